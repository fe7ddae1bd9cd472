"""Report → workbook. Cells hold real numbers, formatted to show what every other renderer shows.

Text is always written as text: a name that begins with ``=`` is a name, never a formula.
"""

from __future__ import annotations

import io
import re
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import UTC, datetime
from typing import Any

import xlsxwriter

from specflow.exporters.formula_sheets import write_formula_sheet
from specflow.exporters.paper import lines_in, pages_across
from specflow.model.report import Align, CellTone, Report, ReportCell, ReportColumn, ReportRow, ReportTable

title = "Workbook"
extension = ".xlsx"

# A fixed date of creation: the same report gives the same bytes. What it was made from stands in its "about" sheet.
CREATED = datetime(2000, 1, 1, tzinfo=UTC).replace(tzinfo=None)
LINE = 15  # points
MOST_LINES = 12  # a row higher than this hides its neighbours; the cell still holds all of its text
A4 = 9  # what the file format calls this paper
HEADER = 3  # row of the headers, from 0
MOST_ROWS = 1_048_000
MOST_LINKS = 60_000  # a sheet may hold 65,530 links
MOST_TEXT = 32_767  # characters in a cell
FIGURE = re.compile(r"^(?P<sign>[+-]?)(?P<digits>\d+(?:\.(?P<decimals>\d+))?)(?P<unit> .*)?$")
FILLS: dict[CellTone, dict[str, Any]] = {
    CellTone.PLAIN: {},
    CellTone.GOOD: {"bg_color": "#DDEFE3"},
    CellTone.DOUBTFUL: {"bg_color": "#FBEFD0"},
    CellTone.BAD: {"bg_color": "#F6D5CF", "bold": True},
    CellTone.QUIET: {"font_color": "#777777"},
}


def render(report: Report) -> bytes:
    """Return the workbook: a sheet a table (several where it has more rows than a sheet may), headers frozen."""
    buffer = io.BytesIO()
    book = xlsxwriter.Workbook(
        buffer, {"in_memory": True, "strings_to_formulas": False, "strings_to_urls": False}
    )
    book.set_properties({"title": report.title, "comments": report.subtitle, "created": CREATED})
    styles = _Styles(book)
    parts = _parts(report)
    targets = _targets(parts)
    for part in parts:
        _write_part(book, part, styles, targets)
    names = [part.sheet for part in parts]
    for sheet in report.sheets:
        names.append(sheet_name(sheet.title, names))
        write_formula_sheet(book, sheet, names[-1])
    book.close()
    return buffer.getvalue()


@dataclass(frozen=True, slots=True)
class _Part:
    """The rows of a table that go on one sheet."""

    table: ReportTable
    sheet: str
    rows: tuple[ReportRow, ...]


def _parts(report: Report) -> list[_Part]:
    names: list[str] = []
    parts = []
    for table in report.tables:
        starts = range(0, max(len(table.rows), 1), MOST_ROWS)
        for number, start in enumerate(starts, start=1):
            title = table.title if len(starts) == 1 else f"{table.title[:24]} ({number})"
            names.append(sheet_name(title, names))
            parts.append(_Part(table, names[-1], table.rows[start : start + MOST_ROWS]))
    return parts


def _targets(parts: list[_Part]) -> dict[str, str]:
    """Return where links lead: the first row about something, table by table."""
    targets: dict[str, str] = {}
    for part in parts:
        for offset, row in enumerate(part.rows):
            place = f"internal:'{part.sheet.replace(chr(39), chr(39) * 2)}'!A{HEADER + 2 + offset}"
            targets.setdefault(f"{part.table.key}/{row.id}", place)
    return targets


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
            if align is Align.RIGHT:
                options["indent"] = 1  # or figures touch the words of the next column
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


def _write_part(book: Any, part: _Part, styles: _Styles, targets: dict[str, str]) -> None:
    table = part.table
    sheet = book.add_worksheet(part.sheet)
    sheet.write_string(0, 0, table.title, styles.heading("title"))
    if table.intro:
        last = max(1, min(7, len(table.columns) - 1))
        sheet.merge_range(1, 0, 1, last, "", styles.heading("intro"))
        sheet.write_string(1, 0, table.intro, styles.heading("intro"))
        sheet.set_row(1, 48)
    for place, column in enumerate(table.columns):
        name = column.title + (f"\n({column.explains})" if column.explains else "")
        sheet.write_string(HEADER, place, name, styles.heading("header"))
        sheet.set_column(place, place, column.width)
    sheet.set_row(HEADER, LINE * max(_title_lines(column) for column in table.columns))
    for offset, row in enumerate(part.rows):
        for place, cell in enumerate(row.cells):
            depth = row.depth if place == 0 else 0
            look = styles.get(cell.tone, table.columns[place].align, figure_format(cell), depth)
            _write_cell(sheet, HEADER + 1 + offset, place, cell, look, targets)
        lines = max(
            lines_in(cell.text, column.width) for cell, column in zip(row.cells, table.columns, strict=True)
        )
        if lines > 1:
            sheet.set_row(HEADER + 1 + offset, LINE * min(lines, MOST_LINES))
    sheet.freeze_panes(HEADER + 1, 1)
    if part.rows:
        sheet.autofilter(HEADER, 0, HEADER + len(part.rows), len(table.columns) - 1)
    _set_pages(sheet, table)


def _title_lines(column: ReportColumn) -> int:
    room = column.width - 1  # bold
    return lines_in(column.title, room) + (lines_in(f"({column.explains})", room) if column.explains else 0)


def _set_pages(sheet: Any, table: ReportTable) -> None:
    """Print whole columns on each page, large enough to be read; what the row is about stands on all of them."""
    sheet.set_landscape()
    sheet.set_paper(A4)
    sheet.set_margins(left=0.4, right=0.4, top=0.5, bottom=0.6)
    sheet.fit_to_pages(pages_across([column.width for column in table.columns]), 0)
    sheet.repeat_rows(HEADER)
    sheet.repeat_columns(0)
    sheet.set_footer("&L&A&RPage &P of &N")


def _write_cell(
    sheet: Any, row: int, place: int, cell: ReportCell, look: Any, targets: dict[str, str]
) -> None:
    target = targets.get(cell.link, "")
    if cell.number is not None and figure_format(cell):
        sheet.write_number(row, place, cell.number, look)
    elif target and row < MOST_LINKS and cell.text:
        sheet.write_url(row, place, target, look, _fitting(cell.text))
    elif cell.text:
        sheet.write_string(row, place, _fitting(cell.text), look)
    else:
        sheet.write_blank(row, place, None, look)


def _fitting(text: str) -> str:
    return text if len(text) <= MOST_TEXT else text[: MOST_TEXT - 1] + "…"


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


def sheet_name(title: str, taken: Sequence[str] = ()) -> str:
    """Return a title as a sheet name: at most 31 characters, none that a name may not hold, and not taken yet."""
    plain = re.sub(r"[\[\]:*?/\\]", " ", title).strip().strip("'")[:31].strip() or "Sheet"
    known = {name.casefold() for name in taken}
    name, number = plain, 1
    while name.casefold() in known:
        number += 1
        name = f"{plain[:26]} ({number})"
    return name
