"""A table as it was found on a sheet: its headers, its rows, and what is known of where and how it lies."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from specflow.importers.measured.cells import ColumnCells, Rows, read_column
from specflow.importers.measured.facts import Fact
from specflow.importers.measured.header_cells import HeaderCell
from specflow.importers.measured.mapping_parts import LongMapping, PivotMapping
from specflow.importers.measured.quantity_text import NamedQuantity
from specflow.importers.measured.result import Question
from specflow.importers.readers import Grid


@dataclass(frozen=True, slots=True)
class Remark:
    """A row inside a table that is no data: its text ("" for repeated headers) and what is said about it.

    ``states`` says that the row holds a key that is known, with its value.
    """

    row: int
    text: str
    words: str
    states: bool = False


@dataclass(frozen=True, slots=True)
class Axis:
    """A condition of each row that no column holds: ``start`` in row ``first``, a ``step`` more in each further row."""

    dimension: str
    unit: str
    first: int
    start: float
    step: float
    by: str

    def at(self, rows: Rows) -> NDArray[np.float64]:
        """The values in these rows."""
        return self.start + self.step * (rows - self.first).astype(np.float64)


@dataclass(frozen=True, slots=True)
class OverColumns:
    """What a sheet says over columns of numbers: the quantity and its unit by ``words``, the condition by ``across``.

    ``quantity`` is None, and ``words`` "", where no quantity is named; ``dimension`` is "" where no condition is.
    """

    columns: tuple[int, ...]
    quantity: NamedQuantity | None
    unit: str
    words: str
    dimension: str = ""
    dimension_unit: str = ""
    across: str = ""


@dataclass(frozen=True)
class FoundTable:
    """A table on a sheet.

    ``top`` is the first row that may speak about it (title, key–value rows); ``rows`` int32 are the row numbers that
    hold data, among ``first_row`` up to, not including, ``stop_row``. ``headers`` are named columns in order;
    ``unnamed`` are columns with cells and no header. ``stepped_over`` are rows that are no data, ``between`` those of
    them with data below.

    ``part`` says which part of a table it is where one was parted (by quantity, by a group of columns), ``facts`` what
    is said of that part alone. ``axis`` is a condition that no column holds, ``pivots`` are columns of one quantity at
    several conditions, ``over`` what the sheet says over such columns, ``long`` says that the quantity stood in the
    rows. ``doubts`` are questions about where the
    table stands and how it lies, ``notes`` what is said about that. ``title_rows`` are rows above that belong to the
    headers, ``group_row`` one that is read already. ``words_above`` stand for the headers of a table that has none; one
    without any words is not known again (``has_words``).
    """

    grid: Grid
    top: int
    header_row: int
    units_row: int | None
    first_row: int
    stop_row: int
    headers: tuple[HeaderCell, ...]
    rows: Rows
    unnamed: tuple[int, ...] = ()
    stepped_over: tuple[Remark, ...] = ()
    between: tuple[Remark, ...] = ()
    part: str = ""
    facts: tuple[Fact, ...] = ()
    axis: Axis | None = None
    pivots: tuple[PivotMapping, ...] = ()
    over: tuple[OverColumns, ...] = ()
    long: LongMapping | None = None
    doubts: tuple[Question, ...] = ()
    notes: tuple[str, ...] = ()
    title_rows: tuple[int, ...] = ()
    group_row: int | None = None
    words_above: tuple[str, ...] = ()
    has_words: bool = True
    _cells: dict[int, ColumnCells] = field(default_factory=dict, repr=False, compare=False)

    def cells(self, column: int) -> ColumnCells:
        """The cells of a column, from ``first_row`` on."""
        if column not in self._cells:
            self._cells[column] = read_column(self.grid, column, self.first_row, self.stop_row)
        return self._cells[column]

    @property
    def place(self) -> str:
        """Header row and rows as people say it: "A5:D17"."""
        if not self.headers:
            return ""
        last = int(self.rows[-1]) if len(self.rows) else self.header_row
        columns = [header.column for header in self.headers]
        corners = (self.header_row, min(columns)), (last, max(columns))
        return ":".join(self.grid.address(*corner) for corner in corners)
