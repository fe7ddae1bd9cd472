"""Tables of web pages, which instruments save as .xls: one grid a table, cells as text as written."""

from __future__ import annotations

from collections.abc import Callable
from html.parser import HTMLParser

from specflow.errors import FileError
from specflow.importers.readers.delimiter import decimal_mark, is_grouped
from specflow.importers.readers.encoding import decode
from specflow.importers.readers.grid import Grid
from specflow.importers.readers.places import CellRange
from specflow.importers.readers.source import Source
from specflow.importers.readers.stores import Value

MAX_CELLS = 2_000_000
_MOST_SPANNED = 16_384
_UNSEEN = frozenset({"script", "style", "head", "title"})


def read_html(source: Source) -> list[Grid]:
    """All tables of the page. Raises FileError for a page without one, and for tables inside tables."""
    text, notes = decode(source)
    page = _Page(lambda what, hint: FileError(what, where=source.name, hint=hint))
    try:
        page.feed(text)
        page.close()
    except AssertionError as error:  # the parser of the standard library asserts what the page should be
        raise FileError(
            f"the web page is damaged: {error}", where=source.name, hint="export the table as csv or .xlsx"
        ) from error
    tables = [table for table in page.tables if any(map(any, table.rows))]
    if not tables:
        raise FileError(
            "this is a web page without a table", where=source.name, hint="export the table as csv or .xlsx"
        )
    return [
        _grid(table, source.name, f"table {place}" if len(tables) > 1 else source.name, tuple(notes))
        for place, table in enumerate(tables, start=1)
    ]


def _grid(table: _Table, file: str, name: str, notes: tuple[str, ...]) -> Grid:
    texts = [str(cell) for row in table.rows for cell in row]
    decimal = decimal_mark(texts)
    return Grid(
        name=name,
        rows=table.rows,
        file=file,
        merged=tuple(table.merged),
        is_text=True,
        decimal=decimal,
        grouped=is_grouped(texts, decimal),
        notes=notes,
    )


class _Table:
    """Rows of one table; cells that are spanned stay empty, as in a workbook."""

    def __init__(self) -> None:
        self.rows: list[list[Value]] = []
        self.merged: list[CellRange] = []
        self._covered: set[tuple[int, int]] = set()

    def start_cell(self, rows: int, columns: int) -> None:
        """A cell begins that goes over so many rows and columns."""
        if not self.rows:
            self.rows.append([])
        row, cells = len(self.rows), self.rows[-1]
        while (row, len(cells) + 1) in self._covered:
            cells.append("")
        column = len(cells) + 1
        cells.append("")
        if rows > 1 or columns > 1:
            self.merged.append(CellRange(row, column, row + rows - 1, column + columns - 1))
            self._covered.update(
                (row + down, column + right)
                for down in range(rows)
                for right in range(columns)
                if down or right
            )

    def add(self, text: str) -> None:
        """More text of the last cell."""
        if self.rows and self.rows[-1]:
            self.rows[-1][-1] = f"{self.rows[-1][-1]}{text}"

    def end_cell(self) -> None:
        """The cell ends: runs of blanks are one."""
        if self.rows and self.rows[-1]:
            self.rows[-1][-1] = " ".join(str(self.rows[-1][-1]).split())


class _Page(HTMLParser):
    def __init__(self, refuse: Callable[[str, str], FileError]) -> None:
        super().__init__(convert_charrefs=True)
        self.tables: list[_Table] = []
        self._refuse = refuse
        self._in_table = self._in_cell = False
        self._unseen = 0
        self._left = MAX_CELLS

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        if tag in _UNSEEN:
            self._unseen += 1
        elif tag == "table":
            if self._in_table:
                raise self._refuse("a table of the web page stands inside another", "save it as .xlsx")
            self.tables.append(_Table())
            self._in_table = True
        elif self._in_table and tag == "tr":
            self._end_cell()
            self.tables[-1].rows.append([])
        elif self._in_table and tag in ("td", "th"):
            self._end_cell()
            self._start_cell(dict(attrs))
        elif self._in_cell and tag == "br":
            self.tables[-1].add(" ")

    def handle_endtag(self, tag: str) -> None:
        if tag in _UNSEEN:
            self._unseen = max(self._unseen - 1, 0)
        elif tag in ("td", "th", "tr", "table"):
            self._end_cell()
            self._in_table = self._in_table and tag != "table"

    def handle_data(self, data: str) -> None:
        if self._in_cell and not self._unseen:
            self.tables[-1].add(data)

    def _start_cell(self, attributes: dict[str, str | None]) -> None:
        rows, columns = _span(attributes.get("rowspan")), _span(attributes.get("colspan"))
        self._left -= rows * columns
        if self._left < 0:
            raise self._refuse(f"the tables span more than {MAX_CELLS:,} cells", "split the file")
        self.tables[-1].start_cell(rows, columns)
        self._in_cell = True

    def _end_cell(self) -> None:
        if self._in_cell:
            self.tables[-1].end_cell()
        self._in_cell = False


def _span(text: str | None) -> int:
    text = (text or "1").strip()
    return min(max(int(text), 1), _MOST_SPANNED) if text.isascii() and text.isdigit() and len(text) < 7 else 1
