"""A sheet's XML through an event parser: columns, merged ranges, and the cells of sheets written in an unusual way."""

from __future__ import annotations

import re
from xml.parsers import expat

from specflow.importers.readers.odd_cells import OddCell, OddKind
from specflow.importers.readers.odd_marks import OddMarks
from specflow.importers.readers.places import CellRange, column_number
from specflow.importers.readers.styles import Styles

MAX_ROW, MAX_COLUMN = 1_048_576, 16_384

TEXT_TYPES = frozenset({"s", "str", "inlineStr"})

_SHARED = re.compile(r"[0-9]{1,10}")
_REFERENCE = re.compile(r"([A-Za-z]{1,3})([0-9]{1,7})")


class SheetProblem(Exception):
    """The sheet says something that no spreadsheet program writes, or that bulk reading would get wrong."""


class SheetEvents:
    """Feed it the XML of a sheet; it fills ``marks``, ``hidden_columns`` and ``merged``."""

    def __init__(self, marks: OddMarks, styles: Styles) -> None:
        self.hidden_columns: set[int] = set()
        self.merged: list[CellRange] = []
        self._marks = marks
        self._styles = styles
        self._row, self._column = 0, 0
        self._cell: dict[str, str] = {}
        self._formula = False
        self._text: list[str] | None = None
        self._value = ""
        self._has_value = False
        self._inline = False
        self._parser = expat.ParserCreate()
        self._parser.buffer_text = True
        self._parser.StartElementHandler = self._start
        self._parser.EndElementHandler = self._end
        self._parser.CharacterDataHandler = self._characters
        self._parser.StartCdataSectionHandler = self._cdata
        self._parser.StartDoctypeDeclHandler = self._doctype
        self._parser.XmlDeclHandler = self._declaration

    def feed(self, piece: bytes) -> None:
        """The next bytes of the sheet; raises SheetProblem or ExpatError."""
        self._parser.Parse(piece, False)

    def close(self) -> None:
        """The sheet ends here."""
        self._parser.Parse(b"", True)

    def _declaration(self, version: str, encoding: str | None, standalone: int) -> None:
        if encoding and encoding.lower() not in ("utf-8", "us-ascii"):
            raise SheetProblem(f"its text is {encoding}, not UTF-8")

    def _doctype(self, *_: object) -> None:
        raise SheetProblem("it declares a document type")

    def _cdata(self) -> None:
        if self._text is not None:
            raise SheetProblem("a cell value is written as CDATA, which bulk reading drops")

    def _start(self, name: str, attributes: dict[str, str]) -> None:
        match name.rpartition(":")[2]:
            case "c":
                self._start_cell(attributes)
            case "v" if self._has_value or self._inline:
                raise SheetProblem(f"a cell in row {self._row} holds two values")
            case "v":
                self._text, self._has_value = [], True
            case "f":
                self._formula = True
            case "is":
                self._inline = True
            case "row":
                self._start_row(attributes)
            case "col":
                self._hide_columns(attributes)
            case "mergeCell":
                self.merged.append(_cell_range(attributes.get("ref", "")))

    def _end(self, name: str) -> None:
        match name.rpartition(":")[2]:
            case "v" if self._text is not None:
                self._value, self._text = "".join(self._text), None
            case "c":
                self._end_cell()

    def _characters(self, text: str) -> None:
        if self._text is not None:
            self._text.append(text)

    def _start_row(self, attributes: dict[str, str]) -> None:
        given = attributes.get("r", "")
        self._row = int(given) if given.isdigit() else self._row + 1
        self._column = 0
        if attributes.get("hidden") in ("1", "true"):
            self._marks.hidden_rows.add(self._row)

    def _start_cell(self, attributes: dict[str, str]) -> None:
        if reference := attributes.get("r"):
            self._row, self._column = cell_place(reference)
        else:
            self._column += 1
        if not 1 <= self._row <= MAX_ROW or not 1 <= self._column <= MAX_COLUMN:
            raise SheetProblem(f"a cell lies outside the sheet (row {self._row}, column {self._column})")
        self._cell = attributes
        self._formula, self._value, self._has_value, self._inline = False, "", False, False

    def _end_cell(self) -> None:
        self._marks.mention(self._row, self._column, self._row, self._column)
        odd = self._oddity(self._cell.get("t", "n"))
        if odd is not None:
            self._marks.add_one(self._row, self._column, odd)
        if self._value or self._inline or (odd is not None and odd.kind is OddKind.NO_VALUE):
            self._marks.extend(self._row, self._column, self._row, self._column)

    def _oddity(self, kind: str) -> OddCell | None:
        if kind == "e":
            return OddCell(OddKind.ERROR, self._value)
        if self._formula and (not self._has_value or (not self._value and kind not in TEXT_TYPES)):
            return OddCell(OddKind.NO_VALUE)
        if self._formula and kind == "n" and self._value == "0" and self._styles.never_calculated:
            return NEVER_CALCULATED
        if kind == "s" and self._value and not _SHARED.fullmatch(self._value):
            raise SheetProblem(f"a cell in row {self._row} names no shared text ({self._value[:20]!r})")
        filled = self._value or self._inline
        if kind == "d" and filled:
            return OddCell(OddKind.DATE, "ISO 8601")
        if kind == "n" and filled:
            return self._styles.of(_style(self._cell.get("s", "0")))
        return None

    def _hide_columns(self, attributes: dict[str, str]) -> None:
        first, last = attributes.get("min", ""), attributes.get("max", "")
        if attributes.get("hidden") in ("1", "true") and first.isdigit() and last.isdigit():
            self.hidden_columns.update(range(int(first), min(int(last), MAX_COLUMN) + 1))


NEVER_CALCULATED = OddCell(OddKind.NO_VALUE, "a stored 0 in a workbook that was never calculated")


def _style(text: str) -> int:
    return int(text) if text.isdigit() and len(text) < 7 else -1


def cell_place(reference: str) -> tuple[int, int]:
    """``C17`` is row 17, column 3; raises SheetProblem for what is no reference."""
    if (match := _REFERENCE.fullmatch(reference)) is None:
        raise SheetProblem(f"{reference[:20]!r} is no cell of a sheet")
    return int(match[2]), column_number(match[1])


def _cell_range(reference: str) -> CellRange:
    first, _, last = reference.partition(":")
    return CellRange(*cell_place(first), *cell_place(last or first))
