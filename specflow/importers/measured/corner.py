"""Headers that are numbers: one quantity in several columns, each at another value of a condition.

The condition is named where the numbers carry a unit, in the corner ("Frequency (GHz) \\ Baseplate (°C)"), or in a row
above; the quantity in a row above or beside the corner. What is named nowhere is asked about.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from specflow.conditions import Comparison, find_dimension
from specflow.importers.measured.condition_column import is_temperature
from specflow.importers.measured.context import Context
from specflow.importers.measured.found_table import OverColumns
from specflow.importers.measured.header_cells import HeaderCell
from specflow.importers.measured.header_text import known_unit, read_header
from specflow.importers.measured.mapping_parts import UNLOCATED, PivotMapping
from specflow.importers.measured.quantity_text import NamedQuantity, name_quantity
from specflow.importers.measured.result import Question, Role
from specflow.importers.measured.roles import role_of_words
from specflow.importers.measured.statements import is_reading
from specflow.importers.measured.tables import FoundTable, table_below
from specflow.importers.measured.unit_source import FoundUnit
from specflow.importers.readers import Grid, Value, is_blank
from specflow.parameters import suits

_NUMBER_AND_UNIT = re.compile(r"^[+\-−]?\s?[0-9]+(?:[.,][0-9]+)?\s*(?P<unit>(?:[^\W\d_]|[°%]).*)$")
_ROWS_ABOVE = 3


@dataclass(frozen=True, slots=True)
class NumberRow:
    """A row of numbers that are headers: the label of the first column, and the columns of the numbers."""

    row: int
    first_column: int
    label: str
    label_row: int
    columns: tuple[int, ...]


def find_number_row(grid: Grid, top: int, stop: int, context: Context) -> NumberRow | None:
    """Return the first row of ``top`` up to ``stop`` that is a row of numbers over a table, None without one."""
    for row in range(top, min(stop, grid.last_row)):
        found = _number_row(grid, top, row, context)
        if found is not None:
            return found
    return None


def next_number_row(table: FoundTable, context: Context) -> int | None:
    """The first row below the headers of a table that is a row of numbers over another one."""
    cells = table.cells(table.headers[0].column)
    begins: dict[Value, bool] = {}  # a column of items has a million cells and few words
    last_label = -_ROWS_ABOVE - 1
    for place in np.flatnonzero(~cells.numeric[: table.stop_row - table.first_row]).tolist():
        row, value = table.first_row + place, cells.values[place]
        if is_blank(value):
            may = row - last_label <= _ROWS_ABOVE  # the label of a blank corner stands just above
        else:
            if value not in begins:
                begins[value] = is_reading(value) or _is_label(str(value), context)
            may, last_label = begins[value], row if begins[value] else last_label
        if (
            may
            and row < table.grid.last_row
            and _number_row(table.grid, table.first_row, row, context) is not None
        ):
            return row
    return None


def _is_label(label: str, context: Context) -> bool:
    return _is_of_words(label) or _is_named(label, context)


def table_under(grid: Grid, top: int, found: NumberRow, context: Context) -> FoundTable:
    """Return the table with its pivots, or with the question that has to be answered first."""
    label, across = _corner_parts(found.label)
    above = _rows_above(grid, top, found)
    groups = _groups(grid, found, above, context)
    headers = [HeaderCell(found.first_column, found.label_row, label, turned=grid.turned)]
    headers += [
        HeaderCell(column, found.row, _words(grid.value(found.row, column)), turned=grid.turned)
        for column in found.columns
    ]
    first_row = min([found.label_row, *(row for row in above)])
    table = table_below(grid, tuple(headers), top, found.label_row, found.row + 1, None, context.recognises)
    dimension = _dimension(grid, found, across, above, label)
    doubts: list[Question] = []
    pivots, over = [], []
    named, of_unit = dimension or ("", "")
    for columns, quantity, unit, words in groups:
        over.append(OverColumns(columns, quantity, unit, words, named, of_unit, across or named))
        if (
            dimension is None
            or quantity is None
            or quantity.parameter is None
            or _repeat(grid, found, columns)
        ):
            doubts.append(_question(grid, found, columns, dimension, words))
            continue
        pivot = _pivot(grid, columns, dimension, quantity, unit, _carried_unit(grid, found))
        pivots.append(replace(pivot, over=f"{words} | {across}" if across else words))
    rows = tuple(range(first_row, found.row + 1))
    return replace(table, pivots=tuple(pivots), over=tuple(over), doubts=tuple(doubts), title_rows=rows)


def _repeat(grid: Grid, found: NumberRow, columns: Sequence[int]) -> bool:
    """Whether a number stands over two of the columns: nobody can tell these apart."""
    return len({_words(grid.value(found.row, column)) for column in columns}) < len(columns)


def _number_row(grid: Grid, top: int, row: int, context: Context) -> NumberRow | None:
    if row in grid.comment_rows:
        return None
    filled = [(column, value) for column, value in enumerate(grid.row(row), start=1) if not is_blank(value)]
    numbers = [(column, value) for column, value in filled if is_reading(value)]
    if len(numbers) < 2 or len(filled) - len(numbers) > 1:
        return None
    columns = tuple(column for column, _ in numbers)
    if len(filled) > len(numbers):
        column, label = filled[0]
        if is_reading(label) or column > columns[0] or not isinstance(label, str) or ":" in label:
            return None
        label_row = row
    else:
        column, label, label_row = _label_above(grid, top, row, columns[0])
        if not label or _has_names(grid, row - 1, columns):
            return None
    words = _is_of_words(str(label))
    if not _is_over_numbers(grid, row, column, columns, words):
        return None
    if not words and not _is_named(str(label), context):
        return None
    return NumberRow(row, column, " ".join(str(label).split()), label_row, columns)


def _is_named(label: str, context: Context) -> bool:
    """Whether a corner says what runs down or across."""
    parts = [read_header(part) for part in _corner_parts(label)]
    if any(find_dimension(one.name) or is_temperature(one, FoundUnit(one.unit)) for one in parts):
        return True
    words = read_header(label)  # "Limit", "Mean" and the like stand before readings, not over them
    return bool(words.unit) and role_of_words(words) is None and context.recognises(words.text)


def _label_above(grid: Grid, top: int, row: int, before: int) -> tuple[int, str, int]:
    """The label of the first column in one of the rows above, where the corner itself is blank."""
    column = next((place for place in range(before - 1, 0, -1) if is_reading(grid.value(row + 1, place))), 0)
    if not column:
        return 0, "", 0
    for above in range(row - 1, max(top, row - _ROWS_ABOVE) - 1, -1):
        value = grid.value(above, column)
        if isinstance(value, str) and not is_blank(value) and not is_reading(value):
            return column, value, above
    return 0, "", 0


def _has_names(grid: Grid, row: int, columns: Sequence[int]) -> bool:
    """Whether each number has words of its own above: then it is a reading under its header."""
    return all(
        isinstance(value := grid.value(row, column), str) and not is_blank(value) for column in columns
    )


def _is_of_words(label: str) -> bool:
    """Whether the first column is one of items, or of a condition that is said in words."""
    down = read_header(_corner_parts(label)[0])
    named, dimension = role_of_words(down), find_dimension(down.name)
    is_item = named is not None and named[0] is Role.ITEM
    return is_item or (dimension is not None and dimension.comparison is Comparison.TEXT)


def _is_over_numbers(grid: Grid, row: int, column: int, columns: Sequence[int], words: bool) -> bool:
    """Whether the next two rows are rows of readings, the first column of them too unless it is one of words."""
    below = [one for one in range(row + 1, grid.last_row + 1) if not all(map(is_blank, grid.row(one)))][:2]
    for one in below:
        readings = sum(is_reading(grid.value(one, place)) for place in columns)
        first = grid.value(one, column)
        fits = not is_blank(first) and not is_reading(first) if words else is_reading(first)
        if not fits or 2 * readings < len(columns):
            return False
    return bool(below)


def _corner_parts(label: str) -> tuple[str, str]:
    """A corner says what runs down and, behind a backslash or an arrow, what runs to the right."""
    down, mark, across = label.partition("\\")
    if not mark and "→" in label and "↓" in label:
        found = re.search(r"(?P<a>.+?)\s*(?P<m>[→↓])\s*/?\s*(?P<b>.+?)\s*[→↓]$", " ".join(label.split()))
        if found:
            first, second = found["a"].strip(" /"), found["b"].strip(" /")
            return (first, second) if found["m"] == "↓" else (second, first)
    return (down.strip(), across.strip()) if mark else (label, "")


def _rows_above(grid: Grid, top: int, found: NumberRow) -> dict[int, dict[int, str]]:
    """Words over the numbers in the rows directly above: row → column → text, merged cells spread."""
    rows: dict[int, dict[int, str]] = {}
    for row in range(found.row - 1, max(top, found.row - _ROWS_ABOVE) - 1, -1):
        texts = {}
        for column in range(found.first_column, found.columns[-1] + 1):
            value = grid.value(row, column)
            if isinstance(value, str) and not is_blank(value):
                texts[column] = " ".join(value.split())
            elif not is_blank(value):
                return rows
        over = {column: text for column, text in texts.items() if column >= found.columns[0]}
        if row in grid.comment_rows or not (over or row == found.label_row or texts):
            return rows
        rows[row] = over or {column: text for column, text in texts.items() if row != found.label_row}
    return rows


def _dimension(
    grid: Grid, found: NumberRow, across: str, above: dict[int, dict[int, str]], label: str
) -> tuple[str, str] | None:
    """(dimension, unit) of the numbers; None where nothing, or more than one thing, names it."""
    named = {one for one in (_named_dimension(across), _unit_dimension(grid, found)) if one is not None}
    for texts in above.values():
        words = set(texts.values())
        if len(words) == 1:
            one = _named_dimension(words.pop())
            named |= {one} if one is not None else set()
    dimensions = {name for name, _ in named} - {_name_of(label)}
    if len(dimensions) != 1:
        return None
    units = {unit for name, unit in named if name in dimensions and unit}
    return (dimensions.pop(), units.pop()) if len(units) == 1 else None


def _name_of(label: str) -> str:
    found = find_dimension(read_header(label).name)
    return found.name if found else ""


def _named_dimension(text: str) -> tuple[str, str] | None:
    parts = read_header(text)
    dimension = find_dimension(parts.name)
    if dimension is not None:
        return dimension.name, parts.unit
    return (UNLOCATED, parts.unit) if is_temperature(parts, FoundUnit(parts.unit)) else None


def _unit_dimension(grid: Grid, found: NumberRow) -> tuple[str, str] | None:
    """What the units of the numbers themselves say: "28 GHz" is a frequency, "-40 °C" a temperature of something."""
    unit = _carried_unit(grid, found)
    spelled = known_unit(unit) if unit else None
    if spelled is None:
        return None
    if spelled.dimension == "frequency":
        return "frequency", unit
    return (UNLOCATED, unit) if spelled.dimension == "temperature" else None


def _carried_unit(grid: Grid, found: NumberRow) -> str:
    """The unit that all numbers carry; "" where they carry none, or several."""
    units = set()
    for column in found.columns:
        match = _NUMBER_AND_UNIT.match(_words(grid.value(found.row, column)))
        units.add(match["unit"].strip() if match else "")
    return units.pop() if len(units) == 1 else ""


Group = tuple[tuple[int, ...], NamedQuantity | None, str, str]


def _groups(grid: Grid, found: NumberRow, above: dict[int, dict[int, str]], context: Context) -> list[Group]:
    """The number columns by the quantity that stands over them: (columns, quantity, its unit, its words)."""
    for row, texts in above.items():
        named = {
            column: one for column, text in texts.items() if (one := _quantity(text, context)) is not None
        }
        if not named:
            continue
        groups = []
        starts = sorted(named)
        for place, start in enumerate(starts):
            stop = starts[place + 1] if place + 1 < len(starts) else found.columns[-1] + 1
            first = start if place else min(start, found.columns[0])
            area = grid.merged_range(row, start)
            if area is not None and area.first_row == row:
                stop = min(stop, area.last_column + 1)
            columns = tuple(column for column in found.columns if first <= column < stop)
            groups.append((columns, *named[start]))
        grouped = {column for group in groups for column in group[0]}
        rest = tuple(column for column in found.columns if column not in grouped)
        return [group for group in groups if group[0]] + ([(rest, None, "", "")] if rest else [])
    return [(found.columns, None, "", "")]


def _quantity(text: str, context: Context) -> tuple[NamedQuantity, str, str] | None:
    parts = read_header(text)
    if find_dimension(parts.name) is not None and not parts.unit.startswith("dB"):
        return None
    named = name_quantity(parts, parts.unit, context.dictionary, context.planes)
    parameter = named.parameter
    if parameter is None or named.doubt or not parts.unit or not suits(parameter, parts.unit):
        return None
    return named, parts.unit, text


def _pivot(
    grid: Grid,
    columns: Sequence[int],
    dimension: tuple[str, str],
    quantity: NamedQuantity,
    unit: str,
    carried: str,
) -> PivotMapping:
    name, of_condition = dimension
    assert quantity.parameter is not None  # groups without one are asked about before
    return PivotMapping(
        header=f"{{{name}}} {carried}".strip(),
        parameter=quantity.parameter.key,
        unit=unit,
        units={name: of_condition},
        plane=quantity.plane,
        statistic=quantity.statistic,
        polarisation=quantity.polarisation,
        columns=f"{grid.column_name(columns[0])}:{grid.column_name(columns[-1])}",
    )


def _words(value: Value) -> str:
    if isinstance(value, float):
        return f"{value:.15g}"
    return " ".join(str(value).split())


def _question(
    grid: Grid, found: NumberRow, columns: Sequence[int], dimension: tuple[str, str] | None, words: str
) -> Question:
    shown = ", ".join(_words(grid.value(found.row, column)) for column in columns[:4])
    first, last = grid.column_name(columns[0]), grid.column_name(columns[-1])
    lacking = []
    if dimension is None:
        lacking.append("which condition (and unit) these are")
    if not words:
        lacking.append("of which quantity (and unit) the values are")
    what = f"columns {first} to {last} have numbers as headers ({shown} ...); nothing says {' and '.join(lacking)}"
    name = dimension[0] if dimension else "DIMENSION"
    unit = dimension[1] if dimension else "UNIT"
    remedy = (
        f'in a mapping: [table.pivot] header = "{{{name}}}", columns = "{first}:{last}", parameter, unit, '
        f'units = {{ {name} = "{unit}" }}; or write both over the numbers'
    )
    return Question("", grid.address(found.row, columns[0]), what, remedy)
