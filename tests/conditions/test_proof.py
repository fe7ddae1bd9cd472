"""Points and ranges proved, per item, and against the plain definition."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from specflow.conditions import expand, match, proves, range_gaps
from specflow.model.conditions import ConditionsSet, Dimension, MatchingRule, Span
from tests.conditions.make import a_set, everything, rows
from tests.conditions.second_route import range_is_proved


def proved(conditions: ConditionsSet, frequency: list[float]) -> bool:
    points = expand(conditions)
    records = rows(frequency=frequency)
    return bool(proves(points, match(points, records), everything(records))[0])


def test_a_point_is_proved_by_one_good_record() -> None:
    points = expand(a_set("frequency: 27.5, 28.75, 30 GHz ± 10 MHz"))
    records = rows(frequency=[27.5, 27.505, 30])
    matching = match(points, records)
    assert proves(points, matching, np.array([False, True, True])).tolist() == [True, False, True]
    assert proves(points, matching, np.array([False, False, False])).tolist() == [False, False, False]


def test_items_do_not_complete_one_another_when_asked_one_by_one() -> None:
    points = expand(a_set("frequency: 27.5 to 30 GHz step 1 GHz ± 10 MHz"))
    records = rows(frequency=[27.5, 28.5, 29.5, 30])
    item = np.array(["7", "8", "7", "7"])
    matching = match(points, records)
    each = [bool(proves(points, matching, item == one)[0]) for one in ("7", "8")]
    assert each == [False, False]
    assert proves(points, matching, everything(records)).tolist() == [True]


@pytest.mark.parametrize(
    ("frequency", "expected"),
    [
        ([27.5, 28.5, 29.5, 30.0], True),
        ([30.0, 28.5, 27.5, 29.5], True),
        ([27.505, 28.5, 29.5, 29.995], True),
        ([27.52, 28.5, 29.5, 30.0], False),
        ([27.5, 28.5, 29.5], False),
        ([27.5, 28.4, 29.5, 30.0], False),
        ([27.0, 28.0, 29.0, 30.5], False),
        ([], False),
    ],
)
def test_a_range_needs_both_ends_and_no_gap_above_its_step(frequency: list[float], expected: bool) -> None:
    assert proved(a_set("frequency: 27.5 to 30 GHz step 1 GHz ± 10 MHz"), frequency) is expected


def test_a_range_is_not_matched_against_an_invented_grid() -> None:
    assert proved(a_set("frequency: 1 to 2 GHz step 0.3 GHz"), [1, 1.21, 1.5, 1.77, 2])


def test_steps_written_in_decimal_are_not_lost_to_binary() -> None:
    sweep = [float(value) for value in np.arange(0, 1.0001, 0.1)]
    assert max(np.diff(sweep)) > 0.1
    assert proved(a_set("frequency: 0 to 1 GHz step 0.1 GHz"), sweep)


def test_each_combination_of_the_others_with_the_range_is_one_point() -> None:
    points = expand(a_set("frequency: 27.5 to 30 GHz step 2 GHz", "temperature_ambient: -40, 85 °C ± 2 K"))
    assert points.size == 2
    assert points.step == {"frequency": 2.0}
    records = rows(frequency=[27.5, 29, 30, 27.5, 30], temperature_ambient=[-40, -39, -41, 85, 85])
    assert proves(points, match(points, records), everything(records)).tolist() == [True, False]


def test_two_ranges_in_one_set_are_refused() -> None:
    from specflow.errors import ConditionsError

    with pytest.raises(ConditionsError, match="both ranges"):
        a_set("frequency: 27.5 to 30 GHz step 1 GHz", "temperature_ambient: -40 to 85 °C step 25 K")


def test_beyond_the_end_counts_where_declared() -> None:
    dimension = Dimension(
        name="frequency",
        unit="GHz",
        span=Span(low=1, high=2, step=1),
        tolerance=0.01,
        rule=MatchingRule.OUTWARD,
    )
    outward = ConditionsSet(id="O", dimensions=(dimension,))
    within = ConditionsSet(id="W", dimensions=(dimension.model_copy(update={"rule": MatchingRule.WITHIN}),))
    assert proved(outward, [0.9, 1.5, 2.3])
    assert not proved(within, [0.9, 1.5, 2.3])


def test_gaps_are_named() -> None:
    points = expand(a_set("frequency: 27.5 to 30 GHz step 0.5 GHz ± 10 MHz"))
    records = rows(frequency=[28, 28.5, 29.3])
    matching = match(points, records)
    gaps = range_gaps(points, matching, everything(records), 0)
    assert gaps == ((27.5, 28.0), (28.5, 29.3), (29.3, 30.0))
    assert range_gaps(points, matching, np.zeros(3, np.bool_), 0) == ((27.5, 30.0),)


lattice = st.integers(-8, 48).map(lambda number: number / 4)


@settings(max_examples=400, deadline=None)
@given(
    st.lists(lattice, max_size=14),
    st.sampled_from([0.0, 0.25, 0.5, 1.0]),
    st.sampled_from([0.25, 0.75, 1.0, 2.5, 20.0]),
)
def test_range_proof_agrees_with_its_definition(values: list[float], tolerance: float, step: float) -> None:
    dimension = Dimension(
        name="frequency", unit="GHz", span=Span(low=0, high=10, step=step), tolerance=tolerance
    )
    conditions = ConditionsSet(id="R", dimensions=(dimension,))
    assert proved(conditions, values) is range_is_proved(0, 10, tolerance, step, values)


@settings(max_examples=200, deadline=None)
@given(st.lists(st.tuples(lattice, st.sampled_from([-40.0, 25.0, 85.0]), st.booleans()), max_size=25))
def test_range_points_are_decided_one_by_one(records_as_typed: list[tuple[float, float, bool]]) -> None:
    points = expand(
        a_set("frequency: 0 to 10 GHz step 3 GHz ± 0.25 GHz", "temperature_ambient: -40, 25, 85 °C")
    )
    records = rows(
        frequency=[one[0] for one in records_as_typed],
        temperature_ambient=[one[1] for one in records_as_typed],
    )
    good = np.array([one[2] for one in records_as_typed], np.bool_)
    matching = match(points, records)
    decided = proves(points, matching, good)
    for point, temperature in enumerate((-40.0, 25.0, 85.0)):
        values = [one[0] for one in records_as_typed if one[1] == temperature and one[2]]
        assert bool(decided[point]) is range_is_proved(0, 10, 0.25, 3, values)
        assert bool(decided[point]) is not bool(range_gaps(points, matching, good, point))
