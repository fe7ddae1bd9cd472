"""Condition columns of a table, with what is stated for all of its rows."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from specflow.importers.measured.carried import ditto_question, rows_of_values
from specflow.importers.measured.cells import Rows
from specflow.importers.measured.column import ColumnMeaning
from specflow.importers.measured.readings import read_numbers
from specflow.importers.measured.rejects import Rejects
from specflow.importers.measured.result import Question, Role
from specflow.importers.measured.stated import Stated
from specflow.importers.measured.tables import FoundTable
from specflow.importers.measured.words import read_words
from specflow.model.columns import Columns, TextColumn
from specflow.model.evidence import ConditionColumn
from specflow.units import format_unit, parse_unit


@dataclass
class ReadConditions:
    """The documents and arrays of all conditions of a table."""

    columns: Columns
    documents: list[ConditionColumn] = field(default_factory=list)
    questions: list[Question] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)


def read_conditions(
    table: FoundTable, meanings: Sequence[ColumnMeaning], stated: Stated, rows: Rows, rejects: Rejects
) -> ReadConditions:
    """Read the condition columns; what a column gives per row goes before what is stated for the table."""
    numeric: dict[str, NDArray[np.float64]] = {}
    text: dict[str, TextColumn] = {}
    units: dict[str, str] = {}
    read = ReadConditions(Columns(len(rows), numeric, text, units))
    for meaning in meanings:
        if meaning.role is not Role.CONDITION:
            continue
        name = meaning.dimension
        if meaning.is_text:
            text[name] = words_of_rows(table, meaning, rows, rejects, read.notes)
            ditto = ditto_question(meaning, text[name])
            read.questions += [ditto] if ditto else []
            blank = int(np.count_nonzero(text[name].codes < 0))
        else:
            values = _numbers(table, meaning, rows, rejects, read)
            numeric[name] = values
            if meaning.unit and (unit := format_unit(parse_unit(meaning.unit))) != "1":
                units[name] = unit
            blank = int(np.count_nonzero(np.isnan(values)))
        if blank:
            read.notes.append(
                f"{meaning.header.line} states no {name.replace('_', ' ')} in {blank} of {len(rows)} rows"
                + ("" if meaning.fill_down else "; fill_down = true in a mapping takes the cell above")
            )
        read.documents.append(_document(meaning, units.get(name, "")))
    _add_stated(stated, rows, numeric, text, units, read)
    return read


def _numbers(
    table: FoundTable, meaning: ColumnMeaning, rows: Rows, rejects: Rejects, read: ReadConditions
) -> NDArray[np.float64]:
    own = rejects.apart()
    rows, places = rows_of_values(table, meaning.column, rows, meaning.fill_down, read.notes)
    numbers = read_numbers(table, meaning.column, meaning.spelled, rows, own)
    rejects.cells += own.cells
    if numbers.problem:
        remedy = "give the whole column one number format, and attach again"
        read.questions.append(
            Question(
                meaning.header.text, meaning.header.cell, f"{meaning.header.line}: {numbers.problem}", remedy
            )
        )
    read.notes += [f"{meaning.header.line}: {note}" for note in numbers.notes]
    if numbers.high is not numbers.low:
        for place in np.flatnonzero(numbers.high != numbers.low).tolist():
            if np.isnan(numbers.low[place]):
                continue
            rejects.add(int(rows[place]), meaning.column, table.cells(meaning.column).value(int(rows[place])),
                        "a condition must be one value, not a bound or a range")  # fmt: skip
            numbers.drop(place)
    return numbers.low if places is None else numbers.low[places]


def words_of_rows(
    table: FoundTable, meaning: ColumnMeaning, rows: Rows, rejects: Rejects, notes: list[str]
) -> TextColumn:
    """The words of a column for each row, also where they stand in a merged cell or further above."""
    own, places = rows_of_values(table, meaning.column, rows, meaning.fill_down, notes)
    words = read_words(table, meaning.column, own, rejects)
    return words if places is None else words.take(places)


def _document(meaning: ColumnMeaning, unit: str) -> ConditionColumn:
    return ConditionColumn(
        dimension=meaning.dimension,
        kind="text" if meaning.is_text else "numeric",
        unit=unit,
        column=meaning.column,
        header=meaning.header.text,
        unit_from=meaning.unit_from,
    )


def _add_stated(
    stated: Stated,
    rows: Rows,
    numeric: dict[str, NDArray[np.float64]],
    text: dict[str, TextColumn],
    units: dict[str, str],
    read: ReadConditions,
) -> None:
    for name, condition in stated.conditions.items():
        if name in numeric or name in text:
            read.notes.append(
                f"{name.replace('_', ' ')} is given row by row; that it is {condition.by} was not used"
            )
            continue
        if isinstance(condition.value, str):
            text[name] = TextColumn(np.zeros(len(rows), np.int32), (condition.value,))
        else:
            numeric[name] = np.full(len(rows), condition.value)
            if condition.unit:
                units[name] = condition.unit
        kind = "text" if isinstance(condition.value, str) else "numeric"
        read.documents.append(
            ConditionColumn(dimension=name, kind=kind, unit=condition.unit, stated_by=condition.by)  # type: ignore[arg-type]
        )
