"""Requirements met by lower-level closure alone: they close when all below is closed, and their own fails count."""

from __future__ import annotations

from datetime import date

import pytest

from specflow.limits import parse_limit
from specflow.model.base import Document
from specflow.model.decision import Approval
from specflow.model.evidence import EvidenceColumns, ItemChange
from specflow.model.verdict import CloseOut, Compliance, Label, RequirementStatus
from tests.builders import a_block, a_requirement, a_waiver, an_evidence_table, some_evidence
from tests.verification.evaluating import status_of


def closed(requirement: str) -> Approval:
    return Approval(
        id=f"A-{requirement}",
        requirement=requirement,
        decision="closed",
        by="the board",
        on=date(2026, 5, 20),
    )


def parent(*documents: Document, child: str = ">= 20 dB", **columns: EvidenceColumns) -> RequirementStatus:
    """Return the status of P, approved and met by R-1 below it alone."""
    return status_of(
        a_block("SYS"),
        a_requirement("P", block="SYS", met_by_lower_level=True),
        a_requirement(parents=("P",), limit=parse_limit(child)),
        closed("P"),
        *documents,
        requirement="P",
        **columns,
    )


def test_it_closes_when_every_child_is_closed() -> None:
    status = parent(closed("R-1"))
    assert (status.label, status.close_out) == (Label.CLOSED_VERIFIED, CloseOut.CLOSED)


def test_a_child_that_waits_for_the_board_keeps_it_open() -> None:
    status = parent()
    assert (status.compliance, status.label) == (Compliance.COMPLIANT, Label.READY)
    assert status.close_out_reason == "ready for close-out; below it open: R-1"


def test_a_child_to_be_reviewed_keeps_it_open() -> None:
    status = parent(closed("R-1"), child="TBR >= 20 dB")
    assert (status.label, status.close_out) == (Label.TBR, CloseOut.OPEN)


def test_a_stale_child_keeps_it_open() -> None:
    change = ItemChange(id="C-1", block="LNA", effective=date(2026, 5, 5), description="new die")
    status = parent(closed("R-1"), change)
    assert (status.label, status.stale) == (Label.REVERIFY, True)


def test_a_child_in_conflict_keeps_it_open() -> None:
    status = parent(closed("R-1"), T_1=some_evidence(), T_2=some_evidence((26.0, 21.0, 21.0)))
    assert (status.label, status.close_out) == (Label.CONFLICTING, CloseOut.OPEN)


@pytest.mark.parametrize(("value", "label"), [(19.0, Label.FAILING), (21.0, Label.CLOSED_VERIFIED)])
def test_its_own_failing_evidence_counts(value: float, label: Label) -> None:
    own = an_evidence_table("T-2", block="SYS")
    status = parent(closed("R-1"), own, T_1=some_evidence(), T_2=some_evidence((value, 21.0, 21.0)))
    assert status.label is label


def test_its_own_waiver_excuses_its_own_readings_and_no_child() -> None:
    own = an_evidence_table("T-2", block="SYS")
    waiver = a_waiver(requirement="P", state="approved", approver="the board", permitted=">= 18 dB")
    fails = some_evidence((19.0, 21.0, 21.0))
    assert parent(closed("R-1"), own, waiver, T_1=some_evidence(), T_2=fails).label is Label.CLOSED_WAIVED
    assert parent(closed("R-1"), own, waiver, T_1=fails, T_2=fails).label is Label.FAILING
