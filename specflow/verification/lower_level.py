"""Requirements declared met by lower-level closure alone: theirs is the worst compliance of their children.

*Closure*: the requirement closes only when every child is closed. A child that is to be reviewed, stale, in conflict or
waiting for the board keeps it open, and the reason names it. Evidence of the requirement's own can only make it worse:
where something of it fails, that counts.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from specflow.errors import ConditionsError, ExpressionError
from specflow.model.requirement import Requirement
from specflow.model.verdict import CloseOut, Compliance, Label, RequirementStatus, Verdict
from specflow.verification.applicability import applicability
from specflow.verification.assessment import Assessment
from specflow.verification.compliance import StatusFacts
from specflow.verification.decisions import Decisions
from specflow.verification.docket import Docket
from specflow.verification.status import own_facts, status_from, with_evidence
from specflow.verification.waiving import NO_WAIVER
from specflow.verification.workspace import Workspace

_VERDICTS = {
    Compliance.COMPLIANT: Verdict.PASS,
    Compliance.NOT_DETERMINED: Verdict.NONE,
    Compliance.PARTIALLY_COMPLIANT: Verdict.FAIL,
    Compliance.NON_COMPLIANT: Verdict.FAIL,
}


def status_by_children(
    requirement: Requirement,
    children: Sequence[RequirementStatus],
    docket: Docket,
    workspace: Workspace,
    decisions: Decisions,
) -> RequirementStatus:
    """Return the status that the children give a requirement; children that are not applicable leave the count."""
    applies, reason, remarks = applicability(requirement, workspace.declared)
    facts = own_facts(requirement, (), workspace, decisions)
    binding = [child for child in children if child.compliance is not Compliance.NOT_APPLICABLE]
    facts = _of_children(replace(facts, applicable=applies, not_applicable_reason=reason), binding)
    met = sum(child.compliance is Compliance.COMPLIANT for child in binding)
    words = f"met by lower-level closure alone: {met} of {len(binding)} children compliant"
    if not binding:
        words = "to be met by lower-level closure alone, and it has no children"
    own = _own_fails(requirement, docket) if applies and not facts.to_be_defined else None
    if own is not None:
        judged = with_evidence(facts, requirement, own, workspace, decisions)
        # A waiver of the requirement is held against its own readings; it excuses no child.
        waiving = NO_WAIVER if facts.fails else judged.waiving
        verdicts = facts.verdicts | {one for one in judged.verdicts if one >= Verdict.CONDITIONAL_FAIL}
        facts = replace(facts, verdicts=verdicts, complete=False, waiving=waiving)
        return status_from(requirement, facts, own, (words, "its own evidence fails", *remarks))
    status = status_from(requirement, facts, None, (words, *remarks))
    worst = max(binding, key=lambda child: (_VERDICTS[child.compliance], child.verdict), default=None)
    return status if worst is None else replace(status, governing=worst.governing, unit=worst.unit)


def _of_children(facts: StatusFacts, binding: Sequence[RequirementStatus]) -> StatusFacts:
    """Return what follows from the children that count."""
    verdicts = frozenset(_VERDICTS[child.compliance] for child in binding) or frozenset({Verdict.NONE})
    return replace(
        facts,
        planned=True,
        counted=bool(binding),
        verdicts=verdicts,
        complete=verdicts == {Verdict.PASS},
        some_proved=Verdict.PASS in verdicts,
        marginal=any(child.marginal for child in binding),
        stale=any(child.stale for child in binding),
        conflicting=any(_is_open_for(child, Label.CONFLICTING) for child in binding),
        to_be_reviewed=facts.to_be_reviewed or any(_is_open_for(child, Label.TBR) for child in binding),
        open_children=tuple(child.requirement for child in binding if child.close_out is CloseOut.OPEN),
    )


def _is_open_for(child: RequirementStatus, reason: Label) -> bool:
    """Whether a child is open for a reason, which a marginal result may hide in its label."""
    return child.label is reason or child.close_out_reason.split("; ")[0] == reason.value


def _own_fails(requirement: Requirement, docket: Docket) -> Assessment | None:
    """Return the requirement's own evidence where something of it fails."""
    try:
        found = docket.assess(requirement)
    except (ConditionsError, ExpressionError):
        return None  # what cannot be judged does not fail
    return found if any(outcome.failing for outcome in found.outcomes) else None
