"""One table found on a sheet to evidence: meanings, rows, conditions, values and uncertainties brought together."""

from __future__ import annotations

import hashlib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any, TypeVar

import numpy as np
from numpy.typing import NDArray
from pydantic import ValidationError

from specflow.exchange import digest
from specflow.importers.measured.cells import Rows
from specflow.importers.measured.conditions import ReadConditions, merged_items, read_conditions
from specflow.importers.measured.facts import read_preamble
from specflow.importers.measured.header_text import known_unit
from specflow.importers.measured.layout import layout_key
from specflow.importers.measured.mapping import LayoutMapping, PivotMapping
from specflow.importers.measured.meaning import ColumnMeaning, Context, read_meanings
from specflow.importers.measured.pivot import (
    PivotConditions,
    read_pivot_headers,
    source_columns,
    stack_conditions,
    stack_words,
)
from specflow.importers.measured.readings import Numbers, read_numbers
from specflow.importers.measured.rejects import Rejects, cell_text
from specflow.importers.measured.result import ColumnReading, MeasuredTable, Question, Role
from specflow.importers.measured.selection import select_rows
from specflow.importers.measured.stated import Said, Stated, collect
from specflow.importers.measured.subject import find_block, item_name, item_notes
from specflow.importers.measured.tables import FoundTable
from specflow.importers.measured.uncertainty import Spread, from_column, from_register, from_statement
from specflow.importers.measured.words import fill_down, read_dates, read_words
from specflow.importers.readers import column_letter
from specflow.model.block import Block
from specflow.model.columns import TextColumn
from specflow.model.declared import UncertaintyEntry
from specflow.model.evidence import EvidenceColumns, EvidenceTable, ValueArrays, ValueColumn
from specflow.model.requirement import Method, Requirement, Stage
from specflow.units import Kind, format_unit, parse_unit

#: Extra column of stacked tables: the letter of the column that a value stands in.
SOURCE_COLUMN = "source column"

_KEPT = {Role.STATED_LIMIT, Role.STATED_VERDICT, Role.REQUIREMENT, Role.REMARK}
E = TypeVar("E", Method, Stage)

_STATED_METHODS = (Method.TEST, Method.DEMONSTRATION, Method.INSPECTION)


@dataclass
class _Work:
    """What is known of a table while it is read."""

    table: FoundTable
    context: Context
    mapping: LayoutMapping
    stated: Stated
    rejects: Rejects
    meanings: tuple[ColumnMeaning, ...] = ()
    questions: list[Question] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)
    rows: Rows = field(default_factory=lambda: np.zeros(0, np.int32))

    def of(self, *roles: Role) -> list[ColumnMeaning]:
        return [meaning for meaning in self.meanings if meaning.role in roles]


def read_table(
    table: FoundTable,
    context: Context,
    mapping: LayoutMapping,
    mapping_from: str,
    person: Mapping[str, str],
    key: str = "",
) -> MeasuredTable:
    """Read one table; it has no document while a question is open or when no row is left."""
    preamble = read_preamble(table.grid, table.top, table.header_row)
    stated = collect(preamble.facts, mapping.stated, person)
    sheet = "" if table.grid.name == table.grid.file else table.grid.name
    work = _Work(table, context, mapping, stated, Rejects(sheet))
    work.notes += table.stepped_over
    work.meanings = read_meanings(table, context, mapping, stated)
    work.questions += stated.questions
    work.questions += [meaning.question for meaning in work.meanings if meaning.question]
    _ask_about_unnamed(work)
    if not work.of(Role.VALUE, Role.PIVOT) and not work.questions:
        work.questions.append(_no_values(table))
    work.rows, notes = select_rows(table, work.meanings, mapping, work.rejects)
    work.notes += notes
    title = mapping.title or preamble.title
    document, columns = _evidence(work, key or layout_key(table), title, sheet)
    values = 0 if columns is None else sum(int((~np.isnan(one.low)).sum()) for one in columns.values.values())
    return MeasuredTable(
        sheet=sheet,
        place=table.place,
        title=title,
        layout_key=key or layout_key(table),
        rows=len(work.rows) if columns is None else columns.conditions.size,
        values=values,
        recognised=(*stated.readings, *(meaning.reading() for meaning in work.meanings)),
        questions=tuple(work.questions),
        rejected=work.rejects.left_out(),
        rejected_cells=len(work.rejects.cells),
        blank=dict(work.rejects.blank),
        notes=(*work.notes, *(f"not used: {one}" for one in stated.unused)),
        mapping_from=mapping_from,
        document=document,
        columns=columns,
    )


