"""The cells of one column between two rows, read once: values, numbers, and which hold something."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from specflow.importers.readers import Grid, OddKind, Value

Rows = NDArray[np.int32]
Flags = NDArray[np.bool_]


@dataclass(frozen=True)
class ColumnCells:
    """Cells of rows ``first`` on; arrays of one length.

    ``numbers`` float64 with NaN where there is no plain number; ``filled`` says which cells hold anything, a formula
    without a value or an error included.
    """

    grid: Grid = field(repr=False, compare=False)
    column: int
    first: int
    numbers: NDArray[np.float64]
    filled: Flags

    @cached_property
    def values(self) -> list[Value]:
        """The cells themselves; made when asked for, because columns of plain numbers need no object for each."""
        return self.grid.column(self.column, self.first, self.first + len(self.numbers))

    @cached_property
    def numeric(self) -> Flags:
        """Which cells are plain numbers."""
        return ~np.isnan(self.numbers)

    @cached_property
    def odd(self) -> Sequence[int]:
        """The numbers of the rows that hold something else than a plain number."""
        places = np.flatnonzero(self.filled & ~self.numeric)
        if len(places) == len(self.numbers):  # a column of words: a million numbers of rows need not be kept
            return range(self.first, self.first + len(places))
        return tuple((places + self.first).tolist())

    @cached_property
    def distinct(self) -> frozenset[Value]:
        """All values that occur."""
        return frozenset(self.values)

    def value(self, row: int) -> Value:
        """The cell of one row."""
        return self.grid.value(row, self.column)

    def at(self, rows: Rows) -> list[Value]:
        """The cells of the rows asked for, in that order."""
        if len(rows) == len(self.numbers):
            return self.values
        return [self.values[place] for place in (rows - self.first).tolist()]

    def numbers_at(self, rows: Rows) -> NDArray[np.float64]:
        """The numbers of the rows asked for, as a copy."""
        return self.numbers[rows - self.first]


def read_column(grid: Grid, column: int, first: int, stop: int) -> ColumnCells:
    """Read the cells of ``column`` in rows ``first`` up to, not including, ``stop``."""
    if not grid.is_text and stop > first and not grid.has_numbers(column, first, stop):
        return _words(grid, column, first, stop)
    numbers, odd = grid.column_floats(column, first, stop)
    filled = ~np.isnan(numbers)
    if odd:
        filled[np.array(odd) - first] = True
    return ColumnCells(grid, column, first, numbers, filled)


def _words(grid: Grid, column: int, first: int, stop: int) -> ColumnCells:
    """A column of a workbook with no number in it: there is nothing to convert."""
    values = grid.column(column, first, stop)
    filled = np.fromiter(
        (not str(value).isspace() and value != "" for value in values), np.bool_, len(values)
    )
    for run in grid.odd.in_column(column, first, stop):
        if run.cell.kind in (OddKind.ERROR, OddKind.NO_VALUE):
            filled[max(run.first - first, 0) : run.last + 1 - first] = True
    return ColumnCells(grid, column, first, np.broadcast_to(np.nan, len(values)), filled)
