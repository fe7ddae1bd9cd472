"""Formulas of old binary workbooks whose value was never calculated: xlrd shows them as empty text.

A writer that does not calculate stores "empty text" as the result of every formula (record 0x0006, its result ends in
0xFFFF and begins with 3: [MS-XLS] 2.5.133 FormulaValue). A spreadsheet program stores the same for a formula whose
result *is* an empty text, so only workbooks without any other result are taken for uncalculated.
"""

from __future__ import annotations

import struct
from collections.abc import Iterator
from io import StringIO

from xlrd import compdoc

_FORMULA, _BOF = 0x0006, (0x0809, 0x0409, 0x0209, 0x0009)
_WORKSHEET = 0x0010

Cell = tuple[int, int]


def formulas_never_calculated(content: bytes) -> dict[int, frozenset[Cell]]:
    """Place of the worksheet -> its formulas (row and column from 0), when no formula of the workbook has a value.

    Raises whatever a damaged file provokes.
    """
    empty: dict[int, set[Cell]] = {}
    sheet = -1
    for kind, body in _records(_stream(content)):
        if kind in _BOF and len(body) >= 4:
            sheet += struct.unpack_from("<H", body, 2)[0] == _WORKSHEET
        elif kind == _FORMULA and len(body) >= 14 and sheet >= 0:
            row, column = struct.unpack_from("<2H", body)
            result = body[6:14]
            if result[6:] != b"\xff\xff" or result[0] != 3:
                return {}
            empty.setdefault(sheet, set()).add((row, column))
    return {place: frozenset(cells) for place, cells in empty.items()}


def _stream(content: bytes) -> bytes:
    if not content.startswith(compdoc.SIGNATURE):
        return content
    document = compdoc.CompDoc(content, logfile=StringIO())  # it prints what it doubts
    for name in ("Workbook", "Book"):
        memory, base, length = document.locate_named_stream(name)
        if memory:
            return bytes(memory[base : base + length])
    return b""


def _records(stream: bytes) -> Iterator[tuple[int, bytes]]:
    place = 0
    while place + 4 <= len(stream):
        kind, length = struct.unpack_from("<2H", stream, place)
        yield kind, stream[place + 4 : place + 4 + length]
        place += 4 + length