def _ask_about_unnamed(work: _Work) -> None:
    for column in work.table.unnamed:
        cells = work.table.cells(column)
        places = work.table.rows - work.table.first_row
        letter = column_letter(column)
        if cells.numeric[places].any():
            entry = work.mapping.column("", letter)
            if entry is None or entry.role != Role.NOT_READ:
                work.questions.append(
                    Question(
                        "",
                        f"{letter}{work.table.header_row}",
                        f"column {letter}: numbers without a header",
                        f'write a header, or column = "{letter}" with role = "not read" in a mapping',
                    )  # fmt: skip
                )
        else:
            work.notes.append(f"column {letter} has words and no header; it was not read")


def _no_values(table: FoundTable) -> Question:
    return Question(
        "", table.place, "no column holds values of a parameter",
        "name the parameter in a mapping (--propose-mapping writes one), or skip = true for this layout",
    )  # fmt: skip


def _evidence(
    work: _Work, key: str, title: str, sheet: str
) -> tuple[EvidenceTable | None, EvidenceColumns | None]:
    items = _items(work)
    block, block_from, question = find_block(work.table, work.context, work.stated, items)
    if question:
        work.questions.append(question)
    work.notes += item_notes(items, work.context, block)
    method = _one_of(Method, work, "method", Method.TEST)
    stage = _one_of(Stage, work, "stage", Stage.QUALIFICATION)
    if method in _STATED_METHODS and not (items.codes >= 0).any() and len(work.rows):
        work.questions.append(
            Question(
                "item",
                "",
                f"a {method.value} must say which item it was on",
                '--state item=SERIAL, an item column, or a line "DUT: SERIAL" above the table',
            )  # fmt: skip
        )
    elif method in _STATED_METHODS and (items.codes < 0).any():
        work.notes.append(f"{int((items.codes < 0).sum())} rows name no item")
    conditions = read_conditions(work.table, work.meanings, work.stated, work.rows, work.rejects)
    work.questions += conditions.questions
    work.notes += conditions.notes
    values, arrays = _values(work, conditions)
    dates = _dates(work)
    extra = {
        _name(meaning, ()): read_words(work.table, meaning.column, work.rows) for meaning in work.of(*_KEPT)
    }
    columns = EvidenceColumns(conditions.columns, arrays, work.rows, items, dates, extra)
    if work.mapping.pivot and work.of(Role.PIVOT):
        stacked = _stacked(work, work.mapping.pivot, conditions, columns)
        if stacked is None:
            return None, None
        value, columns = stacked
        values = [value]
    if block_from and block is not None:
        work.stated.readings.append(ColumnReading("block", "", Role.REMARK, f"block: {block.id}", block_from))
    if work.questions or block is None or not columns.conditions.size or not values:
        return None, None
    document = _document(work, block, method, stage, values, conditions, columns, key, title, sheet)
    return (None, None) if document is None else (document, columns)


def _items(work: _Work) -> TextColumn:
    columns = work.of(Role.ITEM)
    if columns:
        words = read_words(work.table, columns[0].column, work.rows, work.rejects)
        words = merged_items(work.table, columns[0].column, work.rows, words, work.notes)
        return fill_down(words) if columns[0].fill_down else words
    item = work.stated.text("item")
    if item:
        name = item_name(item, work.context)
        return TextColumn(np.zeros(len(work.rows), np.int32), (name,))
    return TextColumn(np.full(len(work.rows), -1, np.int32), ())


