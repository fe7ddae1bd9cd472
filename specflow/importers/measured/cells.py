"""The cells of one column between two rows, read once: values, numbers, and which hold something."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from functools import cached_property
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from specflow.importers.readers import Grid, OddKind, Value
from specflow.importers.readers.stores import Coded, locked

T = TypeVar("T", bound=np.generic)
Codes = NDArray[np.int32]
Rows = NDArray[np.int32]
Flags = NDArray[np.bool_]


@dataclass(frozen=True)
class ColumnCells:
    """Cells of rows ``first`` on; arrays of one length.

    ``numbers`` float64 with NaN where there is no plain number; ``filled`` says which cells hold anything, a formula
    without a value or an error included. ``coded`` is a column of words in a sheet of many cells.
    """

    grid: Grid = field(repr=False, compare=False)
    column: int
    first: int
    numbers: NDArray[np.float64]
    filled: Flags
    coded: Coded | None = field(default=None, repr=False, compare=False)

    @cached_property
    def values(self) -> list[Value]:
        """The cells themselves; made when asked for, because columns of plain numbers need no object for each."""
        return self.grid.column(self.column, self.first, self.first + len(self.numbers))

    @cached_property
    def numeric(self) -> Flags:
        """Which cells are plain numbers."""
        return _flags(~np.isnan(self.numbers))

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
        if self.coded is not None:
            return frozenset(self.coded.value(code) for code in np.unique(self.coded.codes).tolist())
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
        """The numbers of the rows asked for; of rows without a gap they are a part of the column, and locked."""
        return _at(self.numbers, rows, self.first)

    def codes_at(self, rows: Rows) -> Codes:
        """The codes of the words in the rows asked for, where the column is ``coded``; locked as numbers are."""
        assert self.coded is not None
        return _at(self.coded.codes, rows, self.first)


def read_column(grid: Grid, column: int, first: int, stop: int) -> ColumnCells:
    """Read the cells of ``column`` in rows ``first`` up to, not including, ``stop``."""
    if not grid.is_text and stop > first and not grid.has_numbers(column, first, stop):
        return _words(grid, column, first, stop)
    numbers, odd = grid.column_floats(column, first, stop)
    filled = ~np.isnan(numbers)
    if odd:
        filled[np.array(odd) - first] = True
    return ColumnCells(grid, column, first, numbers, _flags(filled))


def _at(column: NDArray[T], rows: Rows, first: int) -> NDArray[T]:
    if len(rows) and int(rows[-1]) - int(rows[0]) == len(rows) - 1 and bool((np.diff(rows) == 1).all()):
        start = int(rows[0]) - first
        return locked(column[start : start + len(rows)])
    return column[rows - first]


def _flags(flags: Flags) -> Flags:
    """The flags; where all are set one stands for all, since a sheet may have millions of rows."""
    return np.broadcast_to(np.True_, flags.shape) if flags.all() else flags


def _words(grid: Grid, column: int, first: int, stop: int) -> ColumnCells:
    """A column of a workbook with no number in it: there is nothing to convert."""
    coded = grid.coded(column, first, stop)
    if coded is not None:
        filled = ~coded.is_blank()
    else:
        values = grid.column(column, first, stop)
        filled = np.fromiter(
            (not str(value).isspace() and value != "" for value in values), np.bool_, len(values)
        )
    for run in grid.odd.in_column(column, first, stop):
        if run.cell.kind in (OddKind.ERROR, OddKind.NO_VALUE):
            filled[max(run.first - first, 0) : run.last + 1 - first] = True
    return ColumnCells(grid, column, first, np.broadcast_to(np.nan, len(filled)), _flags(filled), coded)
