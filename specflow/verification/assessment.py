"""Assessment: the evidence of one requirement judged at its required points, activity by activity."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from specflow.conditions.points import Points
from specflow.limits.conversion import difference_unit
from specflow.model.requirement import Requirement
from specflow.model.verdict import Conflict, Mismatch, RecordRef, Standing, Verdict
from specflow.verification.activity import ActivityOutcome, summarise
from specflow.verification.alternatives import put_together
from specflow.verification.case import Case, Ground, bench_of
from specflow.verification.conflicts import conflicts
from specflow.verification.grid import Bench
from specflow.verification.points import ItemPoints, item_points
from specflow.verification.readings import Readings
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


def assess(case: Case, workspace: Workspace) -> Assessment:
    """Judge all evidence of a requirement."""
    requirement, points = case.requirement, case.points
    named = [str(getattr(workspace.item(name), "id", name)) for name in requirement.provers.items]
    units = [difference_unit(member.limit.unit) for member in case.members]
    outcomes: list[ActivityOutcome] = []
    benches: list[Bench] = []
    shown = 0
    for place, activity in enumerate(case.activities):
        if case.found:
            own, items = [case.found[place].bench], case.found[place].items
        else:
            own = [bench_of(ground, activity, workspace) for ground in case.grounds]
            items, shown = _items(requirement, own, points.size, units)
        why = [text for bench in own for text in bench.readings.why + bench.credit.why]
        outcomes.append(summarise(activity, requirement.provers, points, items, units[shown], named, why))
        benches = benches or own
    return _assessment(case, case.members[shown].limit.unit, outcomes, benches, workspace)


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
    case: Case, unit: str, outcomes: Sequence[ActivityOutcome], benches: Sequence[Bench], workspace: Workspace
) -> Assessment:
    tolerance, grounds = difference_unit(unit), case.grounds
    doubtful = () if case.found and not case.found[0].doubtful else benches
    return Assessment(
        case.points,
        tolerance,
        tuple(outcomes),
        _standing(grounds[0]) if len(grounds) == 1 else _added([_standing(one) for one in grounds]),
        tuple([one for bench in doubtful for one in conflicts(bench, unit, tolerance, workspace.policy)]),
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
    # Values that were not judged are said, whatever else of their column serves.
    return tuple(
        dict.fromkeys(one for one in found if one.kind == "value" or (one.table, one.column) not in served)
    )


def _ambiguous(ground: Ground) -> tuple[RecordRef, ...]:
    rows = ground.matching.ambiguous
    if not len(rows):
        return ()
    if ground.records.usable is not None:
        rows = rows[ground.records.usable[rows]]
    return tuple(ground.records.reference(int(row)) for row in rows[:MOST_NAMED])