def _dates(work: _Work) -> TextColumn | None:
    columns = work.of(Role.DATE)
    return read_dates(work.table, columns[0].column, work.rows, work.rejects) if columns else None


def _values(work: _Work, conditions: ReadConditions) -> tuple[list[ValueColumn], dict[str, ValueArrays]]:
    documents: list[ValueColumn] = []
    arrays: dict[str, ValueArrays] = {}
    for meaning in work.of(Role.VALUE):
        numbers = _numbers(work, meaning)
        spread = _spread(work, meaning, numbers, conditions)
        name = _name(meaning, arrays)
        arrays[name] = ValueArrays(numbers.low, numbers.high, spread.u)
        documents.append(_value_column(meaning, name, spread, numbers.notes))
    return documents, arrays


def _numbers(work: _Work, meaning: ColumnMeaning) -> Numbers:
    numbers = read_numbers(work.table, meaning.column, meaning.unit, work.rows, work.rejects)
    letter = column_letter(meaning.column)
    if numbers.problem:
        work.questions.append(
            Question(
                meaning.header.text,
                meaning.header.cell,
                f"column {letter}: {numbers.problem}",
                "give the whole column one number format, and attach again",
            )  # fmt: skip
        )
    if meaning.column in work.table.grid.hidden_columns:
        work.notes.append(f"column {letter} is hidden in the file; it was read")
    _reject_merged(work, meaning.column, numbers)
    work.notes += [f"column {letter}: {note}" for note in numbers.notes]
    return numbers


def _reject_merged(work: _Work, column: int, numbers: Numbers) -> None:
    for area in work.table.grid.merged:
        if not area.first_column <= column <= area.last_column:
            continue
        inside = (work.rows >= area.first_row) & (work.rows <= area.last_row) & ~np.isnan(numbers.low)
        for place in np.flatnonzero(inside).tolist():
            work.rejects.add(int(work.rows[place]), column, float(numbers.low[place]),
                             f"merged cells {area}: of which of them is the value")  # fmt: skip
            numbers.low[place] = np.nan
            numbers.high[place] = np.nan


def _spread(work: _Work, value: ColumnMeaning, numbers: Numbers, conditions: ReadConditions) -> Spread:
    finite = np.where(
        np.isfinite(numbers.low), numbers.low, np.where(np.isfinite(numbers.high), numbers.high, np.nan)
    )
    own = [one for one in work.of(Role.UNCERTAINTY) if one.of == value.header.cell]
    stated = _stated_uncertainty(work, value)
    if own:
        spread = from_column(work.table, own[0], value, finite, work.rows, work.rejects)
    elif stated is not None:
        spread = from_statement(stated, value, finite)
    else:
        entries = work.context.snapshot.all(UncertaintyEntry)
        spread = from_register(entries, work.stated.text("set_up"), value, finite, conditions.columns)
    if spread.question:
        work.questions.append(spread.question)
    work.notes += [f"{value.header.text}: {note}" for note in spread.notes]
    return spread


def _stated_uncertainty(work: _Work, value: ColumnMeaning) -> Said | None:
    """What is stated for this column: by name, else for all columns; for several of one kind that is a question."""
    key = value.parameter.key.replace("_", " ") if value.parameter else ""
    for said in work.stated.uncertainty_keys.values():
        words = said.key.casefold()
        if key and (
            key in words or (value.parameter and any(a.casefold() in words for a in value.parameter.aliases))
        ):
            return said
    said_of_all = work.stated.said.get("uncertainty")
    if said_of_all is None:
        return None
    alike = [one for one in work.of(Role.VALUE) if _log_kind(one.unit) == _log_kind(value.unit)]
    unit = known_unit(said_of_all.text.split("(")[0].split(",")[0].strip(" ±0123456789.=uU"))
    if unit is not None and unit.is_log != parse_unit(value.unit).is_log and unit.kind is Kind.RATIO:
        return None
    if len(alike) > 1:
        work.questions.append(
            Question(
                value.header.text,
                value.header.cell,
                f"the uncertainty {said_of_all.text!r} is {said_of_all.by}; of which of the {len(alike)} columns is it",
                'name it ("Gain uncertainty: 0.4 dB (k=2)"), or give the columns their own',
            )  # fmt: skip
        )
        return None
    return said_of_all


