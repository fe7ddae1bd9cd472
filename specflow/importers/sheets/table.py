"""The table of a sheet: the rows below the header row, and what is wrong with the sheet as a whole."""

from __future__ import annotations

from collections.abc import Sequence

from specflow.importers.readers.grid import Grid, is_blank
from specflow.importers.readers.places import CellRange, address
from specflow.importers.sheets.header import HEADER_ROWS, Header, read_header
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.spelling import near
from specflow.model.finding import Finding, Severity
from specflow.model.origin import Origin
from specflow.model.sheet import EXAMPLE, SheetColumn, SheetLayout, header_key

MARK = "mark"
_FEW_HEADERS = 15


def missing_header(grid: Grid, layout: SheetLayout, sha256: str) -> Finding:
    """Say which required headers the sheet lacks, judged by the row that comes nearest."""
    rows = range(grid.first_row, min(grid.last_row, grid.first_row + HEADER_ROWS) + 1)
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
    left = [column.title for column in layout.offered if column.key not in {MARK, *header.columns}]
    for place, text in header.unknown:
        findings.append(
            Finding(
                rule="workbook-unknown-column",
                severity=Severity.INFO,
                subject=layout.title,
                subject_kind=layout.noun,
                message=f"the column {text!r} is not known here and was not read",
                remedy="rename it to a header of the template if it should be read" + _candidates(text, left),
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
    for double in header.doubled:
        findings.append(
            Finding(
                rule="workbook-doubled-column",
                severity=Severity.WARNING if double.certain else Severity.ERROR,
                subject=layout.title,
                subject_kind=layout.noun,
                message=(
                    f"the header {double.text!r} says the same as the one in {address(header.row, double.first)}"
                    + (", which was read" if double.certain else "")
                ),
                remedy="delete or rename one of the two columns",
                origin=_origin(grid, sha256, header.row, double.place),
            )
        )


def _candidates(text: str, left: Sequence[str]) -> str:
    """The headers that an unknown one may mean: those near to it, else all that the sheet lacks, if they are few."""
    nearest = near(text, left)
    if nearest or not left or len(left) > _FEW_HEADERS:
        return nearest
    return f"; this sheet has none of: {', '.join(left)}"


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
    """A row of which one cell is filled gets one finding, not one for each cell that is missing.

    Where few columns are needed, that cell may be the row (a block has nothing but its id): then only another cell
    that stands alone is a heading or a note.
    """
    for row in rows:
        filled = [
            key for key, place in row.columns.items() if not is_blank(row.grid.value(row.number, place))
        ]
        needed = {column.key for column in row.layout.required}
        lone = len(filled) == 1 and filled[0] != MARK
        if lone and (len(needed) > 2 or filled[0] not in needed):
            row.fault(
                filled[0],
                f"only the column {row.layout.column(filled[0]).title} of this row is filled in",
                "fill in the row; if it is a heading or a note, delete it, or move it above the header row",
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
