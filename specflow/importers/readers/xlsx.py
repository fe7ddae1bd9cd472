"""Workbooks (.xlsx, .xlsm): values by python-calamine in bulk, beside them the scan of each sheet for odd cells."""

from __future__ import annotations

import re
from collections.abc import Sequence
from xml.parsers.expat import ExpatError

from python_calamine import CalamineSheet

from specflow.errors import FileError
from specflow.importers.readers.archive import Archive
from specflow.importers.readers.book import Book, read_book
from specflow.importers.readers.bulk import BulkError, bulk_workbook
from specflow.importers.readers.cell_values import CellValues
from specflow.importers.readers.contents import Content, content_of
from specflow.importers.readers.grid import Grid
from specflow.importers.readers.odd_cells import OddKind
from specflow.importers.readers.places import CellRange, address
from specflow.importers.readers.shared_texts import read_shared_texts
from specflow.importers.readers.sheet_scan import SheetScan, scan_sheet
from specflow.importers.readers.source import Source
from specflow.importers.readers.stores import Value
from specflow.importers.readers.styles import Styles

MAX_CELLS = 16_000_000
"""The largest used range that is read cell by cell. One stray cell in the last corner spans 17 thousand million."""

MAX_STREAMED_CELLS = 64_000_000
"""The largest used range in typed columns, which take eight bytes a number where a Python list takes 32."""

STREAMED_BYTES = 256 * 1024
"""Sheets whose XML is longer, of more than about 6,000 cells, are read into typed columns, which takes half the time of
bulk reading and a quarter of its memory. Below it hardly matters, and rows in lists are quicker to walk over."""

_UNIQUE = re.compile(rb"uniqueCount\s*=\s*[\"']([^\"']*)")
_TEXTS, _MACROS = "xl/sharedStrings.xml", "xl/vbaProject.bin"


def read_xlsx(source: Source) -> list[Grid]:
    """All worksheets of a workbook, in its order. Raises FileError for whatever is not a readable workbook."""
    archive = open_archive(source)
    book = read_book(archive)
    if _TEXTS in archive:
        archive.check_text(_TEXTS)
        _check_text_count(archive)
    sheets = [_Sheet(archive, name, part, book) for name, part in book.sheets.items()]
    if not any(sheet.scan.extent for sheet in sheets):
        raise FileError(
            "no cell of the workbook holds anything",
            where=source.name,
            hint="check that it was saved with its data",
        )
    _read_values(source, archive, [sheet for sheet in sheets if sheet.rows is None])
    notes = ("the file holds macros: they were not run",) if _MACROS in archive else ()
    return [sheet.grid(source.name, notes) for sheet in sheets]


def open_archive(source: Source) -> Archive:
    """The zip archive of a workbook; FileError says what the file is when it is none."""
    content = content_of(source)
    if content is not Content.XLSX:
        raise FileError(
            f"this is {content}, not a workbook (.xlsx)", where=source.name, hint="save it as .xlsx"
        )
    return Archive(source)


