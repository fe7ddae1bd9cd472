"""Workbooks (.xlsx, .xlsm): values by python-calamine in bulk, beside them the scan of each sheet for odd cells."""

from __future__ import annotations

import io
import posixpath
from dataclasses import dataclass
from xml.etree.ElementTree import Element

from python_calamine import CalamineError, CalamineWorkbook, SheetTypeEnum, SheetVisibleEnum

from specflow.errors import FileError
from specflow.importers.readers.archive import Archive
from specflow.importers.readers.grid import CellRange, Grid, OddKind, Value, address
from specflow.importers.readers.sheet_scan import SheetScan, scan_sheet
from specflow.importers.readers.source import Source
from specflow.importers.readers.styles import Styles, children, local_name, read_styles

MAX_CELLS = 16_000_000
"""The largest used range that is read. One stray cell in the last corner of a sheet spans 17 thousand million."""

_WORKBOOK, _RELATIONS = "xl/workbook.xml", "xl/_rels/workbook.xml.rels"
_STYLES, _TEXTS, _MACROS = "xl/styles.xml", "xl/sharedStrings.xml", "xl/vbaProject.bin"
_OLE = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1"
_ENCRYPTED = "EncryptedPackage".encode("utf-16-le")


def read_xlsx(source: Source) -> list[Grid]:
    """All worksheets of a workbook, in its order. Raises FileError for whatever is not a readable workbook."""
    _check_container(source)
    archive = Archive(source)
    book = _read_book(archive)
    if _TEXTS in archive:
        archive.check_text(_TEXTS)
    notes = ("the file holds macros: they are not run",) if _MACROS in archive else ()
    scans = {name: _scan(archive, name, part, book.styles) for name, part in book.sheets.items()}
    return _read_values(source, archive, scans, notes)


@dataclass(frozen=True, slots=True)
class _Book:
    sheets: dict[str, str]  # worksheet name -> its part
    styles: Styles


def _check_container(source: Source) -> None:
    """Say what the file is when it is no zip archive."""
    head = source.content[:512]
    if head.startswith(b"PK"):
        return
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


def _read_book(archive: Archive) -> _Book:
    if _WORKBOOK not in archive:
        raise _no_workbook(archive)
    root, targets = archive.xml(_WORKBOOK), _targets(archive)
    calculation = next((element for element in root if local_name(element) == "calcPr"), None)
    never = calculation is not None and calculation.get("fullCalcOnLoad") in ("1", "true")
    styles = read_styles(archive.xml(_STYLES) if _STYLES in archive else None, never)
    sheets = {}
    for element in children(root, "sheets"):
        kind, part = targets.get(_relation_id(element), ("", ""))
        if kind == "worksheet":
            sheets[element.get("name", "")] = part
    if not sheets:
        raise FileError(
            "the workbook has no worksheet", where=archive.name, hint="charts alone cannot be read"
        )
    return _Book(sheets, styles)


def _no_workbook(archive: Archive) -> FileError:
    if "xl/workbook.bin" in archive:
        message, hint = "this is a binary workbook (.xlsb)", "save it as .xlsx"
    elif "content.xml" in archive:
        message, hint = "this is an OpenDocument file", "save it as .xlsx"
    else:
        message, hint = (
            "this is a zip archive, but no workbook",
            "unpack it first, or save the workbook as .xlsx",
        )
    return FileError(message, where=archive.name, hint=hint)


def _targets(archive: Archive) -> dict[str, tuple[str, str]]:
    """Relation id -> (kind, part) of the workbook."""
    found = {}
    for element in archive.xml(_RELATIONS):
        target = element.get("Target", "")
        part = target[1:] if target.startswith("/") else posixpath.normpath(f"xl/{target}")
        found[element.get("Id", "")] = (element.get("Type", "").rpartition("/")[2], part)
    return found


def _relation_id(element: Element) -> str:
    return next((text for name, text in element.items() if name.endswith("}id")), "")


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
    grids = []
    try:
        with CalamineWorkbook.from_filelike(io.BytesIO(source.content)) as book:
            for sheet in book.sheets_metadata:
                if sheet.typ is SheetTypeEnum.WorkSheet and sheet.name in scans:
                    hidden = sheet.visible is not SheetVisibleEnum.Visible
                    grids.append(_grid(book, source.name, sheet.name, scans[sheet.name], hidden, notes))
    except CalamineError as error:
        raise archive.damaged(str(error)) from error
    return grids


def _grid(
    book: CalamineWorkbook, file: str, name: str, scan: SheetScan, hidden: bool, notes: tuple[str, ...]
) -> Grid:
    sheet = book.get_sheet_by_name(name)
    top, left = sheet.start or (0, 0)
    rows: list[list[Value]] = sheet.to_python()
    return Grid(
        name=name,
        rows=rows,
        file=file,
        first_row=top + 1,
        first_column=left + 1,
        odd=scan.odd,
        hidden=hidden,
        hidden_rows=scan.hidden_rows,
        hidden_columns=scan.hidden_columns,
        merged=scan.merged,
        notes=notes,
    )
