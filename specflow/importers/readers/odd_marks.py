"""Collects the odd cells of one sheet while it is scanned, and the extent of the cells that hold something."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.importers.readers.grid import CellRange, OddCell, OddCells, OddRun

Integers = NDArray[np.int64]


class OddMarks:
    """Marks come in any order, as arrays or one by one; ``cells`` turns them into runs down each column."""

    def __init__(self) -> None:
        self._legend: dict[OddCell, int] = {}
        self._marks: list[tuple[Integers, Integers, Integers]] = []
        self._single: list[tuple[int, int, int]] = []
        self._extent: tuple[int, int, int, int] | None = None
        self.hidden_rows: set[int] = set()

    def code(self, cell: OddCell) -> int:
        """The number that stands for this oddity in arrays."""
        return self._legend.setdefault(cell, len(self._legend))

    def add(self, rows: Integers, columns: Integers, codes: Integers) -> None:
        """Mark many cells; three arrays of one length."""
        if len(rows):
            self._marks.append((rows, columns, codes))

    def add_one(self, row: int, column: int, cell: OddCell) -> None:
        """Mark one cell."""
        self._single.append((row, column, self.code(cell)))

    def extend(self, first_row: int, first_column: int, last_row: int, last_column: int) -> None:
        """Cells that hold something lie within these bounds."""
        if self._extent is None:
            self._extent = (first_row, first_column, last_row, last_column)
        else:
            top, left, bottom, right = self._extent
            self._extent = (
                min(top, first_row), min(left, first_column), max(bottom, last_row), max(right, last_column)
            )  # fmt: skip

    def extent(self) -> CellRange | None:
        """The smallest range around all cells that hold something."""
        return CellRange(*self._extent) if self._extent else None

    def cells(self) -> OddCells:
        """The marks as runs; of several marks on one cell the last one added stands."""
        if self._single:
            self.add(*np.array(self._single, dtype=np.int64).T)
            self._single = []
        if not self._marks:
            return OddCells()
        rows, columns, codes = (np.concatenate(parts) for parts in zip(*self._marks, strict=True))
        order = np.lexsort((rows, columns))
        rows, columns, codes = rows[order], columns[order], codes[order]
        same = (columns[1:] == columns[:-1]) & (codes[1:] == codes[:-1]) & (rows[1:] - rows[:-1] <= 1)
        starts = np.flatnonzero(np.concatenate(([True], ~same)))
        stops = np.concatenate((starts[1:], [len(rows)])) - 1
        legend = list(self._legend)
        runs = zip(
            columns[starts].tolist(),
            rows[starts].tolist(),
            rows[stops].tolist(),
            codes[starts].tolist(),
            strict=True,
        )
        return OddCells(OddRun(column, first, last, legend[code]) for column, first, last, code in runs)
