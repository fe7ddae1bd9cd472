"""Worksheets that calculate, written into a workbook: formulas with their cached values.

The workbook is made by ``xlsx``, which hands it in; no spreadsheet library is needed here.
"""

from __future__ import annotations

from typing import Any

from specflow.model.formula_sheet import CellLook, FormulaCell, FormulaSheet

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
        for column, cell in enumerate(cells):
            if cell is None:
                continue
            look = (cell.look, cell.format if cell.number is not None or cell.formula else "")
            if look not in formats:
                formats[look] = book.add_format(
                    LOOKS[cell.look] | ({"num_format": look[1]} if look[1] else {})
                )
            _write(target, row, column, cell, formats[look])
    if sheet.frozen_rows:
        target.freeze_panes(sheet.frozen_rows, 0)
    target.set_landscape()
    target.fit_to_pages(1, 0)


def _write(target: Any, row: int, column: int, cell: FormulaCell, look: Any) -> None:
    if cell.formula:
        value = cell.number if cell.number is not None else cell.text
        target.write_formula(row, column, cell.formula, look, value)
    elif cell.number is not None:
        target.write_number(row, column, cell.number, look)
    else:
        target.write_string(row, column, cell.text, look)
