"""Where the tables of a sheet are: the header row below titles and key–value rows, the units row, the rows of data.

A header row is a row of words with numbers below. Of several the first one is taken in which the words are known
(columns of measurement tables have units, or name what the dictionary knows). A table ends where the next header row
begins, or where, after a blank row, hardly anything is filled in any more. Blank rows, footnotes and repeated headers
inside it are stepped over. Several tables below each other are found one after the other.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from specflow.importers.measured.cells import ColumnCells, Flags, Rows, read_column
from specflow.importers.measured.facts import Fact
from specflow.importers.measured.header_cells import (
    HeaderCell,
    find_units_row,
    has_second_row,
    read_headers,
    with_nameless_axis,
    with_unit,
)
from specflow.importers.measured.header_text import header_key
from specflow.importers.measured.mapping_parts import LongMapping, PivotMapping
from specflow.importers.measured.result import Question
from specflow.importers.measured.statements import is_reading, statement_rows, statement_text
from specflow.importers.readers import Grid, is_blank, looks_numeric

Recognises = Callable[[str], bool]

_NUMBER = r"[<>≤≥~±+\-−]*\s*[0-9][0-9.,]*(?:[eE][+\-]?[0-9]+)?"
_ONE_READING = re.compile(rf"^{_NUMBER}(?:\s*(?:±|\+/-|to|\.\.+|…)\s*{_NUMBER})?\s*[^\s0-9]{{0,6}}$")
_LOOK_AHEAD = 5
_SHARE_OF_WORDS = (
    0.75  # a row of words in the place of readings ("N/A") fills nearly all cells, a signature does not
)


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


@dataclass(frozen=True)
class FoundTable:
    """A table on a sheet.

    ``top`` is the first row that may speak about it (title, key–value rows); ``rows`` int32 are the row numbers that
    hold data, among ``first_row`` up to, not including, ``stop_row``. ``headers`` are named columns in order;
    ``unnamed`` are columns with cells and no header. ``stepped_over`` are rows that are no data, ``between`` those of
    them with data below.

    ``part`` says which part of a table it is where one was parted (by quantity, by a group of columns), ``facts`` what
    is said of that part alone. ``axis`` is a condition that no column holds, ``pivots`` are columns of one quantity at
    several conditions, ``long`` says that the quantity stood in the rows. ``doubts`` are questions about where the
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


@dataclass(frozen=True, slots=True)
class HeaderRow:
    """A row of headers; ``is_known``: its words are known, and it is not merely the best row of words."""

    row: int
    is_known: bool
    texts: tuple[str, ...]


def find_tables(grid: Grid, recognises: Recognises) -> tuple[FoundTable, ...]:
    """Return the tables with a row of headers, from top to bottom; ``recognises`` says whether a header is known."""
    tables = []
    top = grid.first_row
    while (header := find_header(grid, top, recognises)) is not None:
        table = cut_table(grid, top, header.row, 1, recognises)
        tables.append(table)
        top = table.stop_row
    return tuple(tables)


def cut_table(grid: Grid, top: int, row: int, header_rows: int, recognises: Recognises) -> FoundTable:
    """Return the table whose header begins in ``row`` and has ``header_rows`` rows."""
    header_rows = max(header_rows, 2 if has_second_row(grid, row) else 1)
    headers = read_headers(grid, row, header_rows)
    units_row = find_units_row(grid, row + header_rows, headers)
    if units_row is None:
        headers = with_nameless_axis(grid, row + header_rows, headers)
        units_row = row + header_rows if any(header.unit for header in headers) else None
    if units_row is not None:
        headers = tuple(with_unit(grid, header, units_row) for header in headers)
    first = row + header_rows if units_row is None else units_row + 1
    return table_below(grid, headers, top, row, first, units_row, recognises)


def table_below(
    grid: Grid,
    headers: tuple[HeaderCell, ...],
    top: int,
    header_row: int,
    first: int,
    units_row: int | None,
    recognises: Recognises,
) -> FoundTable:
    """Return the table of these headers whose data begin in row ``first``."""
    return _Body(grid, headers, first, recognises).table(top, header_row, units_row)


def find_header(grid: Grid, top: int, recognises: Recognises) -> HeaderRow | None:
    """The first row of headers that are known; without one the row of words with the most known and the most cells."""
    best: tuple[tuple[int, int], int] | None = None
    for row in range(top, grid.last_row + 1):
        texts = _words(grid, row)
        if len(texts) < 2 or not _has_numbers_below(grid, row, texts):
            continue
        known = sum(map(recognises, texts.values()))
        if _are_headers(texts, recognises):
            if _is_above_headers(grid, row, recognises):
                continue  # a pair of key and value, both of which happen to be known words
            return HeaderRow(row, True, tuple(texts.values()))
        if best is None or (known, len(texts)) > best[0]:
            best = (known, len(texts)), row
    return None if best is None else HeaderRow(best[1], False, tuple(_words(grid, best[1]).values()))


