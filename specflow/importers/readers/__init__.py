"""Bytes to grids: one module a file format, no meaning given to any cell.

What may live here: the readers (``xlsx``, ``csv``), what they give (``grid``), the bytes they take (``source``), and
the parts of one reader that have a name of their own (the zip archive, the scan of sheet XML, the delimiter). A reader
takes a Source and returns grids, raises FileError for a file that cannot be read, and never reports on a cell: odd
cells are data in the grid. A new format is one module and one line in ``READERS``.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import overload

from specflow.errors import FileError
from specflow.importers.readers.csv import read_csv
from specflow.importers.readers.grid import (
    CellRange,
    Grid,
    OddCell,
    OddCells,
    OddKind,
    OddRun,
    address,
    column_letter,
    column_number,
    is_blank,
    looks_numeric,
    sheet,
)
from specflow.importers.readers.inspection import comments, formulas
from specflow.importers.readers.source import FileFingerprint, Source, read_source
from specflow.importers.readers.stores import Value
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
    """A file format: what it is called, the endings it goes by, and the function that reads it."""

    title: str
    endings: tuple[str, ...]
    read: Callable[[Source], list[Grid]]


READERS = (
    Reader("workbook", (".xlsx", ".xlsm"), read_xlsx),
    Reader("delimited text", (".csv", ".tsv", ".txt", ".dat"), read_csv),
)


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
    """Read a file, by its ending, into grids: one a worksheet, one for a csv file.

    ``expected`` is the fingerprint seen at an earlier look: other content is then refused. Raises FileError (message,
    place, remedy) for every file that cannot be read.
    """
    path = Path(path)
    source = read_source(path, expected)
    reader = next((reader for reader in READERS if path.suffix.lower() in reader.endings), None)
    if reader is None:
        known = ", ".join(ending for reader in READERS for ending in reader.endings)
        raise FileError(
            f"files of the kind {path.suffix!r} are not read", where=path.name, hint=f"known: {known}"
        )
    return GridFile(source.fingerprint, tuple(reader.read(source)))
