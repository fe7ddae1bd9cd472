"""The label of a row: the first that applies in one order. Each label is reached, and every pair keeps the order."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

import pytest

from specflow.model.requirement import Method
from specflow.model.verdict import CloseOut, Compliance, Label, Verdict
from specflow.verification.closeout import label_and_close_out
from specflow.verification.compliance import StatusFacts, compliance
from specflow.verification.waiving import Waiving
from tests.builders import an_activity, an_evidence_table, an_item, some_evidence
from tests.verification.evaluating import status_of


def label(facts: StatusFacts) -> Label:
    return label_and_close_out(facts)[0]


def close_out(facts: StatusFacts) -> tuple[CloseOut, str]:
    return label_and_close_out(facts)[1:]


READY = StatusFacts(counted=True, complete=True, verdicts=frozenset({Verdict.PASS}), some_proved=True)
FAILS = replace(READY, complete=False, verdicts=frozenset({Verdict.PASS, Verdict.FAIL}))


def without(*verdicts: Verdict) -> StatusFacts:
    return replace(READY, complete=False, verdicts=frozenset({Verdict.PASS, *verdicts}))


ROWS: Mapping[Label, StatusFacts] = {
    Label.NOT_APPLICABLE: replace(READY, applicable=False, not_applicable_reason="no such port"),
    Label.WAIVER_EXCEEDED: replace(FAILS, waiving=Waiving(exceeded=("waiver W-1 has lapsed",))),
    Label.FAILING: FAILS,
    Label.PARTIALLY_COMPLIANT: replace(FAILS, split_declared=True),
    Label.CONFLICTING: replace(READY, conflicting=True),
    Label.REVERIFY: replace(without(Verdict.NONE), stale=True),
    Label.TBD: replace(StatusFacts(), to_be_defined=True),
    Label.UNALLOCATED: replace(READY, unallocated=True),
    Label.NOT_PLANNED: StatusFacts(planned=False),
    Label.PLANNED: StatusFacts(),
    Label.UNDECIDABLE: without(Verdict.UNDECIDABLE),
    Label.INSUFFICIENT: without(Verdict.INSUFFICIENT),
    Label.PARTIALLY_VERIFIED: without(Verdict.NONE),
    Label.INCONCLUSIVE: without(Verdict.INCONCLUSIVE),
    Label.MARGINAL: replace(READY, marginal=True),
    Label.TBR: replace(READY, to_be_reviewed=True),
    Label.READY: READY,
    Label.CLOSED_WAIVED: replace(FAILS, waiving=Waiving(covering=("W-1",), all_covered=True)),
    Label.CLOSED_VERIFIED: replace(READY, approved=True),
}


def test_every_label_has_its_row() -> None:
    assert list(ROWS) == list(Label)


@pytest.mark.parametrize("expected", ROWS, ids=[one.name for one in ROWS])
def test_each_label_is_reached(expected: Label) -> None:
    assert label(ROWS[expected]) is expected


def merged(first: StatusFacts, second: StatusFacts) -> StatusFacts:
    """Return facts of which everything is true that is true in either."""
    return StatusFacts(
        applicable=first.applicable and second.applicable,
        to_be_defined=first.to_be_defined or second.to_be_defined,
        to_be_reviewed=first.to_be_reviewed or second.to_be_reviewed,
        unallocated=first.unallocated or second.unallocated,
        planned=first.planned and second.planned,
        counted=first.counted or second.counted,
        complete=first.complete and second.complete,
        verdicts=first.verdicts | second.verdicts,
        some_proved=first.some_proved or second.some_proved,
        split_declared=first.split_declared or second.split_declared,
        conflicting=first.conflicting or second.conflicting,
        stale=first.stale or second.stale,
        marginal=first.marginal or second.marginal,
    )


_ADDITIVE = [
    Label.NOT_APPLICABLE,
    Label.FAILING,
    Label.CONFLICTING,
    Label.REVERIFY,
    Label.UNALLOCATED,
    Label.UNDECIDABLE,
    Label.INSUFFICIENT,
    Label.PARTIALLY_VERIFIED,
    Label.INCONCLUSIVE,
    Label.MARGINAL,
    Label.TBR,
    Label.READY,
]


@pytest.mark.parametrize("later", range(1, len(_ADDITIVE)))
def test_of_two_states_the_earlier_label_is_shown(later: int) -> None:
    second = _ADDITIVE[later]
    for first in _ADDITIVE[:later]:
        assert label(merged(ROWS[first], ROWS[second])) is first, (first, second)


def test_tbd_comes_after_re_verification_and_before_everything_else_that_is_open() -> None:
    """A limit without a number can fail nothing, so TBD never meets a fail."""
    for other in (
        Label.UNALLOCATED,
        Label.UNDECIDABLE,
        Label.PARTIALLY_VERIFIED,
        Label.MARGINAL,
        Label.READY,
    ):
        assert label(merged(ROWS[Label.TBD], ROWS[other])) is Label.TBD
    assert label(merged(ROWS[Label.REVERIFY], ROWS[Label.TBD])) is Label.REVERIFY
    assert compliance(merged(ROWS[Label.FAILING], ROWS[Label.TBD])) is Compliance.NOT_DETERMINED


def test_only_three_labels_are_closed() -> None:
    closed = [one for one, facts in ROWS.items() if close_out(facts)[0] is CloseOut.CLOSED]
    assert closed == [Label.NOT_APPLICABLE, Label.CLOSED_WAIVED, Label.CLOSED_VERIFIED]


def test_a_marginal_result_that_the_board_closed_is_closed_and_still_shown_as_marginal() -> None:
    facts = replace(READY, marginal=True, approved=True)
    assert label(facts) is Label.MARGINAL
    assert close_out(facts) == (CloseOut.CLOSED, "verified")


def test_a_waiver_never_changes_compliance() -> None:
    assert compliance(ROWS[Label.CLOSED_WAIVED]) is Compliance.NON_COMPLIANT


def test_conditional_fail_is_non_compliant() -> None:
    assert compliance(without(Verdict.CONDITIONAL_FAIL)) is Compliance.NON_COMPLIANT


def test_readings_that_may_not_count_are_no_missing_plan() -> None:
    """Nobody planned a verification, and somebody measured: the label says how far that got."""
    table = an_evidence_table(accepted_by="", provisional=True)
    assert status_of(an_activity(planned=False), table).label is Label.PARTIALLY_VERIFIED
    assert status_of(an_activity(planned=True), table).label is Label.PLANNED


@pytest.mark.parametrize(
    ("hardware", "stage", "reason"),
    [
        ("engineering", "qualification", "ready for close-out; proved on engineering hardware (LNA-1)"),
        ("qualification", "qualification", "ready for close-out"),
        ("production", "qualification", "ready for close-out"),
        ("engineering", "development", "ready for close-out"),
    ],
)
def test_a_qualification_proved_on_lesser_hardware_says_so(hardware: str, stage: str, reason: str) -> None:
    status = status_of(
        an_item(hardware_type=hardware),
        an_activity(stage=stage),
        an_evidence_table(stage=stage),
        T_1=some_evidence(),
    )
    assert (status.label, status.close_out_reason) == (Label.READY, reason)


def test_what_nobody_planned_or_an_analysis_proves_is_of_no_hardware() -> None:
    assert status_of(an_activity(planned=False)).close_out_reason == "ready for close-out"
    table = an_evidence_table(method=Method.ANALYSIS, simulation_validated="yes")
    status = status_of(an_activity(method=Method.ANALYSIS), table, T_1=some_evidence(items=[None] * 3))
    assert status.close_out_reason == "ready for close-out"
