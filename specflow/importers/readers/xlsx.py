"""Workbooks (.xlsx, .xlsm): values by python-calamine in bulk, beside them the scan of each sheet for odd cells."""

from __future__ import annotations

import io

from python_calamine import CalamineError, CalamineWorkbook, SheetVisibleEnum

from specflow.errors import FileError
from specflow.importers.readers.archive import Archive
from specflow.importers.readers.book import read_book
from specflow.importers.readers.grid import CellRange, Grid, OddCells, OddKind, address
from specflow.importers.readers.sheet_scan import SheetScan, scan_sheet
from specflow.importers.readers.source import Source
from specflow.importers.readers.stores import Value
from specflow.importers.readers.styles import Styles

MAX_CELLS = 16_000_000
"""The largest used range that is read. One stray cell in the last corner spans 17 thousand million."""

_TEXTS, _MACROS = "xl/sharedStrings.xml", "xl/vbaProject.bin"
_OLE = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1"
_ENCRYPTED = "EncryptedPackage".encode("utf-16-le")


def read_xlsx(source: Source) -> list[Grid]:
    """All worksheets of a workbook, in its order. Raises FileError for whatever is not a readable workbook."""
    archive = open_archive(source)
    book = read_book(archive)
    if _TEXTS in archive:
        archive.check_text(_TEXTS)
    notes = ("the file holds macros: they were not run",) if _MACROS in archive else ()
    scans = {name: _scan(archive, name, part, book.styles) for name, part in book.sheets.items()}
    if not any(scan.extent for scan in scans.values()):
        raise FileError(
            "no cell of the workbook holds anything",
            where=source.name,
            hint="check that it was saved with its data",
        )
    return _read_values(source, archive, scans, notes)


def open_archive(source: Source) -> Archive:
    """The zip archive of a workbook; FileError says what the file is when it is none."""
    head = source.content[:512]
    if head.startswith(b"PK"):
        return Archive(source)
    if head.startswith(_OLE) and _ENCRYPTED in source.content:
        message, hint = "the workbook is protected by a password", "open it and save it without a password"
    elif head.startswith(_OLE):
        message, hint = "this is a workbook of the old binary format (.xls)", "save it as .xlsx"
    elif head.lstrip(b"\xef\xbb\xbf \t\r\n")[:1] == b"<":
        message, hint = "this is a web page or XML text, not a workbook", "open it and save it as .xlsx"
    elif b"\0" not in head:
        message, hint = "this is plain text, not a workbook", "rename it to .csv if it is a table"
    else:
        message, hint = "this is not a workbook: it is no zip archive", "save it as .xlsx"
    raise FileError(message, where=source.name, hint=hint)


def _scan(archive: Archive, name: str, part: str, styles: Styles) -> SheetScan:
    scan = scan_sheet(
        lambda: archive.stream(part), styles, lambda what: archive.damaged(f"sheet {name!r}: {what}")
    )
    if scan.extent and _area(scan.extent) > MAX_CELLS:
        far = address(scan.extent.last_row, scan.extent.last_column)
        raise FileError(
            f"the used range {scan.extent} spans {_area(scan.extent):,} cells, more than {MAX_CELLS:,}",
            where=f"{archive.name}, {name}",
            hint=f"delete the stray cells towards {far}, or split the sheet",
        )
    return scan


def _area(area: CellRange) -> int:
    return (area.last_row - area.first_row + 1) * (area.last_column - area.first_column + 1)


def _read_values(
    source: Source, archive: Archive, scans: dict[str, SheetScan], notes: tuple[str, ...]
) -> list[Grid]:
    name = ""
    grids = []
    try:
        with CalamineWorkbook.from_filelike(io.BytesIO(source.content)) as book:
            hidden = {
                sheet.name: sheet.visible is not SheetVisibleEnum.Visible for sheet in book.sheets_metadata
            }
            for name, scan in scans.items():
                grids.append(_grid(book, source.name, name, scan, hidden.get(name, False), notes))
    except (CalamineError, ValueError, OSError) as error:
        raise _unreadable(archive, name, str(error), scans) from error
    except BaseException as error:
        # a panic of the Rust library is no Exception and cannot be imported by name
        if type(error).__name__ != "PanicException":
            raise
        raise _unreadable(archive, name, str(error), scans) from error
    return grids


def _unreadable(archive: Archive, name: str, message: str, scans: dict[str, SheetScan]) -> FileError:
    """The bulk reader names no cell; where it stumbled over an error code of a cell, the scan knows the cell."""
    for run in scans[name].odd if name in scans else OddCells():
        if run.cell.kind is OddKind.ERROR and repr(run.cell.detail) in message:
            return FileError(
                f"the error {run.cell.detail} is none that can be read",
                where=f"{archive.name}, {name}, {address(run.first, run.column)}",
                hint="correct the formula or clear the cell",
            )
    return archive.damaged(f"sheet {name!r}: {message}" if name else message)


def _grid(
    book: CalamineWorkbook, file: str, name: str, scan: SheetScan, hidden: bool, notes: tuple[str, ...]
) -> Grid:
    sheet = book.get_sheet_by_name(name)
    top, left = sheet.start or (0, 0)
    rows: list[list[Value]] = sheet.to_python()
    first_row, first_column = top + 1, left + 1
    if scan.extent:
        first_row, first_column = _cover(rows, first_row, first_column, scan.extent)
    return Grid(
        name=name,
        rows=rows,
        file=file,
        first_row=first_row,
        first_column=first_column,
        odd=scan.odd,
        hidden=hidden,
        hidden_rows=scan.hidden_rows,
        hidden_columns=scan.hidden_columns,
        merged=scan.merged,
        notes=notes,
    )


def _cover(rows: list[list[Value]], first_row: int, first_column: int, extent: CellRange) -> tuple[int, int]:
    """Widen the rows to the extent that the scan saw: the bulk reader leaves out formulas without a value, and a
    column of nothing else must not look as if it were not there. Returns the first row and column."""
    if not rows:
        first_row, first_column = extent.first_row, extent.first_column
    left = first_column - extent.first_column
    width = max(map(len, rows), default=0)
    right = extent.last_column - (first_column + width - 1)
    if left > 0 or right > 0:
        rows[:] = [[""] * left + row + [""] * right for row in rows]
    above = first_row - extent.first_row
    below = extent.last_row - (first_row + len(rows) - 1)
    full = extent.last_column - min(extent.first_column, first_column) + 1
    rows[:0] = [[""] * full for _ in range(above)]
    rows.extend([""] * full for _ in range(below))
    return min(first_row, extent.first_row), min(first_column, extent.first_column)
