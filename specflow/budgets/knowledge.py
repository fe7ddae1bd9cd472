"""What is known of a line, handed in as plain arrays, and which of it is best at each place.

The order of rank is that of the design: test on production or qualification hardware, test on earlier hardware,
composite (a budget of things measured), analysis with a model validated there, other analysis, similarity, datasheet,
estimate; what is allocated is a target, used only where nothing is known.
"""

from __future__ import annotations

import math
from collections.abc import Collection, Sequence
from dataclasses import dataclass, replace
from enum import IntEnum

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain, ReadLine
from specflow.budgets.spread import elements, moments
from specflow.model.base import code_key
from specflow.model.block import Maturity

Floats = NDArray[np.float64]
Codes = NDArray[np.intp]


class Rank(IntEnum):
    """How good a source is; a greater number is better."""

    ALLOCATED = 0
    ESTIMATE = 1
    DATASHEET = 2
    SIMILARITY = 3
    ANALYSIS = 4
    VALIDATED_ANALYSIS = 5
    COMPOSITE = 6
    EARLIER_TEST = 7
    TEST = 8

    @property
    def words(self) -> str:
        """The rank as people say it."""
        return _WORDS[self]


_WORDS = {
    Rank.ALLOCATED: "allocated, a target",
    Rank.ESTIMATE: "estimate",
    Rank.DATASHEET: "datasheet",
    Rank.SIMILARITY: "similarity",
    Rank.ANALYSIS: "analysis",
    Rank.VALIDATED_ANALYSIS: "analysis, model validated there",
    Rank.COMPOSITE: "composite of what is known of the parts",
    Rank.EARLIER_TEST: "test on earlier hardware",
    Rank.TEST: "test on qualification or production hardware",
}

_OF_MATURITY = {
    Maturity.ESTIMATED: Rank.ESTIMATE,
    Maturity.DATASHEET_TYPICAL: Rank.DATASHEET,
    Maturity.DATASHEET_LIMIT: Rank.DATASHEET,
    Maturity.SIMULATED: Rank.ANALYSIS,
    Maturity.BREADBOARD: Rank.EARLIER_TEST,
    Maturity.ENGINEERING: Rank.EARLIER_TEST,
    Maturity.QUALIFICATION: Rank.TEST,
    Maturity.PRODUCTION: Rank.TEST,
}


@dataclass(frozen=True, slots=True, eq=False)
class Knowledge:
    """Values recorded of one line: m readings, each for one place of evaluation, in the unit of the line.

    ``place`` (m,) is the place of evaluation, ``value`` (m,), ``u`` (m,) its standard uncertainty in the tolerance unit
    (NaN where none is known), ``rank`` (m,), ``item`` (m,) codes into ``items`` ("" is the design, not a specimen),
    ``source`` (m,) codes into ``sources``, which say where a value stands.
    """

    position: int
    parameter: str
    place: Codes
    value: Floats
    u: Floats
    rank: Codes
    item: Codes
    items: tuple[str, ...]
    source: Codes
    sources: tuple[str, ...]

    def at(self, kept: NDArray[np.bool_]) -> Knowledge:
        """Return some of the readings."""
        return replace(
            self,
            place=self.place[kept],
            value=self.value[kept],
            u=self.u[kept],
            rank=self.rank[kept],
            item=self.item[kept],
            source=self.source[kept],
        )


@dataclass(frozen=True, slots=True, eq=False)
class KnownLine:
    """The best that is known of one line at each of n places.

    ``value`` in the unit of the line; ``rank`` (n,); ``source`` (n,) codes into ``sources``; ``items`` (n,): how many
    specimens the value comes from; ``spread`` (n,): standard deviation with which the next specimen (or this one)
    may differ from the value; ``freedom`` (n,) the degrees of freedom of that; ``common`` (n,): the standard
    uncertainty that all specimens share, counted once. ``is_known``: anything better than the line itself was used.
    ``shift`` (n,): how far the mean of the line's own tolerance lies from its figure, where that tolerance is what is
    known of its spread.
    """

    read: ReadLine
    value: Floats
    rank: Codes
    source: Codes
    sources: tuple[str, ...]
    items: Codes
    spread: Floats
    freedom: Floats
    common: Floats
    is_known: NDArray[np.bool_]
    shift: Floats
    notes: tuple[str, ...] = ()

    def source_words(self, place: int) -> str:
        """Say which source was used at a place."""
        found = self.sources[int(self.source[place])]
        rank = Rank(int(self.rank[place])).words
        count = int(self.items[place])
        of = f", {count} item{'s' * (count != 1)}" if count else ""
        return f"{rank}: {found}{of}" if found else f"{rank}{of}"


