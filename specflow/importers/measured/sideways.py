"""Tables that lie on their side: the headers in the first column, one reading after the other to the right."""

from __future__ import annotations

from dataclasses import dataclass, replace

from specflow.importers.measured.context import Context
from specflow.importers.measured.facts import read_preamble
from specflow.importers.measured.header_cells import UNIT_WORDS, HeaderCell, with_unit
from specflow.importers.measured.header_text import header_key, known_unit, read_header
from specflow.importers.measured.items import names_items
from specflow.importers.measured.place_facts import amounts_of
from specflow.importers.measured.result import Question
from specflow.importers.measured.roles import role_of_words
from specflow.importers.measured.selection import is_summary
from specflow.importers.measured.statements import is_reading
from specflow.importers.measured.tables import FoundTable, cut_table
from specflow.importers.readers import CellRange, Grid, Value, is_blank, looks_numeric

#: What stands in the corner over labels; it says nothing of the row of items or conditions beside it.
_CORNERS = frozenset(
    ("", "parameter", "parameters", "quantity", "measurement", "characteristic", "property", "test", "metric", "name",
     "item", "description", "messgröße", "symbol")
)  # fmt: skip


@dataclass(frozen=True, slots=True)
class Region:
    """Rows ``first`` to ``last`` that begin with a label in ``column``; the last column is that of the last cell."""

    first: int
    last: int
    column: int
    last_column: int


def find_sideways(
    grid: Grid, top: int, stop: int, context: Context, is_only: bool
) -> tuple[FoundTable, int] | None:
    """Return the first table on its side in rows ``top`` up to ``stop``, and the row below it.

    A table of one reading (labels with one number each) is taken where nothing else on the sheet is (``is_only``).
    """
    region = _region(grid, top, stop, context)
    if region is None:
        return None
    turned = _turned(grid, region, context)
    if len(turned.rows) < (1 if is_only else 2):
        return None
    above = read_preamble(grid, top, region.first)
    return replace(turned, facts=above.facts), region.last + 1


def _turned(grid: Grid, region: Region, context: Context) -> FoundTable:
    area = CellRange(region.first, region.column, region.last, region.last_column)
    cells = grid.cut(area).turn()
    table = cut_table(cells, cells.first_row, cells.first_row, 1, context.recognises)
    return _with_corner(_with_units_below(table), context)


def _with_units_below(table: FoundTable) -> FoundTable:
    """Take units that stand behind the readings ("Gain | 20.5 | dB"): turned, they are a row of nothing else."""
    if table.units_row is not None:
        return table
    for row in table.rows.tolist():
        texts = {header.column: table.grid.value(row, header.column) for header in table.headers}
        filled = [value for value in texts.values() if not is_blank(value)]
        if len(filled) < 2 or not all(_is_unit(value) for value in filled):
            continue
        headers = tuple(with_unit(table.grid, header, row) for header in table.headers)
        return replace(table, headers=headers, rows=table.rows[table.rows != row])
    return table


def _is_unit(value: Value) -> bool:
    return isinstance(value, str) and known_unit(value.strip()) is not None and not looks_numeric(value)


def _region(grid: Grid, top: int, stop: int, context: Context) -> Region | None:
    """The first run of rows that each are a label with readings to its right; a row of names may stand over them."""
    row = top
    while row < stop:
        column = _label_column(grid, row)
        if column is None:
            row += 1
            continue
        last = row
        while last + 1 < stop and _label_column(grid, last + 1) == column:
            last += 1
        labels = [str(grid.value(one, column)) for one in range(row, last + 1)]
        known = [label for label in labels if context.recognises(" ".join(label.split()))]
        quantities = [label for label in known if _is_no_role(label)]
        if (
            len(known) >= 2
            and 2 * len(known) >= len(labels)
            and quantities
            and not _has_ids(grid, row, last, column)
        ):
            first = row
            while first > top and _is_row_of_names(grid, first - 1, (row, last), column):
                first -= 1
            width = max(len(grid.row(one)) for one in range(first, last + 1))
            return Region(first, last, column, width)
        row = last + 1
    return None


