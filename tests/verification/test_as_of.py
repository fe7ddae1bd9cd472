"""What was decided or recorded after the day of judgement is not known yet (here 2026-06-01)."""

from __future__ import annotations

from datetime import date, timedelta
from typing import Literal

import pytest

from specflow.model.decision import Approval, DeclaredSplit, Disposition, Nonconformance
from specflow.model.evidence import Equipment, EvidenceColumns, Supersession, Withdrawal
from specflow.model.verdict import CloseOut, Compliance, Label, Standing
from tests.builders import (
    a_conditions_set,
    a_dimension,
    a_waiver,
    an_evidence_table,
    some_columns,
    some_evidence,
)
from tests.verification.evaluating import AS_OF, status_of

LATER = AS_OF + timedelta(days=180)
FAILING = (19.5, 21.0, 21.0)


def approval(on: date, decision: Literal["closed", "kept open"] = "closed", id: str = "A-1") -> Approval:
    return Approval(id=id, requirement="R-1", decision=decision, by="the board", on=on)


@pytest.mark.parametrize(("on", "label"), [(AS_OF, Label.CLOSED_VERIFIED), (LATER, Label.READY)])
def test_an_approval_of_a_later_day_closes_nothing(on: date, label: Label) -> None:
    assert status_of(approval(on)).label is label


@pytest.mark.parametrize(
    ("decided", "label"), [(AS_OF, Label.CLOSED_WAIVED), (LATER, Label.FAILING), (None, Label.CLOSED_WAIVED)]
)
def test_a_waiver_decided_later_is_still_requested(decided: date | None, label: Label) -> None:
    waiver = a_waiver(state="approved", approver="the board", decided_on=decided)
    status = status_of(waiver, T_1=some_evidence(FAILING))
    assert status.label is label
    assert ("waiver requested (W-1)" in status.close_out_reason) == (decided == LATER)


def test_a_waiver_requested_later_is_not_known() -> None:
    waiver = a_waiver(requested_on=LATER)
    assert status_of(waiver, T_1=some_evidence(FAILING)).close_out_reason == "failing"


def test_a_split_declared_later_is_not_known() -> None:
    fields = {
        "id": "S-1",
        "requirement": "R-1",
        "scope_not_met": "frequency < 28 GHz",
        "reason": "x",
        "by": "y",
    }
    for on, compliance in ((AS_OF, Compliance.PARTIALLY_COMPLIANT), (LATER, Compliance.NON_COMPLIANT)):
        split = DeclaredSplit(**fields, on=on)  # type: ignore[arg-type]
        assert status_of(split, T_1=some_evidence(FAILING)).compliance is compliance


def test_a_nonconformance_closed_later_is_still_open() -> None:
    report = Nonconformance(id="NCR-1", requirement="R-1", description="x", state="closed", decided_on=LATER)
    status = status_of(report, approval(AS_OF))
    assert (status.label, status.close_out) == (Label.READY, CloseOut.OPEN)


def test_a_withdrawal_of_a_later_day_withdraws_nothing() -> None:
    for at, standing in (
        ("2026-05-20T12:00:00Z", Standing.WITHDRAWN),
        ("2026-09-01T12:00:00Z", Standing.ACCEPTED),
    ):
        withdrawal = Withdrawal(id="W-1", table="T-1", reason="wrong", at=at)
        assert status_of(withdrawal, T_1=some_evidence()).standing == {standing: 3}


def test_a_supersession_of_a_later_day_supersedes_nothing() -> None:
    step = Supersession(id="S-1", earlier="T-1", later="T-2", names_fail="NCR-1", at="2026-09-01T12:00:00Z")
    status = status_of(step, T_1=some_evidence((15.0, 21.0, 21.0)), T_2=some_evidence())
    assert status.label is Label.FAILING


def test_of_two_decisions_of_one_day_kept_open_wins() -> None:
    for decisions in (
        (approval(AS_OF), approval(AS_OF, "kept open", "A-2")),
        (approval(AS_OF, "kept open"), approval(AS_OF, id="A-2")),
    ):
        assert status_of(*decisions).close_out is CloseOut.OPEN


def contradicting() -> EvidenceColumns:
    return some_evidence((21.0, 26.0), conditions=some_columns(frequency=[27.5, 27.5]))


@pytest.mark.parametrize(
    ("on", "label"), [(date(2026, 5, 3), Label.READY), (date(2026, 4, 1), Label.CONFLICTING)]
)
def test_a_disposition_settles_the_conflicts_of_its_day(on: date, label: Label) -> None:
    """The evidence was accepted on 2 May: a disposition of April cannot have been about it."""
    one_point = a_conditions_set("CS", a_dimension(values=(27.5,)))
    settled = Disposition(
        id="D-1", rule="conflicting-evidence", subject="R-1", reason="cable", by="the board", on=on
    )
    assert status_of(one_point, settled, T_1=contradicting()).label is label


@pytest.mark.parametrize(
    ("due", "standing"),
    [
        (date(2020, 1, 1), Standing.PROVISIONAL),
        (date(2026, 5, 20), Standing.ACCEPTED),  # accepted on 2 May: it was taken before
        (None, Standing.ACCEPTED),
    ],
)
def test_undated_readings_with_a_lapsed_calibration_are_provisional(
    due: date | None, standing: Standing
) -> None:
    instruments = (Equipment(asset="SA-1", calibration_due=due),)
    table = an_evidence_table(performed_on=None, equipment=instruments)
    assert status_of(table, T_1=some_evidence()).standing == {standing: 3}
