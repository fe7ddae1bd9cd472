"""Blocks of numbers without a header row, as instruments write traces below their settings.

What the columns are is taken from the settings directly above where these say it beyond doubt (start and stop of the
axis are the first and the last number of a column); else the columns go by their numbers and are asked about.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from specflow.errors import UnitError
from specflow.importers.measured.cells import read_column
from specflow.importers.measured.context import Context
from specflow.importers.measured.cut_title import with_cut
from specflow.importers.measured.facts import Fact, read_preamble
from specflow.importers.measured.header_cells import HeaderCell
from specflow.importers.measured.header_text import header_key, known_unit
from specflow.importers.measured.names import name_of
from specflow.importers.measured.placed import NAMELESS, headerless
from specflow.importers.measured.result import Question
from specflow.importers.measured.tables import FoundTable
from specflow.importers.readers import CellRange, Grid, Value, is_blank, looks_numeric
from specflow.units import parse_quantity

_RUN = 3
_WORDS_ABOVE = 12
_MANY = 8
_STARTS = frozenset(
    ("xstart", "start", "startfreq", "startfrequency", "startfreqency", "fstart", "freqstart", "xmin")
)
_STOPS = frozenset(("xstop", "stop", "stopfreq", "stopfrequency", "fstop", "freqstop", "xmax", "xend", "end"))
_X_UNIT = re.compile(r"^(?:x[\s_-]*(?:axis[\s_-]*)?units?|units?[\s_-]*x)\b", re.IGNORECASE)
_Y_UNIT = re.compile(
    r"^(?:y[\s_-]*(?:axis[\s_-]*)?units?|units?[\s_-]*y|(?:level|amplitude)[\s_-]*units?)\b", re.IGNORECASE
)
_SECTION = re.compile(r"^\[[^\[\]]+\]$")


def find_block(grid: Grid, top: int, stop: int) -> int | None:
    """Return the first of ``_RUN`` rows of numbers that follow each other and fill the same columns (two at least)."""
    run: tuple[int, ...] = ()
    length = 0
    for row in range(top, stop):
        columns = _number_columns(grid, row)
        if columns and columns == run:
            length += 1
        else:
            run, length = columns, 1 if columns else 0
        if length == _RUN:
            return row - _RUN + 1
    return None


def end_before_more(grid: Grid, block: int) -> int:
    """The last row of a block where settings and another block follow; else the last row of the grid.

    One line of words between the blocks is a remark; settings are several.
    """
    last = _last_row(grid, block, _number_columns(grid, block)[0])
    more = find_block(grid, last + 1, grid.last_row + 1)
    if more is None:
        return grid.last_row
    written = [row for row in range(last + 1, more) if not all(map(is_blank, grid.row(row)))]
    return last if len(written) > 1 else grid.last_row


def is_far_from(grid: Grid, header: int, block: int) -> bool:
    """Whether a header row does not belong to a block of numbers: between them words stand over its first column."""
    column = _number_columns(grid, block)[0]
    between = [grid.value(row, column) for row in range(header + 1, block) if row not in grid.comment_rows]
    words = [
        value
        for value in between
        if isinstance(value, str) and not is_blank(value) and not looks_numeric(value)
    ]
    filled = [value for value in between if not is_blank(value)]
    return len(words) >= 2 and 2 * len(words) >= len(filled)


def block_table(grid: Grid, top: int, block: int, context: Context) -> FoundTable:
    """Return the block that begins in a row as a table, with the rows from ``top`` above it."""
    columns = _number_columns(grid, block)
    last = _last_row(grid, block, columns[0])
    area = CellRange(top, columns[0], last, columns[-1])
    cells = grid.cut(area)
    table = headerless(cells, top, block, context.recognises)
    facts = read_preamble(grid, _section_row(grid, top, block), block).facts
    headers = _in_one_cell(grid, top, block, columns, context)
    headers = headers or _named(table, facts, _units_above(grid, block), columns)
    words = _words_above(grid, top, block)
    table = replace(table, grid=cells, headers=headers, top=block, words_above=words, has_words=bool(words))
    table = replace(table, doubts=_matrix_question(table))
    return with_cut(replace(table, facts=section_facts(grid, top, block)), grid, block)


def _matrix_question(table: FoundTable) -> tuple[Question, ...]:
    """One question for a block of many columns that nothing names, in the place of one for each column."""
    nameless = [header for header in table.headers if header.text.startswith(NAMELESS)]
    if len(nameless) < _MANY:
        return ()
    first, last = nameless[0], nameless[-1]
    what = f"{len(table.rows)} rows of {len(nameless)} columns of numbers without headers ({table.place})"
    remedy = (
        f'in a mapping: area = "{table.place}", header_rows = 0, with [table.matrix] for one quantity over two axes '
        f"(--propose-mapping explains it), or an entry for each of the columns {first.letter} to {last.letter}"
    )
    return (Question("", first.cell, what, remedy),)


def section_facts(grid: Grid, top: int, row: int) -> tuple[Fact, ...]:
    """What stands above a row; of a text in sections, conditions only from the section of the row itself.

    Settings of other sections (markers, receivers, aerials that are not in use) say nothing of this table.
    """
    facts = read_preamble(grid, top, row).facts
    own = _section_row(grid, top, row)
    if own == top:
        return facts
    return tuple(fact for fact in facts if fact.row >= own or _is_of_the_file(fact))


def _is_of_the_file(fact: Fact) -> bool:
    return bool(name_of(fact.key))


def _section_row(grid: Grid, top: int, row: int) -> int:
    """The row of the last section name ("[Trace]") above a row; ``top`` without one."""
    for above in range(row - 1, top - 1, -1):
        filled = [value for value in grid.row(above) if not is_blank(value)]
        if len(filled) == 1 and isinstance(filled[0], str) and _SECTION.match(filled[0].strip()):
            return above
    return top


def _number_columns(grid: Grid, row: int) -> tuple[int, ...]:
    """The columns of a row when all that is written in it are plain numbers, two at least."""
    if row in grid.comment_rows:
        return ()
    columns = []
    for column, value in enumerate(grid.row(row), start=1):
        if is_blank(value):
            continue
        if not _is_number(value):
            return ()
        columns.append(column)
    return tuple(columns) if len(columns) > 1 else ()


def _is_number(value: Value) -> bool:
    if isinstance(value, str):
        return looks_numeric(value) and not value.strip().endswith("%")
    return isinstance(value, float | int) and not isinstance(value, bool)


def _last_row(grid: Grid, block: int, column: int) -> int:
    """The last row before words stand in the first column again."""
    cells = read_column(grid, column, block, grid.last_row + 1)
    ends = [row for row in cells.odd if isinstance(cells.value(row), str) and not is_blank(cells.value(row))]
    words = [row for row in ends if not looks_numeric(str(cells.value(row)))]
    stop = words[0] if words else grid.last_row + 1
    filled = np.flatnonzero(cells.filled[: stop - block])
    return block + int(filled[-1])


def _in_one_cell(
    grid: Grid, top: int, block: int, columns: Sequence[int], context: Context
) -> tuple[HeaderCell, ...]:
    """The headers in a line directly above that is one cell: "# Freq(Hz) Amp(dBm)", as many words as columns."""
    for row in range(block - 1, top - 1, -1):
        filled = [value for value in grid.row(row) if not is_blank(value)]
        if not filled:
            continue
        words = str(filled[0]).split() if len(filled) == 1 else []
        if (
            len(words) != len(columns)
            or not any(map(context.recognises, words))
            or any(map(looks_numeric, words))
        ):
            return ()
        return tuple(HeaderCell(column, row, word) for column, word in zip(columns, words, strict=True))
    return ()


def _named(
    table: FoundTable, facts: Sequence[Fact], units: Sequence[tuple[str, str, str]], columns: Sequence[int]
) -> tuple[HeaderCell, ...]:
    """Name the axis by its start and stop, and the only other column by the only unit above."""
    axis = _axis_of(table, facts, columns, units)
    if axis is None:
        return table.headers
    column, unit, cell = axis
    levels = [one for one in units if _Y_UNIT.match(one[1])]
    units = levels or [one for one in units if not _X_UNIT.match(one[1])]
    others = [one for one in columns if one != column]
    spelled = known_unit(unit)
    name = "Frequency" if spelled is not None and spelled.dimension == "frequency" else "Axis"
    named = []
    for header in table.headers:
        if header.column == column:
            header = replace(
                header, text=name, unit=unit, unit_row=header.row, unit_from=f"the settings above, {cell}"
            )
        elif len(others) == len(units) == 1:
            found, title, where = units[0]
            source = f"the settings above, {where}"
            header = replace(header, text=title, unit=found, unit_row=header.row, unit_from=source)
        named.append(header)
    return tuple(named)


def _axis_of(
    table: FoundTable, facts: Sequence[Fact], columns: Sequence[int], units: Sequence[tuple[str, str, str]]
) -> tuple[int, str, str] | None:
    """(column, unit, cell of the start) where a column begins at the start that is stated and ends at the stop.

    Where start and stop have no unit, the settings name the unit of the x axis.
    """
    starts = [fact for fact in facts if header_key(fact.key).replace(" ", "") in _STARTS]
    stops = [fact for fact in facts if header_key(fact.key).replace(" ", "") in _STOPS]
    if len(starts) != 1 or len(stops) != 1 or not len(table.rows):
        return None
    try:
        low, high = parse_quantity(starts[0].value), parse_quantity(stops[0].value)
    except UnitError:
        return None
    unit = str(low.unit)
    if unit == "1":
        unit = next((found for found, name, _ in units if _X_UNIT.match(name)), "1")
    if str(low.unit) != str(high.unit) or unit == "1":
        return None
    ends = (int(table.rows[0]), int(table.rows[-1]))
    fitting = []
    for column in columns:
        first, last = table.cells(column).numbers_at(np.array(ends, np.int32)).tolist()
        if np.isclose(first, float(low.value), 1e-9) and np.isclose(last, float(high.value), 1e-9):
            fitting.append(column)
    return (fitting[0], unit, starts[0].cell) if len(fitting) == 1 else None


def _units_above(grid: Grid, block: int) -> list[tuple[str, str, str]]:
    """Units in the section above that belong to no number ("Trace 1,,dBm"), with the words of their row, and cells."""
    found = []
    for row in range(_section_row(grid, grid.first_row, block), block):
        before: Value = ""
        name = ""
        for column, value in enumerate(grid.row(row), start=1):
            if is_blank(value):
                continue
            if isinstance(value, str) and not looks_numeric(value):
                unit = known_unit(value.strip())
                if name and unit is not None and str(unit) != "1" and not looks_numeric(str(before)):
                    found.append((value.strip(), name, grid.address(row, column)))
                name = name or " ".join(value.split())
            before = value
    return found


def _words_above(grid: Grid, top: int, block: int) -> tuple[str, ...]:
    """The words directly above, without numbers: they stand for headers in the key of the layout."""
    words: list[str] = []
    for row in range(block - 1, max(top, block - _WORDS_ABOVE) - 1, -1):
        texts = [value for value in grid.row(row) if isinstance(value, str) and not is_blank(value)]
        texts = [value for value in texts if not looks_numeric(value)]
        if not any(not is_blank(value) for value in grid.row(row)):
            break
        words += [re.sub(r"[0-9]+", "#", header_key(text)) for text in texts]
    return tuple(words)
