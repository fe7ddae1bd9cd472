"""Records that speak for a part of a range (derived values, floors of scans), and listed peaks, which prove no part."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from specflow.conditions import expand, match, proves, range_gaps
from specflow.model.columns import Columns, Spans
from tests.conditions.make import a_set, everything, rows

Part = tuple[float, float]


def parts(
    *spans: Part, alone: tuple[float, ...] = (), peaks: tuple[float, ...] = (), gap: float = 0.0
) -> Columns:
    """Rows that speak for spans, rows that speak for their own value, and listed peaks; in GHz."""
    none = [float("nan")]
    frequency = none * len(spans) + list(alone) + list(peaks)
    rest = none * (len(alone) + len(peaks))
    low = np.array([low for low, _ in spans] + rest)
    high = np.array([high for _, high in spans] + rest)
    silent = np.arange(len(frequency)) >= len(spans) + len(alone)
    columns = rows(frequency=frequency)
    return replace(columns, spans={"frequency": Spans(low, high, low * 0 + gap, "GHz", silent)})


def proved(records: Columns, text: str = "frequency: 1 to 12 GHz step 0.5 GHz ± 10 MHz") -> bool:
    points = expand(a_set(text))
    return bool(proves(points, match(points, records), everything(records))[0])


@pytest.mark.parametrize(
    ("records", "expected"),
    [
        (parts((1, 12)), True),
        (parts((0.03, 40)), True),
        (parts((0.03, 3), (3, 12.75)), True),
        (parts((3, 12.75), (0.03, 3)), True),
        (parts((1, 3), (3.4, 12)), True),  # the gap is below the step
        (parts((1, 3), (3.6, 12)), False),
        (parts((1, 11)), False),
        (parts((1, 11), alone=(11.5, 12.0)), True),
        (parts((2, 12), (0.5, 8), (0.9, 1.2)), True),  # overlapping, in no order
        (parts((1, 12), gap=1.0), False),  # raw data with gaps above the step
        (parts((13, 14)), False),
        (parts(peaks=tuple(np.arange(1, 12.1, 0.5))), False),  # a list without a scan, however dense
        (parts((1, 6), peaks=(6.2, 6.6, 7.0, 12.0)), False),
        (parts((1, 12), peaks=(2.0, 3.0)), True),
    ],
)
def test_parts_prove_a_range_where_they_cover_it(records: Columns, expected: bool) -> None:
    assert proved(records) is expected


def test_what_is_missing_is_named() -> None:
    points = expand(a_set("frequency: 1 to 12 GHz step 0.5 GHz ± 10 MHz"))
    records = parts((1, 3), (5, 9), peaks=(4.0,))
    matching = match(points, records)
    assert range_gaps(points, matching, everything(records), 0) == ((3.0, 5.0), (9.0, 12.0))


def test_spans_in_another_unit_are_converted() -> None:
    spans = {"frequency": Spans(np.array([1000.0]), np.array([12000.0]), np.zeros(1), "MHz")}
    assert proved(replace(rows(frequency=[None]), numeric={"frequency": np.array([np.nan])}, spans=spans))


@given(
    st.lists(st.tuples(st.floats(0, 13), st.floats(0, 13)), max_size=6),
    st.lists(st.floats(0, 13), max_size=6),
)
def test_against_the_plain_definition(spans: list[Part], alone: list[float]) -> None:
    """Away from the ends, where tolerances decide: no stretch longer than the step lies outside all parts."""
    ordered = [(min(one), max(one)) for one in spans]
    points = [*ordered, *((value, value) for value in alone)]
    assume(points and not any(abs(edge - end) < 0.03 for pair in points for edge in pair for end in (1, 12)))
    assert proved(parts(*ordered, alone=tuple(alone))) is _covers(points)


def _covers(points: list[Part]) -> bool:
    """Whether parts and values begin by 1, end by 12, and leave no gap above 0.5 between them."""
    inside = [(max(low, 1.0), min(high, 12.0)) for low, high in points if high >= 1.0 and low <= 12.0]
    if not inside or min(low for low, _ in inside) > 1.0 or max(high for _, high in inside) < 12.0:
        return False
    reached = 1.0
    for low, high in sorted(inside):
        if low - reached > 0.5:
            return False
        reached = max(reached, high)
    return True
