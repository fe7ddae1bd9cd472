"""The rows below a header: which are data, which are stepped over, and where the table ends."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from specflow.importers.measured.cells import Flags, Rows, read_column
from specflow.importers.measured.found_table import FoundTable, Remark
from specflow.importers.measured.header_cells import HeaderCell, find_units_row, with_unit
from specflow.importers.measured.header_rows import Recognises, has_numbers_below, words_of
from specflow.importers.measured.header_text import header_key
from specflow.importers.measured.statements import is_reading, statement_rows, statement_text
from specflow.importers.readers import Grid, is_blank

_SHARE_OF_WORDS = (
    0.75  # a row of words in the place of readings ("N/A") fills nearly all cells, a signature does not
)


class TableBody:
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
        texts = words_of(self._grid, row)
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
        """Whether all of these words are the headers of their own columns."""
        own = {header.column: header_key(header.text) for header in self._headers}
        return all(own.get(column) == header_key(text) for column, text in texts.items())

    def _has_other_units(self, row: int) -> bool:
        """Whether a row of units below repeated headers says other ones than those of this table."""
        if find_units_row(self._grid, row, self._headers) is None:
            return False
        bare = [replace(header, unit="") for header in self._headers]
        return [with_unit(self._grid, header, row).unit for header in bare] != [
            one.unit for one in self._headers
        ]

    def _begins_another(self, row: int, texts: dict[int, str]) -> bool:
        return all(map(self._recognises, texts.values())) and has_numbers_below(self._grid, row, texts)

    def _row_of_words(self, place: int, filled: int, beside: int) -> str:
        row = self._first + place
        texts = words_of(self._grid, row)
        if len(texts) >= 2 and self._repeats(texts):
            if self._is_below_title(row) or self._has_other_units(row + 1):
                return "ends"
            self._remarks.append(Remark(row, "", f"row {row} repeats the headers"))
            return "skip"
        if len(texts) >= 2 and self._begins_another(row, texts):
            return "ends"
        above = words_of(self._grid, row - 1) if place else {}
        if len(above) >= 2 and self._repeats(above) and find_units_row(self._grid, row, self._headers):
            self._remarks.append(Remark(row, "", f"row {row} repeats the units"))
            return "skip"
        if filled == 1 and beside == 0 and len(self._named) > 1:
            words = next(str(cells.values[place]) for cells in self._cells.values() if cells.filled[place])
            self._remarks.append(Remark(row, words, f"row {row} is a remark: {words[:60]!r}"))
            return "skip"
        return "data"
