"""When a block misses what it was allocated: what that costs the system, and who could make up for it."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.allotment import (
    Allotment,
    joined,
    key_of,
    open_allotment,
    rounded_safely,
    rounded_widely,
)
from specflow.budgets.allowed import Ends, worst_corner
from specflow.budgets.children import ends_of_children
from specflow.budgets.closure import Closure, test_ends, tolerance_ends
from specflow.budgets.knowledge import KnownLine, Rank
from specflow.budgets.probe import Probe, line_name
from specflow.budgets.spread import moves
from specflow.model.requirement import Requirement
from specflow.statistics.prediction import one_sided_quantile

Floats = NDArray[np.float64]
_SMALL = 1e-9
_STEPS = 40
_HOLDS = 1e-7


@dataclass(frozen=True, slots=True)
class Cost:
    """What a miss takes from one limit, with every other block at its worst allowed bound."""

    requirement: str
    before: float
    after: float
    unit: str


@dataclass(frozen=True, slots=True)
class Miss:
    """A line that is known to lie outside what its block was allocated, by ``short`` in ``unit`` at ``words``."""

    line: str
    value: float
    allowed: float
    short: float
    unit: str
    words: str
    source: str
    costs: tuple[Cost, ...]


@dataclass(frozen=True, slots=True)
class Slack:
    """How far a block is known to be better than it has to be, in ``unit``, on the side that hurts."""

    line: str
    amount: float
    unit: str
    source: str


@dataclass(frozen=True, slots=True, eq=False)
class Reallocation:
    """Misses, what the system comes to with them, and a proposal that makes up for them.

    ``with_misses`` is the closure test with the blocks that miss at what is known of them and all others at their
    bounds. ``proposal`` are the bounds that would change (empty where it closes anyway); ``part`` is the part of the
    slack that they take, NaN where all of it is not enough; ``closure`` the test with them.
    """

    misses: tuple[Miss, ...]
    slack: tuple[Slack, ...]
    with_misses: Closure
    part: float
    proposal: tuple[Allotment, ...]
    closure: Closure

    @property
    def sentence(self) -> str:
        """The outcome in words."""
        if not self.misses:
            return "no block is known to miss its allocation"
        if self.with_misses.closes:
            return "the system still closes with every other block at its worst allowed bound; nothing need change"
        if math.isnan(self.part):
            return f"the slack that is known does not cover the miss: {self.closure.sentence}"
        names = ", ".join(f"{one.block} {one.parameter}" for one in self.proposal)
        return f"{self.part:.0%} of the known slack covers it: change {names}"


def reallocate(
    probe: Probe, known: Sequence[KnownLine], children: Sequence[Requirement], *, confidence: float = 0.95
) -> Reallocation:
    """Compare what is known with the requirements on the blocks, and propose bounds that close again.

    ``probe`` is the budget as planned, ``children`` the requirements that carry its allocations.
    """
    ends, notes = ends_of_children(probe, children)
    misses, held = _misses(probe, known, ends)
    after = test_ends(probe, held, notes)
    slack, reach = _slack(probe, known, held, misses, confidence)
    if not misses or after.closes:
        return Reallocation(misses, slack, after, 0.0, (), after)
    part = _part(probe, held, reach)
    taken = _tightened(held, reach, 1.0 if math.isnan(part) else part)
    proposal = _proposal(probe, ends, taken)
    closure = test_ends(probe, _with(probe, taken, proposal), notes)
    return Reallocation(misses, slack, after, part, proposal, closure)


def _misses(
    probe: Probe, known: Sequence[KnownLine], ends: Sequence[Ends | None]
) -> tuple[tuple[Miss, ...], list[Ends | None]]:
    found: list[Miss] = []
    held = list(ends)
    for number, (line, own) in enumerate(zip(known, ends, strict=True)):
        if own is None or not line.is_known.any():
            continue
        low, high = own
        short = np.where(line.is_known, np.maximum(low - line.value, line.value - high), -np.inf)
        place = int(np.argmax(short))
        if short[place] <= _SMALL:
            continue
        held[number] = _widened(probe, line, own)
        costs = _costs(probe, ends, number, held[number])
        found.append(_miss(probe, line, own, place, float(short[place]), costs))
    return tuple(found), held


def _widened(probe: Probe, line: KnownLine, own: Ends) -> Ends:
    """Return bounds that take in what is known, rounded outwards: one number for all places where they are one now."""
    read = line.read
    if _is_one(own):
        known = line.value[line.is_known]
        low = np.full(probe.size, min(float(own[0].min()), float(known.min())))
        high = np.full(probe.size, max(float(own[1].max()), float(known.max())))
    else:
        low = np.where(line.is_known, np.minimum(own[0], line.value), own[0])
        high = np.where(line.is_known, np.maximum(own[1], line.value), own[1])
    return rounded_widely(open_allotment(read, "", is_shared=True).by_place(low, high)).ends(probe.size)


def _is_one(own: Ends) -> bool:
    """Whether each side is one number at all places."""
    return all(bool((side == side[0]).all()) for side in own)


def _miss(
    probe: Probe, line: KnownLine, own: Ends, place: int, short: float, costs: tuple[Cost, ...]
) -> Miss:
    value = float(line.value[place])
    allowed = float(own[0][place] if value < own[0][place] else own[1][place])
    unit = line.read.line.unit
    words = probe.words(place)
    return Miss(line_name(line.read), value, allowed, short, unit, words, line.source_words(place), costs)


def _costs(probe: Probe, ends: Sequence[Ends | None], number: int, moved: Ends | None) -> tuple[Cost, ...]:
    standing = [
        tolerance_ends(probe, place) if own is None and moves(read.line) else own
        for place, (read, own) in enumerate(zip(probe.chain.lines, ends, strict=True))
    ]
    changed = list(standing)
    changed[number] = moved
    found = []
    for target in probe.targets:
        before, after = (worst_corner(probe, target, each) for each in (standing, changed))
        if before.worst < 0:
            continue
        first, second = float(before.margin[before.worst]), float(after.margin[after.worst])
        if first - second > _SMALL:
            found.append(Cost(target.name, first, second, target.bar.margin_unit))
    return tuple(found)


def _slack(
    probe: Probe,
    known: Sequence[KnownLine],
    held: Sequence[Ends | None],
    misses: Sequence[Miss],
    confidence: float,
) -> tuple[tuple[Slack, ...], list[Ends | None]]:
    """Return the slack of every line, and the bounds it could be held to: what is known with its spread.

    One number for all places must take in what is known at each of them, or the block would miss what is proposed.
    """
    missing = {one.line for one in misses}
    found: list[Slack] = []
    reach: list[Ends | None] = []
    for line, own in zip(known, held, strict=True):
        best = own
        is_known = line.is_known.all() and int(line.rank.min()) >= int(Rank.DATASHEET)
        if own is not None and is_known and line_name(line.read) not in missing:
            wide = one_sided_quantile(confidence, line.freedom) * np.hypot(line.spread, line.common)
            low, high = line.value - wide, line.value + wide
            if _is_one(own):
                low, high = np.full(probe.size, low.min()), np.full(probe.size, high.max())
            best = np.maximum(own[0], low), np.minimum(own[1], high)
            found += _slack_of(line, own, best)
        reach.append(best)
    return tuple(found), reach


def _slack_of(line: KnownLine, own: Ends, best: Ends) -> list[Slack]:
    amounts = [(best[0] - own[0])[np.isfinite(own[0])], (own[1] - best[1])[np.isfinite(own[1])]]
    least = [float(one.min()) for one in amounts if len(one)]
    amount = max(least, default=0.0)
    if amount <= _SMALL:
        return []
    return [Slack(line_name(line.read), amount, line.read.line.unit, line.source_words(0))]


def _tightened(held: Sequence[Ends | None], reach: Sequence[Ends | None], part: float) -> list[Ends | None]:
    found: list[Ends | None] = []
    for own, best in zip(held, reach, strict=True):
        if own is None or best is None:
            found.append(own)
            continue
        low, high = (_between(start, end, part) for start, end in zip(own, best, strict=True))
        found.append((low, high))
    return found


def _between(start: Floats, end: Floats, part: float) -> Floats:
    """Go a part of the way; an open side stays open."""
    known = np.isfinite(start)
    first, last = np.where(known, start, 0.0), np.where(known, end, 0.0)
    return np.where(known, first + part * (last - first), start)


def _smallest(probe: Probe, ends: Sequence[Ends | None]) -> float:
    corners = [worst_corner(probe, target, ends) for target in probe.targets]
    return min((float(one.margin[one.worst]) for one in corners if one.worst >= 0), default=0.0)


def _part(probe: Probe, held: Sequence[Ends | None], reach: Sequence[Ends | None]) -> float:
    """Return the least part of the slack with which all limits hold, NaN where all of it is not enough."""
    if _smallest(probe, _tightened(held, reach, 1.0)) < -_HOLDS:
        return math.nan
    low, high = 0.0, 1.0
    for _ in range(_STEPS):
        middle = (low + high) / 2.0
        if _smallest(probe, _tightened(held, reach, middle)) >= 0:
            high = middle
        else:
            low = middle
    return high


def _proposal(
    probe: Probe, before: Sequence[Ends | None], after: Sequence[Ends | None]
) -> tuple[Allotment, ...]:
    """Return the bounds that changed, rounded so that they still close: by place where they were, else one number."""
    found: list[Allotment] = []
    for read, was, now in zip(probe.chain.lines, before, after, strict=True):
        if was is None or now is None:
            continue
        low, high = now
        wider = bool((now[0] < was[0] - _SMALL).any() or (now[1] > was[1] + _SMALL).any())
        narrower = bool((now[0] > was[0] + _SMALL).any() or (now[1] < was[1] - _SMALL).any())
        if _is_one(was):
            ends = (low.min(), high.max()) if wider else (low.max(), high.min())
            low, high = (np.full(probe.size, end) for end in ends)
        if not wider and not narrower:
            continue
        words = "relaxed to what is known of it" if wider else "tightened into what is known of it"
        one = open_allotment(read, words, is_shared=True).by_place(low, high)
        found.append(rounded_widely(one) if wider else rounded_safely(one))
    return tuple(joined(found, f"budget {probe.budget.id}"))


def _with(probe: Probe, ends: Sequence[Ends | None], proposal: Sequence[Allotment]) -> list[Ends | None]:
    by_key = {one.key: one for one in proposal}
    found: list[Ends | None] = []
    for read, own in zip(probe.chain.lines, ends, strict=True):
        one = by_key.get(key_of(read))
        found.append(own if one is None else one.ends(probe.size))
    return found
