"""Bytes to grids: one module a file format, no meaning given to any cell.

What may live here: the readers (``xlsx``, ``xls``, ``ods``, ``csv``, ``json_lines``, ``html``), what they give
(``grid``, ``stores``), the bytes they take (``source``, ``contents``), and the parts of one reader that have a name of
their own (the zip archive, the scan of sheet XML, the delimiter). A reader takes a Source and returns grids, raises
FileError for a file that cannot be read, and never reports on a cell: odd cells are data in the grid. A new format is
one module and one line in ``READERS``.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import overload

from specflow.errors import FileError
from specflow.importers.readers.contents import Content, content_of
from specflow.importers.readers.csv import read_csv
from specflow.importers.readers.grid import Grid, is_blank, looks_numeric, sheet
from specflow.importers.readers.html import read_html
from specflow.importers.readers.inspection import comments, formulas
from specflow.importers.readers.json_lines import read_json_lines
from specflow.importers.readers.odd_cells import OddCell, OddCells, OddKind, OddRun
from specflow.importers.readers.ods import read_ods
from specflow.importers.readers.places import CellRange, address, column_letter, column_number
from specflow.importers.readers.source import FileFingerprint, Source, read_source
from specflow.importers.readers.stores import Value
from specflow.importers.readers.xls import read_xls
from specflow.importers.readers.xlsx import read_xlsx

__all__ = [
    "READERS",
    "CellRange",
    "FileFingerprint",
    "Grid",
    "GridFile",
    "OddCell",
    "OddCells",
    "OddKind",
    "OddRun",
    "Reader",
    "Source",
    "Value",
    "address",
    "column_letter",
    "column_number",
    "comments",
    "formulas",
    "is_blank",
    "looks_numeric",
    "open_grids",
    "read_source",
    "sheet",
]


@dataclass(frozen=True, slots=True)
class Reader:
    """A file format: what it is called, the endings it goes by, what its files are, and the function that reads it."""

    title: str
    endings: tuple[str, ...]
    content: Content
    read: Callable[[Source], list[Grid]]


READERS = (
    Reader("workbook", (".xlsx", ".xlsm"), Content.XLSX, read_xlsx),
    Reader("old binary workbook", (".xls",), Content.XLS, read_xls),
    Reader("OpenDocument spreadsheet", (".ods",), Content.ODS, read_ods),
    Reader("JSON Lines", (".jsonl", ".ndjson"), Content.TEXT, read_json_lines),
    Reader("delimited text", (".csv", ".tsv", ".txt", ".dat"), Content.TEXT, read_csv),
    Reader("tables of a web page", (".html", ".htm"), Content.HTML, read_html),
)


_CONTROL = re.compile(rb"[\x00-\x08\x0e-\x19\x1b-\x1f\x7f]")
_LEAST_ROWS = 3
REMEDIES = {
    ".xlsb": "save it as .xlsx",
    ".fods": "save it as .ods",
    ".xml": "save it as .xlsx, or export its table as .csv",
    ".json": "write one object a line, as .jsonl",
    ".zip": "unpack it",
    ".gz": "unpack it",
    ".pdf": "ask for the table itself, as .xlsx or .csv",
}
"""What to do with files that are not read and that somebody may well be sent."""


@dataclass(frozen=True, slots=True)
class GridFile(Sequence[Grid]):
    """The grids of one file, in the order of the file, and the fingerprint of the bytes they came from."""

    fingerprint: FileFingerprint
    grids: tuple[Grid, ...]

    @overload
    def __getitem__(self, index: int) -> Grid: ...
    @overload
    def __getitem__(self, index: slice) -> Sequence[Grid]: ...
    def __getitem__(self, index: int | slice) -> Grid | Sequence[Grid]:
        return self.grids[index]

    def __len__(self) -> int:
        return len(self.grids)

    def __iter__(self) -> Iterator[Grid]:
        return iter(self.grids)


def open_grids(path: str | Path, expected: FileFingerprint | None = None) -> GridFile:
    """Read a file into grids: one a worksheet, one for a text file.

    Where the content is certainly of another kind than the ending says, it is read as what it is, with a note.
    ``expected`` is the fingerprint seen at an earlier look: other content is then refused. Raises FileError (message,
    place, remedy) for every file that cannot be read.
    """
    path = Path(path)
    source = read_source(path, expected)
    ending = path.suffix.lower()
    named = next((reader for reader in READERS if ending in reader.endings), None)
    if named is None:
        return _of_unknown_ending(path, source)
    content = content_of(source)
    if content is named.content:
        return GridFile(source.fingerprint, tuple(named.read(source)))
    if content is Content.TEXT and not _is_text(source):
        raise FileError(
            f"this is no {named.title}, and no text either",
            where=path.name,
            hint="export it again, or save it as .xlsx",
        )
    true = next(reader for reader in reversed(READERS) if reader.content is content)
    grids = true.read(source)
    if content is Content.TEXT and (grids[0].last_column < 2 or len(grids[0].rows) < 2):
        raise FileError(
            f"this is {content} without a table, and not what its ending says",
            where=path.name,
            hint="give it its true ending, or export it again",
        )
    note = f"its ending is {ending}, but the file is {content}, and was read so"
    return GridFile(source.fingerprint, tuple(replace(grid, notes=(note, *grid.notes)) for grid in grids))


def _of_unknown_ending(path: Path, source: Source) -> GridFile:
    """Text in columns of numbers is read whatever its ending: antenna files and instruments have their own."""
    if path.suffix.lower() in REMEDIES or content_of(source) is not Content.TEXT or not _is_text(source):
        raise _unknown(path)
    grids = read_csv(source)
    numbers = [sum(map(_is_number, row)) for grid in grids for row in grid.rows]
    if sum(count > 1 for count in numbers) < _LEAST_ROWS:
        raise _unknown(path)
    note = f"files of the kind {path.suffix!r} are not known; this one is text, and was read so"
    return GridFile(source.fingerprint, tuple(replace(grid, notes=(note, *grid.notes)) for grid in grids))


def _is_number(value: Value) -> bool:
    return isinstance(value, str) and looks_numeric(value)


def _unknown(path: Path) -> FileError:
    known = ", ".join([*(ending for reader in READERS for ending in reader.endings), ".s1p, .s2p ... .ts"])
    remedy = REMEDIES.get(path.suffix.lower(), "")
    return FileError(
        f"files of the kind {path.suffix!r} are not read",
        where=path.name,
        hint=f"{remedy}; known: {known}" if remedy else f"known: {known}",
    )


def _is_text(source: Source) -> bool:
    """Text in UTF-16 that says so, or bytes among which no control character stands but those of lines and tabs."""
    marked = source.content.startswith((b"\xff\xfe", b"\xfe\xff"))
    return marked or not _CONTROL.search(source.content)
