"""The condition points of a worksheet: their numbers in a table, and the cell that chooses one for the whole sheet.

Cells that differ between points become INDEX formulas into the table. Where the table would be too large the sheet
keeps the numbers of one point and says so.
"""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from specflow.model.formula_sheet import CellLook, Choice, FormulaCell
from specflow.reports.calculation_grid import Grid, Varying, cell_name
from specflow.reports.figures import DASH

MOST_CELLS = 100_000
"""So many numbers are listed by condition point: beyond that a workbook opens too slowly (our choice, no source)."""
_WORDS = 1  # the column of the points' words
_FIRST = 2  # the first column of numbers
CHOICE_COLUMN = 2


def put_points(grid: Grid, places: Sequence[str], choice_row: int, first_row: int) -> tuple[Choice, ...]:
    """Put the table of points from a row on, and the cell that chooses one; return that choice, none where it is alone.

    The cells that vary were put before with the numbers of ``grid.place``, which is the point chosen at first.
    """
    grid.text(choice_row, 1, "Condition point")
    words = _told_apart(places)
    if len(places) < 2 or not grid.varying or len(places) * len(grid.varying) > MOST_CELLS:
        grid.text(choice_row, CHOICE_COLUMN, words[grid.place], CellLook.NOTE)
        if len(places) > 1 and grid.varying:
            said = f"the numbers of {len(places)} points are too many for this sheet: it stands at this one"
            grid.text(choice_row, CHOICE_COLUMN + 2, said, CellLook.NOTE)
        return ()
    top = first_row + 2
    last = top + len(places) - 1
    grid.text(choice_row, CHOICE_COLUMN, words[grid.place], CellLook.INPUT)
    cell = cell_name(choice_row, CHOICE_COLUMN, fixed=True)
    column = f"{cell_name(top, _WORDS, fixed=True)}:{cell_name(last, _WORDS, fixed=True)}"
    number = FormulaCell(
        formula=f"=MATCH({cell},{column},0)", number=grid.place + 1, look=CellLook.FORMULA, format="0"
    )
    grid.put(choice_row, CHOICE_COLUMN + 1, number)
    _table(grid, words, first_row)
    chosen = cell_name(choice_row, CHOICE_COLUMN + 1, fixed=True)
    for place, one in enumerate(grid.varying):
        _refer(grid, one, _FIRST + place, (top, last), chosen)
    return (Choice(row=choice_row, column=CHOICE_COLUMN, list_column=_WORDS, first_row=top, last_row=last),)


def _told_apart(places: Sequence[str]) -> list[str]:
    """Return the words of the points, with numbers where several have the same."""
    if len(set(places)) == len(places):
        return list(places)
    return [f"{number}: {words}" for number, words in enumerate(places, 1)]


def _table(grid: Grid, words: Sequence[str], first_row: int) -> None:
    title = "Numbers by condition point. The cells named take those of the point that is chosen above."
    grid.text(first_row, 0, title, CellLook.NOTE)
    for column, name in enumerate(("#", "Condition point")):
        grid.text(first_row + 1, column, name, CellLook.HEADER)
    for place, one in enumerate(grid.varying):
        name = f"{cell_name(one.row, one.column)}: {one.title}"
        grid.text(first_row + 1, _FIRST + place, name, CellLook.HEADER)
    for number, said in enumerate(words):
        row = first_row + 2 + number
        grid.number(row, 0, number + 1, CellLook.PLAIN, "0")
        grid.text(row, _WORDS, said)
        for place, one in enumerate(grid.varying):
            look = _look_of(grid, one)
            grid.number(row, _FIRST + place, float(one.values[number]), look, _format_of(grid, one))


def _cell(grid: Grid, one: Varying) -> FormulaCell:
    cell = grid.rows[one.row][one.column]
    assert cell is not None  # put before
    return cell


def _look_of(grid: Grid, one: Varying) -> CellLook:
    return _cell(grid, one).look


def _format_of(grid: Grid, one: Varying) -> str:
    return _cell(grid, one).format


def _refer(grid: Grid, one: Varying, column: int, rows: tuple[int, int], chosen: str) -> None:
    """Make a cell take its number from the table; what is given is changed there."""
    top, last = (cell_name(row, column, fixed=True) for row in rows)
    value = float(one.values[grid.place])
    cell = _cell(grid, one)
    formula = FormulaCell(
        formula=f"=INDEX({top}:{last},{chosen})",
        number=value if np.isfinite(value) else None,
        text="" if np.isfinite(value) else ("no bound" if math.isinf(value) else DASH),
        look=cell.look,
        format=cell.format,
    )
    grid.put(one.row, one.column, formula)
