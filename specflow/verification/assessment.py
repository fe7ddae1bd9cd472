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
from specflow.limits.tree import tree_names
from specflow.model.limit import Limit
from specflow.model.parameter import QuantityIdentity
from specflow.model.requirement import Activity, Requirement
from specflow.model.verdict import Conflict, Mismatch, RecordRef, Standing
from specflow.units import format_unit, parse_unit, tolerance_unit
from specflow.verification.activity import ActivityOutcome, summarise
from specflow.verification.bandwidths import states_bandwidth
from specflow.verification.conflicts import conflicts
from specflow.verification.credit import credit
from specflow.verification.points import Bench, item_points
from specflow.verification.readings import Judgement, Readings, judge, limit_columns, serving
from specflow.verification.records import Records
from specflow.verification.standing import STANDINGS
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
    """The records of a limit, what they serve, and the verdicts: the same for all activities."""

    points: Points
    matching: Matching
    records: Records
    readings: Readings
    nothing_required: NDArray[np.bool_] | None


def assess(requirement: Requirement, activities: Sequence[Activity], workspace: Workspace) -> Assessment:
    """Judge all evidence of a requirement. ConditionsError when its points cannot be had."""
    points = workspace.points(requirement)
    limit = requirement.limit
    unit = difference_unit(limit.unit)
    ground = lay_ground(requirement, limit, requirement.quantity, points, workspace)
    named = [item.id for name in requirement.provers.items if (item := workspace.item(name)) is not None]
    outcomes: list[ActivityOutcome] = []
    found: list[Conflict] = []
    for activity in activities:
        bench = _bench(requirement, activity, ground, workspace)
        items = item_points(bench, together=requirement.provers.may_complete_each_other)
        why = (*ground.readings.why, *bench.credit.why)
        outcomes.append(summarise(activity, requirement.provers, points, items, unit, named, why))
        if not found:
            found = list(conflicts(bench, limit.unit, unit, workspace.policy))
    return Assessment(
        points,
        unit,
        tuple(outcomes),
        _standing(ground),
        tuple(found),
        (*ground.records.mismatches, *_note_served(ground, workspace)),
        _ambiguous(ground),
        (*ground.records.notes, *ground.matching.notes),
    )


def lay_ground(
    requirement: Requirement, limit: Limit, quantity: QuantityIdentity, points: Points, workspace: Workspace
) -> Ground:
    """Gather the records of one limit, match and judge them."""
    records = workspace.records(requirement, quantity, limit.unit)
    matching = workspace.matching(points, records)
    record, point = serving(records, matching)
    columns = limit_columns(limit, points, records.conditions, record, point)
    context = LimitContext(columns, workspace.declared, len(record))
    judgement = Judgement(limit, limit.unit, requirement.decision_rule, workspace.policy, context)
    readings = judge(records, record, point, judgement)
    return Ground(points, matching, records, readings, _nothing_required(limit, points, workspace))


def _nothing_required(limit: Limit, points: Points, workspace: Workspace) -> NDArray[np.bool_] | None:
    """Return the points at which the limit asks for nothing, whatever is recorded; None where it always asks."""
    if not tree_names(limit.tree) and limit.tree.kind != "no_limit":
        return None
    every = np.arange(points.size, dtype=np.int32)
    columns = limit_columns(limit, points, None, every, every)
    bounds = evaluate_limit(limit, LimitContext(columns, workspace.declared, points.size))
    nothing = ~bounds.applies & ~bounds.unknown
    return np.broadcast_to(nothing, (points.size,)) if nothing.any() else None


def _bench(requirement: Requirement, activity: Activity, ground: Ground, workspace: Workspace) -> Bench:
    weights = credit(activity, requirement.provers, ground.records, ground.readings, workspace)
    return Bench(
        ground.points,
        ground.matching,
        ground.records,
        ground.readings,
        weights,
        ground.nothing_required,
        requirement.decision_rule.conditional_pass_counts,
    )


def difference_unit(unit: str) -> str:
    """Return the unit of margins of a limit in ``unit``."""
    return format_unit(tolerance_unit(parse_unit(unit or "1")))


def _standing(ground: Ground) -> Mapping[Standing, int]:
    """Count the standing of records that serve a required point, those that no longer count included."""
    if ground.records.all_accepted:
        return {Standing.ACCEPTED: ground.readings.size} if ground.readings.size else {}
    codes = ground.records.standing[ground.matching.record]
    codes = codes[~np.isnan(ground.records.low[ground.matching.record])]
    counts: Counter[Standing] = Counter()
    for code, count in enumerate(np.bincount(codes, minlength=len(STANDINGS)).tolist()):
        counts[STANDINGS[code]] += count
    return {standing: count for standing, count in counts.items() if count}


def _note_served(ground: Ground, workspace: Workspace) -> tuple[Mismatch, ...]:
    """Remember which tables served; return the sources that did not."""
    idle = serving_nothing(ground.points, ground.records, ground.readings.record)
    without = {(mismatch.table, mismatch.column) for mismatch in idle}
    for source in ground.records.sources:
        if (source.table.id, source.column.name) not in without:
            workspace.served.add(source.table.id)
    return idle


def _ambiguous(ground: Ground) -> tuple[RecordRef, ...]:
    rows = ground.matching.ambiguous
    if ground.records.usable is not None and len(rows):
        rows = rows[ground.records.usable[rows]]
    return tuple(ground.records.reference(int(row)) for row in rows[:MOST_NAMED])


__all__ = ["Assessment", "Ground", "assess", "difference_unit", "lay_ground", "states_bandwidth"]