def own_rank(read: ReadLine) -> Rank:
    """Return the rank of a line's own value: by its maturity; a source that begins with "allocated" is a target."""
    line = read.line
    if line.maturity is Maturity.ESTIMATED and code_key(line.source).startswith("allocat"):
        return Rank.ALLOCATED
    return _OF_MATURITY[line.maturity]


def best_known(
    chain: Chain, number: int, knowledge: Sequence[Knowledge], built_in: Collection[str] | None = None
) -> KnownLine:
    """Return the best that is known of one line, place by place.

    ``built_in`` names the specimens that stand in the system that is looked at; None: the type, of which the next
    specimen is predicted. Without a reading of a built-in specimen a place is known as the type is.
    """
    read = chain.lines[number]
    known = _own(chain, read)
    for one in knowledge:
        if one.position == read.line.position and code_key(one.parameter) == code_key(read.line.parameter):
            _take_type(known, one, elements(chain, read))
            if built_in is not None:
                _take_built(known, one, {code_key(item) for item in built_in})
    return known.finished(read)


class _Table:
    """What is known so far, place by place."""

    def __init__(self, read: ReadLine, size: int, spread: float, shift: float, freedom: float) -> None:
        source = read.line.source or read.line.maturity.value
        self.value = np.array(np.broadcast_to(read.values, (size,)))
        self.rank = np.full(size, int(own_rank(read)))
        self.sources = [f"line of the budget ({source})"]
        self.source = np.zeros(size, np.intp)
        self.items = np.zeros(size, np.intp)
        self.spread = np.full(size, spread)
        self.freedom = np.full(size, freedom)
        self.common = np.zeros(size)
        self.is_known = np.zeros(size, bool)
        self.own_spread = spread
        self.shift = shift
        self.notes: dict[str, None] = {}

    def source_number(self, words: str) -> int:
        """Return the number of a source, listed when it is new."""
        if words not in self.sources:
            self.sources.append(words)
        return self.sources.index(words)

    def finished(self, read: ReadLine) -> KnownLine:
        return KnownLine(
            read,
            self.value,
            self.rank.astype(np.intp),
            self.source,
            tuple(self.sources),
            self.items,
            self.spread,
            self.freedom,
            self.common,
            self.is_known,
            np.where(self.is_known, 0.0, self.shift),
            tuple(self.notes),
        )


def _own(chain: Chain, read: ReadLine) -> _Table:
    """A line by itself: its tolerance is its spread where that names a distribution."""
    spread, shift = _own_spread(chain, read)
    table = _Table(read, chain.size, spread, shift, math.inf)
    tolerance = read.line.tolerance
    if tolerance is not None and moments(tolerance) is None and (tolerance.minus or tolerance.plus):
        table.notes[f"the tolerance of {read.line.place} names no distribution and gives no spread"] = None
    return table


def _own_spread(chain: Chain, read: ReadLine) -> tuple[float, float]:
    """Return standard deviation and mean of a line about its figure by its own tolerance."""
    tolerance = read.line.tolerance
    found = moments(tolerance) if tolerance is not None else None
    if found is None:
        return 0.0, 0.0
    return found.deviation / math.sqrt(elements(chain, read)), found.mean


