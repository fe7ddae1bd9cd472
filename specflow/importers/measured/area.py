"""Areas of a sheet, as people write them: "K6:L10", and "A137:B" to the end of the sheet."""

from __future__ import annotations

import re
from dataclasses import replace

from specflow.importers.readers import CellRange, Grid, Value, column_number

_AREA = re.compile(
    r"\$?(?P<left>[A-Za-z]{1,3})\$?(?P<top>[1-9][0-9]{0,6}):\$?(?P<right>[A-Za-z]{1,3})\$?(?P<bottom>[1-9][0-9]{0,6})?"
)
_CELL = re.compile(r"\$?(?P<column>[A-Za-z]{1,3})\$?(?P<row>[1-9][0-9]{0,6})")
_LAST = 10_000_000


def read_area(text: str) -> CellRange | None:
    """Return the area that a text names, None when it names none."""
    found = _AREA.fullmatch(text.strip())
    if found is None:
        return None
    top, bottom = int(found["top"]), int(found["bottom"] or _LAST)
    left, right = column_number(found["left"]), column_number(found["right"])
    return CellRange(top, left, bottom, right) if top <= bottom and left <= right else None


def read_cell(text: str) -> tuple[int, int] | None:
    """Return row and column that a text like "B3" names, None when it names none."""
    found = _CELL.fullmatch(text.strip())
    return (int(found["row"]), column_number(found["column"])) if found else None


def without(grid: Grid, areas: list[CellRange]) -> Grid:
    """Return the grid with nothing written in these areas."""
    if not areas:
        return grid
    rows: list[list[Value]] = []
    for number, cells in enumerate(grid.rows, start=grid.first_row):
        touched = [area for area in areas if area.first_row <= number <= area.last_row]
        if touched:
            cells = list(cells)
            for area in touched:
                first = max(area.first_column - grid.first_column, 0)
                last = min(area.last_column + 1 - grid.first_column, len(cells))
                cells[first:last] = [""] * max(last - first, 0)
        rows.append(cells)
    return replace(grid, rows=rows)
