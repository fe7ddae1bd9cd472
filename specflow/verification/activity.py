"""One activity: how many of its points are proved, by whom, and what governs it.

Any one item: the item with credit and the most points is shown. Each of named items, or a number of them: n is points
times items, k is counted item by item; readings that name no item are nobody's there. A fail of another item that is
not outranked at its point still makes the activity fail: a verdict may only get worse.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from math import isfinite

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


_VERDICTS, _BY_CODE = len(Verdict), tuple(Verdict)
_FAILING, _NONE = int(Verdict.CONDITIONAL_FAIL), int(Verdict.NONE)
_NOTHING = np.int8(-1)


@dataclass(frozen=True, slots=True)
class ActivityOutcome:
    """An activity's result with what the requirement still needs of it.

    ``verdicts`` counts effective verdicts over the points of the items that must prove it; ``counted``: anything counts
    at all; ``stale``: a point is unproved and stale evidence stands there.
    """

    activity: Activity
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
    counts = {id(one): np.bincount(one.effective, minlength=_VERDICTS).tolist() for one in items}
    failing: list[tuple[ItemPoints, Flags]] = []
    for one in items:
        if any(counts[id(one)][_FAILING:]):
            flags = _open_fails(one, items, one in chosen)
            if np.count_nonzero(flags):
                failing.append((one, flags))
    of_chosen = [counts[id(one)] for one in chosen]
    verdicts = _verdicts(of_chosen, failing, missing_items)
    k, n = sum([one.results.k for one in chosen]), points.size * needed
    governing = _governing(points, chosen, failing, unit)
    without, undecided = _undecided(provers, chosen, failing)
    missing = points.size * missing_items
    result = ActivityResult(
        activity.id,
        _state(activity, k, n, items),
        max(verdicts),
        k,
        n,
        _count_failing(provers, failing),
        sum([one[_NONE] for one in of_chosen]) + missing,
        chosen[0].item if chosen else "",
        {one.item: one.results for one in items},
        governing,
        _smallest(points, chosen, failing, unit, governing),
        any(np.count_nonzero(one.marginal) for one in chosen),
        tuple(why),
        without + missing,
        undecided,
    )
    counted = any(np.count_nonzero(one.counts) for one in items)
    stale = any(_needs_re_verification(one) for one in chosen)
    return ActivityOutcome(activity, result, chosen, failing, verdicts, counted, stale)


def _needs_re_verification(one: ItemPoints) -> bool:
    """Whether stale evidence stands at a point that nothing proves."""
    return bool(np.count_nonzero(one.stale)) and bool(np.any(one.stale & (one.effective == _NONE)))


def _provers(
    provers: Provers, items: Sequence[ItemPoints], named: Sequence[str]
) -> tuple[list[ItemPoints], int]:
    """Return the items that must prove the activity, most proved first, and how many are still without evidence."""
    if provers.may_complete_each_other or (len(items) == 1 and provers.rule == "any one"):
        return list(items), 0
    wanted = {code_key(name) for name in named}
    able = [one for one in items if not wanted or code_key(one.item) in wanted]
    if provers.rule == "any one":
        return [_first_of(able or items)], 0
    ranked = sorted((one for one in able if one.item), key=_most_proved, reverse=True)
    if provers.rule == "each of":
        return ranked, max(len(wanted) - len(ranked), 0)
    return ranked[: provers.number], max(provers.number - len(ranked), 0)


def _first_of(items: Sequence[ItemPoints]) -> ItemPoints:
    """Return the item that comes first; most are told apart by their counts alone."""
    if len(items) == 1:
        return items[0]
    proved = [one.results.k for one in items]
    most = max(proved)
    if proved.count(most) == 1:
        return items[proved.index(most)]
    return max(items, key=_most_proved)


def _most_proved(one: ItemPoints) -> tuple[int, int, float]:
    """Order items: most points proved, most that count, best margin; of equals the first stays."""
    least = float(np.fmin.reduce(one.results.guarded_margin))
    return one.results.k, int(np.count_nonzero(one.counts)), least if least == least else -np.inf


def _open_fails(one: ItemPoints, items: Sequence[ItemPoints], must_prove: bool) -> Flags:
    """Return the points at which a fail of this item counts: its own, or one of another item that nothing outranks."""
    fails = one.effective >= _FAILING
    if not must_prove:
        for other in items:
            if other is not one:
                fails = fails & ~(other.proved & (other.rank > one.rank))
    return np.asarray(fails)


def _verdicts(
    counts: Sequence[Sequence[int]], failing: Sequence[tuple[ItemPoints, Flags]], missing_items: int
) -> frozenset[Verdict]:
    codes = {code for one in counts for code, count in enumerate(one) if count}
    for one, flags in failing:
        codes.update(one.effective[flags].tolist())
    if missing_items or not codes:
        codes.add(_NONE)
    return frozenset([_BY_CODE[code] for code in codes])


def _count_failing(provers: Provers, failing: Sequence[tuple[ItemPoints, Flags]]) -> int:
    """Count failing points: each point once where any one item will do, else once an item."""
    if not failing:
        return 0
    if provers.rule == "any one":
        return int(np.count_nonzero(np.logical_or.reduce([flags for _, flags in failing])))
    return sum(int(np.count_nonzero(flags)) for _, flags in failing)


def _undecided(
    provers: Provers, chosen: Sequence[ItemPoints], failing: Sequence[tuple[ItemPoints, Flags]]
) -> tuple[int, int]:
    """Count points that are neither proved nor fail: those without any reading, and those that have one.

    Where any one item will do, a point fails when any item's open fail stands there; else each item has its own.
    """
    without = undecided = 0
    for one in chosen:
        settled = one.proved
        for other, flags in failing:
            if provers.rule == "any one" or other is one:
                settled = settled | flags
        left = len(settled) - int(np.count_nonzero(settled))
        if left:
            empty = int(np.count_nonzero((one.results.table < 0) & ~settled))
            without += empty
            undecided += left - empty
    return without, undecided


def _state(activity: Activity, k: int, n: int, items: Sequence[ItemPoints]) -> PointsState:
    if k and k == n:
        return PointsState.FULLY_COVERED
    if k:
        return PointsState.PARTIALLY_VERIFIED
    if any(np.count_nonzero(one.results.table >= 0) for one in items):
        return PointsState.IN_PROGRESS
    return PointsState.PLANNED if activity.planned else PointsState.NOT_PLANNED


def _governing(
    points: Points, chosen: Sequence[ItemPoints], failing: Sequence[tuple[ItemPoints, Flags]], unit: str
) -> GoverningPoint | None:
    """Return the worst verdict, then the smallest guarded margin; what counts first, else what shows progress."""
    best: tuple[tuple[bool, int, float], ItemPoints, int] | None = None
    for one, allowed in _candidates(chosen, failing):
        verdict = np.where(allowed, one.effective, _NOTHING)
        worst = int(verdict[verdict.argmax()])
        counts = worst >= 0
        if not counts:
            verdict = np.where(one.results.table >= 0, one.results.verdict, _NOTHING)
            worst = int(verdict[verdict.argmax()])
        if worst < 0:
            continue
        at_worst = verdict == worst
        margin = np.where(at_worst, _sortable(one), np.inf)
        place = int(margin.argmin())
        if not isfinite(margin[place]) and not np.isfinite(margin).any():
            place = int(at_worst.argmax())
        key = counts, worst, -float(margin[place])
        if best is None or key > best[0]:
            best = key, one, place
    return None if best is None else _point(points, best[1], best[2], unit)


def _smallest(
    points: Points,
    chosen: Sequence[ItemPoints],
    failing: Sequence[tuple[ItemPoints, Flags]],
    unit: str,
    governing: GoverningPoint | None,
) -> GoverningPoint | None:
    """Return the point of the smallest plain margin among readings that count."""
    best: tuple[float, ItemPoints, int] | None = None
    for one, allowed in _candidates(chosen, failing):
        margin = np.where(allowed, one.results.margin, np.inf)
        place = int(margin.argmin())  # of the first that is none, if any
        least = float(margin[place])
        if least != least:
            margin[margin != margin] = np.inf
            place = int(margin.argmin())
            least = float(margin[place])
        if least < np.inf and (best is None or least < best[0]):
            best = least, one, place
    if best is None:
        return None
    if governing is not None and (governing.item, governing.point) == (best[1].item, best[2]):
        return governing
    return _point(points, best[1], best[2], unit)


def _candidates(
    chosen: Sequence[ItemPoints], failing: Sequence[tuple[ItemPoints, Flags]]
) -> list[tuple[ItemPoints, Flags]]:
    """Return the items and the points of theirs that may govern: all that count, and open fails of other items."""
    found = [(one, one.counts) for one in chosen]
    if failing:
        known = {id(one) for one in chosen}
        found += [(one, flags) for one, flags in failing if id(one) not in known]
    return found


def _sortable(one: ItemPoints) -> NDArray[np.float64]:
    """Return guarded margins, plain ones where no guarded margin is known; readings without any come last."""
    guarded = one.results.guarded_margin
    unknown = guarded != guarded
    if not np.count_nonzero(unknown):
        return guarded
    margin = np.where(unknown, one.results.margin, guarded)
    return np.where(margin == margin, margin, np.inf)


@lru_cache(maxsize=4096)
def _words(points: Points, place: int) -> str:
    """Say a point once: many requirements share a conditions set."""
    return point_words(points, place)


def _point(points: Points, one: ItemPoints, place: int, unit: str) -> GoverningPoint:
    results = one.results
    return GoverningPoint(
        place,
        _words(points, place),
        _BY_CODE[results.verdict[place]],
        float(results.margin[place]),
        float(results.guarded_margin[place]),
        unit,
        one.item,
        _record(one, place),
    )


def _record(one: ItemPoints, place: int) -> RecordRef | None:
    source = one.results.source_at(place)
    if source is None:
        return None
    table, column, row = source
    return RecordRef(table, one.tables[int(one.results.table[place])].values[column].name, row)
