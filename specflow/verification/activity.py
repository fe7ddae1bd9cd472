"""One activity: how many of its points are proved, by whom, and what governs it.

Any one item: the item with credit and the most points is shown. Each of named items, or a number of them: n is points
times items, k is counted item by item. A fail of another item that is not outranked at its point still makes the
activity fail: a verdict may only get worse.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.points import Points
from specflow.conditions.words import point_words
from specflow.model.base import code_key
from specflow.model.requirement import Activity, Provers
from specflow.model.verdict import ActivityResult, GoverningPoint, PointsState, RecordRef, Verdict
from specflow.verification.points import ItemPoints

Codes = NDArray[np.int8]
Flags = NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class ActivityOutcome:
    """An activity's result with what the requirement still needs of it.

    ``verdicts`` counts effective verdicts over the points of the items that must prove it; ``counted``: anything counts
    at all; ``stale``: a point is unproved and stale evidence stands there.
    """

    result: ActivityResult
    items: Sequence[ItemPoints]
    failing: Sequence[tuple[ItemPoints, Flags]]
    verdicts: frozenset[Verdict]
    counted: bool
    stale: bool


def summarise(
    activity: Activity,
    provers: Provers,
    points: Points,
    items: Sequence[ItemPoints],
    unit: str,
    named: Sequence[str],
    why: Sequence[str] = (),
) -> ActivityOutcome:
    """Roll the points of all items up to one activity. ``named`` are the ids of the items that must prove it."""
    chosen, missing_items = _provers(provers, items, named)
    needed = max(len(chosen) + missing_items, 1)
    k = sum(one.results.k for one in chosen)
    failing = [(one, _open_fails(one, items, one in chosen)) for one in items]
    failing = [(one, flags) for one, flags in failing if flags.any()]
    verdicts = _verdicts(chosen, failing, missing_items)
    n_failing = _count_failing(provers, failing)
    n_missing = sum(int(np.count_nonzero(one.effective == Verdict.NONE)) for one in chosen)
    shown = max(chosen, key=_most_proved, default=None)
    result = ActivityResult(
        activity.id,
        _state(activity, k, points.size * needed, items),
        max(verdicts),
        k,
        points.size * needed,
        n_failing,
        n_missing + points.size * missing_items,
        shown.item if shown else "",
        {one.item: one.results for one in items},
        _governing(points, chosen, failing, unit),
        _smallest(points, chosen, failing, unit),
        any(bool((one.marginal & one.counts).any()) for one in chosen),
        tuple(why),
    )
    counted = any(bool(one.counts.any()) for one in items)
    stale = any(bool((one.stale & ~one.proved & (one.effective == Verdict.NONE)).any()) for one in chosen)
    return ActivityOutcome(result, chosen, failing, verdicts, counted, stale)


def _provers(
    provers: Provers, items: Sequence[ItemPoints], named: Sequence[str]
) -> tuple[list[ItemPoints], int]:
    """Return the items that must prove the activity and have evidence, and how many are still without any."""
    if provers.may_complete_each_other:
        return list(items), 0
    wanted = {code_key(name) for name in named}
    able = [one for one in items if not wanted or code_key(one.item) in wanted]
    if provers.rule == "each of":
        return able, max(len(wanted) - len(able), 0)
    ranked = sorted(able or items, key=_most_proved, reverse=True)
    number = provers.number if provers.rule == "number of" else 1
    return ranked[:number], max(number - len(ranked), 0) if provers.rule == "number of" else 0


def _most_proved(one: ItemPoints) -> tuple[int, int, float, int]:
    """Order items: most points proved, most that count, best margin; then as they came."""
    guarded = one.results.guarded_margin
    worst = float(np.nanmin(guarded)) if np.isfinite(guarded).any() else -np.inf
    return one.results.k, int(np.count_nonzero(one.counts)), worst, int(np.count_nonzero(one.rank >= 0))


def _open_fails(one: ItemPoints, items: Sequence[ItemPoints], must_prove: bool) -> Flags:
    """Return the points at which a fail of this item counts: its own, or one of another item that nothing outranks."""
    fails = (one.effective == Verdict.FAIL) | (one.effective == Verdict.CONDITIONAL_FAIL)
    if must_prove or not fails.any():
        return np.asarray(fails)
    for other in items:
        if other is not one:
            fails = fails & ~(other.proved & (other.rank > one.rank))
    return np.asarray(fails)


def _verdicts(
    chosen: Sequence[ItemPoints], failing: Sequence[tuple[ItemPoints, Flags]], missing_items: int
) -> frozenset[Verdict]:
    codes: set[int] = set()
    for one in chosen:
        codes.update(np.flatnonzero(np.bincount(one.effective, minlength=1)).tolist())
    for one, flags in failing:
        codes.update(np.unique(one.effective[flags]).tolist())
    if missing_items or not codes:
        codes.add(Verdict.NONE)
    return frozenset(Verdict(code) for code in codes)


def _count_failing(provers: Provers, failing: Sequence[tuple[ItemPoints, Flags]]) -> int:
    """Count failing points: each point once where any one item will do, else once an item."""
    if not failing:
        return 0
    if provers.rule == "any one":
        return int(np.count_nonzero(np.logical_or.reduce([flags for _, flags in failing])))
    return sum(int(np.count_nonzero(flags)) for _, flags in failing)


def _state(activity: Activity, k: int, n: int, items: Sequence[ItemPoints]) -> PointsState:
    if k and k == n:
        return PointsState.FULLY_COVERED
    if k:
        return PointsState.PARTIALLY_VERIFIED
    if any(bool((one.results.table >= 0).any()) for one in items):
        return PointsState.IN_PROGRESS
    return PointsState.PLANNED if activity.planned else PointsState.NOT_PLANNED


def _governing(
    points: Points, chosen: Sequence[ItemPoints], failing: Sequence[tuple[ItemPoints, Flags]], unit: str
) -> GoverningPoint | None:
    """Return the worst verdict, then the smallest guarded margin; what counts first, else what shows progress."""
    best: tuple[tuple[int, int, float], ItemPoints, int] | None = None
    for one, among in _candidates(chosen, failing):
        verdict = np.where(one.counts, one.effective, np.int8(-1))[among]
        shown = one.results.verdict[among]
        worst = np.lexsort((_sortable(one)[among], -shown, -verdict))[0]
        place = int(among[worst])
        key = int(verdict[worst]), int(shown[worst]), -float(_sortable(one)[place])
        if best is None or key > best[0]:
            best = key, one, place
    return None if best is None else _point(points, best[1], best[2], unit)


def _smallest(
    points: Points, chosen: Sequence[ItemPoints], failing: Sequence[tuple[ItemPoints, Flags]], unit: str
) -> GoverningPoint | None:
    """Return the point of the smallest plain margin among readings that count."""
    best: tuple[float, ItemPoints, int] | None = None
    for one, among in _candidates(chosen, failing):
        margin = np.where(one.counts, one.results.margin, np.nan)[among]
        if np.isnan(margin).all():
            continue
        place = int(np.nanargmin(margin))
        if best is None or margin[place] < best[0]:
            best = float(margin[place]), one, int(among[place])
    return None if best is None else _point(points, best[1], best[2], unit)


def _candidates(
    chosen: Sequence[ItemPoints], failing: Sequence[tuple[ItemPoints, Flags]]
) -> list[tuple[ItemPoints, NDArray[np.intp]]]:
    """Return the items and the points of theirs that may govern: all with a reading, and fails of other items."""
    found = [(one, np.flatnonzero(one.results.table >= 0)) for one in chosen]
    known = {id(one) for one in chosen}
    found += [(one, np.flatnonzero(flags)) for one, flags in failing if id(one) not in known]
    return [(one, among) for one, among in found if len(among)]


def _sortable(one: ItemPoints) -> NDArray[np.float64]:
    """Return guarded margins, plain ones where no guarded margin is known; readings without any come last."""
    guarded, plain = one.results.guarded_margin, one.results.margin
    margin = np.where(np.isnan(guarded), plain, guarded)
    return np.where(np.isnan(margin), np.inf, margin)


def _point(points: Points, one: ItemPoints, place: int, unit: str) -> GoverningPoint:
    results = one.results
    return GoverningPoint(
        place,
        point_words(points, place),
        Verdict(int(results.verdict[place])),
        float(results.margin[place]),
        float(results.guarded_margin[place]),
        unit,
        one.item,
        record_at(one, place),
    )


def record_at(one: ItemPoints, place: int) -> RecordRef | None:
    """Return the governing record at a point; None where there is none."""
    results = one.results
    table = int(results.table[place])
    if table < 0:
        return None
    found = one.tables[table]
    return RecordRef(found.id, found.values[int(results.column[place])].name, int(results.row[place]))
