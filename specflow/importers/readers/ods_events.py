"""The content of an OpenDocument spreadsheet through an event parser: cells at their true places, and what is odd.

Cells and rows repeat by number; empty ones are counted, not stored, and what they would add up to is known before
anything is stored for it. Notes, drawings and tracked changes inside cells are no cell text.
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from xml.parsers import expat

from specflow.importers.readers.odd_cells import OddCell
from specflow.importers.readers.odd_marks import OddMarks
from specflow.importers.readers.ods_styles import OdsStyles
from specflow.importers.readers.ods_values import Unreadable, read_cell
from specflow.importers.readers.places import CellRange, address
from specflow.importers.readers.stores import Value

MAX_ROW, MAX_COLUMN = 1_048_576, 16_384

_PREFIXES = {
    "urn:oasis:names:tc:opendocument:xmlns:office:1.0": "office",
    "urn:oasis:names:tc:opendocument:xmlns:table:1.0": "table",
    "urn:oasis:names:tc:opendocument:xmlns:text:1.0": "text",
    "urn:oasis:names:tc:opendocument:xmlns:style:1.0": "style",
    "urn:oasis:names:tc:opendocument:xmlns:datastyle:1.0": "number",
    "urn:oasis:names:tc:opendocument:xmlns:drawing:1.0": "draw",
    "urn:org:documentfoundation:names:experimental:calc:xmlns:calcext:1.0": "calcext",
}
_CELLS = frozenset({"table:table-cell", "table:covered-table-cell"})
_NO_CELL_TEXT = frozenset({"office:annotation", "table:tracked-changes", "table:detective", "table:shapes"})
_SIGNS = {"text:s": " ", "text:tab": "\t", "text:line-break": "\n"}
_BLANKS = re.compile(r"[ \t\r\n]+")
_NOTHING: list[Value] = []


class OdsProblem(Exception):
    """The content says something that no spreadsheet program writes; ``place`` is the sheet and the cell."""

    def __init__(self, what: str, place: str = "") -> None:
        super().__init__(what)
        self.place = place


class OdsSheet:
    """One sheet while it is read: ``rows[0]`` is row 1; ``row`` and ``column`` are those before the next ones."""

    def __init__(self, name: str, hidden: bool) -> None:
        self.name = name
        self.hidden = hidden
        self.rows: list[list[Value]] = []
        self.marks = OddMarks()
        self.hidden_rows: list[range] = []
        self.hidden_columns: set[int] = set()
        self.merged: list[CellRange] = []
        self.row, self.columns = 0, 0
        self._styles: list[tuple[range, str]] = []

    def add_columns(self, repeat: int, style: str, hidden: bool) -> None:
        """The next columns: their usual cell style, and whether they are shown."""
        columns = range(self.columns + 1, min(self.columns + repeat, MAX_COLUMN) + 1)
        self.columns += repeat
        self._styles.append((columns, style))
        if hidden:
            self.hidden_columns.update(columns)

    def style_of(self, column: int) -> str:
        """The usual style of cells in a column."""
        return next((style for columns, style in self._styles if column in columns), "")

    def add_rows(self, cells: list[Value], odd: list[tuple[range, OddCell]], repeat: int) -> None:
        """The next rows, all alike; raises OdsProblem outside the sheet."""
        first, last = self.row + 1, self.row + repeat
        self.row = last
        if not cells and not odd:
            return
        if last > MAX_ROW:
            raise OdsProblem("cells lie outside the sheet", f"row {last}")
        self.rows.extend([_NOTHING] * (first - 1 - len(self.rows)))
        self.rows.extend([cells] * repeat)
        for columns, cell in odd:
            for column in columns:
                self.marks.add_run(column, first, last, cell)

    def seen_hidden_rows(self) -> frozenset[int]:
        """The hidden rows among those that hold something."""
        return frozenset(row for rows in self.hidden_rows for row in rows if row <= len(self.rows))


class OdsEvents:
    """Reads styles.xml and content.xml piece by piece; it fills ``sheets``. Raises OdsProblem and ExpatError."""

    def __init__(self, most_cells: int) -> None:
        self.sheets: list[OdsSheet] = []
        self.styles = OdsStyles()
        self._left = most_cells
        self._open: list[str] = []
        self._unread = 0  # how many open elements hide their text from the cell
        self._cell: dict[str, str] | None = None
        self._paragraphs: list[str] = []
        self._row: list[Value] = []
        self._odd: list[tuple[range, OddCell]] = []
        self._column, self._repeat, self._row_style = 0, 1, ""
        self._in_table = False
        self._names: dict[str, str] = {}

    def feed(self, pieces: Iterable[bytes]) -> None:
        """One part of the archive."""
        parser = expat.ParserCreate(namespace_separator="}")
        parser.buffer_text = True
        parser.StartElementHandler = self._start
        parser.EndElementHandler = self._end
        parser.CharacterDataHandler = self._characters
        parser.StartDoctypeDeclHandler = self._doctype
        for piece in pieces:
            parser.Parse(piece, False)
        parser.Parse(b"", True)

    def _doctype(self, *_: object) -> None:
        raise OdsProblem("it declares a document type")

    def _short(self, name: str) -> str:
        known = self._names.get(name)
        if known is None:
            space, _, local = name.rpartition("}")
            known = self._names[name] = f"{_PREFIXES.get(space, '')}:{local}"
        return known

    def _start(self, full_name: str, full_attributes: dict[str, str]) -> None:
        name = self._short(full_name)
        self._open.append(name)
        attributes = {self._short(key): value for key, value in full_attributes.items()}
        if name in _NO_CELL_TEXT or name.startswith("draw:"):
            self._unread += 1
        elif self._unread:
            return
        elif self._cell is not None:
            self._start_inside_cell(name, attributes)
        elif name in _CELLS:
            self._cell, self._paragraphs = attributes, []
        elif name == "table:table":
            self._start_table(attributes)
        elif name == "table:table-row":
            self._start_row(attributes)
        elif name == "table:table-column" and self.sheets:
            self.sheets[-1].add_columns(
                _count(attributes, "table:number-columns-repeated"),
                attributes.get("table:default-cell-style-name", ""),
                attributes.get("table:visibility", "visible") != "visible",
            )
        else:
            self.styles.start(name, attributes)

    def _start_inside_cell(self, name: str, attributes: dict[str, str]) -> None:
        if name in ("text:p", "text:h"):
            self._paragraphs.append("")
        elif name == "table:table":
            raise OdsProblem("a cell holds a table of its own", self._place())
        elif self._paragraphs and name in _SIGNS:
            self._paragraphs[-1] += _SIGNS[name] * min(_count(attributes, "text:c"), 1000)

    def _start_table(self, attributes: dict[str, str]) -> None:
        if self._in_table:
            raise OdsProblem("a sheet holds a table of its own", self._place())
        hidden = self.styles.is_hidden(attributes.get("table:style-name", ""))
        self.sheets.append(OdsSheet(attributes.get("table:name", ""), hidden))
        self._in_table = True

    def _start_row(self, attributes: dict[str, str]) -> None:
        if not self._in_table:
            raise OdsProblem("a row stands outside a sheet")
        self._row, self._odd, self._column = [], [], 0
        self._repeat = _count(attributes, "table:number-rows-repeated")
        self._row_style = attributes.get("table:default-cell-style-name", "")
        if attributes.get("table:visibility", "visible") != "visible":
            row = self.sheets[-1].row
            self.sheets[-1].hidden_rows.append(range(row + 1, row + self._repeat + 1))

    def _characters(self, text: str) -> None:
        if self._cell is None:
            if self._open:
                self.styles.text(self._open[-1], text)
        elif self._paragraphs and not self._unread:
            self._paragraphs[-1] += _BLANKS.sub(" ", text)

    def _end(self, full_name: str) -> None:
        name = self._open.pop()
        if name in _NO_CELL_TEXT or name.startswith("draw:"):
            self._unread -= 1
        elif self._unread:
            return
        elif name in _CELLS and self._cell is not None:
            self._end_cell(self._cell)
            self._cell = None
        elif self._cell is not None:
            return
        elif name == "table:table-row":
            self._take_cells(len(self._row) * (self._repeat - 1))
            self.sheets[-1].add_rows(self._row, self._odd, self._repeat)
        elif name == "table:table":
            self._in_table = False
        else:
            self.styles.end(name)

    def _end_cell(self, cell: dict[str, str]) -> None:
        repeat = _count(cell, "table:number-columns-repeated")
        first = self._column + 1
        self._column += repeat
        self._merge(cell, first)
        style = cell.get("table:style-name") or self._row_style or self.sheets[-1].style_of(first)
        try:
            shown = "\n".join(self._paragraphs) if self._paragraphs else None
            value, odd = read_cell(cell, shown, style, self.styles)
        except Unreadable as error:
            raise OdsProblem(str(error), self._place()) from None
        if value == "" and odd is None:
            return
        if self._column > MAX_COLUMN:
            raise OdsProblem("cells lie outside the sheet", self._place())
        self._take_cells(self._column - len(self._row))
        self._row.extend([""] * (first - 1 - len(self._row)))
        self._row.extend([value] * repeat)
        if odd is not None:
            self._odd.append((range(first, first + repeat), odd))

    def _merge(self, cell: dict[str, str], first: int) -> None:
        rows = _count(cell, "table:number-rows-spanned")
        columns = _count(cell, "table:number-columns-spanned")
        if rows > 1 or columns > 1:
            row = self.sheets[-1].row + 1
            self.sheets[-1].merged.append(CellRange(row, first, row + rows - 1, first + columns - 1))

    def _take_cells(self, count: int) -> None:
        self._left -= count
        if self._left < 0:
            raise OdsProblem("it spans more cells than are read (repeated rows or columns)", self._place())

    def _place(self) -> str:
        sheet = self.sheets[-1]
        return f"{sheet.name}, {address(sheet.row + 1, max(self._column, 1))}"


def _count(attributes: dict[str, str], name: str) -> int:
    """A number of repetitions; 1 where none is given. Raises OdsProblem for what is none."""
    text = attributes.get(name, "1")
    if not (text.isascii() and text.isdigit() and len(text) < 10):
        raise OdsProblem(f"{name} is {text[:20]!r}")
    return max(int(text), 1)
