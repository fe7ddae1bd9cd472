"""All tables of a sheet, however they lie: beside each other, on their side, under numbers, without headers."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import replace

from specflow.importers.measured.beside import strips_of
from specflow.importers.measured.blocks import block_table, end_before_more, find_block, is_far_from
from specflow.importers.measured.context import Context
from specflow.importers.measured.corner import find_number_row, next_number_row, table_under
from specflow.importers.measured.header_rows import words_of
from specflow.importers.measured.long_form import is_long_header
from specflow.importers.measured.sideways import find_sideways
from specflow.importers.measured.tables import FoundTable, cut_table, find_header, rows_of_numbers
from specflow.importers.readers import CellRange, Grid, is_blank

_ROWS_BELOW = 2


def find_all(grid: Grid, context: Context) -> tuple[FoundTable, ...]:
    """Return the tables of a sheet, from left to right and from top to bottom."""
    strips = strips_of(grid, context)
    found = [table for strip in strips.grids for table in _below_each_other(strip, context)]
    if strips.facts:
        found = [replace(table, facts=(*table.facts, *strips.facts)) for table in found]
    if strips.doubt is not None and found:
        found[0] = replace(found[0], doubts=(*found[0].doubts, strips.doubt))
    return tuple(found)


def _below_each_other(grid: Grid, context: Context) -> Iterator[FoundTable]:
    top = grid.first_row
    while top <= grid.last_row:
        found = _next(grid, top, context)
        if found is None:
            return
        table, below = found
        yield table
        top = max(below, top + 1)


def _next(grid: Grid, top: int, context: Context) -> tuple[FoundTable, int] | None:
    """The next table in the rows from ``top`` on, and the row below it."""
    header = find_header(grid, top, context.recognises)
    row = None if header is None else header.row
    certain = header is not None and (header.is_known or is_long_header(header.texts))
    stop = grid.last_row + 1 if row is None or not certain else row
    block = None if certain and not grid.is_text else find_block(grid, top, grid.last_row + 1)
    is_only = not certain and block is None and top == grid.first_row
    side = find_sideways(grid, top, stop, context, is_only)
    if side is not None and (row is None or side[0].grid.first_column <= row or not certain):
        return side
    reach = grid.last_row + 1 if row is None else row + _ROWS_BELOW + 1
    numbers = find_number_row(grid, top, reach, context)
    if numbers is not None and not (certain and row is not None and row < numbers.row == numbers.label_row):
        return _ended(lambda cells: table_under(cells, top, numbers, context), grid, context)
    if block is not None and (
        row is None or (grid.is_text and _has_no_header(grid, row, block, certain, context))
    ):
        table = block_table(grid, top, block, context)
        return table, table.stop_row
    if row is None:
        return None
    last = end_before_more(grid, block) if block is not None and grid.is_text else grid.last_row
    if last < grid.last_row:
        grid = grid.cut(CellRange(grid.first_row, grid.first_column, last, grid.last_column))
    return _ended(lambda cells: cut_table(cells, top, row, 1, context.recognises), grid, context)


def _ended(make: Callable[[Grid], FoundTable], grid: Grid, context: Context) -> tuple[FoundTable, int]:
    """A table, and the row below it; it ends where numbers are headers of another one."""
    table = make(grid)
    row = next_number_row(table, context)
    if row is None:
        return table, table.stop_row
    table = make(grid.cut(CellRange(grid.first_row, grid.first_column, row - 1, grid.last_column)))
    return table, int(table.rows[-1]) + 1 if len(table.rows) else row


def _has_no_header(grid: Grid, row: int, block: int, certain: bool, context: Context) -> bool:
    """Whether a row of words is not the header of a block of numbers: it stands below, or too far above, or it is prose
    with rows of other numbers under it.
    """
    if block < row:
        return True
    named = words_of(grid, row)
    if not certain and any(
        not named.keys() >= _filled(grid, one) for one in rows_of_numbers(grid, row + 1, block)
    ):
        return True
    return is_far_from(grid, row, block) and not _has_header(grid, block, context)


def _filled(grid: Grid, row: int) -> set[int]:
    return {column for column, value in enumerate(grid.row(row), start=1) if not is_blank(value)}


def _has_header(grid: Grid, block: int, context: Context) -> bool:
    """Whether the row directly above a block of numbers is its header: a list of markers may stand above that."""
    above = block - 1
    if above < grid.first_row or above in grid.comment_rows:
        return False
    header = find_header(grid, above, context.recognises)
    return header is not None and header.row == above and header.is_known
