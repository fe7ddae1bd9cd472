"""Points: what governs each required point of one activity, item by item, and whether it is proved.

At one point of one item: readings that count go before those that do not, then the highest rank, then the worst
verdict, then the smallest guarded margin. No averaging. Evidence about the design (analysis without an item) holds
for every item; items never complete each other's points unless the requirement says so.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import Any, TypeVar

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.proof import proved_singly, proves
from specflow.model.evidence import EvidenceTable
from specflow.model.verdict import PointResults, Verdict
from specflow.verification.grid import Bench, Grid, lay_out

T = TypeVar("T", bound=np.generic)
Codes = NDArray[np.int8]
Flags = NDArray[np.bool_]
Floats = NDArray[np.float64]
Rows = NDArray[np.intp]

_PASS, _CONDITIONAL_PASS = int(Verdict.PASS), int(Verdict.CONDITIONAL_PASS)
_NONE, _CONDITIONAL_FAIL = int(Verdict.NONE), int(Verdict.CONDITIONAL_FAIL)
_NOTHING = np.int8(_NONE)


@dataclass(frozen=True, slots=True)
class Fails:
    """The failing readings that stand at points of one item: ``pair`` are places in the readings of ``bench``."""

    bench: Bench
    pair: Rows

    @property
    def record(self) -> Rows:
        """The records of the readings."""
        return self.bench.readings.record[self.pair]

    @property
    def point(self) -> Rows:
        """The points at which they stand."""
        return self.bench.readings.point[self.pair]


#: Tells which of some failing readings, of the item of that name, are accepted.
Accepts = Callable[[Fails, str], Flags]


@dataclass(frozen=True, slots=True)
class ItemPoints:
    """One item at every point (n,).

    ``effective`` is the verdict that rolls up (codes of Verdict): NONE where nothing that counts stands, or where a
    pass does not prove the point. ``rank`` is that of the governing reading, -1 without one; ``stale``: something there
    is stale; ``marginal``: the governing reading is near its limit. ``tables`` are those that ``results.table`` counts.
    ``laid_out`` holds all its readings (``place`` is its number there); ``members`` the outcomes under each of several
    alternatives instead, of which the ``looser`` or the stricter governs.
    """

    item: str
    results: PointResults
    tables: Sequence[EvidenceTable]
    effective: Codes
    rank: Codes
    stale: Flags
    marginal: Flags
    laid_out: Grid | None = None
    place: int = 0
    members: tuple[ItemPoints, ...] = ()
    looser: bool = False

    @property
    def proved(self) -> Flags:
        """Which points are proved."""
        return self.results.proved

    @property
    def counts(self) -> Flags:
        """At which points the governing reading weighs."""
        return self.results.counted

    def fails(self, at: Flags) -> Fails | None:
        """Return every failing reading of the governing rank at some points, not only the one that governs."""
        grid = self.laid_out
        if grid is None:
            return None
        readings = grid.bench.readings
        pairs = np.arange(readings.size) if grid.pair is None else grid.pair
        point = readings.point[pairs]
        standing = (grid.item == self.place) & grid.weighing & at[point]
        standing &= (readings.verdict[pairs] >= _CONDITIONAL_FAIL) & (
            grid.bench.credit.rank[pairs] == self.rank[point]
        )
        return Fails(grid.bench, pairs[standing])

    def where_fails(self, at: Flags, accepts: Accepts) -> Flags:
        """Return at which of some failing points everything that fails is accepted.

        Of alternatives the looser needs one member of which that is true, the stricter all that fail.
        """
        if self.members:
            failing = [at & (one.effective >= _CONDITIONAL_FAIL) for one in self.members]
            accepted = [
                one.where_fails(flags, accepts) for one, flags in zip(self.members, failing, strict=True)
            ]
            if self.looser:
                return np.asarray(np.logical_or.reduce(accepted))
            every = [there | ~flags for there, flags in zip(accepted, failing, strict=True)]
            return np.asarray(np.logical_and.reduce(every) & np.logical_or.reduce(failing))
        fails = self.fails(at)
        accepted_here = np.zeros(len(at), bool)
        if fails is not None and len(fails.pair):
            good = accepts(fails, self.item)
            accepted_here[fails.point] = True
            accepted_here[fails.point[~good]] = False
        return accepted_here


#: Items with the points at which something of theirs fails.
Failing = Sequence[tuple[ItemPoints, Flags]]


def item_points(bench: Bench, *, together: bool) -> list[ItemPoints]:
    """Return the state of every point for each item that has evidence (for all as one item with ``together``)."""
    if bench.readings.size == 0:
        return [_without_evidence(bench)]
    grid, names = lay_out(bench, together=together)
    cells = governed(grid)
    tables = tuple([one.table for one in bench.records.sources])
    return [cells.item(place, name, tables, grid, place) for place, name in enumerate(names)]


def _without_evidence(bench: Bench) -> ItemPoints:
    nobody = absent("", bench.points.size)
    if bench.nothing_required is None:
        return nobody
    free = bench.nothing_required
    verdict = np.where(free, np.int8(Verdict.NOT_TRIGGERED), nobody.effective)
    results = replace(nobody.results, verdict=verdict, proved=free, counted=free)
    return replace(nobody, results=results, effective=verdict)


def _governing(grid: Grid) -> Rows:
    """Return for each cell the place (in ``pair``) of the governing reading, -1 where there is none."""
    cell, readings = grid.cell, grid.bench.readings
    weight = grid.weighing.astype(np.int16) << 8
    weight |= grid.of(grid.bench.credit.rank).astype(np.int16) << 4
    weight |= grid.of(readings.verdict)
    heaviest = np.zeros(grid.cells, np.int16)
    np.maximum.at(heaviest, cell, weight)
    heavy = (weight == heaviest.take(cell)).nonzero()[0]
    cell, margin = cell.take(heavy), grid.of(readings.guarded).take(heavy)
    unknown = margin != margin
    if np.count_nonzero(unknown):
        margin[unknown] = np.inf
    least = _filled(grid.cells, np.inf)
    np.minimum.at(least, cell, margin)
    first = (margin == least.take(cell)).nonzero()[0][::-1]
    governing = _filled(grid.cells, -1, np.intp)
    governing[cell.take(first)] = heavy.take(first)  # of equals the first stays, because it is written last
    return governing


def _filled(shape: int | tuple[int, ...], value: float, kind: type = np.float64) -> NDArray[Any]:
    """Return an array of one value; ``np.full`` takes four times as long for the few cells of a requirement."""
    array: NDArray[Any] = np.empty(shape, kind)
    array.fill(value)
    return array


@dataclass(frozen=True, slots=True)
class Cells:
    """What governs every cell of a grid: arrays (items, points), named as in ``PointResults`` and ``ItemPoints``."""

    verdict: Codes
    proved: Flags
    counted: Flags
    margin: Floats
    guarded_margin: Floats
    value_low: Floats
    value_high: Floats
    u: Floats
    lower: Floats
    upper: Floats
    table: NDArray[np.int32]
    column: NDArray[np.int32]
    row: NDArray[np.int32]
    effective: Codes
    rank: Codes
    stale: Flags
    marginal: Flags

    def item(
        self, line: int, name: str, tables: Sequence[EvidenceTable], laid_out: Grid, place: int
    ) -> ItemPoints:
        """Return one line of cells as the points of an item, which is item ``place`` of the grid ``laid_out``."""
        results = PointResults(
            name,
            self.verdict[line],
            self.proved[line],
            self.counted[line],
            self.margin[line],
            self.guarded_margin[line],
            self.value_low[line],
            self.value_high[line],
            self.u[line],
            self.lower[line],
            self.upper[line],
            self.table[line],
            self.column[line],
            self.row[line],
            tuple([table.id for table in tables]),
        )
        return ItemPoints(
            name,
            results,
            tables,
            self.effective[line],
            self.rank[line],
            self.stale[line],
            self.marginal[line],
            laid_out,
            place,
        )


def governed(grid: Grid) -> Cells:
    """Spread the governing readings over all cells."""
    found = _Spread(grid, _governing(grid))
    verdict, counted, proved, effective = _verdicts(grid, found)
    margin, guarded, low, high, u, lower, upper, table, column, row = _known(grid, found)
    return Cells(
        verdict,
        proved,
        counted,
        margin,
        guarded,
        low,
        high,
        u,
        lower,
        upper,
        table,
        column,
        row,
        effective,
        found(grid.bench.credit.rank, -1),
        _stale(grid).reshape(found.shape),
        found(grid.bench.readings.marginal, False) & counted,
    )


class _Spread:
    """Takes values of readings to items × points by the governing reading of each cell."""

    def __init__(self, grid: Grid, governing: Rows) -> None:
        self.shape = grid.items, grid.bench.points.size
        self.governing = governing
        self.empty = governing < 0
        self.full = not np.count_nonzero(self.empty)
        self._pair = governing if grid.pair is None else grid.pair.take(governing)
        self._record = grid.bench.readings.record.take(self._pair)

    def __call__(self, values: NDArray[T], rest: float) -> NDArray[T]:
        """Return what the governing reading of each cell has, ``rest`` where there is none."""
        return self.placed(values.take(self._pair), rest)

    def of_record(self, values: NDArray[T], rest: float) -> NDArray[T]:
        """Return what the record of each cell has."""
        return self.placed(values.take(self._record), rest)

    def placed(self, values: NDArray[T], rest: float) -> NDArray[T]:
        """Return values of the cells as items × points; ``values`` is changed."""
        if not self.full:
            values[self.empty] = rest
        return values.reshape(self.shape)


def _verdicts(grid: Grid, found: _Spread) -> tuple[Codes, Flags, Flags, Codes]:
    """Return the governing verdict of each cell, whether it weighs, whether the point is proved, what rolls up."""
    bench = grid.bench
    verdict = found(bench.readings.verdict, _NONE)
    counted = found.placed(grid.weighing.take(found.governing), False)
    proved = _passing(verdict, bench.conditional_pass_counts) & counted & _proved(grid)
    if bench.nothing_required is not None and not found.full:
        free = bench.nothing_required & found.empty.reshape(found.shape)
        verdict[free], counted[free], proved[free] = Verdict.NOT_TRIGGERED, True, True
    # A pass that does not prove its point, or a verdict that does not weigh, is nothing.
    effective = np.where(proved | (counted & (verdict > _CONDITIONAL_PASS)), verdict, _NOTHING)
    return verdict, counted, proved, effective


def _known(grid: Grid, found: _Spread) -> tuple[NDArray[Any], ...]:
    """Return the figures of each cell, in the order of the fields of ``Cells``, from ``margin`` to ``row``."""
    readings, records = grid.bench.readings, grid.bench.records
    low = found(readings.low, np.nan)
    if found.full and len(records.sources) == 1:
        source = np.zeros(found.shape, np.int32)
        column = _filled(found.shape, records.sources[0].place, np.int32)
    else:
        source = found.of_record(records.source, -1)
        column = np.array([one.place for one in records.sources], np.int32)[source]
        column[source < 0] = -1
    return (
        found(readings.margin, np.nan),
        found(readings.guarded, np.nan),
        low,
        low if readings.high is readings.low else found(readings.high, np.nan),
        found(readings.u, np.nan),
        _side(readings.lower, found),
        _side(readings.upper, found),
        source,
        column,
        found.of_record(records.row, -1),
    )


def _side(side: NDArray[np.float64], found: _Spread) -> NDArray[np.float64]:
    return _filled(found.shape, side[0]) if side.size == 1 else found(side, np.nan)


def _stale(grid: Grid) -> Flags:
    stale = np.zeros(grid.cells, bool)
    if np.count_nonzero(grid.bench.credit.stale):
        stale[grid.cell[grid.of(grid.bench.credit.stale)]] = True
    return stale


def _proved(grid: Grid) -> Flags:
    """Ask the one place that decides, item by item, whether readings with credit that pass prove each point."""
    bench = grid.bench
    passing = _passing(bench.readings.verdict, bench.conditional_pass_counts) & bench.credit.counts
    places = grid.of(passing).nonzero()[0]
    if bench.matching.along is None:
        return proved_singly(grid.cell.take(places), grid.cells).reshape(grid.items, -1)
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
    figures: dict[str, NDArray[Any]] = dict.fromkeys(
        ("margin", "guarded_margin", "value_low", "value_high", "u", "lower", "upper"), nothing
    )
    figures |= dict.fromkeys(("table", "column", "row"), none)
    results = PointResults(item=item, verdict=verdict, proved=false, counted=false, tables=(), **figures)
    return ItemPoints(item, results, (), verdict, np.full(n, -1, np.int8), false, false)
