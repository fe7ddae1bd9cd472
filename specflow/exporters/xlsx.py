"""Report → workbook. Cells hold real numbers, formatted to show what every other renderer shows.

Text is always written as text: a name that begins with ``=`` is a name, never a formula.
"""

from __future__ import annotations

import io
import re
from datetime import UTC, datetime
from typing import Any

import xlsxwriter

from specflow.model.report import Align, CellTone, Report, ReportCell, ReportTable

title = "Workbook"
extension = ".xlsx"

# A fixed date of creation: the same report gives the same bytes. What it was made from stands in its "about" sheet.
CREATED = datetime(2000, 1, 1, tzinfo=UTC).replace(tzinfo=None)
MOST_ROWS = 1_048_000
FIGURE = re.compile(r"^(?P<sign>[+-]?)(?P<digits>\d+(?:\.(?P<decimals>\d+))?)(?P<unit>[^\de].*)?$")
FILLS = {
    CellTone.PLAIN: {},
    CellTone.GOOD: {"bg_color": "#DDEFE3"},
    CellTone.DOUBTFUL: {"bg_color": "#FBEFD0"},
    CellTone.BAD: {"bg_color": "#F6D5CF", "bold": True},
    CellTone.QUIET: {"font_color": "#777777"},
}


def render(report: Report) -> bytes:
    """Return the workbook: a sheet a table, headers frozen and filterable."""
    buffer = io.BytesIO()
    book = xlsxwriter.Workbook(
        buffer, {"in_memory": True, "strings_to_formulas": False, "strings_to_urls": False}
    )
    book.set_properties({"title": report.title, "comments": report.subtitle, "created": CREATED})
    styles = _Styles(book)
    for table in report.tables:
        _write_table(book, table, styles)
    book.close()
    return buffer.getvalue()


class _Styles:
    """Cell formats by what they look like; a workbook may hold only so many."""

    def __init__(self, book: Any) -> None:
        self._book = book
        self._made: dict[tuple[object, ...], Any] = {}

    def get(self, tone: CellTone, align: Align, number_format: str = "", depth: int = 0) -> Any:
        key = (tone, align, number_format, depth)
        if key not in self._made:
            options: dict[str, Any] = {"valign": "top", "text_wrap": not number_format, **FILLS[tone]}
            options["align"] = align.value
            if number_format:
                options["num_format"] = number_format
            if depth:
                options["indent"] = min(depth, 15)
            self._made[key] = self._book.add_format(options)
        return self._made[key]

    def heading(self, kind: str) -> Any:
        looks: dict[str, dict[str, Any]] = {
            "title": {"bold": True, "font_size": 14},
            "intro": {"italic": True, "text_wrap": True, "valign": "top"},
            "header": {"bold": True, "bottom": 1, "text_wrap": True, "valign": "top", "bg_color": "#E8EDF2"},
        }
        if (kind,) not in self._made:
            self._made[(kind,)] = self._book.add_format(looks[kind])
        return self._made[(kind,)]


def _write_table(book: Any, table: ReportTable, styles: _Styles) -> None:
    sheet = book.add_worksheet(sheet_name(table.title))
    sheet.write_string(0, 0, table.title, styles.heading("title"))
    if table.intro:
        sheet.merge_range(
            1, 0, 1, max(1, min(7, len(table.columns) - 1)), table.intro, styles.heading("intro")
        )
        sheet.set_row(1, 48)
    header = 3
    for place, column in enumerate(table.columns):
        name = column.title + (f"\n({column.explains})" if column.explains else "")
        sheet.write_string(header, place, name, styles.heading("header"))
        sheet.set_column(place, place, column.width)
    for offset, row in enumerate(table.rows[:MOST_ROWS]):
        for place, cell in enumerate(row.cells):
            depth = row.depth if place == 0 else 0
            _write_cell(sheet, header + 1 + offset, place, cell, table.columns[place].align, depth, styles)
    sheet.freeze_panes(header + 1, 1)
    if table.rows:
        sheet.autofilter(header, 0, header + len(table.rows), len(table.columns) - 1)
    sheet.set_landscape()
    sheet.fit_to_pages(1, 0)
    sheet.repeat_rows(header)


def _write_cell(
    sheet: Any, row: int, place: int, cell: ReportCell, align: Align, depth: int, styles: _Styles
) -> None:
    number_format = figure_format(cell)
    if cell.number is not None and number_format:
        sheet.write_number(row, place, cell.number, styles.get(cell.tone, align, number_format, depth))
    elif cell.text:
        sheet.write_string(row, place, cell.text, styles.get(cell.tone, align, "", depth))
    else:
        sheet.write_blank(row, place, None, styles.get(cell.tone, align, "", depth))


def figure_format(cell: ReportCell) -> str:
    """Return the number format under which the number shows as the cell's text, "" where none does."""
    found = FIGURE.match(cell.text) if cell.number is not None else None
    if found is None or '"' in cell.text:
        return ""
    decimals = len(found["decimals"] or "")
    body = "0" + ("." + "0" * decimals if decimals else "")
    unit = f'"{found["unit"]}"' if found["unit"] else ""
    plus = "+" if found["sign"] == "+" else ""
    return f"{plus}{body}{unit};-{body}{unit}"


def sheet_name(title: str) -> str:
    """Return a title as a sheet name: at most 31 characters, without those a sheet name may not hold."""
    return re.sub(r"[\[\]:*?/\\]", " ", title)[:31].strip()