def _are_headers(texts: dict[int, str], recognises: Recognises) -> bool:
    known = sum(map(recognises, texts.values()))
    return len(texts) >= 2 and (known == len(texts) or known >= max(2, (len(texts) + 1) // 2))


def _is_above_headers(grid: Grid, row: int, recognises: Recognises) -> bool:
    """Whether the next row is a row of headers, too, and no units row."""
    below = _words(grid, row + 1) if row < grid.last_row else {}
    return (
        _are_headers(below, recognises) and find_units_row(grid, row + 1, read_headers(grid, row, 1)) is None
    )


def _words(grid: Grid, row: int) -> dict[int, str]:
    """The cells of a row by column when all of them are words; empty when one is a number, a date or an error."""
    texts: dict[int, str] = {}
    for column, value in enumerate(grid.row(row), start=1):
        if isinstance(value, str):
            if value and not value.isspace():
                if looks_numeric(value) or _ONE_READING.match(value.strip()):
                    return {}
                texts[column] = " ".join(value.split())
        else:
            return {}
    if len(texts) >= 2 and next(iter(texts.values())).endswith(":"):
        return {}
    return texts


def _has_numbers_below(grid: Grid, row: int, texts: dict[int, str]) -> bool:
    seen = 0
    for below in range(row + 1, grid.last_row + 1):
        cells = grid.row(below)
        if below in grid.comment_rows or all(is_blank(value) for value in cells):
            continue
        filled = [column for column in texts if is_reading(grid.value(below, column))]
        if filled and sum(not is_blank(value) for value in cells) >= min(2, len(texts)):
            return True
        seen += 1
        if seen >= _LOOK_AHEAD:
            return False
    return False


class _Body:
    """The rows below a header: which are data, which are stepped over, and where the table ends."""

    def __init__(
        self, grid: Grid, headers: tuple[HeaderCell, ...], first: int, recognises: Recognises
    ) -> None:
        self._grid = grid
        self._headers = headers
        self._first = first
        self._recognises = recognises
        stop = grid.last_row + 1
        self._cells = {
            column: read_column(grid, column, first, stop)
            for column in range(grid.first_column, grid.last_column + 1)
        }
        self._named = [header.column for header in headers]
        self._remarks: list[Remark] = []

    def table(self, top: int, header_row: int, units_row: int | None) -> FoundTable:
        """Cut the table."""
        data, stop = self._data_rows()
        places = np.flatnonzero(data)
        last = int(places[-1]) + self._first if len(places) else self._first
        unnamed = tuple(
            column
            for column, cells in self._cells.items()
            if column not in self._named and cells.filled[places].any()
        )
        return FoundTable(
            self._grid,
            top,
            header_row,
            units_row,
            self._first,
            stop,
            self._headers,
            (places + self._first).astype(np.int32),
            unnamed,
            tuple(remark for remark in self._remarks if remark.row < stop),
            tuple(remark for remark in self._remarks if remark.row < last),
            _cells=dict(self._cells) if stop == self._grid.last_row + 1 else {},
        )

    def _data_rows(self) -> tuple[Flags, int]:
        """Which rows are data, and the row at which the table has ended."""
        size = max(self._grid.last_row + 1 - self._first, 0)
        filled, numeric, beside = (np.zeros(size, np.int32) for _ in range(3))
        for column, cells in self._cells.items():
            if column in self._named:
                filled += cells.filled
                numeric += cells.numeric
            else:
                beside += cells.filled
        data = filled > 0
        for row in self._grid.comment_rows:
            if row >= self._first:
                data[row - self._first] = False
        written = data.copy()
        end = size
        named = [self._cells[column] for column in self._named]
        outside = [cells for column, cells in self._cells.items() if column not in self._named]
        stating = {row - self._first for row in statement_rows(self._grid, named, outside)}
        for place in sorted(stating.union(np.flatnonzero(data & (numeric == 0)).tolist())):
            if place in stating and not self._is_header(self._first + place):
                action = self._statement(place, bool(data[:place].any()))
            else:
                action = self._row_of_words(place, int(filled[place]), int(beside[place]))
            if action == "ends":
                end = place
                self._leave_titles(data, written, place)
                break
            data[place] = action == "data"
        data[end:] = False
        stop = self._without_rest(data, written, filled, numeric, end)
        return data, self._first + stop

    def _leave_titles(self, data: Flags, written: Flags, place: int) -> None:
        """Leave the lines of words directly above the headers of the next table to that."""
        for above in range(place - 1, -1, -1):
            if written[above] and not self._is_title(self._first + above):
                return
            data[above] = False

    def _without_rest(self, data: Flags, written: Flags, filled: Rows, numeric: Rows, end: int) -> int:
        """Leave out, below a blank row at the end, blocks of rows that fill less than half of the usual cells.

        What is said there (signatures, or the key–value rows of the next table) is no data of this one. Where no table
        follows, rows with numbers are kept: they are rejected one by one, and not passed over.
        """
        if not data.any():
            return end
        is_followed = end < len(data)
        starts = np.flatnonzero(written[1:end] & ~written[: max(end - 1, 0)]) + 1
        starts = starts[starts > int(np.argmax(data))]
        first_block = slice(0, int(starts[0]) if len(starts) else end)
        usual = float(np.median(filled[first_block][data[first_block]]))
        with_numbers = (numeric > 0) & ((filled >= usual / 2) | (not is_followed))
        holds = with_numbers | (filled >= _SHARE_OF_WORDS * usual)
        stop = end
        for start in reversed(starts.tolist()):
            block = slice(start, stop)
            if (data[block] & holds[block]).any():
                break
            data[block] = False
            stop = start
        return int(np.flatnonzero(data)[-1]) + 1 if is_followed else stop

    def _statement(self, place: int, has_data: bool) -> str:
        """A row that states something ends the table where headers follow; else it is a remark that speaks."""
        row = self._first + place
        if has_data and self._is_above_header(row):
            return "ends"
        words = statement_text(self._grid, row)
        self._remarks.append(Remark(row, words, f"row {row} is no data: {words[:60]!r}", states=True))
        return "skip"

    def _is_above_header(self, row: int) -> bool:
        """Whether, before the next row of readings, a row of headers follows."""
        for below in range(row + 1, self._grid.last_row + 1):
            if self._is_header(below):
                return True
            filled = [value for value in self._grid.row(below) if not is_blank(value)]
            if filled and is_reading(filled[0]):
                return False
        return False

    def _is_header(self, row: int) -> bool:
        texts = _words(self._grid, row)
        if len(texts) < 2:
            return False
        return self._repeats(texts) or self._begins_another(row, texts)

    def _is_below_title(self, row: int) -> bool:
        """Whether a line of words stands over headers that repeat: then they begin another table of the layout."""
        above = row - 1
        while above > self._first and all(is_blank(value) for value in self._grid.row(above)):
            above -= 1
        return self._is_title(above)

    def _is_title(self, row: int) -> bool:
        """Whether a row is a remark, or words that fill fewer cells than there are headers, or a key with a colon."""
        if any(remark.row == row and remark.text for remark in self._remarks):
            return True
        filled = [value for value in self._grid.row(row) if not is_blank(value)]
        if not filled or any(not isinstance(value, str) or is_reading(value) for value in filled):
            return False
        return len(filled) < len(self._named) or any(str(value).rstrip().endswith(":") for value in filled)

    def _repeats(self, texts: dict[int, str]) -> bool:
        return {header_key(text) for text in texts.values()} <= {
            header_key(header.text) for header in self._headers
        }

    def _begins_another(self, row: int, texts: dict[int, str]) -> bool:
        return all(map(self._recognises, texts.values())) and _has_numbers_below(self._grid, row, texts)

    def _row_of_words(self, place: int, filled: int, beside: int) -> str:
        row = self._first + place
        texts = _words(self._grid, row)
        if len(texts) >= 2 and self._repeats(texts):
            if self._is_below_title(row):
                return "ends"
            self._remarks.append(Remark(row, "", f"row {row} repeats the headers"))
            return "skip"
        if len(texts) >= 2 and self._begins_another(row, texts):
            return "ends"
        if filled == 1 and beside == 0 and len(self._named) > 1:
            words = next(str(cells.values[place]) for cells in self._cells.values() if cells.filled[place])
            self._remarks.append(Remark(row, words, f"row {row} is a remark: {words[:60]!r}"))
            return "skip"
        return "data"


def rows_of_numbers(grid: Grid, top: int, stop: int) -> Iterator[int]:
    """Give the rows from ``top`` up to, not including, ``stop`` that hold several numbers."""
    for row in range(top, stop):
        cells = grid.row(row)
        if row not in grid.comment_rows and sum(map(is_reading, cells)) > 1:
            yield row
