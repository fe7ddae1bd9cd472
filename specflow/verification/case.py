"""The case of one requirement: its limits, the records that may serve its points, and what it is to be proved by.

Opening a case judges nothing. Cases that are alike are judged together (``abreast``), the others one by one when they
are assessed.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.match import Matching
from specflow.conditions.points import Points
from specflow.limits import LimitContext, evaluate_limit
from specflow.limits.tree import tree_names
from specflow.model.base import code_key
from specflow.model.limit import Limit
from specflow.model.requirement import Activity, Requirement
from specflow.model.snapshot import Snapshot
from specflow.verification.alternatives import Member, members_of
from specflow.verification.changed import remarks_on
from specflow.verification.credit import Credit, credit
from specflow.verification.grid import Bench
from specflow.verification.judging import Judging
from specflow.verification.limit_inputs import is_plain, limit_columns
from specflow.verification.points import ItemPoints
from specflow.verification.readings import Readings, Served, readings_of, serving
from specflow.verification.records import Records
from specflow.verification.standing import STALE
from specflow.verification.workspace import Workspace


@dataclass(frozen=True, slots=True)
class Ground:
    """The records of one limit and what they serve: the same for all activities."""

    points: Points
    matching: Matching
    records: Records
    served: Served
    judging: Judging
    nothing_required: NDArray[np.bool_] | None
    remarks: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class LaidOut:
    """What was found of one activity: its readings judged, and every point of each item.

    ``doubtful``: two readings may contradict each other, which has to be looked at.
    """

    bench: Bench
    items: Sequence[ItemPoints]
    doubtful: bool = True


@dataclass(slots=True)
class Case:
    """A requirement ready to be judged: one ground a limit. ``found``, one an activity, once it was judged abreast."""

    requirement: Requirement
    activities: Sequence[Activity]
    points: Points
    members: Sequence[Member]
    grounds: Sequence[Ground]
    found: Sequence[LaidOut] = ()


def required_activities(requirement: Requirement, snapshot: Snapshot) -> Sequence[Activity]:
    """Return the planned activities, or the default one that every requirement has until somebody plans one."""
    known = snapshot.activities_of.get(code_key(requirement.id), ())
    planned = [activity for activity in known if activity.planned]
    if planned:
        return planned
    return known[:1] or (
        Activity(
            id=f"{requirement.id}/default", requirement=requirement.id, tier=requirement.tier, planned=False
        ),
    )


def open_case(requirement: Requirement, activities: Sequence[Activity], workspace: Workspace) -> Case:
    """Gather what a requirement is judged by. ConditionsError when its points cannot be had."""
    points = workspace.points(requirement)
    members = members_of(requirement, workspace.dictionary)
    grounds = [_lay_ground(requirement, member, points, workspace) for member in members]
    return Case(requirement, activities, points, members, grounds)


def _lay_ground(requirement: Requirement, member: Member, points: Points, workspace: Workspace) -> Ground:
    """Gather the records of one limit and match them."""
    records = workspace.records(requirement, member.want)
    conditions = workspace.conditions_of(requirement, records)
    matched = workspace.matching(points, conditions)
    served = readings_of(records, *serving(records, matched.record, matched.point))
    nothing, holes = _nothing_required(member.limit, points, workspace)
    judging = Judging(requirement, member.want, member.limit, points, records, conditions, workspace)
    return Ground(
        points,
        matched.matching,
        records,
        served,
        judging,
        nothing,
        (*holes, *_changed_below(requirement, records, workspace)),
    )


def _changed_below(requirement: Requirement, records: Records, workspace: Workspace) -> tuple[str, ...]:
    """Say that parts of the block have changed since its evidence was taken, where that does not make it stale."""
    changes = workspace.changes_below.get(code_key(requirement.block), ())
    if not changes:
        return ()
    codes = enumerate(records.sources)
    fresh = [
        source.table for code, source in codes if (records.standing[records.source == code] < STALE).any()
    ]
    return remarks_on(fresh, changes)


def _nothing_required(
    limit: Limit, points: Points, workspace: Workspace
) -> tuple[NDArray[np.bool_] | None, tuple[str, ...]]:
    """Return the points at which the limit asks for nothing on purpose, whatever is recorded; None where it asks.

    A required point that the limit does not reach is a hole in the requirement: it stays unproved, and that is said.
    """
    if is_plain(limit) or (not tree_names(limit.tree) and limit.tree.kind != "no_limit"):
        return None, ()
    every = np.arange(points.size)
    columns = limit_columns(limit, points, None, every, every, workspace.declared)
    bounds = evaluate_limit(limit, LimitContext(columns, workspace.declared, points.size))
    nothing = np.broadcast_to(~bounds.applies & ~bounds.unknown & ~bounds.outside, (points.size,))
    holes = int(np.count_nonzero(np.broadcast_to(bounds.outside & ~bounds.unknown, (points.size,))))
    words = f"the limit says nothing at {holes} of {points.size} required points: add a case for them, or 'no limit'"
    return nothing if nothing.any() else None, (words,) if holes else ()


def bench_of(ground: Ground, activity: Activity, workspace: Workspace) -> Bench:
    """Return the readings of one limit judged for one activity, with the credit they have there."""
    requirement = ground.judging.requirement
    weights = credit(activity, requirement.provers, ground.records, ground.served.record, workspace)
    if ground.judging.each_alone:
        return bench_with(ground, ground.judging.one_by_one(ground.served), weights)
    # What judges statistics, allowances and sweeps is long to load, and most projects have few of them.
    from specflow.verification.grouped import judge_grouped

    return bench_with(ground, *judge_grouped(ground.judging, ground.served, weights))


def bench_with(ground: Ground, readings: Readings, weights: Credit) -> Bench:
    """Return the bench of readings that are judged already."""
    judging = ground.judging
    return Bench(
        ground.points,
        ground.matching,
        ground.records,
        readings,
        weights,
        judging,
        ground.nothing_required,
        judging.requirement.decision_rule.conditional_pass_counts,
        judging.together,
    )