class _Sheet:
    """One worksheet on its way to a grid; ``rows`` are None until its values have been read."""

    def __init__(self, archive: Archive, name: str, part: str, book: Book) -> None:
        self.name = name
        self.hidden = name in book.hidden
        self.rows: Sequence[list[Value]] | None = None
        self.first_row, self.first_column = 1, 1
        values = None
        if archive.size(part) > STREAMED_BYTES:
            values = CellValues(book.styles, _shared_texts(archive))
        self.scan = _scan(archive, name, part, book.styles, values)
        if not self.scan.has_values and _area(self.scan.mentioned) > MAX_CELLS:
            values = CellValues(book.styles, _shared_texts(archive))
            self.scan = _scan(archive, name, part, book.styles, values)
            if not self.scan.has_values:
                raise _too_large(archive, name, self.scan.mentioned, MAX_CELLS)
        if self.scan.has_values and values is not None and self.scan.extent:
            self.first_row, self.first_column = self.scan.extent.first_row, self.scan.extent.first_column
            self.rows = values.columns(self.scan.extent)

    def take(self, sheet: CalamineSheet) -> None:
        """Take over the values that bulk reading gives."""
        top, left = sheet.start or (0, 0)
        rows: list[list[Value]] = sheet.to_python()
        self.first_row, self.first_column = top + 1, left + 1
        if self.scan.extent:
            self.first_row, self.first_column = _cover(rows, top + 1, left + 1, self.scan.extent)
        self.rows = rows

    def grid(self, file: str, notes: tuple[str, ...]) -> Grid:
        """The grid of the sheet."""
        return Grid(
            name=self.name,
            rows=self.rows or [],
            file=file,
            first_row=self.first_row,
            first_column=self.first_column,
            odd=self.scan.odd,
            hidden=self.hidden,
            hidden_rows=self.scan.hidden_rows,
            hidden_columns=self.scan.hidden_columns,
            merged=self.scan.merged,
            notes=notes,
        )


def _check_text_count(archive: Archive) -> None:
    """The bulk reader reserves memory for as many shared texts as the part says it holds, and takes the whole process
    down where there is not so much; each text takes at least its ``<si/>``."""
    for said in _UNIQUE.findall(next(archive.stream(_TEXTS), b"")):
        if not said.isdigit() or len(said) > 12 or int(said) > archive.size(_TEXTS):
            raise archive.hostile(f"{_TEXTS} says that it holds {said[:20].decode('latin-1')} texts")


def _shared_texts(archive: Archive) -> list[str]:
    if _TEXTS not in archive:
        return []
    try:
        return read_shared_texts(archive.stream(_TEXTS))
    except (ExpatError, LookupError, ValueError) as error:  # LookupError: an encoding that there is not
        raise archive.damaged(f"its shared texts are not well-formed XML ({error})") from error


def _scan(archive: Archive, name: str, part: str, styles: Styles, values: CellValues | None) -> SheetScan:
    scan = scan_sheet(
        lambda: archive.stream(part), styles, lambda what: archive.damaged(f"sheet {name!r}: {what}"), values
    )
    most = MAX_STREAMED_CELLS if scan.has_values else MAX_CELLS
    if _area(scan.extent) > most:
        raise _too_large(archive, name, scan.extent, most)
    return scan


def _too_large(archive: Archive, name: str, area: CellRange | None, most: int) -> FileError:
    far = address(area.last_row, area.last_column) if area else ""
    return FileError(
        f"the used range {area} spans {_area(area):,} cells, more than {most:,}",
        where=f"{archive.name}, {name}",
        hint=f"delete the stray cells towards {far}, or split the sheet",
    )


def _area(area: CellRange | None) -> int:
    if area is None:
        return 0
    return (area.last_row - area.first_row + 1) * (area.last_column - area.first_column + 1)


def _read_values(source: Source, archive: Archive, sheets: Sequence[_Sheet]) -> None:
    """Read the values of these sheets in bulk."""
    now: _Sheet | None = None
    if not sheets:
        return
    try:
        with bulk_workbook(source.content) as book:
            for now in sheets:
                now.take(book.get_sheet_by_name(now.name))
    except BulkError as error:
        raise _unreadable(archive, now, str(error)) from error


def _unreadable(archive: Archive, sheet: _Sheet | None, message: str) -> FileError:
    """The bulk reader names no cell; where it stumbled over an error code of a cell, the scan knows the cell."""
    if sheet is None:
        return archive.damaged(message)
    for run in sheet.scan.odd:
        if run.cell.kind is OddKind.ERROR and repr(run.cell.detail) in message:
            return FileError(
                f"the error {run.cell.detail} is none that can be read",
                where=f"{archive.name}, {sheet.name}, {address(run.first, run.column)}",
                hint="correct the formula or clear the cell",
            )
    return archive.damaged(f"sheet {sheet.name!r}: {message}")


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
