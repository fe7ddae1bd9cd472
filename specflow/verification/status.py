"""The status of one requirement: five axes, the label, what governs, and the sentences that say why."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace

import numpy as np

from specflow.errors import ConditionsError, ExpressionError
from specflow.limits.tree import undefined_in
from specflow.model.base import code_key
from specflow.model.block import HardwareType, Tier
from specflow.model.limit import LimitState
from specflow.model.requirement import Activity, Requirement, Stage
from specflow.model.verdict import CloseOut, GoverningPoint, PointsState, RequirementStatus, Verdict
from specflow.verification.activity import ActivityOutcome
from specflow.verification.applicability import applicability
from specflow.verification.assessment import Assessment
from specflow.verification.case import required_activities
from specflow.verification.closeout import label_and_close_out, waived
from specflow.verification.compliance import StatusFacts, compliance
from specflow.verification.credit import OBSERVED
from specflow.verification.decisions import Decisions
from specflow.verification.docket import Docket
from specflow.verification.points import Failing
from specflow.verification.splits import declared
from specflow.verification.waiving import waiving
from specflow.verification.workspace import Workspace

_LESSER = (HardwareType.BREADBOARD, HardwareType.ENGINEERING)


def status_of(
    requirement: Requirement, docket: Docket, workspace: Workspace, decisions: Decisions
) -> RequirementStatus:
    """Compute the status of a requirement that is proved by its own activities."""
    applies, reason, remarks = applicability(requirement, workspace.declared)
    if not applies:
        return status_from(
            requirement, StatusFacts(applicable=False, not_applicable_reason=reason), None, remarks
        )
    activities = required_activities(requirement, workspace.snapshot)
    facts = own_facts(requirement, activities, workspace, decisions)
    try:
        found = docket.assess(requirement)
    except (ConditionsError, ExpressionError) as error:
        return status_from(requirement, facts, None, (str(error), *remarks))
    facts = facts if facts.to_be_defined else with_evidence(facts, requirement, found, workspace, decisions)
    return status_from(requirement, facts, found, (*_said(requirement, facts, found, decisions), *remarks))


def own_facts(
    requirement: Requirement, activities: Sequence[Activity], workspace: Workspace, decisions: Decisions
) -> StatusFacts:
    """Return what is known of a requirement before its evidence is looked at."""
    approval = decisions.latest_approval(requirement.id)
    approved = approval is not None and approval.decision == "closed"
    limit = requirement.limit
    return StatusFacts(
        to_be_defined=limit.state is LimitState.TBD or undefined_in(limit.tree),
        to_be_reviewed=limit.state is LimitState.TBR,
        unallocated=_unallocated(requirement, workspace, decisions),
        planned=any(activity.planned for activity in activities),
        approved=approved and approval is not None and approval.requirement_revision == requirement.revision,
        nonconformances=decisions.open_nonconformances(requirement.id),
    )


def _unallocated(requirement: Requirement, workspace: Workspace, decisions: Decisions) -> bool:
    """Whether the requirement is to be handed down and was not.

    It says so itself; where it does not, one above block tier of a block that has blocks below is to be handed down.
    """
    needed = requirement.needs_allocation
    if needed is None:
        has_below = bool(workspace.snapshot.blocks_below.get(code_key(requirement.block)))
        needed = requirement.tier is not Tier.BLOCK and has_below
    key = code_key(requirement.id)
    return needed and key not in decisions.allocated and not workspace.snapshot.children_of.get(key)


def with_evidence(
    facts: StatusFacts,
    requirement: Requirement,
    found: Assessment,
    workspace: Workspace,
    decisions: Decisions,
) -> StatusFacts:
    """Return the facts with what the evidence comes to."""
    outcomes, failing = found.outcomes, _failing(found)
    results = [outcome.result for outcome in outcomes]
    split, remarks = declared(decisions.splits.get(code_key(requirement.id), ()), failing)
    verdicts = frozenset[Verdict]().union(*[outcome.verdicts for outcome in outcomes])
    return replace(
        facts,
        counted=any(outcome.counted for outcome in outcomes),
        in_progress=any(result.state is PointsState.IN_PROGRESS for result in results),
        complete=all(result.state is PointsState.FULLY_COVERED for result in results),
        verdicts=verdicts,
        some_proved=any(result.k for result in results),
        conflicting=any(
            not decisions.settles(requirement.id, conflict, workspace.snapshot, workspace.as_of)
            for conflict in found.conflicts
        ),
        stale=any(outcome.stale for outcome in outcomes),
        marginal=any(result.marginal for result in results),
        split_declared=split,
        split_remarks=remarks,
        waiving=waiving(requirement, decisions.waivers.get(code_key(requirement.id), ()), failing, workspace),
        not_representative=tuple(dict.fromkeys(_not_representative(outcomes, workspace))),
    )


def _not_representative(outcomes: Sequence[ActivityOutcome], workspace: Workspace) -> Iterator[str]:
    """Yield the items of lower hardware on which a planned qualification is proved, each with what it is.

    Credit is normally taken on a qualification or production item; on lesser ones by agreement (NASA/SP-2016-6105
    Rev2, 6.1.1.2.4), so the board is told.
    """
    for outcome in outcomes:
        activity = outcome.activity
        if (
            not activity.planned
            or activity.stage is not Stage.QUALIFICATION
            or activity.method not in OBSERVED
        ):
            continue
        for one in outcome.items:
            hardware = workspace.hardware_type(one.item)
            if hardware in _LESSER and outcome.result.k and one.results.k:
                yield f"{hardware.value} hardware ({one.item or 'no item is named'})"


def _failing(found: Assessment) -> Failing:
    return [pair for outcome in found.outcomes for pair in outcome.failing]


def status_from(
    requirement: Requirement, facts: StatusFacts, found: Assessment | None, remarks: Sequence[str]
) -> RequirementStatus:
    """Put the axes together."""
    outcomes = found.outcomes if found is not None else ()
    results = tuple(outcome.result for outcome in outcomes)
    label, closed, reason = label_and_close_out(facts)
    return RequirementStatus(
        requirement=requirement.id,
        activities=results,
        standing=found.standing if found is not None else {},
        k=sum([result.k for result in results]),
        n=sum([result.n for result in results]),
        n_failing=sum([result.n_failing for result in results]),
        n_missing=sum([result.n_missing for result in results]),
        verdict=max(facts.verdicts),
        compliance=compliance(facts),
        close_out=closed,
        close_out_reason=reason,
        label=label,
        governing=_worst(outcomes),
        smallest_margin=_smallest(outcomes),
        unit=found.unit if found is not None else "",
        marginal=facts.marginal,
        remarks=tuple(dict.fromkeys(remark for remark in remarks if remark)),
        ambiguous=found.ambiguous if found is not None else (),
        conflicts=found.conflicts if found is not None else (),
        mismatches=found.mismatches if found is not None else (),
        stale=facts.stale,
        unallocated=facts.unallocated and facts.applicable,
        waived_by=facts.waiving.covering if waived(facts) else (),
        waivers_exceeded=facts.waiving.exceeded,
    )


def _worst(outcomes: Sequence[ActivityOutcome]) -> GoverningPoint | None:
    points = [outcome.result.governing for outcome in outcomes if outcome.result.governing is not None]
    return max(points, key=lambda point: (point.verdict, -_or_infinite(point.guarded_margin)), default=None)


def _smallest(outcomes: Sequence[ActivityOutcome]) -> GoverningPoint | None:
    points = [
        outcome.result.smallest_margin for outcome in outcomes if outcome.result.smallest_margin is not None
    ]
    return min(points, key=lambda point: point.margin, default=None)


def _or_infinite(value: float) -> float:
    return value if value == value else np.inf


def _said(
    requirement: Requirement, facts: StatusFacts, found: Assessment, decisions: Decisions
) -> Sequence[str]:
    """Return plain sentences about the status, most important first."""
    said = [*facts.waiving.exceeded, *facts.split_remarks]
    approval = decisions.latest_approval(requirement.id)
    if approval is not None and approval.decision == "closed":
        if approval.requirement_revision != requirement.revision:
            said.append(
                f"the board closed revision {approval.requirement_revision} on {approval.on}; "
                f"now it is revision {requirement.revision}"
            )
        elif approval.computed_label and label_and_close_out(facts)[1] is not CloseOut.CLOSED:
            said.append(
                f"the board closed it on {approval.on} as {approval.computed_label}; "
                f"now it is {compliance(facts).value}"
            )
    if approval is not None and approval.decision == "kept open":
        said.append(
            f"the board kept it open on {approval.on}" + (f": {approval.note}" if approval.note else "")
        )
    for outcome in found.outcomes:
        said.extend(outcome.result.why)
    if not facts.planned:
        said.append("nobody planned a verification; a test at any stage is taken as one")
    said.extend(found.remarks)
    return said
