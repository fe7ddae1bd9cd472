"""Requirements declared met by lower-level closure alone: theirs is the worst compliance of their children."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from specflow.model.requirement import Requirement
from specflow.model.verdict import Compliance, RequirementStatus, Verdict
from specflow.verification.applicability import applicability
from specflow.verification.decisions import Decisions
from specflow.verification.status import own_facts, status_from
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
    workspace: Workspace,
    decisions: Decisions,
) -> RequirementStatus:
    """Return the status that the children give a requirement; children that are not applicable leave the count."""
    applies, reason, remarks = applicability(requirement, workspace.declared)
    facts = own_facts(requirement, (), workspace, decisions)
    binding = [child for child in children if child.compliance is not Compliance.NOT_APPLICABLE]
    verdicts = frozenset(_VERDICTS[child.compliance] for child in binding) or frozenset({Verdict.NONE})
    facts = replace(
        facts,
        applicable=applies,
        not_applicable_reason=reason,
        planned=True,
        counted=bool(binding),
        verdicts=verdicts,
        complete=verdicts == {Verdict.PASS},
        some_proved=Verdict.PASS in verdicts,
        marginal=any(child.marginal for child in binding),
    )
    met = sum(child.compliance is Compliance.COMPLIANT for child in binding)
    words = f"met by lower-level closure alone: {met} of {len(binding)} children compliant"
    if not binding:
        words = "to be met by lower-level closure alone, and it has no children"
    status = status_from(requirement, facts, None, (words, *remarks))
    worst = max(binding, key=lambda child: (_VERDICTS[child.compliance], child.verdict), default=None)
    return status if worst is None else replace(status, governing=worst.governing, unit=worst.unit)
