"""Where the tables of a sheet are: the header row below titles and key–value rows, the units row, the rows of data.

A header row is a row of words with numbers below. Of several the first one is taken in which the words are known
(columns of measurement tables have units, or name what the dictionary knows). A table ends where the next header row
begins, or where, after a blank row, hardly anything is filled in any more. Blank rows, footnotes and repeated headers
inside it are stepped over. Several tables below each other are found one after the other.
"""

from __future__ import annotations

import re
from collections.abc import Iterator

from specflow.importers.measured.found_table import Axis, FoundTable, Remark
from specflow.importers.measured.header_cells import (
    HeaderCell,
    count_header_rows,
    find_units_row,
    read_headers,
    with_nameless_axis,
    with_unit,
)
from specflow.importers.measured.header_rows import HeaderRow, Recognises, find_header
from specflow.importers.measured.statements import is_reading
from specflow.importers.measured.table_body import TableBody
from specflow.importers.readers import Grid, is_blank

__all__ = [
    "Axis",
    "FoundTable",
    "HeaderRow",
    "Recognises",
    "Remark",
    "cut_table",
    "fills_blanks",
    "find_header",
    "find_tables",
    "rows_of_numbers",
    "table_below",
]


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
    header_rows = max(header_rows, count_header_rows(grid, row))
    headers = read_headers(grid, row, header_rows)
    below = row + header_rows
    if below < grid.last_row and all(map(is_blank, grid.row(below))):
        below += 1  # a line is drawn under the headers
    units_row = find_units_row(grid, below, headers)
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
    return TableBody(grid, headers, first, recognises).table(top, header_row, units_row)


def fills_blanks(table: FoundTable) -> bool:
    """Whether the row below the headers fills their blanks: "H @ _ MHz" over 965 is "H @ 965 MHz"."""
    blank = [header.column for header in table.headers if re.search(r"(?<!\w)_(?!\w)", header.text)]
    row = table.header_row + 1
    return len(blank) > 1 and all(is_reading(table.grid.value(row, column)) for column in blank)


def rows_of_numbers(grid: Grid, top: int, stop: int) -> Iterator[int]:
    """Give the rows from ``top`` up to, not including, ``stop`` that hold several numbers."""
    for row in range(top, stop):
        cells = grid.row(row)
        if row not in grid.comment_rows and sum(map(is_reading, cells)) > 1:
            yield row
