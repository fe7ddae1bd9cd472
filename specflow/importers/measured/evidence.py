"""One table found on a sheet to evidence: meanings, rows, conditions and values brought together."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TypeVar

import numpy as np

from specflow.importers.measured.at_headers import states_condition
from specflow.importers.measured.axis import add_axis
from specflow.importers.measured.column import ColumnMeaning
from specflow.importers.measured.conditions import read_conditions
from specflow.importers.measured.context import Context
from specflow.importers.measured.corrections import with_corrections
from specflow.importers.measured.directions import add_directions
from specflow.importers.measured.document import Identity, Said, make_document
from specflow.importers.measured.facts import states_something
from specflow.importers.measured.header_text import header_key
from specflow.importers.measured.item_column import ask_for_item, read_items
from specflow.importers.measured.items import is_item
from specflow.importers.measured.located import LocatedTable
from specflow.importers.measured.meaning import read_meanings
from specflow.importers.measured.peak_list import corrected_scans, read_peak_list, with_floors
from specflow.importers.measured.pivot import stack, with_location
from specflow.importers.measured.placed import NAMELESS
from specflow.importers.measured.rejects import Rejects
from specflow.importers.measured.result import ColumnReading, MeasuredTable, Question, Role
from specflow.importers.measured.row_kinds import by_row_kind
from specflow.importers.measured.scaling import ask_about_title
from specflow.importers.measured.selection import select_rows
from specflow.importers.measured.slip_findings import slip_findings
from specflow.importers.measured.stated import Stated
from specflow.importers.measured.statements import is_reading
from specflow.importers.measured.stating import collect
from specflow.importers.measured.subject import find_block, item_notes
from specflow.importers.measured.values import column_name, read_values, with_register
from specflow.importers.measured.words import read_dates, read_words
from specflow.importers.measured.work import TableWork
from specflow.importers.measured.zero_hertz import note_zero_hertz
from specflow.model.base import code_key
from specflow.model.evidence import EvidenceColumns, EvidenceTable
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
    _ask_about_remarks(work)
    _ask_about_groups(work)
    work.meanings = read_meanings(table, context, mapping, stated)
    work.questions += stated.questions
    work.questions += _asked_of_columns(work)
    given = {meaning.dimension for meaning in work.of(Role.CONDITION)}
    work.questions += [doubt for name, doubt in stated.doubts.items() if name not in given]
    _ask_about_columns(work)
    _note_idle_entries(work)
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


def _asked_of_columns(work: TableWork) -> list[Question]:
    """The questions about columns; where it is asked how the table lies, numbers as headers are not asked about."""
    asked = [meaning for meaning in work.meanings if meaning.question]
    if work.table.doubts:
        asked = [meaning for meaning in asked if not _is_told(meaning.header.text, work)]
    return [meaning.question for meaning in asked if meaning.question]


def _is_told(header: str, work: TableWork) -> bool:
    """Whether the question how the table lies speaks of this column already."""
    is_told = header.startswith(NAMELESS) or states_condition(header)
    return is_told or is_reading(header) or is_item(header, work.context)


def _note_idle_entries(work: TableWork) -> None:
    """Say which entries of the mapping, or of the person, speak of columns that are not there."""
    headers = work.table.headers
    letters = {header.letter for header in headers} | set(
        map(work.table.grid.column_name, work.table.unnamed)
    )
    keys = {header_key(header.text) for header in headers}
    for entry in work.mapping.columns if not work.table.part else ():
        there = any(entry.is_about(header.text, header.letter) for header in headers)
        if not there and not (entry.column.upper() in letters and not entry.header):
            work.notes.append(
                f"the mapping speaks of a column {entry.header or entry.column!r} that is not there"
            )
    for key in work.stated.columns:
        if key.upper() not in letters and header_key(key) not in keys:
            work.notes.append(f"there is no column {key!r}, of which something was stated")


def _count(columns: EvidenceColumns) -> int:
    return sum(int(np.count_nonzero(~np.isnan(one.low))) for one in columns.values.values())


def _ask_about_remarks(work: TableWork) -> None:
    """Ask about remarks between rows of data that state something, as "T = 85 °C" over a group of rows."""
    for remark in work.table.between:
        if remark.states or states_something(remark.text):
            cell = f"row {remark.row}"
            remedy = "give it a column of its own, or make each group a table with headers"
            work.ask(
                "", cell, f"{remark.text[:60]!r} stands among the rows and may hold for those below", remedy
            )


def _ask_about_groups(work: TableWork) -> None:
    """Ask about a cell merged over some of the headers that states a condition or names an item: "+85 °C"."""
    table = work.table
    columns = {header.column for header in table.headers}
    for area in table.grid.merged:
        over = {column for column in columns if area.first_column <= column <= area.last_column}
        if (
            area.first_row == table.group_row
            or area.first_row != table.header_row - 1
            or area.first_row != area.last_row
            or len(over) < 2
        ):
            continue
        text = str(table.grid.value(area.first_row, area.first_column)).strip()
        says = states_something(text) or code_key(text) in work.context.snapshot.items_by_name
        if says and over != columns:
            what = f"{text[:60]!r} is merged over some of the headers and may hold for their columns ({area})"
            remedy = "say it in each of these headers, give it a column of its own, or empty the cell"
            work.ask("", table.grid.address(area.first_row, area.first_column), what, remedy)


def _ask_about_columns(work: TableWork) -> None:
    """Ask about numbers without a header, and about a table without any value."""
    table = work.table
    for header in table.headers:
        if header.column in table.grid.hidden_columns:
            work.notes.append(f"{header.line} is hidden in the file; it was read all the same")
    if _lies_on_its_side(work):
        remedy = "turn it (copy, paste special, transpose): one row of headers, one reading a row"
        what = "the table lies on its side, with its headers in the first column"
        work.questions.insert(0, Question("", table.place, what, remedy))
        return
    for column in table.unnamed:
        cells = table.cells(column)
        letter = table.grid.column_name(column)
        entry = work.mapping.column("", letter)
        if not cells.numeric[table.rows - table.first_row].any():
            work.notes.append(f"column {letter} has words and no header; it was not read")
        elif entry is None or entry.role != Role.NOT_READ:
            remedy = f'write a header, or column = "{letter}" with role = "not read" in a mapping'
            cell = table.grid.address(table.header_row, column)
            work.ask("", cell, f"column {letter}: numbers without a header", remedy)
    if not work.of(Role.VALUE, Role.PIVOT) and not work.questions:
        remedy = (
            "name the parameter in a mapping (--propose-mapping writes one), or skip = true for this layout"
        )
        work.ask("", table.place, "no column holds values of a parameter", remedy)


def _lies_on_its_side(work: TableWork) -> bool:
    """Whether the first column holds headers that are known, and numbers stand in columns without a header."""
    table = work.table
    if not table.unnamed or not table.headers:
        return False
    cells = table.cells(min(header.column for header in table.headers))
    texts = [value for value in cells.at(table.rows) if isinstance(value, str) and value.strip()]
    known = sum(map(work.context.recognises, texts))
    return len(texts) == len(table.rows) and known >= 2 and 2 * known >= len(texts)


def _evidence(
    work: TableWork, key: str, title: str, sheet: str
) -> tuple[EvidenceTable | None, EvidenceColumns | None]:
    items = read_items(work)
    method = _one_of(Method, work, "method", Method.TEST)
    stage = _one_of(Stage, work, "stage", Stage.QUALIFICATION)
    block, block_from, question = find_block(work.table, work.context, work.stated, items)
    if question:
        work.questions.append(question)
    work.notes += item_notes(items, work.context, block)
    ask_for_item(work, method, items)
    conditions = read_conditions(work.table, work.meanings, work.stated, work.rows, work.rejects)
    work.questions += conditions.questions
    work.notes += conditions.notes
    add_directions(work, conditions)
    add_axis(work, conditions)
    values = read_values(work, conditions.columns)
    dates = work.of(Role.DATE)
    columns = EvidenceColumns(
        conditions.columns,
        values.arrays,
        work.rows,
        items,
        read_dates(work.table, dates[0].column, work.rows, work.rejects) if dates else None,
        {
            column_name(meaning): read_words(work.table, meaning.column, work.rows)
            for meaning in work.of(*_KEPT)
        }
        | values.extra,
    )
    if work.mapping.pivot is not None and work.of(Role.PIVOT):
        stacked = stack(work, work.mapping.pivot, columns)
        if stacked is not None:
            columns, documents = with_register(work, stacked.columns, [stacked.value])
            values.documents += documents
            conditions.documents += stacked.conditions
    if block is not None and not work.stated.text("block"):
        work.stated.readings.append(ColumnReading("block", "", Role.STATED, f"block: {block.id}", block_from))
    if work.questions or block is None or not columns.conditions.size or not values.documents:
        return None, None
    identity = Identity(block, method, stage, key, title, sheet)
    work.findings += slip_findings(work, columns, values.documents)
    work.notes += note_zero_hertz(work, columns.conditions)
    columns, documents = by_row_kind(work, columns, values.documents)
    corrected = with_corrections(work, columns, documents)
    columns, documents = corrected.columns, corrected.values
    peaks = read_peak_list(work, title)
    if peaks is not None:
        peaks = corrected_scans(work, peaks, corrected.applied)
        grown = with_floors(work, peaks, columns, documents)
        columns, documents = grown.columns, grown.values
    document = None
    if not work.questions:
        said = Said(peaks, corrected.applied, corrected.words)
        document = make_document(work, identity, documents, conditions.documents, columns, said)
    return (None, None) if document is None else (document, columns)


def _one_of(kind: type[E], work: TableWork, name: str, default: E) -> E:
    text = work.stated.text(name)
    return kind(text.casefold()) if text else default
