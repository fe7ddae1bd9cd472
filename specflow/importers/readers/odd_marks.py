"""Collects the odd cells of one sheet while it is scanned, and the extent of the cells that hold something."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.importers.readers.odd_cells import OddCell, OddCells, OddRun
from specflow.importers.readers.places import CellRange

Integers = NDArray[np.int64]
Runs = tuple[Integers, Integers, Integers, Integers]
"""Column, first row, last row and code of runs; four arrays of one length."""

Bounds = tuple[int, int, int, int]
_MOST_SINGLE = 65536


class OddMarks:
    """Marks come in any order, as arrays or one by one; ``cells`` turns them into runs down each column."""

    def __init__(self) -> None:
        self._legend: dict[OddCell, int] = {}
        self._runs: list[Runs] = []
        self._single: list[tuple[int, int, int]] = []
        self._extent: Bounds | None = None
        self._mentioned: Bounds | None = None
        self.hidden_rows: set[int] = set()

    def code(self, cell: OddCell) -> int:
        """The number that stands for this oddity in arrays."""
        return self._legend.setdefault(cell, len(self._legend))

    def add(self, rows: Integers, columns: Integers, codes: Integers) -> None:
        """Mark many cells; three arrays of one length. They are kept as runs at once: a percent-formatted column of
        a million rows must not take a million marks."""
        if len(rows):
            self._runs.append(_as_runs(rows, columns, codes))

    def add_one(self, row: int, column: int, cell: OddCell) -> None:
        """Mark one cell."""
        self._single.append((row, column, self.code(cell)))
        if len(self._single) >= _MOST_SINGLE:
            self._gather()

    def _gather(self) -> None:
        if self._single:
            self.add(*np.array(self._single, dtype=np.int64).T)
            self._single = []

    def add_run(self, column: int, first: int, last: int, cell: OddCell) -> None:
        """Mark rows ``first`` to ``last``, both included, of one column."""
        if first == last:
            self.add_one(first, column, cell)
        else:
            code = self.code(cell)
            self._runs.append((np.array([column]), np.array([first]), np.array([last]), np.array([code])))

    def extend(self, first_row: int, first_column: int, last_row: int, last_column: int) -> None:
        """Cells that hold something lie within these bounds."""
        self._extent = _around(self._extent, (first_row, first_column, last_row, last_column))

    def extent(self) -> CellRange | None:
        """The smallest range around all cells that hold something."""
        return CellRange(*self._extent) if self._extent else None

    def mention(self, first_row: int, first_column: int, last_row: int, last_column: int) -> None:
        """Cells that the file mentions, even if they hold nothing, lie within these bounds."""
        self._mentioned = _around(self._mentioned, (first_row, first_column, last_row, last_column))

    def mentioned(self) -> CellRange | None:
        """The smallest range around all cells that the file mentions."""
        return CellRange(*self._mentioned) if self._mentioned else None

    def cells(self) -> OddCells:
        """The marks as runs; of several marks on one cell the last one added stands."""
        self._gather()
        if not self._runs:
            return OddCells()
        runs = _joined(*(np.concatenate(parts) for parts in zip(*self._runs, strict=True)))
        legend = list(self._legend)
        return OddCells(
            OddRun(column, first, last, legend[code])
            for column, first, last, code in zip(*(part.tolist() for part in runs), strict=True)
        )


def _around(known: Bounds | None, more: Bounds) -> Bounds:
    if known is None:
        return more
    return min(known[0], more[0]), min(known[1], more[1]), max(known[2], more[2]), max(known[3], more[3])


def _as_runs(rows: Integers, columns: Integers, codes: Integers) -> Runs:
    """Single marks as runs."""
    order = np.lexsort((rows, columns))
    rows, columns, codes = rows[order], columns[order], codes[order]
    same = (columns[1:] == columns[:-1]) & (codes[1:] == codes[:-1]) & (rows[1:] - rows[:-1] <= 1)
    starts = np.flatnonzero(np.concatenate(([True], ~same)))
    stops = np.concatenate((starts[1:], [len(rows)])) - 1
    return columns[starts], rows[starts], rows[stops], codes[starts]


def _joined(columns: Integers, first: Integers, last: Integers, codes: Integers) -> Runs:
    """Runs of several blocks, joined where they touch. Where a file marks a cell twice, the last mark stands."""
    order = np.lexsort((first, columns))
    columns_, first_, last_, codes_ = columns[order], first[order], last[order], codes[order]
    beside = columns_[1:] == columns_[:-1]
    if (beside & (first_[1:] <= last_[:-1])).any():
        sizes = last - first + 1
        begin = np.repeat(np.cumsum(sizes) - sizes, sizes)
        rows = np.repeat(first, sizes) + np.arange(int(sizes.sum())) - begin
        return _as_runs(rows, np.repeat(columns, sizes), np.repeat(codes, sizes))
    touch = beside & (codes_[1:] == codes_[:-1]) & (first_[1:] == last_[:-1] + 1)
    starts = np.flatnonzero(np.concatenate(([True], ~touch)))
    stops = np.concatenate((starts[1:], [len(first_)])) - 1
    return columns_[starts], first_[starts], last_[stops], codes_[starts]
