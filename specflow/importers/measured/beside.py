"""Tables that stand beside each other: parted by blank columns, or by headers that begin again."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from specflow.conditions import find_dimension, is_unlocated_temperature
from specflow.importers.measured.context import Context
from specflow.importers.measured.facts import Fact, read_preamble
from specflow.importers.measured.header_cells import read_headers
from specflow.importers.measured.header_text import header_key, read_header
from specflow.importers.measured.long_form import find_long
from specflow.importers.measured.mapping_parts import LayoutMapping
from specflow.importers.measured.names import canonical
from specflow.importers.measured.result import Question
from specflow.importers.measured.roles import role_of_words
from specflow.importers.measured.tables import FoundTable, find_header, find_tables
from specflow.importers.readers import CellRange, Grid, is_blank

_LOOK_AT = 20  # rows at which nearly every column has begun
_MOST_COLUMNS = 2000
_WIDEST_FACTS = 3
_MOST_FACTS = 60


@dataclass(frozen=True, slots=True)
class Strips:
    """A sheet cut into strips of columns; ``doubt`` where it may as well be one table.

    ``facts`` are those of strips that hold nothing but keys with their values, beside a table.
    """

    grids: tuple[Grid, ...]
    doubt: Question | None = None
    facts: tuple[Fact, ...] = ()


def strips_of(grid: Grid, context: Context) -> Strips:
    """Cut a sheet, where its columns hold tables of their own; else it is its own only strip."""
    whole = Strips((grid,))
    if grid.last_column - grid.first_column + 1 > _MOST_COLUMNS:
        return whole
    parted = _at_gaps(grid, context) or _at_repeats(grid, context)
    return parted or whole


def _at_gaps(grid: Grid, context: Context) -> Strips | None:
    """Cut at columns in which nothing is written, where both sides are tables of their own."""
    runs = _written_runs(grid)
    if len(runs) < 2:
        return None
    facts, runs = _without_facts(grid, runs)
    kept: list[tuple[int, int]] = [runs[0]]
    doubt: Question | None = None
    for run in runs[1:]:
        verdict = _are_two(_strip(grid, kept[-1]), _strip(grid, run), context)
        if isinstance(verdict, Question):
            doubt = verdict
        if verdict is True:
            kept.append(run)
        else:
            kept[-1] = (kept[-1][0], run[1])
    if len(kept) < 2 and not facts:
        return Strips((grid,), doubt) if doubt else None
    return Strips(tuple(_strip(grid, run) for run in kept), doubt, facts)


def _without_facts(grid: Grid, runs: list[tuple[int, int]]) -> tuple[tuple[Fact, ...], list[tuple[int, int]]]:
    """Take out the strips, right of the first, in which every row but a title is a key with its value."""
    facts: list[Fact] = []
    left = runs[:1]
    for run in runs[1:]:
        own = _facts_only(_strip(grid, run)) if run[1] - run[0] < _WIDEST_FACTS else ()
        facts += own
        left += [] if own else [run]
    return tuple(facts), left


def _facts_only(strip: Grid) -> tuple[Fact, ...]:
    """The facts of a strip in which every row but a title is a key with its value; () for any other."""
    rows = [
        row for row in range(strip.first_row, strip.last_row + 1) if not all(map(is_blank, strip.row(row)))
    ]
    if len(rows) > _MOST_FACTS:
        return ()
    own = read_preamble(strip, strip.first_row, strip.last_row + 1).facts
    known = sum(bool(canonical(fact.key)) for fact in own)
    return own if known >= 2 and 2 * known >= len(own) and len(own) >= len(rows) - 1 else ()


def _written_runs(grid: Grid) -> list[tuple[int, int]]:
    """Runs of columns with something in them. Only where a header-like row has a gap is a column looked through."""
    last = grid.last_row + 1
    runs: list[tuple[int, int]] = []
    for column in range(grid.first_column, grid.last_column + 1):
        begins = range(grid.first_row, min(last, grid.first_row + _LOOK_AT))
        if all(is_blank(grid.value(row, column)) for row in begins) and all(
            map(is_blank, grid.column(column, grid.first_row, last))
        ):
            continue
        if runs and runs[-1][1] == column - 1:
            runs[-1] = (runs[-1][0], column)
        else:
            runs.append((column, column))
    return runs


def _strip(grid: Grid, run: tuple[int, int]) -> Grid:
    return grid.cut(CellRange(grid.first_row, run[0], grid.last_row, run[1]))


def _are_two(left: Grid, right: Grid, context: Context) -> bool | Question:
    """Whether two strips are tables of their own; a question where both readings hold."""
    ones, others = find_tables(left, context.recognises), find_tables(right, context.recognises)
    if not ones or not others:
        return False
    one, other = _at_same_height(ones, others)
    if one.header_row != other.header_row:
        return True
    if _dimensions(one) & _dimensions(other):
        return True
    if _keys(one) & _keys(other):
        return _begins_with_condition(other, context)
    if any(find_long(table, LayoutMapping(), context) is not None for table in (one, other)):
        return True
    if not _begins_with_condition(other, context):
        return False
    if _differ_in_length(one, other):
        return True
    if not _dimensions(one) or not _dimensions(other) or not _holds_values(other, context):
        return False
    return _question(one, other)


def _at_same_height(
    ones: Sequence[FoundTable], others: Sequence[FoundTable]
) -> tuple[FoundTable, FoundTable]:
    rows = {table.header_row: table for table in others}
    for one in ones:
        if one.header_row in rows:
            return one, rows[one.header_row]
    return ones[0], others[0]


def _keys(table: FoundTable) -> set[str]:
    return {header_key(header.text) for header in table.headers}


def _dimensions(table: FoundTable) -> set[str]:
    names = {read_header(header.text).name for header in table.headers}
    found = {dimension.name for name in names if (dimension := find_dimension(name)) is not None}
    return found | {"temperature" for name in names if is_unlocated_temperature(name)}


def _begins_with_condition(table: FoundTable, context: Context) -> bool:
    """Whether the first column can be the axis of a table of its own: a condition, or numbers of a name unknown."""
    first = table.headers[0]
    parts = read_header(first.text)
    if find_dimension(parts.name) is not None or is_unlocated_temperature(parts.name):
        return True
    if role_of_words(parts) is not None or context.recognises(first.text):
        return False
    return len(table.headers) > 1 and bool(table.cells(first.column).numeric.any())


def _holds_values(table: FoundTable, context: Context) -> bool:
    others = [read_header(header.text) for header in table.headers]
    return any(
        find_dimension(parts.name) is None and role_of_words(parts) is None and context.recognises(parts.text)
        for parts in others
    )


def _extent(table: FoundTable) -> tuple[int, int]:
    return (int(table.rows[0]), int(table.rows[-1])) if len(table.rows) else (0, 0)


def _differ_in_length(one: FoundTable, other: FoundTable) -> bool:
    """Whether most rows of the longer table have none of the other beside them."""
    longer, shorter = sorted((one.rows, other.rows), key=len, reverse=True)
    return 2 * len(np.setdiff1d(longer, shorter)) > len(longer)


def _question(one: FoundTable, other: FoundTable) -> Question:
    first, last = one.headers[0].letter, other.headers[-1].letter
    rows = f"{one.header_row}", f"{_extent(other)[1]}"
    what = (
        f"{one.place} and {other.place} may be two tables beside each other, or one whose rows go over the blank "
        "column; both begin with a condition"
    )
    remedy = (
        f'in a mapping: one [[table]] with area = "{one.place}" and one with area = "{other.place}", or one '
        f'with area = "{first}{rows[0]}:{last}{rows[1]}"'
    )
    return Question("", "", what, remedy)


def _at_repeats(grid: Grid, context: Context) -> Strips | None:
    """Cut where the header of a condition begins again: Frequency, S21, Frequency, S11."""
    row = find_header(grid, grid.first_row, context.recognises)
    headers = read_headers(grid, row.row, 1) if row is not None else ()
    if not headers:
        return None
    first = header_key(headers[0].text)
    starts = [place for place, header in enumerate(headers) if header_key(header.text) == first]
    parts = read_header(headers[0].text)
    is_axis = find_dimension(parts.name) is not None or is_unlocated_temperature(parts.name)
    lengths = {after - before for before, after in zip(starts, [*starts[1:], len(headers)], strict=True)}
    if len(starts) < 2 or min(lengths) < 2 or not is_axis:
        return None
    columns = [headers[place].column for place in starts]
    ends = [column - 1 for column in columns[1:]] + [grid.last_column]
    begins = [grid.first_column, *columns[1:]]
    return Strips(tuple(_strip(grid, run) for run in zip(begins, ends, strict=True)))