def _log_kind(unit: str) -> bool:
    return parse_unit(unit).is_log


def _name(meaning: ColumnMeaning, taken: Mapping[str, object] | tuple[()]) -> str:
    name = meaning.parts.name or meaning.header.text
    return name if name not in taken else f"{name} ({column_letter(meaning.column)})"


def _value_column(
    meaning: ColumnMeaning, name: str, spread: Spread, conversions: Sequence[str]
) -> ValueColumn:
    assert meaning.quantity is not None
    return ValueColumn(
        name=name,
        quantity=meaning.quantity,
        unit=format_unit(parse_unit(meaning.unit)),
        unit_from=meaning.unit_from,
        column=meaning.column,
        header=meaning.header.text,
        spectrum=meaning.spectrum,
        uncertainty_from=spread.source,
        coverage_factor=spread.k,
        conversions=tuple(conversions),
    )


def _stacked(
    work: _Work, pivot: PivotMapping, conditions: ReadConditions, columns: EvidenceColumns
) -> tuple[ValueColumn, EvidenceColumns] | None:
    """The pivot columns below each other; a table with a pivot has no other values."""
    pivoted = work.of(Role.PIVOT)
    headers = read_pivot_headers(pivot, pivoted)
    if isinstance(headers, Question):
        work.questions.append(headers)
        return None
    if work.of(Role.VALUE):
        work.questions.append(
            Question(
                "", work.table.place, "values beside the columns of the pivot", 'mark them role = "not read"'
            )
        )
        return None
    value = _pivot_value(work, pivot, pivoted[0])
    if value is None:
        return None
    parts = [_numbers(work, replace(one, unit=pivot.unit)) for one in pivoted]
    low = np.concatenate([part.low for part in parts])
    same = all(part.high is part.low for part in parts)
    high = low if same else np.concatenate([part.high for part in parts])
    count = len(pivoted)
    stacked = EvidenceColumns(
        stack_conditions(columns.conditions, headers, count),
        {value.name: ValueArrays(low, high)},
        np.tile(work.rows, count),
        stack_words(columns.items, count),
        None if columns.dates is None else stack_words(columns.dates, count),
        {
            **{name: stack_words(words, count) for name, words in columns.extra.items()},
            SOURCE_COLUMN: source_columns(pivoted, work.rows),
        },
    )
    _document_pivot(conditions, headers, pivot)
    return value, stacked


def _pivot_value(work: _Work, pivot: PivotMapping, first: ColumnMeaning) -> ValueColumn | None:
    from specflow.importers.measured.mapping import ColumnMapping

    entry = ColumnMapping(
        column=column_letter(first.column), role="value", parameter=pivot.parameter, unit=pivot.unit, plane=pivot.plane,
        statistic=pivot.statistic, polarisation=pivot.polarisation, bandwidth=pivot.bandwidth, spectrum=pivot.spectrum,
    )  # fmt: skip
    alone = replace(work.table, headers=(first.header,))
    meaning = read_meanings(
        alone, work.context, replace(work.mapping, columns=(entry,), pivot=None), work.stated
    )[0]
    if meaning.question is not None:
        work.questions.append(meaning.question)
        return None
    return _value_column(meaning, pivot.parameter, Spread(), ()).model_copy(update={"header": pivot.header})


def _document_pivot(conditions: ReadConditions, headers: PivotConditions, pivot: PivotMapping) -> None:
    from specflow.model.evidence import ConditionColumn

    for name in headers.numeric:
        conditions.documents.append(
            ConditionColumn(
                dimension=name,
                kind="numeric",
                unit=headers.units.get(name, ""),
                header=pivot.header,
                stated_by="header",
            )  # fmt: skip
        )
    for name in headers.text:
        conditions.documents.append(
            ConditionColumn(dimension=name, kind="text", header=pivot.header, stated_by="header")
        )


