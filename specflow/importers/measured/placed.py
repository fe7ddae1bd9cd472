"""Tables whose place a mapping states: an area of the sheet, with headers or without, turned, or a bare matrix."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from specflow.importers.measured.area import read_area
from specflow.importers.measured.header_cells import HeaderCell
from specflow.importers.measured.mapping_parts import LayoutMapping, MatrixMapping, PivotMapping
from specflow.importers.measured.tables import Axis, FoundTable, Recognises, cut_table, table_below
from specflow.importers.readers import CellRange, Grid, is_blank

#: How the header of a column without one begins; its number follows.
NAMELESS = "column #"

_MOST_ROWS_ABOVE = 40


def table_in_area(grid: Grid, mapping: LayoutMapping, recognises: Recognises) -> FoundTable | None:
    """Return the table that stands in the area of a mapping; None when nothing is written there."""
    area = clipped(grid, mapping.area)
    if area is None:
        return None
    cells = grid.cut(area)
    if mapping.stop_at:
        cells = until(cells, mapping.stop_at)
    if mapping.turned:
        cells = cells.turn()
    if mapping.matrix is not None:
        return matrix_table(cells, mapping.matrix)
    first = cells.first_row
    if mapping.header_rows == 0:
        return headerless(cells, first, first, recognises)
    return cut_table(cells, first, first, mapping.header_rows, recognises)


def clipped(grid: Grid, text: str) -> CellRange | None:
    """The area as far as the sheet has cells there; None when it has none."""
    area = read_area(text)
    if area is None:
        return None
    area = CellRange(
        max(area.first_row, grid.first_row),
        max(area.first_column, grid.first_column),
        min(area.last_row, grid.last_row),
        min(area.last_column, grid.last_column),
    )
    if area.first_row > area.last_row or area.first_column > area.last_column:
        return None
    rows = range(area.first_row, area.last_row + 1)
    columns = slice(area.first_column - 1, area.last_column)
    written = any(not is_blank(value) for row in rows for value in grid.row(row)[columns])
    return area if written else None


def until(grid: Grid, words: str) -> Grid:
    """The grid above the first row in which a cell begins with these words."""
    wanted = words.strip().casefold()
    for row in range(grid.first_row, grid.last_row + 1):
        if any(
            isinstance(value, str) and value.strip().casefold().startswith(wanted) for value in grid.row(row)
        ):
            return grid.cut(CellRange(grid.first_row, grid.first_column, row - 1, grid.last_column))
    return grid


def headerless(grid: Grid, top: int, first: int, recognises: Recognises) -> FoundTable:
    """A table without headers, whose columns go by their numbers."""
    headers = tuple(
        HeaderCell(column, first, f"{NAMELESS}{column}", turned=grid.turned)
        for column in range(grid.first_column, grid.last_column + 1)
        if any(not is_blank(value) for value in grid.column(column, first, grid.last_row + 1))
    )
    return replace(table_below(grid, headers, top, first, first, None, recognises), has_words=False)


def matrix_table(grid: Grid, matrix: MatrixMapping) -> FoundTable:
    """A matrix without headers: one column for each step of the axis that runs to the right."""
    unit = matrix.columns.unit
    headers = tuple(
        HeaderCell(
            column,
            grid.first_row,
            f"{matrix.columns.start + matrix.columns.step * place:.12g} {unit}".strip(),
            turned=grid.turned,
        )
        for place, column in enumerate(range(grid.first_column, grid.last_column + 1))
    )
    down = matrix.rows
    return FoundTable(
        grid,
        grid.first_row,
        grid.first_row,
        None,
        grid.first_row,
        grid.last_row + 1,
        headers,
        np.arange(grid.first_row, grid.last_row + 1, dtype=np.int32),
        axis=Axis(down.dimension, down.unit, grid.first_row, down.start, down.step, "stated by the mapping"),
        has_words=False,
    )


def pivot_of(matrix: MatrixMapping) -> PivotMapping:
    """The axis that runs to the right as a pivot of the columns."""
    axis = matrix.columns
    return PivotMapping(
        header=f"{{{axis.dimension}}} {axis.unit}".strip(),
        parameter=matrix.parameter,
        unit=matrix.unit,
        units={axis.dimension: axis.unit} if axis.unit else {},
        plane=matrix.plane,
        statistic=matrix.statistic,
        polarisation=matrix.polarisation,
        bandwidth=matrix.bandwidth,
        spectrum=matrix.spectrum,
    )


def first_row_above(grid: Grid, area: CellRange) -> int:
    """The first of the rows that may speak of an area: those directly above it, up to a blank one."""
    row = area.first_row
    columns = slice(area.first_column - 1, area.last_column)
    while row > grid.first_row and area.first_row - row < _MOST_ROWS_ABOVE:
        if not grid.is_text and all(is_blank(value) for value in grid.row(row - 1)[columns]):
            break
        row -= 1
    return row
