"""The workbook template: empty sheets with guidance, drop-downs and a filled example row each.

Every cell is formatted as text, so that a spreadsheet program does not turn the id ``MAR-8`` into a date or ``10 %``
into 0.1.
"""

from __future__ import annotations

from collections.abc import Sequence
from datetime import datetime
from io import BytesIO
from pathlib import Path
from textwrap import wrap
from typing import TYPE_CHECKING, Any

from specflow.exporters.files import write_file
from specflow.exporters.guide import LIMITS_HEAD, PARAMETERS_HEAD, limit_pairs, parameter_pairs
from specflow.model.sheet import GUIDE, SheetColumn, SheetLayout
from specflow.parameters import load_dictionary

if TYPE_CHECKING:
    from xlsxwriter import Workbook
    from xlsxwriter.worksheet import Worksheet

_GUIDANCE_ROW, _HEADER_ROW, _FIRST_ROW = 1, 2, 3
_ROWS_TO_FILL = 2000
_NAME_WIDTH, _TEXT_WIDTH = 26, 110
_CREATED = datetime(2026, 1, 1)  # a fixed date: the same layouts give the same bytes

_LEADING = (
    "One sheet for each kind of thing. Fill in only the sheets that you need; several workbooks may be loaded one "
    "after another, and a workbook may be loaded again after edits: what changed is shown before anything is stored.",
    "Sheets and columns are found by their names, in any order. Rows above the headers are not read, and columns that "
    "are not known are reported and left out. Columns you do not need may be deleted.",
    "Rows marked 'example' in the first column are not loaded. Empty the mark to load them, or delete the rows.",
    "A limit is written as you would write it, with its unit. It is said back in words when the workbook is loaded. "
    "Spellings of limits, masks among them, and the parameters that are known stand below.",
    "Write dates as 2026-03-31. Do not merge cells and do not hide rows: both are refused with their address.",
    "Status that is computed from this workbook is engineering evidence, not a certificate.",
)


def write_template(layouts: Sequence[SheetLayout], path: str | Path) -> None:
    """Write the template with one sheet a layout and the guide in front.

    Raises FileError when the file exists already (it may be filled in) or cannot be written.
    """
    write_file(Path(path), template_bytes(layouts), remedy="it may be filled in; name another one")


def template_bytes(layouts: Sequence[SheetLayout]) -> bytes:
    """Return the template as bytes; the same layouts give the same bytes."""
    from xlsxwriter import Workbook  # only who writes a template pays for it

    stream = BytesIO()
    book = Workbook(stream, {"in_memory": True, "strings_to_formulas": False, "strings_to_urls": False})
    book.set_properties({"title": "Project workbook", "created": _CREATED})
    formats = _formats(book)
    _write_guide(book.add_worksheet(GUIDE), layouts, formats)
    for layout in layouts:
        _write_sheet(book.add_worksheet(layout.title), layout, formats)
    book.close()
    return stream.getvalue()


def _formats(book: Workbook) -> dict[str, Any]:
    top = {"valign": "top", "text_wrap": True}
    head = {**top, "bold": True, "bottom": 1}
    return {
        "title": book.add_format({"bold": True, "font_size": 14}),
        "text": book.add_format({**top}),
        "guidance": book.add_format({**top, "italic": True, "font_size": 9, "font_color": "#555555"}),
        "header": book.add_format({**head, "bg_color": "#E8EDF2"}),
        "needed": book.add_format({**head, "bg_color": "#C9D8E6"}),
        "cell": book.add_format({**top, "num_format": "@"}),
        "example": book.add_format({**top, "num_format": "@", "italic": True, "font_color": "#777777"}),
        "name": book.add_format({"bold": True, "valign": "top"}),
        "word": book.add_format({**top, "num_format": "@"}),
    }