def _one_of(kind: type[E], work: _Work, name: str, default: E) -> E:
    text = work.stated.text(name)
    if not text:
        return default
    for one in kind:
        if one.value == text.casefold().strip().replace("_", " "):
            return one
    known = ", ".join(one.value for one in kind)
    work.questions.append(
        Question(name, "", f"{text!r} is no {name} ({work.stated.by(name)})", f"one of: {known}")
    )
    return default


def _requirement(work: _Work) -> str | None:
    """The requirement that the table names, by statement or in a column that says the same in all rows."""
    text = work.stated.text("requirement")
    columns = work.of(Role.REQUIREMENT)
    if not text and columns:
        words = {cell_text(value).strip() for value in work.table.cells(columns[0].column).at(work.rows)} - {
            ""
        }
        text = words.pop() if len(words) == 1 else ""
    if not text:
        return None
    requirement = work.context.snapshot.find(Requirement, text)
    if requirement is None:
        work.notes.append(f"the requirement {text!r} is not known; the values are matched without it")
        return None
    keys = {meaning.quantity.parameter for meaning in work.of(Role.VALUE) if meaning.quantity}
    if requirement.quantity.parameter not in keys and keys:
        work.notes.append(
            f"{requirement.id} is on {requirement.quantity.parameter}, the table has {', '.join(sorted(keys))}"
        )
    return requirement.id


def _document(
    work: _Work,
    block: Block,
    method: Method,
    stage: Stage,
    values: Sequence[ValueColumn],
    conditions: ReadConditions,
    columns: EvidenceColumns,
    key: str,
    title: str,
    sheet: str,
) -> EvidenceTable | None:
    stated = work.stated
    try:
        document = EvidenceTable(
            id="EV-0",
            file="F-0",
            sheet=sheet,
            title=title[:200],
            block=block.id,
            requirement=_requirement(work),
            method=method,
            stage=stage,
            rows=columns.conditions.size,
            values=tuple(values),
            conditions=tuple(conditions.documents),
            table_key="T-" + digest([key, sheet, block.id.casefold(), stated.text("set_up").casefold(),
                                     stated.text("performer").casefold()])[:16],
            set_up=stated.text("set_up"),
            performer=stated.text("performer"),
            procedure=stated.text("procedure"),
            procedure_revision=stated.text("procedure_revision"),
            performed_on=stated.day("date"),
            equipment=tuple(stated.equipment),
            corrections=tuple(filter(None, [stated.text("corrections")])),
            simulation_model=stated.text("model"),
            simulation_version=stated.text("model_version"),
            simulation_validated=stated.text("validated"),
            hardware_note=stated.text("hardware"),
            left_out=work.rejects.left_out(),
        )  # fmt: skip
    except ValidationError as error:
        fault = error.errors()[0]
        work.questions.append(
            Question(
                "",
                "",
                f"{'.'.join(map(str, fault['loc']))}: {fault['msg']}",
                "correct what is stated for the table",
            )
        )
        return None
    return document.model_copy(update={"digest": content_digest(document, columns)})


def content_digest(table: EvidenceTable, columns: EvidenceColumns) -> str:
    """Return the digest of what a table says: values, uncertainties, conditions, items, and what they mean."""
    told = table.model_dump(
        mode="json",
        exclude={"id", "file", "digest", "mapping", "mapping_revision", "accepted_by", "accepted_at", "provisional",
                 "revision", "left_out", "title", "sheet"},
    )  # fmt: skip
    sums = hashlib.sha256(digest(told).encode())
    arrays: list[NDArray[Any]] = [columns.source_rows, columns.items.codes]
    arrays += [array for _, array in sorted(columns.conditions.numeric.items())]
    arrays += [words.codes for _, words in sorted(columns.conditions.text.items())]
    for _, value in sorted(columns.values.items()):
        arrays += [value.low, value.high] + ([] if value.u is None else [value.u])
    for array in arrays:
        sums.update(np.ascontiguousarray(array).tobytes())
    sums.update(
        repr([columns.items.labels, [w.labels for _, w in sorted(columns.conditions.text.items())]]).encode()
    )
    return sums.hexdigest()