def _take_type(table: _Table, one: Knowledge, count: int) -> None:
    """Take the readings of best rank at every place: the mean of the specimens, and what they say of the next one."""
    best = np.full(len(table.rank), -1, np.intp)
    np.maximum.at(best, one.place, one.rank)
    is_better = np.where(table.is_known, best > table.rank, best >= table.rank) & (best >= 0)
    found = _Means.of(one, is_better[one.place] & (one.rank == best[one.place]), len(best))
    _set(table, one, found, best)
    several = found.places[found.count[found.places] >= 2]
    n = found.count[several]
    table.spread[several] = found.deviation[several] * np.sqrt(1.0 / count + 1.0 / n)
    table.freedom[several] = n - 1.0
    single = found.places[found.count[found.places] < 2]
    table.spread[single], table.freedom[single] = table.own_spread, math.inf
    instead = "the tolerance of the line is kept" if table.own_spread else "none is taken"
    for is_item, what in ((True, "one specimen says"), (False, "a value of the design says")):
        if ((found.specimens[single] > 0) == is_item).any():
            said = f"{what} nothing about the spread between specimens; {instead}"
            table.notes[f"{one.parameter} at position {one.position}: {said}"] = None


def _take_built(table: _Table, one: Knowledge, built_in: Collection[str]) -> None:
    """Take the readings of the specimens that stand in the system: they are those, so nothing is predicted."""
    is_built = np.array([code_key(item) in built_in for item in one.items], bool)[one.item]
    best = np.full(len(table.rank), -1, np.intp)
    np.maximum.at(best, one.place[is_built], one.rank[is_built])
    found = _Means.of(one, is_built & (one.rank == best[one.place]), len(best))
    _set(table, one, found, best)
    table.spread[found.places], table.freedom[found.places] = 0.0, math.inf
    for number in np.unique(found.count[found.places]):
        if number > 1:
            said = f"{number} specimens stand in the system; their mean is taken"
            table.notes[f"{one.parameter} at position {one.position}: {said}"] = None


@dataclass(frozen=True, slots=True, eq=False)
class _Means:
    """Readings by place: ``places`` that have any, and for every place of evaluation (n,) the mean of its specimens,
    how many they are (the design counts as one), those of them that are specimens, and their standard deviation.

    Repeats on one specimen are not more specimens: they count by their mean.
    """

    rows: Codes
    places: Codes
    mean: Floats
    count: Codes
    specimens: Codes
    deviation: Floats

    @classmethod
    def of(cls, one: Knowledge, kept: NDArray[np.bool_], size: int) -> _Means:
        """Return the means of the rows that are kept."""
        rows = np.flatnonzero(kept)
        width = max(len(one.items), 1)
        keys, inverse, repeats = np.unique(
            one.place[rows] * width + one.item[rows], return_inverse=True, return_counts=True
        )
        means = np.bincount(inverse, one.value[rows], len(keys)) / repeats
        place = keys // width
        count = np.bincount(place, minlength=size).astype(np.intp)
        whole = np.maximum(count, 1)
        mean = np.bincount(place, means, size) / whole
        squares = np.bincount(place, (means - mean[place]) ** 2, size)
        is_item = np.array([bool(name) for name in one.items] or [False])[keys % width]
        specimens = np.bincount(place[is_item], minlength=size).astype(np.intp)
        deviation = np.sqrt(squares / np.maximum(count - 1, 1))
        return cls(rows, np.flatnonzero(count), mean, count, specimens, deviation)


def _set(table: _Table, one: Knowledge, found: _Means, best: Codes) -> None:
    """Put value, rank, source, number of specimens and the uncertainty that all of them share."""
    at, rows = found.places, found.rows
    table.value[at], table.rank[at], table.items[at] = found.mean[at], best[at], found.specimens[at]
    table.is_known[at] = True
    greatest = np.zeros(len(best))
    np.maximum.at(greatest, one.place[rows], np.nan_to_num(one.u[rows]))
    table.common[at] = greatest[at]
    named = np.zeros((len(best), len(one.sources)), bool)
    named[one.place[rows], one.source[rows]] = True
    patterns, inverse = np.unique(named[at], axis=0, return_inverse=True)
    inverse = inverse.reshape(-1)  # one release of numpy gave it a second axis
    numbers = [table.source_number(", ".join(np.array(one.sources)[pattern])) for pattern in patterns]
    table.source[at] = np.array(numbers, np.intp)[inverse] if len(at) else table.source[at]
