"""The table of a sheet: where the header row is, which column is which, and the rows below it."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, field

from specflow.importers.readers.grid import CellRange, Grid, address, is_blank
from specflow.importers.sheets.cells import clean
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.spelling import near
from specflow.model.finding import Finding, Severity
from specflow.model.origin import Origin
from specflow.model.sheet import EXAMPLE, SheetColumn, SheetLayout, header_key

_HEADER_ROWS = 50
_BRACKET = re.compile(r"^(?P<name>.*?)\s*[\[(](?P<inside>[^\[\]()]*)[\])]\s*$")
MARK = "mark"


@dataclass(frozen=True)
class Header:
    """The header row: its number, column numbers by column key, units found in headers, and the headers not known."""

    row: int
    columns: dict[str, int]
    units: dict[str, str] = field(default_factory=dict)
    unknown: tuple[tuple[int, str], ...] = ()
    doubled: tuple[tuple[int, str, int], ...] = ()


def find_header(grid: Grid, layout: SheetLayout) -> Header | None:
    """Return the first row that holds every required header, None when there is none in the first rows."""
    for row in range(grid.first_row, min(grid.last_row, grid.first_row + _HEADER_ROWS) + 1):
        header = read_header(grid, layout, row)
        if not layout.lacking(header.columns):
            return header
    return None


def read_header(grid: Grid, layout: SheetLayout, row: int) -> Header:
    """Match the cells of one row with the columns of the layout.

    Titles go before aliases, so that "ID" beside "Number" is the id; a header that is left over may still be what a
    column is ``also`` called ("Requirement" beside "ID" is the statement).
    """
    left = {
        place: text
        for place, value in enumerate(grid.row(row), start=1)
        if isinstance(value, str) and (text := clean(value))
    }
    columns: dict[str, int] = {}
    units: dict[str, str] = {}
    for known in _name_tables(layout):
        for place, text in list(left.items()):
            key, unit = _match(text, known)
            if key is not None and key not in columns:
                del left[place]
                columns[key] = place
                if unit:
                    units[key] = unit
    every = {name: key for known in _name_tables(layout) for name, key in known.items()}
    known_of = {place: key for place, text in left.items() if (key := _match(text, every)[0])}
    doubled = tuple((place, left[place], columns[key]) for place, key in known_of.items())
    unknown = tuple((place, text) for place, text in left.items() if place not in known_of)
    return Header(row, columns, units, unknown, doubled)


def missing_header(grid: Grid, layout: SheetLayout, sha256: str) -> Finding:
    """Say which required headers the sheet lacks, judged by the row that comes nearest."""
    rows = range(grid.first_row, min(grid.last_row, grid.first_row + _HEADER_ROWS) + 1)
    nearest = max(
        (read_header(grid, layout, row) for row in rows), key=lambda one: len(one.columns), default=None
    )
    found = nearest.columns if nearest else {}
    names = "; ".join(_names(column) for column in layout.lacking(found))
    seen = (
        f"the nearest to a header row is row {nearest.row}"
        if nearest and found
        else "no row looks like headers"
    )
    return Finding(
        rule="workbook-missing-column",
        severity=Severity.ERROR,
        subject=layout.title,
        subject_kind=layout.noun,
        message=f"the sheet {grid.name} has no column {names}",
        why=f"a sheet of this kind is read from the first row that holds every required header; {seen}",
        remedy="add the column, or rename its header to one of the names listed",
        origin=_origin(grid, sha256, nearest.row if nearest and found else None, None),
    )


def read_table(
    grid: Grid, layout: SheetLayout, header: Header, sha256: str, findings: list[Finding]
) -> list[SheetRow]:
    """Return the rows below the header that hold something and are no examples.

    Headers not known, doubled headers, hidden rows and merged cells are reported; rows touched by the last two are
    unsound.
    """
    _report_headers(grid, layout, header, sha256, findings)
    rows = [
        SheetRow(grid, layout, number, header.columns, header.units, sha256, findings)
        for number in range(header.row + 1, grid.last_row + 1)
        if number not in grid.comment_rows
        and _holds_something(grid, number, header)
        and not _is_example(grid, number, header)
    ]
    _report_hidden(rows, grid)
    _spoil_headings(rows)
    _spoil_merged(rows, grid, header)
    return rows


def _name_tables(layout: SheetLayout) -> tuple[dict[str, str], ...]:
    """Header key → column key: of titles, of aliases, and of what columns are also called."""
    return (
        {header_key(column.title): column.key for column in layout.columns},
        {
            header_key(name): column.key
            for column in layout.columns
            for name in column.aliases
            if header_key(name)
        },
        {header_key(name): column.key for column in layout.columns for name in column.also},
    )


def _match(text: str, known: dict[str, str]) -> tuple[str | None, str]:
    """The column of a header, with the unit in its brackets; a star that marks a required column does not count."""
    key = known.get(header_key(text))
    if key is not None:
        return key, ""
    parts = _BRACKET.match(text.rstrip("* "))
    if parts is None:
        return None, ""
    return known.get(header_key(parts["name"])), parts["inside"].strip()


def _names(column: SheetColumn) -> str:
    others = ", ".join(repr(alias) for alias in column.aliases)
    return f"{column.title!r}" + (f" (or {others})" if others else "")


def _holds_something(grid: Grid, number: int, header: Header) -> bool:
    return any(
        not is_blank(grid.value(number, place)) or grid.odd.at(number, place) is not None
        for key, place in header.columns.items()
        if key != MARK
    )


def _is_example(grid: Grid, number: int, header: Header) -> bool:
    mark = header.columns.get(MARK)
    return mark is not None and header_key(str(grid.value(number, mark))) == EXAMPLE


def _report_headers(
    grid: Grid, layout: SheetLayout, header: Header, sha256: str, findings: list[Finding]
) -> None:
    titles = [column.title for column in layout.columns]
    for place, text in header.unknown:
        findings.append(
            Finding(
                rule="workbook-unknown-column",
                severity=Severity.INFO,
                subject=layout.title,
                subject_kind=layout.noun,
                message=f"the column {text!r} is not known here and was not read",
                remedy="rename it to a header of the template if it should be read" + near(text, titles),
                origin=_origin(grid, sha256, header.row, place),
            )
        )
    for key, place in header.columns.items():
        if place in grid.hidden_columns:
            findings.append(
                Finding(
                    rule="workbook-hidden-column",
                    severity=Severity.WARNING,
                    subject=layout.title,
                    subject_kind=layout.noun,
                    message=f"the column {layout.column(key).title} is hidden, and was read all the same",
                    remedy="show it and check what it says, or delete it",
                    origin=_origin(grid, sha256, header.row, place),
                )
            )
    for place, text, first in header.doubled:
        findings.append(
            Finding(
                rule="workbook-doubled-column",
                severity=Severity.ERROR,
                subject=layout.title,
                subject_kind=layout.noun,
                message=f"the header {text!r} says the same as the one in {address(header.row, first)}",
                remedy="delete or rename one of the two columns",
                origin=_origin(grid, sha256, header.row, place),
            )
        )


def _report_hidden(rows: Sequence[SheetRow], grid: Grid) -> None:
    for row in rows:
        if row.number in grid.hidden_rows:
            row.sound = False
            row.report(
                "",
                f"row {row.number} is hidden, so nobody who looks at the sheet sees what it says",
                "show the row (or clear the filter) and load again, or delete it",
                rule="workbook-hidden-row",
                severity=Severity.ERROR,
            )


def _spoil_headings(rows: Sequence[SheetRow]) -> None:
    """A row of which one cell is filled gets one finding, not one for each cell that is missing."""
    for row in rows:
        filled = [
            key for key, place in row.columns.items() if not is_blank(row.grid.value(row.number, place))
        ]
        if len(filled) == 1 and len(row.layout.required) > 2 and filled[0] != MARK:
            row.fault(
                filled[0],
                f"only the column {row.layout.column(filled[0]).title} of this row is filled in",
                "fill in the row; if it is a heading, delete it, or move it above the header row",
            )
            row.spoiled.update(column.key for column in row.layout.columns)


def _spoil_merged(rows: Sequence[SheetRow], grid: Grid, header: Header) -> None:
    by_number = {row.number: row for row in rows}
    for area in grid.merged:
        keys = [key for key, place in header.columns.items() if _crosses(area, place)]
        touched = [
            by_number[number] for number in range(area.first_row, area.last_row + 1) if number in by_number
        ]
        if not keys or not touched or area.last_row <= header.row:
            continue
        first = touched[0]
        first.report(
            keys[0],
            f"the cells {area} are merged: it is not said which of their rows and columns the value belongs to",
            "split the merged cells and write the value into each cell it is meant for",
            rule="workbook-merged-cells",
            severity=Severity.ERROR,
        )
        for row in touched:
            row.sound = False
            row.spoiled.update(keys)


def _crosses(area: CellRange, place: int) -> bool:
    return area.first_column <= place <= area.last_column


def _origin(grid: Grid, sha256: str, row: int | None, column: int | None) -> Origin:
    sheet = "" if grid.name == grid.file else grid.name
    return Origin(file=grid.file, sha256=sha256, sheet=sheet, row=row, column=column)
