"""Waivers and declared splits against every reading that fails, where it stands."""

from __future__ import annotations

from datetime import date

import pytest

from specflow.limits import parse_limit
from specflow.model.base import Document
from specflow.model.conditions import Dimension, Span
from specflow.model.decision import DeclaredSplit, Nonconformance, Waiver
from specflow.model.requirement import Method
from specflow.model.verdict import CloseOut, Compliance, Label, RequirementStatus, Verdict
from tests.builders import (
    a_conditions_set,
    a_dimension,
    a_quantity,
    a_requirement,
    a_value_column,
    a_waiver,
    an_evidence_table,
    between,
    some_columns,
    some_evidence,
)
from tests.verification.evaluating import status_of

RANGE = a_conditions_set(
    "CS", Dimension(name="frequency", unit="GHz", span=Span(low=27.5, high=30.0, step=1.5), tolerance=0.01)
)
ONE_POINT = a_conditions_set("CS", a_dimension(values=(27.5,)))


def approved(**fields: object) -> Waiver:
    return a_waiver(state="approved", approver="the board", **fields)


def test_a_waiver_that_nobody_approved_closes_nothing_and_says_so() -> None:
    status = status_of(a_waiver(state="approved"), T_1=some_evidence((19.5, 21.0, 21.0)))
    assert status.close_out is CloseOut.OPEN and status.label is Label.WAIVER_EXCEEDED
    assert status.close_out_reason == "waiver W-1 is said to be approved and names nobody who approved it"
    assert status_of(approved(), T_1=some_evidence((19.5, 21.0, 21.0))).close_out is CloseOut.CLOSED


def over_range(waiver: Waiver, values: tuple[float, float, float], *documents: Document) -> RequirementStatus:
    """Return the status of readings at 27.5, 28.75 and 30 GHz of a required range."""
    return status_of(waiver, RANGE, *documents, T_1=some_evidence(values))


def test_the_scope_of_a_waiver_is_asked_where_the_reading_fails() -> None:
    """The range begins at 27.5 GHz; what fails is at 30 GHz."""
    at_low_end = approved(permitted=">= 18 dB", conditions="frequency <= 27.6 GHz")
    status = over_range(at_low_end, (21.0, 21.0, 18.5))
    assert (status.label, status.close_out) == (Label.WAIVER_EXCEEDED, CloseOut.OPEN)
    at_high_end = approved(permitted=">= 18 dB", conditions="frequency >= 29.9 GHz")
    assert over_range(at_high_end, (21.0, 21.0, 18.5)).label is Label.CLOSED_WAIVED


def test_every_failing_reading_must_be_within_a_waiver() -> None:
    """22.9 dB governs (1.9 dB beyond the upper side) and is permitted; 17.5 dB, 1.5 dB beyond the lower, is not."""
    requirement = a_requirement(limit=between(19, 21))
    status = over_range(approved(permitted="18..23 dB"), (17.5, 22.9, 20.0), requirement)
    assert status.label is Label.WAIVER_EXCEEDED
    assert over_range(approved(permitted="17..23 dB"), (17.5, 22.9, 20.0), requirement).waived_by == ("W-1",)


@pytest.mark.parametrize("permitted", ["TBR >= 10 dB", "TBD"])
def test_a_permitted_value_that_is_not_settled_permits_nothing(permitted: str) -> None:
    status = status_of(approved(permitted=permitted), T_1=some_evidence((19.0, 21.0, 21.0)))
    assert status.label is Label.WAIVER_EXCEEDED
    assert "not settled" in status.close_out_reason


def test_an_open_nonconformance_keeps_a_waived_row_open() -> None:
    report = Nonconformance(id="NCR-1", requirement="R-1", description="0.5 dB low")
    status = status_of(approved(), report, T_1=some_evidence((19.5, 21.0, 21.0)))
    assert status.close_out is CloseOut.OPEN
    assert "NCR-1 open" in status.close_out_reason
    closed = report.model_copy(update={"state": "closed"})
    assert status_of(approved(), closed, T_1=some_evidence((19.5, 21.0, 21.0))).close_out is CloseOut.CLOSED


def test_an_open_nonconformance_is_no_row_ready_to_be_called_closed() -> None:
    report = Nonconformance(id="NCR-1", requirement="R-1", description="scratch")
    status = status_of(report)
    assert (status.label, status.close_out_reason) == (
        Label.READY,
        "ready for close-out; proved on engineering hardware (LNA-1); NCR-1 open",
    )


