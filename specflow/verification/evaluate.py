"""Evaluate a snapshot: the status of every requirement, and which evidence serves none."""

from __future__ import annotations

from collections.abc import Collection, Iterable, Sequence
from dataclasses import replace
from datetime import date

from specflow.model.base import code_key
from specflow.model.garbage import uncollected
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Results, Snapshot
from specflow.model.verdict import RequirementStatus
from specflow.parameters import Dictionary
from specflow.verification.decisions import Decisions
from specflow.verification.docket import Docket
from specflow.verification.lower_level import status_by_children
from specflow.verification.status import status_of
from specflow.verification.unmatched import misattributed, unmatched
from specflow.verification.workspace import Workspace


def evaluate(
    snapshot: Snapshot, dictionary: Dictionary, *, as_of: date, only: Iterable[str] | None = None
) -> Results:
    """Judge all requirements of a snapshot as seen on ``as_of``, or ``only`` those of the given ids.

    Never raises for what evidence or documents contain: what cannot be judged is said in the status.
    """
    with uncollected():
        return _evaluated(snapshot, dictionary, as_of, only)


def _evaluated(
    snapshot: Snapshot, dictionary: Dictionary, as_of: date, only: Iterable[str] | None
) -> Results:
    workspace = Workspace(snapshot, dictionary, as_of)
    decisions = Decisions.of(snapshot, as_of)
    asked = None if only is None else {code_key(one) for one in only}
    wanted = _wanted(snapshot, decisions, asked)
    workspace.fetch(requirement for requirement in wanted if not requirement.met_by_lower_level)
    docket = Docket((one for one in wanted if not one.met_by_lower_level), workspace)
    statuses: dict[str, RequirementStatus] = {}
    for requirement in wanted:
        _compute(requirement, statuses, docket, workspace, decisions, frozenset())
    for key, mismatches in misattributed(snapshot).items():
        if key in statuses:
            found = statuses[key]
            statuses[key] = replace(found, mismatches=(*found.mismatches, *mismatches))
    if asked is not None:
        return Results(as_of.isoformat(), {key: one for key, one in statuses.items() if key in asked})
    outdated = workspace.register.outdated
    return Results(as_of.isoformat(), statuses, unmatched(workspace), outdated=outdated)


def _wanted(snapshot: Snapshot, decisions: Decisions, asked: Collection[str] | None) -> Sequence[Requirement]:
    """Return the requirements asked for and the children that some of them are met by."""
    if asked is None:
        return snapshot.requirements
    wanted: dict[str, Requirement] = {}
    queue = [one for key in asked if (one := snapshot.find(Requirement, key)) is not None]
    while queue:
        requirement = queue.pop()
        if code_key(requirement.id) in wanted:
            continue
        wanted[code_key(requirement.id)] = requirement
        if requirement.met_by_lower_level:
            queue.extend(_children(requirement, snapshot, decisions))
    return tuple(wanted.values())


def _children(requirement: Requirement, snapshot: Snapshot, decisions: Decisions) -> Sequence[Requirement]:
    """Return the requirements that name it as their parent, and those it was allocated to."""
    key = code_key(requirement.id)
    allocated = (snapshot.find(Requirement, child) for child in decisions.allocated.get(key, ()))
    named = (*snapshot.children_of.get(key, ()), *(child for child in allocated if child is not None))
    return tuple({code_key(child.id): child for child in named}.values())


def _compute(
    requirement: Requirement,
    statuses: dict[str, RequirementStatus],
    docket: Docket,
    workspace: Workspace,
    decisions: Decisions,
    above: frozenset[str],
) -> RequirementStatus:
    """Compute a status once, children first where they decide; one that is its own descendant is left out there."""
    key = code_key(requirement.id)
    found = statuses.get(key)
    if found is not None:
        return found
    if not requirement.met_by_lower_level:
        status = status_of(requirement, docket, workspace, decisions)
    else:
        path = above | {key}
        children = [
            _compute(child, statuses, docket, workspace, decisions, path)
            for child in _children(requirement, workspace.snapshot, decisions)
            if code_key(child.id) not in path
        ]
        status = status_by_children(requirement, children, docket, workspace, decisions)
    statuses[key] = status
    return status
