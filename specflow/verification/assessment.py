"""Assessment: the evidence of one requirement judged at its required points, activity by activity."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.match import Matching
from specflow.conditions.points import Points
from specflow.limits import LimitContext, evaluate_limit
from specflow.limits.conversion import difference_unit
from specflow.limits.tree import tree_names
from specflow.model.base import code_key
from specflow.model.limit import Limit
from specflow.model.requirement import Activity, Requirement
from specflow.model.verdict import Conflict, Mismatch, RecordRef, Standing, Verdict
from specflow.verification.activity import ActivityOutcome, summarise
from specflow.verification.alternatives import Member, members_of, put_together
from specflow.verification.changed import remarks_on
from specflow.verification.conflicts import conflicts
from specflow.verification.credit import credit
from specflow.verification.grid import Bench
from specflow.verification.judging import Judging
from specflow.verification.limit_inputs import is_plain, limit_columns
from specflow.verification.points import ItemPoints, item_points
from specflow.verification.readings import Readings, Served, readings_of, serving
from specflow.verification.records import Records
from specflow.verification.standing import STALE, STANDINGS
from specflow.verification.unmatched import serving_nothing
from specflow.verification.workspace import Workspace

#: Records within the tolerance of several points that are named one by one.
MOST_NAMED = 100


@dataclass(frozen=True, slots=True)
class Assessment:
    """What the evidence of a requirement comes to. ``unit`` is that of margins."""

    points: Points
    unit: str
    outcomes: tuple[ActivityOutcome, ...]
    standing: Mapping[Standing, int]
    conflicts: tuple[Conflict, ...] = ()
    mismatches: tuple[Mismatch, ...] = ()
    ambiguous: tuple[RecordRef, ...] = ()
    remarks: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Ground:
    """The records of a limit and what they serve: the same for all activities.

    ``readings`` are the verdicts where every reading is judged by itself; None where that takes others into account
    (statistics, allowances, sweeps), because which of them count differs between activities.
    """

    points: Points
    matching: Matching
    records: Records
    served: Served
    judging: Judging
    readings: Readings | None
    nothing_required: NDArray[np.bool_] | None
    remarks: tuple[str, ...] = ()


def assess(requirement: Requirement, activities: Sequence[Activity], workspace: Workspace) -> Assessment:
    """Judge all evidence of a requirement. ConditionsError when its points cannot be had."""
    points = workspace.points(requirement)
    members = members_of(requirement, workspace.dictionary)
    grounds = [lay_ground(requirement, member, points, workspace) for member in members]
    named = [str(getattr(workspace.item(name), "id", name)) for name in requirement.provers.items]
    units = [difference_unit(member.limit.unit) for member in members]
    outcomes: list[ActivityOutcome] = []
    benches: list[Bench] = []
    shown = 0
    for activity in activities:
        own = [_bench(requirement, activity, ground, workspace) for ground in grounds]
        items, shown = _items(requirement, own, points.size, units)
        why = [text for bench in own for text in bench.readings.why + bench.credit.why]
        outcomes.append(summarise(activity, requirement.provers, points, items, units[shown], named, why))
        benches = benches or own
    return _assessment(points, members[shown].limit.unit, outcomes, grounds, benches, workspace)


def _items(
    requirement: Requirement, benches: Sequence[Bench], n: int, units: Sequence[str]
) -> tuple[Sequence[ItemPoints], int]:
    """Return the points of every item under the whole limit, and which member of its alternatives is shown."""
    together = requirement.provers.may_complete_each_other
    if len(benches) == 1:
        return item_points(benches[0], together=together), 0
    members = [item_points(bench, together=together) for bench in benches]
    return put_together(requirement.limit, members, n, units)


def _assessment(
    points: Points,
    unit: str,
    outcomes: Sequence[ActivityOutcome],
    grounds: Sequence[Ground],
    benches: Sequence[Bench],
    workspace: Workspace,
) -> Assessment:
    tolerance = difference_unit(unit)
    return Assessment(
        points,
        tolerance,
        tuple(outcomes),
        _standing(grounds[0]) if len(grounds) == 1 else _added([_standing(one) for one in grounds]),
        tuple([one for bench in benches for one in conflicts(bench, unit, tolerance, workspace.policy)]),
        _mismatches(grounds, workspace),
        tuple([one for ground in grounds for one in _ambiguous(ground)]),
        _remarks(grounds, benches),
    )


def _added(parts: Sequence[Mapping[Standing, int]]) -> Mapping[Standing, int]:
    standing: Counter[Standing] = Counter()
    for part in parts:
        standing.update(part)
    return dict(standing)


def _remarks(grounds: Sequence[Ground], benches: Sequence[Bench]) -> tuple[str, ...]:
    holes = [remark for ground in grounds for remark in ground.remarks]
    return tuple(dict.fromkeys([*holes, *[note for one in benches for note in _notes(one)]]))


def _notes(bench: Bench) -> tuple[str, ...]:
    """Return how many readings are too wide to decide, and what was done to values and conditions."""
    return (*_too_wide(bench.readings), *bench.records.notes, *bench.matching.notes)


def _too_wide(readings: Readings) -> tuple[str, ...]:
    """Say that intervals (<46, or a bandwidth that is only bounded) meet the limit with a part of them only."""
    if readings.high is readings.low:
        return ()
    wide = (readings.low != readings.high) & (readings.verdict == Verdict.INCONCLUSIVE)
    count = int(np.count_nonzero(wide))
    if not count:
        return ()
    return (
        f"{count} reading{'s' * (count != 1)} known as an interval only, a part of which meets the limit",
    )


def lay_ground(requirement: Requirement, member: Member, points: Points, workspace: Workspace) -> Ground:
    """Gather the records of one limit, match and judge them."""
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
        judging.one_by_one(served) if judging.each_alone else None,
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


def _bench(requirement: Requirement, activity: Activity, ground: Ground, workspace: Workspace) -> Bench:
    weights = credit(activity, requirement.provers, ground.records, ground.served.record, workspace)
    readings = ground.readings
    if readings is None:
        # What judges statistics, allowances and sweeps is long to load, and most projects have few of them.
        from specflow.verification.grouped import judge_grouped

        readings, weights = judge_grouped(ground.judging, ground.served, weights)
    return Bench(
        ground.points,
        ground.matching,
        ground.records,
        readings,
        weights,
        ground.judging,
        ground.nothing_required,
        requirement.decision_rule.conditional_pass_counts,
        ground.judging.together,
    )


def _standing(ground: Ground) -> Mapping[Standing, int]:
    """Count the standing of records that serve a required point, those that no longer count included."""
    if ground.records.all_accepted:
        count = len(ground.served.record)
        return {Standing.ACCEPTED: count} if count else {}
    codes = ground.records.standing[ground.matching.record]
    codes = codes[~np.isnan(ground.records.low[ground.matching.record])]
    counts: Counter[Standing] = Counter()
    for code, count in enumerate(np.bincount(codes, minlength=len(STANDINGS)).tolist()):
        counts[STANDINGS[code]] += count
    return {standing: count for standing, count in counts.items() if count}


def _mismatches(grounds: Sequence[Ground], workspace: Workspace) -> tuple[Mismatch, ...]:
    """Return what could not be compared or serves nothing, and remember which tables served.

    A column that serves one of several alternatives is no mismatch for the others.
    """
    found: list[Mismatch] = []
    served: set[tuple[str, str]] = set()
    for ground in grounds:
        idle = serving_nothing(ground.points, ground.records, ground.matching.record)
        named = {(source.table.id, source.column.name) for source in ground.records.sources}
        served |= named - {(mismatch.table, mismatch.column) for mismatch in idle} if idle else named
        found += [*ground.records.mismatches, *idle]
    workspace.served.update([table for table, _ in served])
    if not found:
        return ()
    return tuple(dict.fromkeys(one for one in found if (one.table, one.column) not in served))


def _ambiguous(ground: Ground) -> tuple[RecordRef, ...]:
    rows = ground.matching.ambiguous
    if not len(rows):
        return ()
    if ground.records.usable is not None:
        rows = rows[ground.records.usable[rows]]
    return tuple(ground.records.reference(int(row)) for row in rows[:MOST_NAMED])
