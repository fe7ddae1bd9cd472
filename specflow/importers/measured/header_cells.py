"""The header cells of a table: of one row or several, with merged cells spread, and with the units row below."""

from __future__ import annotations

import re
from dataclasses import dataclass, replace

from specflow.importers.measured.header_text import known_unit, read_header, without_coverage
from specflow.importers.readers import CellRange, Grid, Value, address, column_letter, is_blank, looks_numeric

_NO_UNIT = ("", "-", "—", "–", "n/a")

_MOST_ROWS = 4

#: What stands before a row of units, and is none itself.
UNIT_WORDS = frozenset(("unit", "units", "uom", "einheit"))


@dataclass(frozen=True, slots=True)
class HeaderCell:
    """One header: its column, its text as written, and the unit of a units row below it ("" without one).

    ``k`` is a coverage factor that stands beside that unit; ``unit_from`` says where the unit stands when that is not
    the units row. ``turned``: rows and columns of its grid have changed places.
    """

    column: int
    row: int
    text: str
    unit: str = ""
    unit_row: int | None = None
    k: float | None = None
    unit_from: str = ""
    turned: bool = False

    @property
    def cell(self) -> str:
        """Its true address."""
        return address(self.column, self.row) if self.turned else address(self.row, self.column)

    @property
    def letter(self) -> str:
        """The name of its column: its letter; the number of the true row where the table is turned."""
        return str(self.column) if self.turned else column_letter(self.column)

    @property
    def line(self) -> str:
        """Its column as people say it: "column C"; "row 3" where the table is turned."""
        return f"{'row' if self.turned else 'column'} {self.letter}"


def count_header_rows(grid: Grid, row: int) -> int:
    """How many rows the headers have that begin in ``row``: those below tell apart what a cell above is merged over."""
    count = 1
    while count < _MOST_ROWS and _tells_apart(grid, row + count - 1):
        count += 1
    return count


def _tells_apart(grid: Grid, row: int) -> bool:
    """Whether the row below tells apart the columns over which a header is merged: Gain over Min, Typ, Max.

    It may be merged over some of them, too: supplies below a power, over Typ and Max of each.
    """
    below = [grid.value(row + 1, column) for column in range(grid.first_column, grid.last_column + 1)]
    if row >= grid.last_row or any(not isinstance(value, str) or looks_numeric(value) for value in below):
        return False
    return any(_is_told_apart(grid, row + 1, area) for area in grid.merged if _is_over_columns(area, row))


def _is_over_columns(area: CellRange, row: int) -> bool:
    return area.first_row == area.last_row == row and area.first_column < area.last_column


def _is_told_apart(grid: Grid, row: int, area: CellRange) -> bool:
    filled = 0
    for column in range(area.first_column, area.last_column + 1):
        value = grid.value(row, column)
        filled += not is_blank(value)
        if is_blank(value) and is_blank(_spread(grid, row, column)):
            return False
    return filled > 1


def read_headers(grid: Grid, row: int, count: int) -> tuple[HeaderCell, ...]:
    """Headers of one or several rows; the second row fills a lone ``_`` of the first, else it is put behind."""
    found = []
    for column in range(grid.first_column, grid.last_column + 1):
        text = ""
        for number in range(row, row + count):
            value = grid.value(number, column)
            value = _spread(grid, number, column) if number < row + count - 1 and is_blank(value) else value
            more = " ".join(_header_word(value).split())
            if re.search(r"(?<!\w)_(?!\w)", text):
                text = re.sub(r"(?<!\w)_(?!\w)", lambda _, word=more: word, text, count=1)  # type: ignore[misc]
            else:
                text = _joined(text, more)
        if text:
            found.append(HeaderCell(column, row, text, turned=grid.turned))
    return tuple(found)


def _header_word(value: Value) -> str:
    if isinstance(value, float) and value.is_integer():
        return str(int(value))
    return str(value)


def find_units_row(grid: Grid, row: int, headers: tuple[HeaderCell, ...]) -> int | None:
    """The row below the header when all that is written in it are units."""
    if row > grid.last_row or row in grid.comment_rows:
        return None
    values = [grid.value(row, header.column) for header in headers]
    texts = [value.strip() if isinstance(value, str) else None for value in values]
    if any(text is None for text in texts):
        return None
    if texts and texts[0] is not None and texts[0].casefold() in UNIT_WORDS:
        texts[0] = ""
    units = [_unit_and_k(text)[0] for text in texts if text is not None and text not in _NO_UNIT]
    if units and all(known_unit(unit) is not None and not looks_numeric(unit) for unit in units):
        return row
    return None


def with_nameless_axis(grid: Grid, row: int, headers: tuple[HeaderCell, ...]) -> tuple[HeaderCell, ...]:
    """Add the one column without a header, left of the others, of which a row below the headers gives the unit alone.

    Analysers write ",Trace 1,Trace 2" over "Hz,," and the readings; it is called a frequency where the unit is one and
    the settings above speak of a frequency.
    """
    filled = [(column, value) for column, value in enumerate(grid.row(row), start=1) if not is_blank(value)]
    if len(filled) != 1 or row in grid.comment_rows or row > grid.last_row or not headers:
        return headers
    column, value = filled[0]
    unit = known_unit(value.strip()) if isinstance(value, str) and not looks_numeric(value) else None
    if unit is None or column >= headers[0].column:
        return headers
    above = [
        cell for number in range(grid.first_row, row) for cell in grid.row(number) if isinstance(cell, str)
    ]
    speaks = any("freq" in cell.casefold() for cell in above)
    text = "Frequency" if unit.dimension == "frequency" and speaks else f"column #{column}"
    axis = HeaderCell(column, headers[0].row, text, str(value).strip(), row, turned=grid.turned)
    return (axis, *headers)


def with_unit(grid: Grid, header: HeaderCell, row: int) -> HeaderCell:
    text, k = _unit_and_k(str(grid.value(row, header.column)).strip())
    return (
        header
        if text in _NO_UNIT or text.casefold() in UNIT_WORDS
        else replace(header, unit=text, unit_row=row, k=k)
    )


def _unit_and_k(text: str) -> tuple[str, float | None]:
    """The parts of a cell of a units row: "[GHz]", "dB (k=2)", "(± dB, k=2)"."""
    unit, k = without_coverage(_bare(text))
    return _bare(unit.removeprefix("±").removeprefix("+/-").strip()), k


def _bare(text: str) -> str:
    inside = text[1:-1]
    is_bracketed = text[:1] + text[-1:] in ("[]", "()") and not set("[]()") & set(inside)
    return inside.strip() if is_bracketed else text


def _spread(grid: Grid, row: int, column: int) -> Value:
    """What a cell merged over several columns of a header row says of each of them."""
    area = grid.merged_range(row, column)
    if area is None or area.first_column == area.last_column or area.first_row != row:
        return ""
    return grid.value(area.first_row, area.first_column)


def _joined(text: str, more: str) -> str:
    """A header and what stands below it: "Gain (dB)" over "Min" is "Gain Min (dB)"."""
    upper = read_header(text)
    own = looks_numeric(more) or read_header(more).unit or known_unit(more) is not None
    if not upper.unit or not more or own:
        return f"{text} {more}".strip()
    return f"{upper.name} {more} ({upper.unit})"
