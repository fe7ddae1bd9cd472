"""What lifts a fail: a decided reading at the same place, taken by evidence that counts."""

from __future__ import annotations

from datetime import date

import pytest

from specflow.model.base import Document
from specflow.model.conditions import Dimension, Span
from specflow.model.evidence import EvidenceColumns, ItemChange, Supersession, Withdrawal
from specflow.model.verdict import Label, RequirementStatus, Verdict
from tests.builders import a_conditions_set, a_dimension, an_evidence_table, some_columns, some_evidence
from tests.verification.evaluating import status_of

CHANGED = ItemChange(id="C-1", block="LNA", effective=date(2026, 5, 5), description="new die")
LATER = {"performed_on": "2026-05-10"}
RANGE = a_conditions_set(
    "CS", Dimension(name="frequency", unit="GHz", span=Span(low=27.5, high=30.0, step=1.5), tolerance=0.01)
)
NAMED = Supersession(id="S-1", earlier="T-1", later="T-2", names_fail="NCR-1, use as is")


def after_change(second: EvidenceColumns, *documents: Document) -> RequirementStatus:
    """Return the status after a change: T-1 failed before it, T-2 was taken after."""
    table = an_evidence_table("T-2", rows=len(second.source_rows), **LATER)
    return status_of(CHANGED, table, *documents, T_1=some_evidence((15.0, 21.0, 21.0)), T_2=second)


def test_an_undecided_reading_does_not_lift_a_stale_fail() -> None:
    """19 to 22 dB neither meets nor misses 20 dB."""
    wide = some_evidence((19.0, 21.0, 21.0), high=(22.0, 21.0, 21.0))
    status = after_change(wide)
    assert (status.label, status.n_failing) == (Label.FAILING, 1)


def test_a_passing_reading_at_the_point_lifts_a_stale_fail() -> None:
    assert after_change(some_evidence()).label is Label.READY


@pytest.mark.parametrize(("frequency", "label"), [(28.75, Label.PARTIALLY_VERIFIED), (27.5, Label.FAILING)])
def test_a_stale_fail_of_a_range_is_lifted_at_its_own_value_only(frequency: float, label: Label) -> None:
    again = some_evidence((21.0,), conditions=some_columns(frequency=[frequency]))
    table = an_evidence_table("T-2", rows=1, **LATER)
    status = status_of(CHANGED, RANGE, table, T_1=some_evidence((21.0, 15.0, 21.0)), T_2=again)
    assert (status.k, status.label is Label.FAILING) == (0, label is Label.FAILING)


def replaced(later: str, *documents: Document, **columns: EvidenceColumns) -> RequirementStatus:
    """Return the status of a fail at 27.5 GHz whose supersession names it."""
    step = NAMED.model_copy(update={"later": later})
    return status_of(step, *documents, T_1=some_evidence((15.0, 21.0, 21.0)), **columns)


def test_a_named_retest_lifts_the_fail() -> None:
    assert replaced("T-2", T_2=some_evidence()).label is Label.READY


def test_a_named_successor_that_is_not_there_leaves_the_fail_open() -> None:
    assert replaced("T-9").label is Label.FAILING


def test_a_named_successor_that_was_withdrawn_leaves_the_fail_open() -> None:
    withdrawn = Withdrawal(id="W-1", table="T-2", reason="wrong cable")
    assert replaced("T-2", withdrawn, T_2=some_evidence()).label is Label.FAILING


def test_a_named_successor_that_is_provisional_leaves_the_fail_open() -> None:
    table = an_evidence_table("T-2", accepted_by="", provisional=True)
    assert replaced("T-2", table, T_2=some_evidence()).label is Label.FAILING


def test_a_named_successor_that_measured_elsewhere_leaves_the_fail_open() -> None:
    elsewhere = some_evidence((21.0, 21.0), conditions=some_columns(frequency=[28.75, 30.0]))
    status = replaced("T-2", an_evidence_table("T-2", rows=2), T_2=elsewhere)
    assert (status.label, status.n_failing) == (Label.FAILING, 1)


def test_a_chain_of_corrections_is_followed() -> None:
    """T-1 failed, T-2 retested it by name, T-3 corrects T-2."""
    correction = Supersession(id="S-2", earlier="T-2", later="T-3", reason="wrong date")
    status = replaced("T-2", correction, T_2=some_evidence(), T_3=some_evidence())
    assert status.label is Label.READY


def test_a_named_retest_that_fails_is_what_fails() -> None:
    status = replaced("T-2", T_2=some_evidence((19.0, 21.0, 21.0)))
    assert status.governing is not None
    assert (status.verdict, status.governing.margin) == (Verdict.FAIL, -1.0)


def test_a_named_retest_of_another_item_leaves_the_fail_open() -> None:
    one = a_conditions_set("CS", a_dimension(values=(27.5,)))
    at = some_columns(frequency=[27.5])
    status = status_of(
        NAMED,
        one,
        an_evidence_table("T-1", rows=1),
        an_evidence_table("T-2", rows=1),
        T_1=some_evidence((15.0,), conditions=at),
        T_2=some_evidence((21.0,), items="LNA-2", conditions=at),
    )
    assert status.label is Label.FAILING
