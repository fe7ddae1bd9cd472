"""Masks over an axis that the conditions set does not name, and readings that a limit does not reach."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import pytest

from specflow.limits import parse_limit
from specflow.model.conditions import Dimension, Span
from specflow.model.verdict import RequirementStatus, Verdict
from tests.builders import (
    a_conditions_set,
    a_dimension,
    a_requirement,
    an_evidence_table,
    some_columns,
    some_evidence,
)
from tests.verification.evaluating import status_of

MASK = "mask(offset[MHz], max dB: 2..10: -30; 10..100: -50)"
SWEEP = np.unique(np.concatenate([np.linspace(2, 10, 11), np.geomspace(10, 100, 11)])).round(9).tolist()


def swept(
    offsets: Sequence[float], values: Sequence[float], limit: str = MASK, **fields: object
) -> RequirementStatus:
    """Return the status of a mask over an offset that the set (27.5 GHz) does not name."""
    conditions = some_columns({"offset": "MHz"}, frequency=[27.5] * len(offsets), offset=list(offsets))
    return status_of(
        a_requirement(limit=parse_limit(limit)),
        fields.pop("conditions", None) or a_conditions_set("CS", a_dimension(values=(27.5,))),  # type: ignore[arg-type]
        an_evidence_table(rows=len(offsets), **fields),
        T_1=some_evidence(list(values), conditions=conditions),
    )


def below(offsets: Sequence[float]) -> list[float]:
    return [-31.0 if offset < 10 else -51.0 for offset in offsets]


def test_a_reading_beside_the_mask_proves_nothing() -> None:
    status = swept([1.0], [-5.0])
    assert (status.k, status.verdict) == (0, Verdict.NONE)
    assert any("beside the limit" in remark for remark in status.remarks)


def test_one_reading_does_not_prove_a_mask() -> None:
    status = swept([3.0], [-35.0])
    assert (status.k, status.verdict) == (0, Verdict.INSUFFICIENT)
    assert any("the mask over offset is not swept" in remark for remark in status.remarks)


def test_a_sweep_from_end_to_end_proves_a_mask() -> None:
    status = swept(SWEEP, below(SWEEP))
    assert (status.k, status.n, status.verdict) == (1, 1, Verdict.PASS)


@pytest.mark.parametrize("left_out", [slice(0, 2), slice(5, 7), slice(14, 16), slice(-2, None)])
def test_a_sweep_with_a_gap_does_not_prove_a_mask(left_out: slice) -> None:
    offsets = list(SWEEP)
    del offsets[left_out]
    assert swept(offsets, below(offsets)).verdict is Verdict.INSUFFICIENT


def test_a_gap_does_not_excuse_a_fail() -> None:
    assert swept([3.0], [-20.0]).verdict is Verdict.FAIL


def test_readings_beside_the_mask_do_not_disturb_a_sweep() -> None:
    offsets = [1.0, *SWEEP, 200.0]
    assert swept(offsets, [0.0, *below(SWEEP), 0.0]).k == 1


def test_what_a_mask_excludes_need_not_be_swept() -> None:
    limit = "mask(offset[MHz], max dB: 0..10: -30; except 4..10)"
    offsets = [0.4 * step for step in range(11)]
    assert swept(offsets, [-31.0] * 11, limit).k == 1


def test_a_piece_without_end_needs_one_reading() -> None:
    limit = "mask(offset[MHz], max dB: 0..10: -30; 10..: -50)"
    offsets = [float(step) for step in range(11)]
    values = [-51.0] * 11
    assert swept(offsets, values, limit).k == 1  # 10 MHz belongs to both pieces
    assert swept(offsets[:-1], values[:-1], limit).k == 0


def test_an_axis_that_the_set_names_is_a_range_with_its_own_step() -> None:
    offset = Dimension(name="offset", unit="MHz", span=Span(low=2, high=100, step=49), tolerance=0.1)
    conditions = a_conditions_set("CS", a_dimension(values=(27.5,)), offset)
    assert swept([2.0, 51.0, 100.0], [-51.0] * 3, conditions=conditions).k == 1


def test_provisional_samples_do_not_complete_a_sweep() -> None:
    status = swept(SWEEP, below(SWEEP), accepted_by="", provisional=True)
    assert (status.k, status.verdict) == (0, Verdict.NONE)


def test_a_required_point_in_no_case_of_a_table_stays_unproved() -> None:
    limit = "by frequency[GHz] (26..27: >= 20 dB; 28..30: >= 22 dB)"
    status = status_of(
        a_requirement(limit=parse_limit(limit)), a_conditions_set("CS", a_dimension(values=(27.5, 30.0)))
    )
    assert (status.k, status.n, status.verdict) == (0, 2, Verdict.FAIL)  # 21 dB at 30 GHz
    assert any("says nothing at 1 of 2 required points" in remark for remark in status.remarks)


def test_no_limit_said_on_purpose_asks_for_nothing() -> None:
    status = status_of(a_requirement(limit=parse_limit("no limit")))
    assert (status.k, status.n) == (3, 3)
