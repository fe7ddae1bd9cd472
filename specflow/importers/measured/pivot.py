"""Columns that are one quantity at several conditions, stacked below each other into one column of values."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from specflow.conditions import Comparison, known_dimension
from specflow.errors import UnitError
from specflow.importers.measured.cells import Rows
from specflow.importers.measured.mapping import PivotMapping
from specflow.importers.measured.meaning import ColumnMeaning, pivot_pattern
from specflow.importers.measured.result import Question
from specflow.importers.readers import column_letter
from specflow.model.columns import Columns, TextColumn
from specflow.units import parse_number, parse_unit


@dataclass(frozen=True, slots=True)
class PivotConditions:
    """The conditions that the header of each pivot column states: dimension → one entry a column."""

    numeric: dict[str, list[float]]
    text: dict[str, list[str]]
    units: dict[str, str]


def read_pivot_headers(pivot: PivotMapping, columns: Sequence[ColumnMeaning]) -> PivotConditions | Question:
    """Read the conditions out of the headers; a header or a unit that cannot be read is a question."""
    pattern = pivot_pattern(pivot.header)
    read = PivotConditions({}, {}, {})
    for column in columns:
        match = pattern.fullmatch(column.header.text)
        if match is None:
            continue
        for name, words in match.groupdict().items():
            known = known_dimension(name)
            is_text = name not in pivot.units and (known is None or known.comparison is Comparison.TEXT)
            if is_text:
                read.text.setdefault(name, []).append(" ".join(words.split()))
                continue
            try:
                unit = parse_unit(pivot.units[name]) if name in pivot.units else None
                read.numeric.setdefault(name, []).append(parse_number(words))
            except UnitError as error:
                return Question(
                    column.header.text, column.header.cell, error.message, "mend the pattern of the pivot"
                )
            if unit is None and (known is None or known.unit):
                remedy = f'write units = {{ {name} = "..." }} in the pivot'
                return Question(column.header.text, column.header.cell, f"{name} without a unit", remedy)
            if unit is not None:
                read.units[name] = pivot.units[name]
    return read


def stack_conditions(rows: Columns, headers: PivotConditions, count: int) -> Columns:
    """Repeat the conditions of the rows for each of ``count`` columns, and add what the headers say."""
    size = rows.size
    numeric = {name: np.tile(values, count) for name, values in rows.numeric.items()}
    text = {name: stack_words(words, count) for name, words in rows.text.items()}
    numeric |= {
        name: np.repeat(np.array(values, np.float64), size) for name, values in headers.numeric.items()
    }
    for name, words in headers.text.items():
        one = TextColumn.of(words)
        text[name] = TextColumn(np.repeat(one.codes, size), one.labels)
    return Columns(size * count, numeric, text, {**rows.units, **headers.units})


def stack_words(words: TextColumn, count: int) -> TextColumn:
    """Repeat a column of words."""
    return TextColumn(np.tile(words.codes, count), words.labels)


def source_columns(columns: Sequence[ColumnMeaning], rows: Rows) -> TextColumn:
    """The letter of the column that each stacked value stands in."""
    letters = TextColumn.of([column_letter(column.column) for column in columns])
    return TextColumn(np.repeat(letters.codes, len(rows)), letters.labels)
