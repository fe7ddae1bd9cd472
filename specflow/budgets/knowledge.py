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

    def __init__(self, read: ReadLine, size: int, spread: float, freedom: float) -> None:
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
        self.notes: dict[str, None] = {}

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
            tuple(self.notes),
        )


def _own(chain: Chain, read: ReadLine) -> _Table:
    """A line by itself: its tolerance is its spread where that names a distribution."""
    spread = _own_spread(chain, read)
    table = _Table(read, chain.size, spread, math.inf)
    tolerance = read.line.tolerance
    if tolerance is not None and moments(tolerance) is None and (tolerance.minus or tolerance.plus):
        table.notes[f"the tolerance of {read.line.place} names no distribution and gives no spread"] = None
    return table


def _own_spread(chain: Chain, read: ReadLine) -> float:
    tolerance = read.line.tolerance
    found = moments(tolerance) if tolerance is not None else None
    return 0.0 if found is None else found.deviation / math.sqrt(elements(chain, read))


def _take_type(table: _Table, one: Knowledge, count: int) -> None:
    """Take the readings of best rank at every place: the mean of the specimens, and what they say of the next one."""
    for place in np.unique(one.place):
        rows = np.flatnonzero(one.place == place)
        best = int(one.rank[rows].max())
        if best < table.rank[place] or (table.is_known[place] and best == table.rank[place]):
            continue
        rows = rows[one.rank[rows] == best]
        means = _item_means(one, rows)
        n = len(means)
        _set(table, one, int(place), rows, best, float(means.mean()), n)
        if n >= 2:
            deviation = float(means.std(ddof=1))
            table.spread[place] = deviation * math.sqrt(1.0 / count + 1.0 / n)
            table.freedom[place] = n - 1
        else:
            table.spread[place], table.freedom[place] = table.own_spread, math.inf
            what = "one specimen says" if one.items[int(one.item[rows[0]])] else "a value of the design says"
            instead = "the tolerance of the line is kept" if table.own_spread else "none is taken"
            said = f"{what} nothing about the spread between specimens; {instead}"
            table.notes[f"{one.parameter} at position {one.position}: {said}"] = None


def _take_built(table: _Table, one: Knowledge, built_in: Collection[str]) -> None:
    """Take the readings of the specimens that stand in the system: they are those, so nothing is predicted."""
    is_built = np.array([code_key(item) in built_in for item in one.items], bool)[one.item]
    for place in np.unique(one.place[is_built]):
        rows = np.flatnonzero(is_built & (one.place == place))
        best = int(one.rank[rows].max())
        rows = rows[one.rank[rows] == best]
        means = _item_means(one, rows)
        _set(table, one, int(place), rows, best, float(means.mean()), len(means))
        table.spread[place], table.freedom[place] = 0.0, math.inf
        if len(means) > 1:
            said = f"{len(means)} specimens stand in the system; their mean is taken"
            table.notes[f"{one.parameter} at position {one.position}: {said}"] = None


def _item_means(one: Knowledge, rows: Codes) -> Floats:
    """Return one value a specimen: repeats on one are not more specimens."""
    items = one.item[rows]
    return np.array([float(one.value[rows[items == item]].mean()) for item in np.unique(items)])


def _set(table: _Table, one: Knowledge, place: int, rows: Codes, rank: int, value: float, n: int) -> None:
    names = list(dict.fromkeys(one.sources[int(code)] for code in one.source[rows]))
    words = ", ".join(names)
    if words not in table.sources:
        table.sources.append(words)
    specimens = {one.items[int(code)] for code in one.item[rows]} - {""}
    known = one.u[rows][~np.isnan(one.u[rows])]
    table.value[place] = value
    table.rank[place] = rank
    table.source[place] = table.sources.index(words)
    table.items[place] = len(specimens)
    table.common[place] = float(known.max()) if len(known) else 0.0
    table.is_known[place] = True
