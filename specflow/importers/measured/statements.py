"""Rows among the rows of a table that state something of those below: ``S/N | SN2``, ``Ambient (°C) | 85``."""

from __future__ import annotations

import re
from collections.abc import Sequence

from specflow.conditions import is_unlocated_temperature
from specflow.importers.measured.cells import ColumnCells
from specflow.importers.measured.facts import read_facts
from specflow.importers.measured.header_text import read_header
from specflow.importers.measured.names import canonical
from specflow.importers.readers import Grid, Value, is_blank, looks_numeric

_LIKE_A_READING = re.compile(r"^[<>≤≥=~+\-−±]*\s*[.,]?[0-9]")
_MOST_TEXTS = 50
_MOST_WORDS = 2000


def is_reading(value: Value) -> bool:
    """Whether a cell holds a number, or a text that begins like one."""
    if isinstance(value, str):
        return _LIKE_A_READING.match(value.strip()) is not None
    return isinstance(value, float | int) and not isinstance(value, bool)


def statement_rows(grid: Grid, named: Sequence[ColumnCells], outside: Sequence[ColumnCells]) -> list[int]:
    """Give the rows that hold nothing but keys with their values, and begin under a column of readings or beside them.

    Under a column of words (items, modes) a word is a key only in a row that is hardly filled. ``named`` are the
    columns with a header.
    """
    found: set[int] = set()
    for cells in (*filter(_holds_readings, named), *outside):
        for row in cells.odd:
            if isinstance(cells.value(row), str) and row not in grid.comment_rows and _states(grid, row):
                found.add(row)
    return sorted(found.union(_among_words(grid, named[0], len(named)) if named else ()))


def _among_words(grid: Grid, cells: ColumnCells, columns: int) -> list[int]:
    """Rows of two cells, the first a key, in a table of more columns that begins with words: ``Ambient (°C) | 85``."""
    if columns <= 2 or not cells.odd or len(cells.distinct) > _MOST_WORDS or _holds_readings(cells):
        return []
    keys = {text for text in cells.distinct if isinstance(text, str) and _is_key(text.split(":")[0])}
    rows = [row for row in cells.odd if cells.value(row) in keys] if keys else []
    return [
        row
        for row in rows
        if row not in grid.comment_rows
        and sum(not is_blank(value) for value in grid.row(row)) <= 2
        and _states(grid, row)
    ]


def statement_text(grid: Grid, row: int) -> str:
    """The row as a person would say it: "S/N: SN2"."""
    return ", ".join(f"{fact.key}: {fact.value}" for fact in read_facts(grid, row))


def _holds_readings(cells: ColumnCells) -> bool:
    numbers = int(cells.numeric.sum())
    if not cells.odd or 2 * numbers >= len(cells.odd):
        return bool(cells.odd)
    texts = [cells.value(row) for row in cells.odd[:_MOST_TEXTS]]
    return 2 * sum(map(is_reading, texts)) >= len(texts)


def _states(grid: Grid, row: int) -> bool:
    filled = [value for value in grid.row(row) if not is_blank(value)]
    first = filled[0] if filled else ""  # a row of error cells holds nothing
    if not filled or not isinstance(first, str) or looks_numeric(first) or is_reading(first):
        return False
    facts = read_facts(grid, row)
    if not facts or len(filled) > 3 * len(facts) or not _is_key(facts[0].key):
        return False
    return len(filled) <= 2 * len(facts) or any(" " in fact.value for fact in facts)


def _is_key(key: str) -> bool:
    return bool(canonical(key)) or is_unlocated_temperature(read_header(key).name)