SPURIOUS = a_quantity("spurious_emission")


def of_two(
    limit: str, dbm: float, dbc: float, *documents: Document, dbc_item: str | None = "LNA-1", **fields: object
) -> RequirementStatus:
    """Return the status of a limit with a member in dBm and one in dBc."""
    at = some_columns(frequency=[27.5])
    relative = a_quantity("spurious_relative")
    return status_of(
        a_requirement(quantity=SPURIOUS, limit=parse_limit(limit)),
        ONE_POINT,
        an_evidence_table("T-1", rows=1, values=(a_value_column("P", quantity=SPURIOUS, unit="dBm"),)),
        an_evidence_table(
            "T-2", rows=1, values=(a_value_column("P", quantity=relative, unit="dBc"),), **fields
        ),
        *documents,
        T_1=some_evidence({"P": [dbm]}, conditions=at),
        T_2=some_evidence({"P": [dbc]}, conditions=at, items=[dbc_item]),
    )


LOOSER = "looser(<= -30 dBm; spurious_relative <= -60 dBc)"
STRICTER = "stricter(<= -30 dBm; spurious_relative <= -60 dBc)"


def test_a_waiver_on_one_alternative_of_the_looser_covers() -> None:
    assert of_two(LOOSER, -20.0, -50.0).label is Label.FAILING
    assert of_two(LOOSER, -20.0, -50.0, approved(permitted="<= -15 dBm")).label is Label.CLOSED_WAIVED
    assert of_two(LOOSER, -20.0, -50.0, approved(permitted="<= -40 dBm")).label is Label.WAIVER_EXCEEDED


def test_of_the_stricter_all_that_fail_must_be_covered() -> None:
    waiver = approved(permitted="<= -20 dBm")
    assert of_two(STRICTER, -25.0, -70.0, waiver).label is Label.CLOSED_WAIVED
    assert of_two(STRICTER, -25.0, -50.0, waiver).label is Label.WAIVER_EXCEEDED
    both = approved(permitted="stricter(<= -20 dBm; spurious_relative <= -40 dBc)")
    assert of_two(STRICTER, -25.0, -50.0, both).label is Label.CLOSED_WAIVED


def test_the_member_that_decides_is_shown() -> None:
    """dBm keeps its limit by 5 dB, dBc misses by 10 dB: the record shown is the one that fails."""
    status = of_two(STRICTER, -35.0, -50.0)
    assert status.governing is not None
    assert status.governing.record is not None
    assert (status.governing.verdict, status.governing.record.table) == (Verdict.FAIL, "T-2")
    assert status.governing.margin == -10.0
    passing = of_two(LOOSER, -20.0, -70.0)
    assert passing.governing is not None
    assert passing.governing.record is not None
    assert (passing.governing.record.table, passing.governing.margin) == ("T-2", 10.0)


def test_analysis_without_an_item_serves_every_item_of_the_other_member() -> None:
    status = of_two(
        STRICTER.replace("stricter", "looser"), -20.0, -70.0, dbc_item=None, method=Method.ANALYSIS
    )
    assert list(status.activities[0].items) == ["LNA-1"]


def split(scope: str) -> DeclaredSplit:
    return DeclaredSplit(
        id="S-1", requirement="R-1", scope_not_met=scope, reason="known", by="the board", on=date(2026, 5, 1)
    )


@pytest.mark.parametrize(
    ("scope", "values", "compliance"),
    [
        ("frequency >= 29 GHz", (21.0, 21.0, 19.0), Compliance.PARTIALLY_COMPLIANT),
        ("frequency >= 29 GHz", (10.0, 21.0, 19.0), Compliance.NON_COMPLIANT),
        ("item == LNA-1", (10.0, 21.0, 19.0), Compliance.PARTIALLY_COMPLIANT),
        ("item == LNA-2", (10.0, 21.0, 19.0), Compliance.NON_COMPLIANT),
        ("only at 30 GHz", (21.0, 21.0, 19.0), Compliance.NON_COMPLIANT),
    ],
)
def test_a_declared_split_covers_its_scope_only(
    scope: str, values: tuple[float, float, float], compliance: Compliance
) -> None:
    assert status_of(split(scope), T_1=some_evidence(values)).compliance is compliance


def test_a_split_that_cannot_be_read_is_said() -> None:
    status = status_of(split("only at 30 GHz"), T_1=some_evidence((21.0, 21.0, 19.0)))
    assert any("S-1" in remark and "only at 30 GHz" in remark for remark in status.remarks)
