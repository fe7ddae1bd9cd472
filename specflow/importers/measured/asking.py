"""What has to be asked of a table before it is evidence: columns, remarks among the rows, words over the headers."""

from __future__ import annotations

from specflow.importers.measured.at_headers import states_condition
from specflow.importers.measured.facts import states_something
from specflow.importers.measured.header_text import header_key
from specflow.importers.measured.items import is_item
from specflow.importers.measured.placed import NAMELESS
from specflow.importers.measured.result import Question, Role
from specflow.importers.measured.statements import is_reading
from specflow.importers.measured.work import TableWork
from specflow.model.base import code_key


def asked_of_columns(work: TableWork) -> list[Question]:
    """The questions about columns; where it is asked how the table lies, numbers as headers are not asked about."""
    asked = [meaning for meaning in work.meanings if meaning.question]
    if work.table.doubts:
        asked = [meaning for meaning in asked if not _is_told(meaning.header.text, work)]
    return [meaning.question for meaning in asked if meaning.question]


def _is_told(header: str, work: TableWork) -> bool:
    """Whether the question how the table lies speaks of this column already."""
    is_told = header.startswith(NAMELESS) or states_condition(header)
    return is_told or is_reading(header) or is_item(header, work.context)


def note_idle_entries(work: TableWork) -> None:
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


def ask_about_remarks(work: TableWork) -> None:
    """Ask about remarks between rows of data that state something, as "T = 85 °C" over a group of rows."""
    for remark in work.table.between:
        if remark.states or states_something(remark.text):
            cell = f"row {remark.row}"
            remedy = "give it a column of its own, or make each group a table with headers"
            work.ask(
                "", cell, f"{remark.text[:60]!r} stands among the rows and may hold for those below", remedy
            )


def ask_about_groups(work: TableWork) -> None:
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


def ask_about_columns(work: TableWork) -> None:
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
