"""Cells that hold for more than their own row: merged over several rows, or with blanks below that mean the same.

The cell that a row takes its value from may stand in a row that is not read itself (hidden, skipped): a label there is
that of its group all the same, and no row below it may fall to the group above. Only a blank cell takes the one above;
one that cannot be read, or a dash, says nothing and hands down nothing else.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.importers.measured.cells import Rows
from specflow.importers.measured.column import ColumnMeaning
from specflow.importers.measured.result import Question
from specflow.importers.measured.tables import FoundTable
from specflow.importers.readers import CellRange
from specflow.model.columns import TextColumn

_DITTO = frozenset(('"', "''", "″", "〃", "”", "do.", "ditto", "dto.", "dto"))


def ditto_question(meaning: ColumnMeaning, words: TextColumn) -> Question | None:
    """A question where marks stand for the word above: written out, or blank with fill_down, they have one meaning."""
    marks = [label for label in words.labels if label.strip().casefold() in _DITTO]
    if not marks:
        return None
    remedy = "write the word into each row; or leave the cells blank, with fill_down = true for the column in a mapping"
    return meaning.asks(f"{marks[0]!r} stands for the word above", remedy)


def rows_of_values(
    table: FoundTable, column: int, rows: Rows, fill_down: bool, notes: list[str]
) -> tuple[Rows, NDArray[np.intp] | None]:
    """The rows in which the values of a column stand, each once, and which of them each of ``rows`` takes.

    The second is None where every row has its own. ``notes`` are told of merged cells.
    """
    source = rows
    for area in _merged(table, column):
        inside = (rows > area.first_row) & (rows <= area.last_row)
        if inside.any():
            source = np.where(inside, area.first_row, source)
            first, last = (
                table.grid.address(area.first_row, column),
                table.grid.address(area.last_row, column),
            )
            notes.append(f"merged cells {first}:{last}: the value holds for all their rows")
    if fill_down:
        source = _filled(table, column, rows, source)
    if source is rows:
        return rows, None
    own, places = np.unique(source, return_inverse=True)
    return own.astype(np.int32), places


def _merged(table: FoundTable, column: int) -> list[CellRange]:
    return [
        area
        for area in table.grid.merged
        if area.first_column == area.last_column == column and area.first_row >= table.first_row
    ]


def _filled(table: FoundTable, column: int, rows: Rows, source: Rows) -> Rows:
    """Where a cell is blank, the row of the nearest one above that is not; sums, repeated headers are passed over."""
    filled = table.cells(column).filled
    usable = filled.copy()
    hidden = np.array(sorted(table.grid.hidden_rows), np.int32)
    passed = np.setdiff1d(np.setdiff1d(table.rows, rows), hidden)
    stepped = np.array([remark.row for remark in table.stepped_over], np.int32)
    for other in (passed, stepped):
        inside = other[(other >= table.first_row) & (other < table.first_row + len(usable))]
        usable[inside - table.first_row] = False
    last = np.maximum.accumulate(np.where(usable, np.arange(len(usable)), -1))
    places = source - table.first_row
    above = last[places]
    return np.where(~filled[places] & (above >= 0), above + table.first_row, source)
