"""Columns that are one quantity at several conditions, stacked below each other into one column of values."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from specflow.conditions import Comparison, find_dimension, known_dimension, unlocated_temperature_hint
from specflow.errors import UnitError
from specflow.importers.measured.cell_units import to_unit
from specflow.importers.measured.column import ColumnMeaning, Heading
from specflow.importers.measured.mapping_parts import UNLOCATED, ColumnMapping, LayoutMapping, PivotMapping
from specflow.importers.measured.result import Question, Role
from specflow.importers.measured.stated import Stated
from specflow.importers.measured.uncertainty import Spread
from specflow.importers.measured.unit_source import FoundUnit
from specflow.importers.measured.value_column import mapped_value
from specflow.importers.measured.values import column_numbers, value_document
from specflow.importers.measured.work import TableWork
from specflow.importers.readers import column_letter
from specflow.model.columns import Columns, TextColumn
from specflow.model.evidence import SOURCE_COLUMN, ConditionColumn, EvidenceColumns, ValueArrays, ValueColumn
from specflow.units import parse_number, parse_unit, split_quantity


@dataclass(frozen=True, slots=True)
class PivotConditions:
    """The conditions that the header of each pivot column states: dimension → one entry a column."""

    numeric: dict[str, list[float]]
    text: dict[str, list[str]]
    units: dict[str, str]

    def documents(self, pivot: PivotMapping) -> list[ConditionColumn]:
        """The condition columns as documents."""
        numeric = [
            ConditionColumn(
                dimension=name,
                kind="numeric",
                unit=self.units.get(name, ""),
                header=pivot.header,
                stated_by="header",
            )
            for name in self.numeric
        ]
        return numeric + [
            ConditionColumn(dimension=name, kind="text", header=pivot.header, stated_by="header")
            for name in self.text
        ]


def with_location(mapping: LayoutMapping, stated: Stated) -> LayoutMapping | Question:
    """Say whose temperature the headers of a pivot give, where they only say temperature; a question where unsaid."""
    pivot = mapping.pivot
    if pivot is None or UNLOCATED not in pivot.units:
        return mapping
    location = stated.text("temperature")
    dimension = find_dimension(f"{location} temperature") if location else None
    if dimension is None:
        what = f"the headers {pivot.columns} give a temperature that does not say whose"
        remedy = f"{unlocated_temperature_hint()}: --state temperature=ambient"
        return Question("", pivot.columns, what, remedy)
    units = {dimension.name if name == UNLOCATED else name: unit for name, unit in pivot.units.items()}
    header = pivot.header.replace(f"{{{UNLOCATED}}}", f"{{{dimension.name}}}")
    return replace(mapping, pivots=(replace(pivot, header=header, units=units),))


@dataclass(frozen=True, slots=True)
class Stacked:
    """A table after stacking: its one value column, its arrays, and the conditions that headers gave."""

    value: ValueColumn
    columns: EvidenceColumns
    conditions: list[ConditionColumn]


def stack(work: TableWork, pivot: PivotMapping, columns: EvidenceColumns) -> Stacked | None:
    """Put the pivot columns below each other; ``columns`` has what the rows themselves say. None with a question."""
    pivoted = work.of(Role.PIVOT)
    headers = read_pivot_headers(pivot, pivoted)
    if isinstance(headers, Question):
        work.questions.append(headers)
        return None
    if work.of(Role.VALUE):
        work.ask(
            "", work.table.place, "values beside the columns of the pivot", 'mark them role = "not read"'
        )
        return None
    value = _value(work, pivot, pivoted[0])
    if value is None:
        return None
    parts = [column_numbers(work, replace(one, unit=pivot.unit)) for one in pivoted]
    low = np.concatenate([part.low for part in parts])
    points = all(part.high is part.low for part in parts)
    high = low if points else np.concatenate([part.high for part in parts])
    count = len(pivoted)
    named = headers.text.pop("item", None)
    items = _repeated(columns.items, count) if named is None else _spread(named, len(work.rows))
    extra = {name: _repeated(words, count) for name, words in columns.extra.items()}
    extra[SOURCE_COLUMN] = _spread([column_letter(column.column) for column in pivoted], len(work.rows))
    stacked = EvidenceColumns(
        _stacked_conditions(columns.conditions, headers, count),
        {value.name: ValueArrays(low, high)},
        np.tile(work.rows, count),
        items,
        None if columns.dates is None else _repeated(columns.dates, count),
        extra,
    )
    return Stacked(value, stacked, headers.documents(pivot))


def read_pivot_headers(pivot: PivotMapping, columns: Sequence[ColumnMeaning]) -> PivotConditions | Question:
    """Read the conditions out of the headers; a header or a unit that cannot be read is a question."""
    pattern = pivot.pattern()
    read = PivotConditions({}, {}, {})
    for column in columns:
        match = pattern.fullmatch(column.header.text)
        for name, words in match.groupdict().items() if match else ():
            problem = _take(read, pivot, name, " ".join(words.split()))
            if problem:
                return column.asks(problem, f'mend the pattern, or its units = {{ {name} = "UNIT" }}')
    return read


def _take(read: PivotConditions, pivot: PivotMapping, name: str, words: str) -> str:
    """Add one condition of one column; the sentence that says why it cannot be read, "" when it can."""
    known = known_dimension(name)
    if name not in pivot.units and (known is None or known.comparison is Comparison.TEXT):
        read.text.setdefault(name, []).append(words)
        return ""
    if name not in pivot.units and known is not None and known.unit:
        return f"the pivot states no unit of {name}"
    try:
        if name in pivot.units:
            parse_unit(pivot.units[name])
            read.units[name] = pivot.units[name]
        read.numeric.setdefault(name, []).append(_number(words, read.units.get(name, "")))
    except UnitError as error:
        return error.message
    return ""


def _number(words: str, unit: str) -> float:
    """A number of a header; one that carries a unit of its own ("28 V", "90°") is brought to that of the pivot."""
    number, own = split_quantity(words)
    if not own or not unit:
        return parse_number(words)
    return to_unit(parse_number(number), parse_unit(own), parse_unit(unit))


def _value(work: TableWork, pivot: PivotMapping, first: ColumnMeaning) -> ValueColumn | None:
    hints = ColumnMapping(
        plane=pivot.plane,
        statistic=pivot.statistic,
        polarisation=pivot.polarisation,
        bandwidth=pivot.bandwidth,
        spectrum=pivot.spectrum,
    )
    heading = Heading(work.table, first.header, first.parts, hints)
    unit = FoundUnit(pivot.unit, "the mapping")
    meaning = mapped_value(heading, pivot.parameter, unit, work.context, work.stated)
    if meaning.question is not None:
        work.questions.append(meaning.question)
        return None
    return value_document(meaning, pivot.parameter, Spread()).model_copy(update={"header": pivot.header})


def _stacked_conditions(rows: Columns, headers: PivotConditions, count: int) -> Columns:
    """Repeat the conditions of the rows for each of ``count`` columns, and add what the headers say."""
    size = rows.size
    numeric = {name: np.tile(values, count) for name, values in rows.numeric.items()}
    numeric |= {
        name: np.repeat(np.array(values, np.float64), size) for name, values in headers.numeric.items()
    }
    text = {name: _repeated(words, count) for name, words in rows.text.items()}
    for name, words in headers.text.items():
        text[name] = _spread(words, size)
    return Columns(size * count, numeric, text, {**rows.units, **headers.units})


def _spread(words: Sequence[str], size: int) -> TextColumn:
    """One word a column, for each of its ``size`` rows."""
    one = TextColumn.of(words)
    return TextColumn(np.repeat(one.codes, size), one.labels)


def _repeated(words: TextColumn, count: int) -> TextColumn:
    return TextColumn(np.tile(words.codes, count), words.labels)
