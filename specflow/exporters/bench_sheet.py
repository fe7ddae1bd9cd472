"""A test sheet as a workbook: cells as they are laid out, protected but for the open ones, with its hidden identity.

Nothing is computed here. Protection has no password: it keeps cells from being changed by accident, and the identity
tells when one was changed all the same.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from datetime import datetime
from io import BytesIO
from textwrap import wrap
from typing import TYPE_CHECKING, Any

from specflow.model.bench_sheet import (
    GUIDE_SHEET,
    IDENTITY_SHEET,
    LISTS_SHEET,
    BenchCell,
    BenchSheet,
    BenchWorkbook,
    identity_lines,
    identity_of,
)
from specflow.model.origin import column_letters

if TYPE_CHECKING:
    from xlsxwriter import Workbook
    from xlsxwriter.worksheet import Worksheet

_CREATED = datetime(2026, 1, 1)  # a fixed date: the same points give the same bytes
_TEXT_WIDTH = 74  # signs a line: a single column wider than the page is cut by some programs, not scaled
_DATE = "yyyy-mm-dd"
_ALLOWED = {
    "select_locked_cells": True,
    "select_unlocked_cells": True,
    "format_columns": True,
    "format_rows": True,
}


def bench_sheet_bytes(workbook: BenchWorkbook, remarks: Sequence[str]) -> bytes:
    """Return the workbook; the same test sheet gives the same bytes. ``remarks`` are offered, others may be written."""
    from xlsxwriter import Workbook  # only who writes a test sheet pays for it

    stream = BytesIO()
    book = Workbook(stream, {"in_memory": True, "strings_to_formulas": False, "strings_to_urls": False})
    book.set_properties({"title": f"Test sheet of {workbook.project}", "created": _CREATED})
    formats = _formats(book)
    _write_guide(book.add_worksheet(GUIDE_SHEET), workbook, formats)
    sheets = [(sheet, book.add_worksheet(sheet.name)) for sheet in workbook.sheets]
    lists = _write_lists(book.add_worksheet(LISTS_SHEET), workbook, remarks)
    for sheet, worksheet in sheets:
        _write_sheet(worksheet, sheet, formats, lists)
    _write_identity(book.add_worksheet(IDENTITY_SHEET), workbook)
    sheets[0][1].activate()
    book.close()
    return stream.getvalue()


def _formats(book: Workbook) -> dict[str, Any]:
    plain = {"valign": "top", "text_wrap": True}
    edge = {**plain, "border": 1, "border_color": "#C8C8C8"}
    filled = {**edge, "locked": False, "bg_color": "#FFF7D6"}
    return {
        "title": book.add_format({"bold": True, "font_size": 14}),
        "text": book.add_format({"valign": "top"}),
        "wrapped": book.add_format(plain),
        "caution": book.add_format({"bold": True, "font_color": "#9C2A00"}),
        "label": book.add_format({"bold": True, "valign": "top"}),
        "header": book.add_format({**edge, "bold": True, "bg_color": "#E8EDF2"}),
        "heading": book.add_format({"bold": True, "top": 2, "bg_color": "#F3F3F3"}),
        "cell": book.add_format(edge),
        "number": book.add_format({**edge, "align": "right", "indent": 1}),
        "fixed": book.add_format({**edge, "bold": True}),
        "entry": book.add_format(filled),
        "date": book.add_format({**filled, "num_format": _DATE}),
    }


def _write_guide(sheet: Worksheet, workbook: BenchWorkbook, formats: Mapping[str, Any]) -> None:
    sheet.hide_gridlines(2)
    sheet.set_column(0, 0, _TEXT_WIDTH)
    sheet.write_string(0, 0, f"Test sheet of {workbook.project}", formats["title"])
    made = f"Written at project revision {workbook.revision}, judged as of {workbook.as_of}."
    count = len(workbook.sheets)
    counted = f"{workbook.points} values on {count} {'sheet' if count == 1 else 'sheets'}."
    texts = [made, counted, *workbook.guide]
    texts += ["Not on this test sheet:", *workbook.notes] if workbook.notes else []
    for row, text in enumerate(texts, 2):
        sheet.set_row(row, 15 * max(len(wrap(text, _TEXT_WIDTH)), 1) + 3)
        sheet.write_string(row, 0, text, formats["wrapped"])
    sheet.fit_to_pages(1, 0)
    sheet.protect("", _ALLOWED)


def _write_lists(sheet: Worksheet, workbook: BenchWorkbook, remarks: Sequence[str]) -> dict[str, str]:
    """Write what drop-downs offer to a hidden sheet (a list within a cell may have 255 signs); return their ranges."""
    ranges: dict[str, str] = {}
    lists = {"remark": remarks, **{f"item {sheet.name}": sheet.items for sheet in workbook.sheets}}
    for column, (name, words) in enumerate(lists.items()):
        for row, word in enumerate(words):
            sheet.write_string(row, column, word)
        if words:
            letters = column_letters(column + 1)
            ranges[name] = f"='{LISTS_SHEET}'!${letters}$1:${letters}${len(words)}"
    sheet.protect()
    sheet.hide()
    return ranges


def _write_sheet(
    worksheet: Worksheet, sheet: BenchSheet, formats: Mapping[str, Any], lists: Mapping[str, str]
) -> None:
    for place, column in enumerate(sheet.columns):
        worksheet.set_column(place, place, column.width)
    heights: dict[int, int] = {}
    for cell in sheet.cells:
        _write_cell(worksheet, cell, formats)
        if cell.kind in ("cell", "header") and isinstance(cell.value, str):
            width = sheet.columns[cell.column - 1].width
            heights[cell.row] = max(heights.get(cell.row, 1), len(wrap(cell.value, max(width - 1, 4))))
    for row, lines in heights.items():
        worksheet.set_row(row - 1, 15 * lines + 3)
    for cell in sheet.cells:
        if cell.is_open:
            _validate(worksheet, cell, lists, f"item {sheet.name}")
    worksheet.freeze_panes(sheet.header_row, 3)
    worksheet.set_landscape()
    worksheet.fit_to_pages(1, 0)
    worksheet.repeat_rows(sheet.header_row - 1)
    worksheet.protect("", _ALLOWED)


def _write_cell(worksheet: Worksheet, cell: BenchCell, formats: Mapping[str, Any]) -> None:
    place = cell.row - 1, cell.column - 1
    if cell.is_open:
        style = formats["date" if cell.kind == "date" else "entry"]
    else:
        style = formats["fixed" if cell.kind == "item" else cell.kind]
    if cell.value is None:
        worksheet.write_blank(*place, None, style)
    elif isinstance(cell.value, str):
        worksheet.write_string(*place, cell.value, style)
    else:
        worksheet.write_number(*place, cell.value, formats["number"] if cell.kind == "cell" else style)


def _validate(worksheet: Worksheet, cell: BenchCell, lists: Mapping[str, str], items: str) -> None:
    """Offer words, or hold an entry to what can be meant; a reading may be a bound in words, so it is left free."""
    rules: dict[str, dict[str, Any]] = {
        "item": {"validate": "list", "source": lists.get(items, ""), "show_error": False},
        "remark": {"validate": "list", "source": lists.get("remark", ""), "show_error": False},
        "date": {
            "validate": "date",
            "criteria": ">=",
            "value": datetime(2000, 1, 1),
            "error_message": "Write a date, as 2026-03-31.",
        },
        "uncertainty": {
            "validate": "decimal",
            "criteria": ">=",
            "value": 0,
            "error_message": "Write the expanded uncertainty (k = 2) as a number.",
        },
        "range": {
            "validate": "decimal",
            "criteria": "between",
            "minimum": cell.low or 0,
            "maximum": cell.high or 0,
            "input_title": "Write the value that it was",
            "input_message": f"any value from {cell.low or 0:g} to {cell.high or 0:g}",
        },
    }
    rule = rules.get(cell.kind)
    if cell.kind == "range" and cell.low is None:
        rule = {
            "validate": "any",
            "input_title": "Write down what it was",
            "input_message": "the limit needs it",
        }
    if rule is not None and rule.get("source", "given"):
        worksheet.data_validation(cell.row - 1, cell.column - 1, cell.row - 1, cell.column - 1, rule)


def _write_identity(sheet: Worksheet, workbook: BenchWorkbook) -> None:
    for row, line in enumerate(identity_lines(identity_of(workbook))):
        sheet.write_string(row, 0, line)
    sheet.protect()
    sheet.hide()
