"""The grid: what a reader gives for one sheet, with true addresses and the oddities a bare value does not show.

Rows and columns are the 1-based coordinates of the sheet everywhere on the surface (``C17`` is row 17, column 3);
for a csv file the row is the line number of the file. The cells are plain Python values in plain lists, or, where a
sheet has millions of them, in a CellStore (``stores``), which is asked by column.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from datetime import date, datetime, time, timedelta
from itertools import islice
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from specflow.errors import FileError
from specflow.importers.readers.odd_cells import OddCell, OddCells, OddKind, OddRun
from specflow.importers.readers.places import CellRange, address, column_letter
from specflow.importers.readers.stores import CellStore, Coded, Value

T = TypeVar("T")

_NUMBER = re.compile(r"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")
_LOOKS_NUMERIC = re.compile(
    r"[+\-−]?\s*[0-9.,'\s\u00a0\u202f]*[0-9][0-9.,'\s\u00a0\u202f]*(?:[eE][+\-−]?[0-9]+)?\s*%?"
)


@dataclass(frozen=True, slots=True)
class Grid:
    """One sheet of a workbook, or one csv file.

    ``rows[0][0]`` is the cell at (``first_row``, ``first_column``); rows may be of unequal length. ``is_text`` says
    that all cells are text as written (csv); ``decimal`` is then the decimal mark found, ``""`` when it is ambiguous,
    and ``grouped`` says whether the other mark was seen where it can only stand between thousands.
    ``comment_rows`` are csv lines that began with a comment mark, which is taken off. ``notes`` say what the reader
    did or saw on the way. ``turned`` says that rows and columns have changed places (``turn``): ``address`` and
    ``column_name`` still give the true place.
    """

    name: str
    rows: Sequence[list[Value]]
    file: str = ""
    first_row: int = 1
    first_column: int = 1
    odd: OddCells = field(default_factory=OddCells)
    hidden: bool = False
    hidden_rows: frozenset[int] = frozenset()
    hidden_columns: frozenset[int] = frozenset()
    merged: tuple[CellRange, ...] = ()
    comment_rows: frozenset[int] = frozenset()
    is_text: bool = False
    decimal: str = "."
    grouped: bool = False
    notes: tuple[str, ...] = ()
    turned: bool = False

    @property
    def last_row(self) -> int:
        """Row number of the last row; ``first_row - 1`` when the grid is empty."""
        return self.first_row + len(self.rows) - 1

    @property
    def last_column(self) -> int:
        """Column number of the last column of the widest row."""
        return self.first_column + self._width - 1

    @property
    def _width(self) -> int:
        rows = self.rows
        return rows.width if isinstance(rows, CellStore) else max(map(len, rows), default=0)

    def value(self, row: int, column: int) -> Value:
        """The cell at (row, column); ``""`` for an empty cell and for every place outside the used range."""
        if row < self.first_row or column < self.first_column or row > self.last_row:
            return ""
        place = column - self.first_column
        if isinstance(self.rows, CellStore):
            return self.rows.value(row - self.first_row, place)
        cells = self.rows[row - self.first_row]
        return cells[place] if place < len(cells) else ""

    def row(self, row: int) -> list[Value]:
        """The cells of one row from column 1 on, so that index ``column - 1`` is the cell of ``column``."""
        if not self.first_row <= row <= self.last_row:
            return []
        return [""] * (self.first_column - 1) + self.rows[row - self.first_row]

    def column(self, column: int, start: int, stop: int) -> list[Value]:
        """The cells of one column in rows ``start`` up to, not including, ``stop``."""
        first, last, above, below = self._inside(start, stop)
        inside = _column_of(self.rows, column - self.first_column, first, last)
        return [""] * above + inside + [""] * below

    def has_numbers(self, column: int, start: int, stop: int) -> bool:
        """Whether a cell of one column, in rows ``start`` up to ``stop``, is something else than text: a workbook's
        number, date or truth value. Cells of a text file are text until they are read."""
        first, last, _, _ = self._inside(start, stop)
        place = column - self.first_column
        if isinstance(self.rows, CellStore):
            return place >= 0 and self.rows.has_numbers(place, first, last)
        return place >= 0 and any(
            place < len(cells) and type(cells[place]) is not str for cells in islice(self.rows, first, last)
        )

    def coded(self, column: int, start: int, stop: int) -> Coded | None:
        """The words of one column in rows ``start`` up to ``stop``, coded; None where they are kept cell by cell."""
        first, last, above, below = self._inside(start, stop)
        place = column - self.first_column
        if not isinstance(self.rows, CellStore) or place < 0 or above or below:
            return None
        return self.rows.coded(place, first, last)

    def _inside(self, start: int, stop: int) -> tuple[int, int, int, int]:
        """Rows ``start`` up to ``stop`` as places in ``rows``, and how many of them lie above and below the grid."""
        size, count = max(stop - start, 0), len(self.rows)
        first = min(max(start - self.first_row, 0), count)
        last = max(min(stop - self.first_row, count), first)
        above = min(max(self.first_row - start, 0), size)
        return first, last, above, size - above - (last - first)

    def column_floats(self, column: int, start: int, stop: int) -> tuple[NDArray[np.float64], list[int]]:
        """The numbers of one column in rows ``start`` up to, not including, ``stop``.

        Returns float64, shape (stop - start,), NaN where there is no plain number, and the row numbers whose cell
        holds something that is not a plain finite number: text, date, boolean, error, formula without a value, NaN,
        infinity. Blank cells are NaN and are not listed. Number formats (percent, unit) are not applied: ask ``odd``.
        The array may be the grid's own, and is then locked.
        """
        numbers, other = self._plain_numbers(column, start, stop)
        bad = set((np.flatnonzero(other) + start).tolist())
        for run in self.odd.in_column(column, start, stop):
            if run.cell.kind in (OddKind.ERROR, OddKind.NO_VALUE):
                bad.update(range(max(run.first, start), min(run.last + 1, stop)))
        if bad:
            numbers = numbers.copy()
            numbers[np.array(sorted(bad)) - start] = np.nan
        return numbers, sorted(bad)

    def _plain_numbers(
        self, column: int, start: int, stop: int
    ) -> tuple[NDArray[np.float64], NDArray[np.bool_]]:
        """The numbers of a column, and which of its cells hold something else."""
        if isinstance(self.rows, CellStore):
            first, last, above, below = self._inside(start, stop)
            place = column - self.first_column
            known = self.rows.numbers(place, first, last) if place >= 0 else None
            if known is not None:
                numbers, other = known
                if above or below:
                    numbers = np.pad(numbers, (above, below), constant_values=np.nan)
                    other = np.pad(other, (above, below))
                return numbers, other
        cells = self.column(column, start, stop)
        numbers = text_floats(cells, self.decimal) if self.is_text else _number_floats(cells)
        other = np.zeros(len(cells), bool)
        for here in np.flatnonzero(~np.isfinite(numbers)).tolist():
            other[here] = not is_blank(cells[here])
        return numbers, other

    def oddities(self, row: int, column: int) -> list[OddCell]:
        """Everything odd about one cell: of its value, its format, its visibility and its merged range."""
        found = [odd] if (odd := self.odd.at(row, column)) else []
        value = self.value(row, column)
        if not found and isinstance(value, datetime | date | time | timedelta):
            found.append(OddCell(OddKind.DATE))
        if isinstance(value, str) and not self.is_text and looks_numeric(value):
            found.append(OddCell(OddKind.TEXT_NUMBER))
        if row in self.hidden_rows:
            found.append(OddCell(OddKind.HIDDEN, f"row {row}"))
        if column in self.hidden_columns:
            found.append(OddCell(OddKind.HIDDEN, f"column {column_letter(column)}"))
        if area := self.merged_range(row, column):
            found.append(OddCell(OddKind.MERGED, str(area)))
        return found

    def merged_range(self, row: int, column: int) -> CellRange | None:
        """The merged range that holds the cell; its value stands in the upper left cell, the anchor."""
        return next((area for area in self.merged if (row, column) in area), None)

    def address(self, row: int, column: int) -> str:
        """The true address of a cell: ``C17``, also where the grid is turned."""
        return address(column, row) if self.turned else address(row, column)

    def column_name(self, column: int) -> str:
        """What a column is called: its letter; the number of the true row where the grid is turned."""
        return str(column) if self.turned else column_letter(column)

    def cut(self, area: CellRange) -> Grid:
        """The cells of an area, at the same coordinates."""
        first = max(area.first_column - self.first_column, 0)
        stop = max(area.last_column + 1 - self.first_column, 0)
        top = max(area.first_row - self.first_row, 0)
        below = max(area.last_row + 1 - self.first_row, 0)
        rows: Sequence[list[Value]]
        if isinstance(self.rows, CellStore):
            rows = self.rows.cut(top, below, first, stop)
        else:
            rows = [cells[first:stop] for cells in self.rows[top:below]]
        return replace(
            self,
            rows=rows,
            first_row=self.first_row + top,
            first_column=self.first_column + first,
            merged=tuple(one for one in self.merged if one.touches(area)),
            comment_rows=frozenset(
                row for row in self.comment_rows if area.first_row <= row <= area.last_row
            ),
        )

    def turn(self) -> Grid:
        """The grid with rows and columns changed; what is said of columns then is said of true rows."""
        rows = [_column_of(self.rows, place, 0, len(self.rows)) for place in range(self._width)]
        runs = [
            OddRun(row, run.column, run.column, run.cell)
            for run in self.odd
            for row in range(max(run.first, self.first_row), min(run.last, self.last_row) + 1)
        ]
        return replace(
            self,
            rows=rows,
            first_row=self.first_column,
            first_column=self.first_row,
            odd=OddCells(runs),
            hidden_rows=self.hidden_columns,
            hidden_columns=self.hidden_rows,
            merged=tuple(area.turn() for area in self.merged),
            comment_rows=frozenset(),
            turned=not self.turned,
        )

    def where(self, row: int | None = None, column: int | None = None) -> str:
        """The place as people write it: file, sheet, cell."""
        parts = [self.file, self.name if self.name != self.file else ""]
        if row is not None:
            parts.append(f"row {row}" if column is None else self.address(row, column))
        return ", ".join(part for part in parts if part)


def sheet(grids: Iterable[Grid], name: str) -> Grid:
    """The grid called ``name`` (compared without case and outer blanks); FileError with the names that there are."""
    known = {grid.name: grid for grid in grids}
    return by_sheet_name(known, name, next((grid.file for grid in known.values()), ""))


def by_sheet_name(known: Mapping[str, T], name: str, file: str) -> T:
    """What stands in ``known`` under a sheet name, compared without case and outer blanks."""
    wanted = name.strip().casefold()
    for there, found in known.items():
        if there.strip().casefold() == wanted:
            return found
    names = ", ".join(map(repr, known)) or "none"
    raise FileError(f"there is no sheet {name!r}", where=file, hint=f"sheets in the file: {names}")


def is_blank(value: Value) -> bool:
    """Nothing is written in the cell (blanks and no-break spaces count as nothing)."""
    return isinstance(value, str) and not value.strip()


def looks_numeric(text: str) -> bool:
    """The text is a number as people write them: sign, digits, separators, exponent, perhaps a percent sign."""
    return _LOOKS_NUMERIC.fullmatch(text.strip()) is not None


def _column_of(rows: Sequence[list[Value]], place: int, first: int, last: int) -> list[Value]:
    """The cells at ``place`` of rows ``first`` up to ``last``; empty ones where a row is shorter."""
    if place < 0:
        return [""] * (last - first)
    if isinstance(rows, CellStore):
        return rows.column(place, first, last)
    part = rows[first:last]
    try:
        return [cells[place] for cells in part]
    except IndexError:
        return [cells[place] if place < len(cells) else "" for cells in part]


def _number_floats(cells: list[Value]) -> NDArray[np.float64]:
    """Cells of a workbook: numbers stay, all else (numbers stored as text and booleans, too) is NaN."""
    if set(map(type, cells)) <= {float, int}:
        return np.array(cells, dtype=np.float64)
    return np.array([cell if type(cell) in (float, int) else np.nan for cell in cells], dtype=np.float64)


def text_floats(cells: list[Value], decimal: str) -> NDArray[np.float64]:
    """Cells of a csv file. numpy (like ``float``) also takes ``1_000`` and digits of other scripts: not here."""
    texts = [str(cell) for cell in cells]
    joined = "".join(texts)
    if decimal == "." and joined.isascii() and "_" not in joined:
        try:
            return np.array(texts, dtype=np.float64)
        except ValueError:
            pass  # some cell is not a number: find out which
    return np.array([_text_float(text.strip(), decimal) for text in texts], dtype=np.float64)


def _text_float(text: str, decimal: str) -> float:
    """A plain number with this decimal mark; an ambiguous mark leaves only numbers without one."""
    if decimal != "." and "." in text:
        return np.nan
    if decimal == ",":
        text = text.replace(",", ".")
    return float(text) if _NUMBER.fullmatch(text) else np.nan
