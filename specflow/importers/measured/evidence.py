"""One table found on a sheet to evidence: meanings, rows, conditions and values brought together."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TypeVar

import numpy as np

from specflow.importers.measured.asking import (
    ask_about_columns,
    ask_about_groups,
    ask_about_remarks,
    asked_of_columns,
    note_idle_entries,
)
from specflow.importers.measured.axis import add_axis
from specflow.importers.measured.column import ColumnMeaning
from specflow.importers.measured.conditions import read_conditions
from specflow.importers.measured.context import Context
from specflow.importers.measured.corrections import with_corrections
from specflow.importers.measured.directions import add_directions
from specflow.importers.measured.document import Identity, Said, make_document
from specflow.importers.measured.item_column import ask_for_item, read_items
from specflow.importers.measured.located import LocatedTable
from specflow.importers.measured.meaning import read_meanings
from specflow.importers.measured.peak_list import corrected_scans, read_peak_list, with_floors
from specflow.importers.measured.pivot import stack, with_location
from specflow.importers.measured.rejects import Rejects
from specflow.importers.measured.result import ColumnReading, MeasuredTable, Question, Role
from specflow.importers.measured.row_kinds import by_row_kind
from specflow.importers.measured.scaling import ask_about_title
from specflow.importers.measured.selection import select_rows
from specflow.importers.measured.slip_findings import slip_findings
from specflow.importers.measured.stated import Stated
from specflow.importers.measured.stating import collect
from specflow.importers.measured.subject import find_block, item_notes
from specflow.importers.measured.values import column_name, read_values, with_register
from specflow.importers.measured.words import read_dates, read_words
from specflow.importers.measured.work import TableWork
from specflow.importers.measured.zero_hertz import note_zero_hertz
from specflow.model.block import Block
from specflow.model.columns import TextColumn
from specflow.model.evidence import ConditionColumn, EvidenceColumns, EvidenceTable, ValueColumn
from specflow.model.requirement import Method, Stage

E = TypeVar("E", Method, Stage)

_KEPT = (Role.STATED_LIMIT, Role.STATED_VERDICT, Role.REQUIREMENT, Role.REMARK, Role.SPECTRUM)


def collected(located: LocatedTable, context: Context, person: Mapping[str, str]) -> Stated:
    """What is said for a table by the person, its mapping and the file."""
    return collect(
        located.preamble.facts,
        located.read_as.stated,
        person,
        sheet_facts=located.sheet_facts,
        own_dimensions=context.dimensions,
    )


@dataclass(frozen=True, slots=True)
class ReadTable:
    """A table as read, and what its columns were taken for."""

    table: MeasuredTable
    meanings: tuple[ColumnMeaning, ...]


def read_table(located: LocatedTable, context: Context, person: Mapping[str, str]) -> ReadTable:
    """Read one table; it has no document while a question is open or when no row is left."""
    table, mapping, key = located.table, located.read_as, located.key
    stated = collected(located, context, person)
    settled = with_location(mapping, stated)
    mapping = mapping if isinstance(settled, Question) else settled
    sheet = "" if table.grid.name == table.grid.file else table.grid.name
    rejects = Rejects(sheet, table.grid.turned, keep_placeholders=mapping.keep_placeholders)
    work = TableWork(table, context, mapping, stated, rejects)
    work.notes += [*table.notes, *(remark.words for remark in table.stepped_over)]
    ask_about_title(work, located.preamble.title)
    work.questions += [*table.doubts, *([settled] if isinstance(settled, Question) else [])]
    ask_about_remarks(work)
    ask_about_groups(work)
    work.meanings = read_meanings(table, context, mapping, stated)
    work.questions += stated.questions
    work.questions += asked_of_columns(work)
    given = {meaning.dimension for meaning in work.of(Role.CONDITION)}
    work.questions += [doubt for name, doubt in stated.doubts.items() if name not in given]
    ask_about_columns(work)
    note_idle_entries(work)
    work.notes += [f"column {one.letter} was {one.reason}" for one in work.of(Role.NOT_READ) if one.of_file]
    work.rows, notes = select_rows(table, work.meanings, mapping, work.rejects)
    work.notes += notes
    title = mapping.title or located.preamble.title
    document, columns = _evidence(work, key, title, sheet)
    read = MeasuredTable(
        sheet=sheet,
        place=table.place,
        title=title,
        layout_key=located.kept_under,
        rows=len(work.rows) if columns is None else columns.conditions.size,
        values=0 if columns is None else _count(columns),
        recognised=(*stated.readings, *(meaning.reading() for meaning in work.meanings)),
        questions=tuple(dict.fromkeys(work.questions)),
        rejected=work.rejects.rejected(),
        rejected_cells=len(work.rejects.cells),
        blank=dict(work.rejects.blank),
        notes=tuple(work.notes),
        unused=tuple(dict.fromkeys(stated.unused)),
        findings=tuple(work.findings),
        mapping_from=located.mapping_from,
        document=document,
        columns=columns,
    )
    return ReadTable(read, work.meanings)


def _count(columns: EvidenceColumns) -> int:
    return sum(int(np.count_nonzero(~np.isnan(one.low))) for one in columns.values.values())


def _evidence(
    work: TableWork, key: str, title: str, sheet: str
) -> tuple[EvidenceTable | None, EvidenceColumns | None]:
    items = read_items(work)
    method = _one_of(Method, work, "method", Method.TEST)
    stage = _one_of(Stage, work, "stage", Stage.QUALIFICATION)
    block = _block(work, items)
    ask_for_item(work, method, items)
    columns, conditions, documents = _columns(work, items)
    if work.questions or block is None or not columns.conditions.size or not documents:
        return None, None
    identity = Identity(block, method, stage, key, title, sheet)
    work.findings += slip_findings(work, columns, documents)
    work.notes += note_zero_hertz(work, columns.conditions)
    columns, documents, said = _made_of(work, title, columns, documents)
    if work.questions:
        return None, None
    document = make_document(work, identity, documents, conditions, columns, said)
    return (None, None) if document is None else (document, columns)


def _block(work: TableWork, items: TextColumn) -> Block | None:
    """The block that the table is of; where it is not stated, what it was found by is told."""
    block, block_from, question = find_block(work.table, work.context, work.stated, items)
    if question:
        work.questions.append(question)
    work.notes += item_notes(items, work.context, block)
    if block is not None and not work.stated.text("block"):
        work.stated.readings.append(ColumnReading("block", "", Role.STATED, f"block: {block.id}", block_from))
    return block


def _columns(
    work: TableWork, items: TextColumn
) -> tuple[EvidenceColumns, list[ConditionColumn], list[ValueColumn]]:
    """Conditions, values and words of the rows taken, columns of a pivot stacked."""
    conditions = read_conditions(work.table, work.meanings, work.stated, work.rows, work.rejects)
    work.questions += conditions.questions
    work.notes += conditions.notes
    add_directions(work, conditions)
    add_axis(work, conditions)
    values = read_values(work, conditions.columns)
    dates = work.of(Role.DATE)
    days = read_dates(work.table, dates[0].column, work.rows, work.rejects) if dates else None
    kept = {
        column_name(meaning): read_words(work.table, meaning.column, work.rows) for meaning in work.of(*_KEPT)
    }
    columns = EvidenceColumns(conditions.columns, values.arrays, work.rows, items, days, kept | values.extra)
    if work.mapping.pivot is None or not work.of(Role.PIVOT):
        return columns, conditions.documents, values.documents
    stacked = stack(work, work.mapping.pivot, columns)
    if stacked is None:
        return columns, conditions.documents, values.documents
    columns, documents = with_register(work, stacked.columns, [stacked.value])
    return columns, [*conditions.documents, *stacked.conditions], [*values.documents, *documents]


def _made_of(
    work: TableWork, title: str, columns: EvidenceColumns, documents: list[ValueColumn]
) -> tuple[EvidenceColumns, list[ValueColumn], Said]:
    """What is made of values as read: rows told apart, corrections added, floors of a list of peaks set beside it."""
    columns, documents = by_row_kind(work, columns, documents)
    corrected = with_corrections(work, columns, documents)
    columns, documents = corrected.columns, corrected.values
    peaks = read_peak_list(work, title)
    if peaks is not None:
        peaks = corrected_scans(work, peaks, corrected.applied)
        grown = with_floors(work, peaks, columns, documents)
        columns, documents = grown.columns, grown.values
    return columns, documents, Said(peaks, corrected.applied, corrected.words)


def _one_of(kind: type[E], work: TableWork, name: str, default: E) -> E:
    text = work.stated.text(name)
    return kind(text.casefold()) if text else default
