"""Points: what governs each required point of one activity, item by item, and whether it is proved.

At one point of one item: readings that count go before those that do not, then the highest rank, then the worst
verdict, then the smallest guarded margin. No averaging. Evidence about the design (analysis without an item) holds
for every item; items never complete each other's points unless the requirement says so.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any, TypeVar

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.match import Matching
from specflow.conditions.points import Points
from specflow.conditions.proof import proves
from specflow.model.evidence import EvidenceTable
from specflow.model.verdict import PointResults, Verdict
from specflow.verification.credit import Credit, is_of_design
from specflow.verification.readings import Readings
from specflow.verification.records import Records

T = TypeVar("T", bound=np.generic)
Codes = NDArray[np.int8]
Flags = NDArray[np.bool_]
Rows = NDArray[np.intp]

# Looking a member up in an enumeration costs as much as an array operation; these are used for every requirement.
_PASS, _CONDITIONAL_PASS = int(Verdict.PASS), int(Verdict.CONDITIONAL_PASS)
_NONE, _CONDITIONAL_FAIL = int(Verdict.NONE), int(Verdict.CONDITIONAL_FAIL)

#: Name of the item that stands for all of them where they may complete each other.
ALL_ITEMS = "all items"


@dataclass(frozen=True, slots=True)
class Bench:
    """Everything known at the required points of one activity, before items are told apart.

    ``nothing_required`` (n,): points at which the limit asks for nothing. ``together``: the limit is on all items at
    once.
    """

    points: Points
    matching: Matching
    records: Records
    readings: Readings
    credit: Credit
    nothing_required: Flags | None = None
    conditional_pass_counts: bool = True
    together: bool = False


@dataclass(frozen=True, slots=True)
class ItemPoints:
    """One item at every point (n,).

    ``effective`` is the verdict that rolls up (codes of Verdict): NONE where nothing that counts stands, or where a
    pass does not prove the point. ``rank`` is that of the governing reading, -1 without one; ``stale``: something there
    is stale; ``marginal``: the governing reading is near its limit. ``tables`` are those that ``results.table`` counts.
    """

    item: str
    results: PointResults
    tables: Sequence[EvidenceTable]
    effective: Codes
    rank: Codes
    stale: Flags
    marginal: Flags

    @property
    def proved(self) -> Flags:
        """Which points are proved."""
        return self.results.proved

    @property
    def counts(self) -> Flags:
        """At which points the governing reading weighs."""
        return self.results.counted


def item_points(bench: Bench, *, together: bool) -> list[ItemPoints]:
    """Return the state of every point for each item that has evidence (for all as one item with ``together``)."""
    if bench.readings.size == 0:
        return [_without_evidence(bench)]
    names, pair, item = _by_item(bench, together or bench.together)
    point = bench.readings.point if pair is None else bench.readings.point[pair]
    grid = _Grid(bench, pair, item, len(names), item * bench.points.size + point)
    counts = _counting(grid)
    governing = _governing(grid, counts)
    return _items(grid, names, counts, governing)


@dataclass(frozen=True, slots=True)
class _Grid:
    """Readings laid out over items × points: reading ``pair[i]`` is evidence of item ``item[i]`` in cell ``cell[i]``.

    ``pair`` is None where every reading is evidence of one item: then reading i is pair i. Points run fastest.
    """

    bench: Bench
    pair: Rows | None
    item: Rows
    items: int
    cell: Rows

    def of(self, values: NDArray[T]) -> NDArray[T]:
        """Return values of the readings, one for each reading and item."""
        return values if self.pair is None else values[self.pair]

    @property
    def cells(self) -> int:
        """How many cells there are."""
        return self.items * self.bench.points.size


def _without_evidence(bench: Bench) -> ItemPoints:
    nobody = absent("", bench.points.size)
    if bench.nothing_required is None:
        return nobody
    free = bench.nothing_required
    verdict = np.where(free, np.int8(Verdict.NOT_TRIGGERED), nobody.effective)
    results = replace(nobody.results, verdict=verdict, proved=free, counted=free)
    return replace(nobody, results=results, effective=verdict)


def _by_item(bench: Bench, together: bool) -> tuple[Sequence[str], Rows | None, Rows]:
    """Return item names, and for every (pair, item) the pair and the code of the item it is evidence of."""
    if together:
        return (ALL_ITEMS,), None, np.zeros(bench.readings.size, np.intp)
    names = bench.records.items
    item = bench.records.item[bench.readings.record]
    if len(names) == 1:
        return names, None, item
    if "" in names and any(is_of_design(source) for source in bench.records.sources):
        return _with_design(bench, names, item)
    return _present(names, None, item)


def _present(names: Sequence[str], pair: Rows | None, item: Rows) -> tuple[Sequence[str], Rows | None, Rows]:
    """Keep the items that have evidence at a required point, in their order."""
    seen = np.bincount(item, minlength=len(names)).nonzero()[0]
    if len(seen) == len(names):
        return names, pair, item
    return [names[code] for code in seen.tolist()], pair, np.searchsorted(seen, item)


def _with_design(bench: Bench, names: Sequence[str], item: Rows) -> tuple[Sequence[str], Rows | None, Rows]:
    """Give evidence about the design to every item that has evidence of its own."""
    of_design = np.array([is_of_design(source) for source in bench.records.sources])
    common = of_design[bench.records.source[bench.readings.record]] & (item == list(names).index(""))
    own = np.unique(item[~common])
    if len(own) == 0:
        return _present(names, None, item)
    pairs, items = [np.flatnonzero(~common)], [item[~common]]
    for code in own:
        pairs.append(np.flatnonzero(common))
        items.append(np.full(int(common.sum()), code, np.intp))
    return _present(names, np.concatenate(pairs), np.concatenate(items))


def _counting(grid: _Grid) -> Flags:
    """Return which readings weigh: those with credit, and fails without it unless they were re-verified.

    A stale fail is lifted by a reading with credit, of the same or a higher rank, of the same item at the point.
    """
    weights = grid.bench.credit
    verdict, credit = grid.of(grid.bench.readings.verdict), grid.of(weights.counts)
    failing = verdict >= _CONDITIONAL_FAIL
    counts = np.asarray((credit & (verdict != _NONE)) | failing)
    lifted = failing & ~credit & grid.of(weights.stale)
    if np.count_nonzero(lifted):
        best = np.full(grid.cells, -1, np.int8)
        np.maximum.at(best, grid.cell[credit], grid.of(weights.rank)[credit])
        counts &= ~(lifted & (grid.of(weights.rank) <= best[grid.cell]))
    return counts


def _governing(grid: _Grid, counts: Flags) -> Rows:
    """Return for each cell the place (in ``pair``) of the governing reading, -1 where there is none."""
    cell, readings = grid.cell, grid.bench.readings
    weight = counts.astype(np.int16) << 8
    weight |= grid.of(grid.bench.credit.rank).astype(np.int16) << 4
    weight |= grid.of(readings.verdict)
    heaviest = np.zeros(grid.cells, np.int16)
    np.maximum.at(heaviest, cell, weight)
    heavy = (weight == heaviest[cell]).nonzero()[0]
    cell, margin = cell[heavy], grid.of(readings.guarded)[heavy]
    margin = np.where(margin == margin, margin, np.inf)
    least = _filled(grid.cells, np.inf)
    np.minimum.at(least, cell, margin)
    first = (margin == least[cell]).nonzero()[0][::-1]
    cell, chosen = cell[first], heavy[first]
    governing = _filled(grid.cells, -1, np.intp)
    governing[cell] = chosen  # of equals the first stays, because it is written last
    return governing


def _filled(shape: int | tuple[int, ...], value: float, kind: type = np.float64) -> NDArray[Any]:
    """Return an array of one value; ``np.full`` takes four times as long for the few cells of a requirement."""
    array: NDArray[Any] = np.empty(shape, kind)
    array.fill(value)
    return array


def _items(grid: _Grid, names: Sequence[str], counts: Flags, governing: Rows) -> list[ItemPoints]:
    """Spread the governing readings over all cells, and cut the grid into items."""
    bench, readings, records = grid.bench, grid.bench.readings, grid.bench.records
    shape = grid.items, bench.points.size
    empty = governing < 0
    full = not np.count_nonzero(empty)
    pair = governing if grid.pair is None else grid.pair[governing]
    record = readings.record[pair]

    def spread(values: NDArray[T], rest: float) -> NDArray[T]:
        if not full:
            values[empty] = rest
        return values.reshape(shape)

    verdict = spread(readings.verdict[pair], _NONE)
    counted = spread(counts[governing], False)
    proved = _passing(verdict, bench.conditional_pass_counts) & counted & _proved(grid)
    if bench.nothing_required is not None and not full:
        free = bench.nothing_required & empty.reshape(shape)
        verdict[free], counted[free], proved[free] = Verdict.NOT_TRIGGERED, True, True
    effective = np.where(counted, verdict, np.int8(_NONE))
    effective[_passing(effective, True) & ~proved] = _NONE
    low = spread(readings.low[pair], np.nan)
    high = low if readings.high is readings.low else spread(readings.high[pair], np.nan)
    margin, guarded = spread(readings.margin[pair], np.nan), spread(readings.guarded[pair], np.nan)
    u = spread(readings.u[pair], np.nan)
    lower, upper = (
        _filled(shape, side[0]) if side.size == 1 else spread(side[pair], np.nan)
        for side in (readings.lower, readings.upper)
    )
    source = spread(records.source[record], -1)
    column = spread(np.array([one.place for one in records.sources], np.int32)[records.source[record]], -1)
    row = spread(records.row[record], -1)
    rank = spread(bench.credit.rank[pair], -1)
    marginal = spread(readings.marginal[pair], False) & counted
    stale = _stale(grid).reshape(shape)
    tables = tuple(one.table for one in records.sources)
    ids = tuple(table.id for table in tables)
    return [
        ItemPoints(
            name,
            PointResults(
                name, verdict[i], proved[i], counted[i], margin[i], guarded[i], low[i], high[i], u[i],
                lower[i], upper[i], source[i], column[i], row[i], ids,
            ),
            tables,
            effective[i],
            rank[i],
            stale[i],
            marginal[i],
        )
        for i, name in enumerate(names)
    ]  # fmt: skip


def _stale(grid: _Grid) -> Flags:
    stale = np.zeros(grid.cells, bool)
    if np.count_nonzero(grid.bench.credit.stale):
        stale[grid.cell[grid.of(grid.bench.credit.stale)]] = True
    return stale


def _proved(grid: _Grid) -> Flags:
    """Ask the one place that decides, item by item, whether readings with credit that pass prove each point."""
    bench = grid.bench
    passing = _passing(bench.readings.verdict, bench.conditional_pass_counts) & bench.credit.counts
    places = grid.of(passing).nonzero()[0]
    record, item = grid.of(bench.readings.record)[places], grid.item[places]
    proved = np.empty((grid.items, bench.points.size), bool)
    for code in range(grid.items):
        good = np.zeros(bench.records.size, bool)
        good[record if grid.items == 1 else record[item == code]] = True
        proved[code] = proves(bench.points, bench.matching, good)
    return proved


def _passing(verdict: Codes, conditional: bool) -> Flags:
    """Return where a verdict may prove its point: pass, not triggered, and a conditional pass where it counts."""
    return np.asarray(verdict <= (_CONDITIONAL_PASS if conditional else _PASS))


def absent(item: str, n: int) -> ItemPoints:
    """Return an item without any evidence at any of n points."""
    nothing, none = np.full(n, np.nan), np.full(n, -1, np.int32)
    verdict, false = np.full(n, _NONE, np.int8), np.zeros(n, bool)
    results = PointResults(
        item,
        verdict,
        false,
        false,
        nothing,
        nothing,
        nothing,
        nothing,
        nothing,
        nothing,
        nothing,
        none,
        none,
        none,
        (),
    )
    return ItemPoints(item, results, (), verdict, np.full(n, -1, np.int8), false, false)
