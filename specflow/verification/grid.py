"""The grid of one activity: its readings laid out over items × required points, and which of them weigh there.

Evidence about the design (analysis without an item) holds for every item. A fail weighs even without credit, unless it
was stale and has been re-verified, or a named successor has measured the same place again.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.match import Matching
from specflow.conditions.points import Points
from specflow.model.base import code_key
from specflow.model.verdict import Verdict
from specflow.verification.credit import Credit, is_of_design
from specflow.verification.judging import Judging
from specflow.verification.readings import Readings
from specflow.verification.records import Records
from specflow.verification.standing import ACCEPTED

T = TypeVar("T", bound=np.generic)
Codes = NDArray[np.int8]
Flags = NDArray[np.bool_]
Rows = NDArray[np.intp]

# Looking a member up in an enumeration costs as much as an array operation; these are used for every requirement.
_PASS, _CONDITIONAL_PASS = int(Verdict.PASS), int(Verdict.CONDITIONAL_PASS)
_NONE, _CONDITIONAL_FAIL = int(Verdict.NONE), int(Verdict.CONDITIONAL_FAIL)
_CLOSE = 1e-6

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
    judging: Judging
    nothing_required: Flags | None = None
    conditional_pass_counts: bool = True
    together: bool = False


@dataclass(slots=True)
class Grid:
    """Readings laid out over items × points: reading ``pair[i]`` is evidence of item ``item[i]`` in cell ``cell[i]``.

    ``pair`` is None where every reading is evidence of one item: then reading i is pair i. Points run fastest.
    ``weighing`` says which of them weigh at their cell.
    """

    bench: Bench
    pair: Rows | None
    item: Rows
    items: int
    cell: Rows
    weighing: Flags = field(init=False)

    @classmethod
    def over(cls, bench: Bench, pair: Rows | None, item: Rows, items: int, cell: Rows) -> Grid:
        """Return the grid with what weighs in it."""
        grid = cls(bench, pair, item, items, cell)
        grid.weighing = _weighing(grid)
        return grid

    def of(self, values: NDArray[T]) -> NDArray[T]:
        """Return values of the readings, one for each reading and item."""
        return values if self.pair is None else values[self.pair]

    @property
    def cells(self) -> int:
        """How many cells there are."""
        return self.items * self.bench.points.size


def lay_out(bench: Bench, *, together: bool) -> tuple[Grid, Sequence[str]]:
    """Return the readings over items × points, and the names of the items (all as one item with ``together``)."""
    names, pair, item = _by_item(bench, together or bench.together)
    point = bench.readings.point if pair is None else bench.readings.point[pair]
    return Grid.over(bench, pair, item, len(names), item * bench.points.size + point), names


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


def _weighing(grid: Grid) -> Flags:
    """Return which readings weigh: those with credit, and fails without it unless they were re-verified.

    A stale fail is lifted by a decided reading with credit, of the same or a higher rank, of the same item at the same
    place; a fail whose supersession names it by an accepted, decided reading of its successor there.
    """
    bench = grid.bench
    verdict, credit = grid.of(bench.readings.verdict), grid.of(bench.credit.counts)
    failing = verdict >= _CONDITIONAL_FAIL
    weighing = np.asarray((credit & (verdict != _NONE)) | failing)
    doubtful = failing & ~credit
    if np.count_nonzero(doubtful):
        weighing &= ~(doubtful & (_reverified(grid, verdict, credit) | _replaced(grid, verdict)))
    return weighing


def _decided(verdict: Codes) -> Flags:
    """Return which verdicts settle anything: pass or fail, conditional or not."""
    passes = (verdict == _PASS) | (verdict == _CONDITIONAL_PASS)
    return np.asarray(passes | (verdict >= _CONDITIONAL_FAIL))


def _reverified(grid: Grid, verdict: Codes, credit: Flags) -> Flags:
    """Return which stale readings were taken again, at the same value along a range."""
    weights = grid.bench.credit
    stale = grid.of(weights.stale)
    if not np.count_nonzero(stale):
        return stale
    place, places = at_one_value(grid.bench, grid.cell, grid.pair, grid.cells)
    best, rank = np.full(places, -1, np.int8), grid.of(weights.rank)
    settled = credit & _decided(verdict)
    np.maximum.at(best, place[settled], rank[settled])
    return np.asarray(stale & (rank <= best[place]))


def _replaced(grid: Grid, verdict: Codes) -> Flags:
    """Return which readings a named successor measured again, at the same value along a range."""
    records = grid.bench.records
    replaced = np.zeros(len(grid.cell), bool)
    if not records.replacements:
        return replaced
    record = grid.of(grid.bench.readings.record)
    place, places = at_one_value(grid.bench, grid.cell, grid.pair, grid.cells)
    settled = _decided(verdict) & (records.standing[record] == ACCEPTED)
    for earlier, tables in records.replacements:
        of_successor = np.array([code_key(source.table.id) in tables for source in records.sources])
        known = np.zeros(places, bool)
        known[place[settled & of_successor[records.source[record]]]] = True
        replaced |= earlier[record] & known[place]
    return replaced


def at_one_value(bench: Bench, cell: Rows, pair: Rows | None, cells: int) -> tuple[Rows, int]:
    """Return finer cells, and how many: readings at different values along a range stand at different places."""
    if bench.matching.along is None:
        return cell, cells
    by_record = np.zeros(bench.records.size)
    by_record[bench.matching.record] = bench.matching.along
    record = bench.readings.record if pair is None else bench.readings.record[pair]
    along = by_record[record]
    order = np.lexsort((along, cell))
    change = np.diff(cell[order]) != 0
    change |= ~np.isclose(along[order][1:], along[order][:-1], rtol=_CLOSE, atol=0)
    finer = np.empty(len(cell), np.intp)
    finer[order] = np.concatenate([[0], np.cumsum(change)])[: len(order)]
    return finer, len(cell)
