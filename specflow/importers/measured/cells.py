"""The cells of one column between two rows, read once: values, numbers, and which hold something."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.importers.readers import Grid, Value

Rows = NDArray[np.int32]
Flags = NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class ColumnCells:
    """Cells of rows ``first`` on; arrays of one length.

    ``numbers`` float64 with NaN where there is no plain number; ``odd`` are the row numbers that hold something else;
    ``filled`` says which cells hold anything, a formula without a value or an error included.
    """

    first: int
    values: list[Value]
    numbers: NDArray[np.float64]
    odd: tuple[int, ...]
    filled: Flags

    @property
    def numeric(self) -> Flags:
        """Which cells are plain numbers."""
        return ~np.isnan(self.numbers)

    def value(self, row: int) -> Value:
        """The cell of one row."""
        return self.values[row - self.first]

    def at(self, rows: Rows) -> list[Value]:
        """The cells of the rows asked for, in that order."""
        if len(rows) == len(self.values):
            return self.values
        return [self.values[place] for place in (rows - self.first).tolist()]

    def numbers_at(self, rows: Rows) -> NDArray[np.float64]:
        """The numbers of the rows asked for, as a copy."""
        return self.numbers[rows - self.first]


def read_column(grid: Grid, column: int, first: int, stop: int) -> ColumnCells:
    """Read the cells of ``column`` in rows ``first`` up to, not including, ``stop``."""
    values = grid.column(column, first, stop)
    numbers, odd = grid.column_floats(column, first, stop)
    filled = ~np.isnan(numbers)
    if odd:
        filled[np.array(odd) - first] = True
    return ColumnCells(first, values, numbers, tuple(odd), filled)