def _write_guide(sheet: Worksheet, layouts: Sequence[SheetLayout], formats: dict[str, Any]) -> None:
    sheet.set_column(0, 0, _NAME_WIDTH)
    sheet.set_column(1, 1, _TEXT_WIDTH)
    sheet.write_string(0, 0, GUIDE, formats["title"])
    sheet.hide_gridlines(2)
    row = 2
    for paragraph in _LEADING:
        sheet.set_row(row, _height([(paragraph, _TEXT_WIDTH)]))
        sheet.write_string(row, 1, paragraph, formats["text"])
        row += 1
    row += 1
    sheet.write_string(row, 0, "Sheet", formats["header"])
    sheet.write_string(row, 1, "What stands in it", formats["header"])
    for layout in layouts:
        row += 1
        needed = ", ".join(column.title for column in layout.required)
        text = f"{layout.intro} Columns that must be there: {needed}."
        sheet.set_row(row, _height([(text, _TEXT_WIDTH)]))
        sheet.write_url(row, 0, f"internal:'{layout.title}'!A1", formats["name"], layout.title)
        sheet.write_string(row, 1, text, formats["text"])
    dictionary = load_dictionary()
    row = _write_pairs(sheet, row + 2, LIMITS_HEAD, limit_pairs(dictionary), formats)
    _write_pairs(sheet, row + 1, PARAMETERS_HEAD, parameter_pairs(dictionary), formats)


def _write_pairs(
    sheet: Worksheet,
    row: int,
    head: tuple[str, str],
    pairs: Sequence[tuple[str, str]],
    formats: dict[str, Any],
) -> int:
    """Write a head and its pairs from a row on; return the row below."""
    for place, text in enumerate(head):
        sheet.write_string(row, place, text, formats["header"])
    for below, (name, text) in enumerate(pairs, start=row + 1):
        sheet.set_row(below, _height([(name, _NAME_WIDTH), (text, _TEXT_WIDTH)]))
        sheet.write_string(below, 0, name, formats["word"])
        sheet.write_string(below, 1, text, formats["text"])
    return row + len(pairs) + 1


def _write_sheet(sheet: Worksheet, layout: SheetLayout, formats: dict[str, Any]) -> None:
    sheet.write_string(0, 0, f"{layout.title}: {layout.intro}", formats["name"])
    sheet.set_row(
        _GUIDANCE_ROW, _height([(_guidance(column), column.width) for column in layout.offered], 12)
    )
    sheet.set_row(_HEADER_ROW, _height([(column.title, column.width - 2) for column in layout.offered]))
    for place, column in enumerate(layout.offered):
        sheet.set_column(place, place, column.width, formats["cell"])
        sheet.write_string(_GUIDANCE_ROW, place, _guidance(column), formats["guidance"])
        sheet.write_string(
            _HEADER_ROW, place, column.title, formats["needed" if column.required else "header"]
        )
        _add_choices(sheet, place, column)
    for row, example in enumerate(layout.examples(), start=_FIRST_ROW):
        sheet.set_row(
            row, _height([(example.get(column.key, ""), column.width) for column in layout.offered])
        )
        for place, column in enumerate(layout.offered):
            sheet.write_string(row, place, example.get(column.key, ""), formats["example"])
    sheet.freeze_panes(_FIRST_ROW, _columns_to_freeze(layout))


def _guidance(column: SheetColumn) -> str:
    return f"{'Needed. ' if column.required else ''}{column.guidance}".strip()


def _add_choices(sheet: Worksheet, place: int, column: SheetColumn) -> None:
    """A drop-down; where other words are allowed, it only offers."""
    if not column.choices:
        return
    sheet.data_validation(
        _FIRST_ROW,
        place,
        _FIRST_ROW + _ROWS_TO_FILL,
        place,
        {
            "validate": "list",
            "source": [str(choice) for choice in column.choices],
            "show_error": not column.open_choices,
            "error_title": column.title,
            "error_message": "Choose one of the words of the list.",
        },
    )


def _columns_to_freeze(layout: SheetLayout) -> int:
    """The mark and the first column of the row's own stay in view; more would crowd a small screen."""
    return min(2, len(layout.offered))


def _height(cells: Sequence[tuple[str, int]], line: int = 15) -> int:
    """Height in points of a row of wrapped texts: spreadsheet programs do not all fit it when a file is opened.

    ``cells`` are texts with the width of their column, in characters.
    """
    lines = max(sum(len(wrap(line, max(width, 4))) for line in text.split("\n")) for text, width in cells)
    return line * max(lines, 1) + 3
