"""Worksheets that calculate, written into a workbook: formulas with their cached values.

The workbook is made by ``xlsx``, which hands it in; no spreadsheet library is needed here.
"""

from __future__ import annotations

from collections.abc import Sequence
from textwrap import wrap
from typing import Any

from specflow.model.formula_sheet import CellLook, FormulaCell, FormulaSheet
from specflow.model.origin import column_letters

LOOKS: dict[CellLook, dict[str, Any]] = {
    CellLook.PLAIN: {},
    CellLook.TITLE: {"bold": True, "font_size": 14},
    CellLook.NOTE: {"italic": True},
    CellLook.HEADER: {"bold": True, "bottom": 1, "text_wrap": True, "valign": "top", "bg_color": "#E8EDF2"},
    CellLook.INPUT: {"bg_color": "#F3EFE2"},
    CellLook.FORMULA: {},
    CellLook.TOOL: {"font_color": "#555F68"},
    CellLook.DIFFERENCE: {"font_color": "#555F68", "italic": True},
}


def write_formula_sheet(book: Any, sheet: FormulaSheet, name: str) -> None:
    """Add one worksheet that calculates to the workbook."""
    target = book.add_worksheet(name)
    formats: dict[tuple[CellLook, str], Any] = {}
    for column, width in enumerate(sheet.widths):
        target.set_column(column, column, width)
    for row, cells in enumerate(sheet.rows):
        if any(cell is not None and cell.look is CellLook.HEADER for cell in cells):
            target.set_row(row, _height(cells, sheet.widths))
        for column, cell in enumerate(cells):
            if cell is None:
                continue
            look = (cell.look, cell.format if cell.number is not None or cell.formula else "")
            if look not in formats:
                formats[look] = book.add_format(LOOKS[cell.look] | _number_look(*look))
            _write(target, row, column, cell, formats[look])
    for one in sheet.choices:
        letters = column_letters(one.list_column + 1)
        source = f"=${letters}${one.first_row + 1}:${letters}${one.last_row + 1}"
        target.data_validation(
            one.row, one.column, one.row, one.column, {"validate": "list", "source": source}
        )
    if sheet.frozen_rows:
        target.freeze_panes(sheet.frozen_rows, 0)
    target.set_landscape()
    target.fit_to_pages(1, 0)


def _number_look(look: CellLook, number_format: str) -> dict[str, Any]:
    if not number_format:
        return {}
    aligned = {"align": "left"} if look is CellLook.PLAIN else {"align": "right"}
    room = "" if "E" in number_format else "_)"
    return {"num_format": number_format + room, **aligned}


def _height(cells: Sequence[FormulaCell | None], widths: Sequence[int]) -> int:
    """Return the height in points of a row of headers: programs do not all fit it to wrapped text by themselves."""
    lines = [
        len(wrap(cell.text, max(width - 1, 4)))
        for cell, width in zip(cells, widths, strict=False)
        if cell is not None and cell.text
    ]
    return 14 * max(lines, default=1) + 3


def _write(target: Any, row: int, column: int, cell: FormulaCell, look: Any) -> None:
    if cell.formula:
        value = cell.number if cell.number is not None else cell.text
        target.write_formula(row, column, cell.formula, look, value)
    elif cell.number is not None:
        target.write_number(row, column, cell.number, look)
    else:
        target.write_string(row, column, cell.text, look)
