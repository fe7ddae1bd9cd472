"""The scan of a sheet's XML for what bulk reading does not show, in pieces, without building a tree.

Bulk reading gives bare values: 0.031 for a cell that shows 3.1 %, nothing for an error cell or for a formula that was
never calculated, rows that nobody sees. The scan finds those cells, and the extent of the used cells, before anything
is allocated for them. The pieces between ``<sheetData>`` and its end are regular in every file that a spreadsheet
program writes and are taken as byte arrays (``cell_bytes``); what is around them, and any sheet written otherwise
(prefixed names, comments, cells without a reference), goes through an XML parser (``cell_events``).
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from xml.parsers import expat

from specflow.errors import FileError
from specflow.importers.readers.cell_bytes import Cells, Irregular, scan_rows
from specflow.importers.readers.cell_events import SheetEvents, SheetProblem
from specflow.importers.readers.cell_values import CellValues
from specflow.importers.readers.odd_cells import OddCells
from specflow.importers.readers.odd_marks import OddMarks
from specflow.importers.readers.places import CellRange
from specflow.importers.readers.styles import Styles

MAX_ROW_BYTES = 64 * 1024 * 1024

_START, _END = b"<sheetData>", b"</sheetData>"


@dataclass(frozen=True, slots=True)
class SheetScan:
    """What the scan found in one sheet; ``extent`` is None when no cell holds anything. ``mentioned`` goes around
    empty cells, too, for which bulk reading takes memory all the same."""

    odd: OddCells
    extent: CellRange | None
    mentioned: CellRange | None
    hidden_rows: frozenset[int]
    hidden_columns: frozenset[int]
    merged: tuple[CellRange, ...]
    has_values: bool = False


def scan_sheet(
    stream: Callable[[], Iterator[bytes]],
    styles: Styles,
    refuse: Callable[[str], FileError],
    values: CellValues | None = None,
) -> SheetScan:
    """Scan one sheet; ``stream`` opens its XML anew, ``refuse`` makes the error for a problem in it.

    ``values`` takes the values of the cells on the way; ``has_values`` says whether it got them all, which it does
    where the sheet is written in the usual shape.
    """
    try:
        if values is not None:
            try:
                return replace(_scan_regular(stream(), styles, values.take), has_values=True)
            except Irregular:
                pass
        try:
            return _scan_regular(stream(), styles)
        except Irregular:
            return _scan_events(stream(), styles)
    except SheetProblem as problem:
        raise refuse(str(problem)) from problem
    except (expat.ExpatError, LookupError, ValueError) as error:  # LookupError: an encoding that there is not
        raise refuse(f"its XML is not well-formed ({error})") from error


def _scan_regular(
    pieces: Iterator[bytes], styles: Styles, take: Callable[[Cells], None] | None = None
) -> SheetScan:
    marks = OddMarks()
    shell = SheetEvents(marks, styles)
    rest = _feed_head(pieces, shell)
    if rest is not None:
        tail = _scan_body(rest, pieces, lambda block: scan_rows(block, marks, styles, take))
        shell.feed(tail)
    for piece in pieces:
        shell.feed(piece)
    shell.close()
    return _result(marks, shell)


def _scan_events(pieces: Iterator[bytes], styles: Styles) -> SheetScan:
    marks = OddMarks()
    events = SheetEvents(marks, styles)
    for piece in pieces:
        events.feed(piece)
    events.close()
    return _result(marks, events)


def _result(marks: OddMarks, shell: SheetEvents) -> SheetScan:
    return SheetScan(
        odd=marks.cells(),
        extent=marks.extent(),
        mentioned=marks.mentioned(),
        hidden_rows=frozenset(marks.hidden_rows),
        hidden_columns=frozenset(shell.hidden_columns),
        merged=tuple(shell.merged),
    )


def _feed_head(pieces: Iterator[bytes], shell: SheetEvents) -> bytes | None:
    """Give the parser all up to the first row; returns the bytes after that, None when the sheet has no rows."""
    head = b""
    for piece in pieces:
        head += piece
        if (at := head.find(_START)) >= 0:
            shell.feed(head[: at + len(_START)])
            return head[at + len(_START) :]
        if len(head) > MAX_ROW_BYTES:
            raise Irregular
    if b"<sheetData/>" not in head:
        raise Irregular
    shell.feed(head)
    return None


def _scan_body(rest: bytes, pieces: Iterator[bytes], scan: Callable[[bytes], None]) -> bytes:
    """Scan whole rows as they come; returns the bytes from the end of the rows on."""
    while True:
        if (end := rest.find(_END)) >= 0:
            scan(rest[:end])
            return rest[end:]
        whole = rest.rfind(b"</row>") + len(b"</row>")
        if whole >= len(b"</row>"):
            scan(rest[:whole])
            rest = rest[whole:]
        elif len(rest) > MAX_ROW_BYTES:
            raise SheetProblem(f"one row is longer than {MAX_ROW_BYTES >> 20} MiB")
        piece = next(pieces, None)
        if piece is None:
            raise SheetProblem("its rows end too early")
        rest += piece