def _is_no_role(label: str) -> bool:
    return role_of_words(read_header(label)) is None


def _label_column(grid: Grid, row: int) -> int | None:
    """The column of the label when the row is a label with at least one reading, and nothing but readings or units."""
    if row in grid.comment_rows:
        return None
    filled = [(column, value) for column, value in enumerate(grid.row(row), start=1) if not is_blank(value)]
    if len(filled) < 2 or not _is_label(filled[0][1]):
        return None
    rest = [value for _, value in filled[1:] if not _is_unit(value)]
    readings = sum(map(is_reading, rest))
    return filled[0][0] if readings and 2 * readings > len(rest) else None


def _is_label(value: Value) -> bool:
    return isinstance(value, str) and not is_reading(value) and not looks_numeric(value) and ":" not in value


def _has_ids(grid: Grid, first: int, last: int, column: int) -> bool:
    """Whether the labels are names that repeat, as items and modes in the first column of a table do."""
    labels = [header_key(str(grid.value(row, column))) for row in range(first, last + 1)]
    return len(set(labels)) < len(labels)


def _is_row_of_names(grid: Grid, row: int, body: tuple[int, int], column: int) -> bool:
    """Whether a row names the columns of readings below it: "Parameter | SN 1 | SN 2", with a corner or without."""
    corner = grid.value(row, column)
    if row in grid.comment_rows or not (is_blank(corner) or _is_label(corner)):
        return False
    named = _columns(grid, row, column)
    filled = set().union(*(_columns(grid, one, column) for one in range(body[0], body[1] + 1)))
    return bool(named) and len(filled - named) <= 1 and not named - filled


def _columns(grid: Grid, row: int, label: int) -> set[int]:
    """The columns right of the labels in which something is written."""
    return {
        column
        for column, value in enumerate(grid.row(row), start=1)
        if column > label and not is_blank(value)
    }


def _with_corner(table: FoundTable, context: Context) -> FoundTable:
    """Say what the row of names means: items where they are such; else it is asked about."""
    doubts = list(table.doubts)
    headers = list(table.headers)
    unnamed = list(table.unnamed)
    for place, header in enumerate(headers):
        if header_key(header.text) not in _CORNERS:
            continue
        texts = _texts(table, header.column)
        if names_items(texts, context):
            headers[place] = replace(header, text="item")
        elif texts:
            doubts.append(_corner_question(table, header.column, texts))
    for column in table.unnamed:
        texts = _texts(table, column)
        if not texts:
            continue
        unnamed.remove(column)
        if names_items(texts, context):
            headers.append(_header(table, column))
        else:
            doubts.append(_corner_question(table, column, texts))
    headers.sort(key=lambda header: header.column)
    return replace(table, headers=tuple(headers), unnamed=tuple(unnamed), doubts=tuple(doubts))


def _header(table: FoundTable, column: int) -> HeaderCell:
    return replace(table.headers[0], column=column, text="item", unit="", unit_row=None, k=None)


def _texts(table: FoundTable, column: int) -> list[str]:
    texts = [str(value).strip() for value in table.cells(column).at(table.rows) if not is_blank(value)]
    return [text for text in texts if header_key(text) not in UNIT_WORDS and not is_summary(text)]


def _corner_question(table: FoundTable, column: int, texts: list[str]) -> Question:
    shown = ", ".join(texts[:4])
    row = table.grid.column_name(column)
    what = f"row {row} says {shown} over the readings; of which condition or item, it does not say"
    like = "frequency" if all(amounts_of(text, ["Hz"]) for text in texts) else "DIMENSION"
    remedy = (
        f'write "item" or the condition with its unit into the first cell of the row, or turned = true with the area, '
        f'and column = "{row}", dimension = "{like}" in a mapping'
    )
    return Question("", table.grid.address(table.header_row, column), what, remedy)
