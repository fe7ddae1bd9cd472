"""A table parted into tables that each read like a plain one: by the quantity in its rows, by its pivots, by groups."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from specflow.conditions import find_dimension
from specflow.importers.measured.at_headers import pivots_of_headers
from specflow.importers.measured.context import Context
from specflow.importers.measured.groups import group_parts
from specflow.importers.measured.header_cells import HeaderCell
from specflow.importers.measured.header_text import read_header
from specflow.importers.measured.item_headers import item_pivots
from specflow.importers.measured.long_form import find_long, long_parts
from specflow.importers.measured.mapping_parts import ColumnMapping, LayoutMapping, PivotMapping
from specflow.importers.measured.over_columns import ask_about_words_over
from specflow.importers.measured.place_facts import is_reference, stated_here
from specflow.importers.measured.placed import pivot_of
from specflow.importers.measured.quantity_text import name_quantity
from specflow.importers.measured.result import Question, Role
from specflow.importers.measured.roles import role_of_words, uncertainty_of
from specflow.importers.measured.tables import FoundTable

Part = tuple[FoundTable, LayoutMapping]


def parts_of(table: FoundTable, mapping: LayoutMapping, context: Context) -> list[Part]:
    """Return the parts, each with the mapping that it is read by; a plain table is its own only part."""
    read_as = replace(mapping, stated=stated_here(mapping))
    if mapping.skip_rows:
        table = _without_rows(table, mapping)
    table = _with_lettered(table, mapping)
    if mapping.matrix is not None:
        return [(table, replace(read_as, pivots=(pivot_of(mapping.matrix),)))]
    long = mapping.long or find_long(table, mapping, context)
    if long is not None:
        return long_parts(table, long, read_as, context)
    if mapping.others:
        read_as = _others_unread(table, read_as)
    if table.pivots and not mapping.pivots:
        read_as = _with_axis(table, read_as)
    if mapping.pivots or _is_settled(mapping):
        pivots = tuple(mapping.pivots)
    else:
        pivots, doubts = _recognised_pivots(table, context)
        table = replace(table, doubts=(*table.doubts, *doubts))
    doubts = tuple(one for one in table.doubts if not _settles(mapping, table, one))
    table = replace(table, doubts=(*doubts, *ask_about_words_over(table, mapping.pivots, context)))
    if pivots and (len(pivots) > 1 or _values_beside(table, replace(read_as, pivots=pivots), context)):
        return _pivot_parts(table, replace(read_as, pivots=pivots), context)
    if not pivots:
        return [(part, read_as) for part in group_parts(table, context)]
    return [(table, replace(read_as, pivots=pivots))]


def _recognised_pivots(
    table: FoundTable, context: Context
) -> tuple[tuple[PivotMapping, ...], tuple[Question, ...]]:
    """Pivots that the headers state beyond doubt, and questions about others."""
    if table.pivots:
        return table.pivots, ()
    at_headers, doubts = pivots_of_headers(table, context)
    return (at_headers, doubts) if at_headers or doubts else item_pivots(table, context)


def _settles(mapping: LayoutMapping, table: FoundTable, doubt: Question) -> bool:
    """Whether a mapping answers a question how the table lies.

    It does by a pivot, by a condition from a cell, or by what it says of the very column that is asked about. A
    question without a cell is answered by areas alone.
    """
    if not doubt.cell:
        return False
    if any(map(is_reference, mapping.stated.values())):
        return True
    for header in table.headers:
        if header.cell == doubt.cell:
            entry = mapping.column(header.text, header.letter)
            told = entry is not None and bool(entry.role or entry.parameter or entry.dimension)
            return told or any(pivot.is_about(header.text, header.letter) for pivot in mapping.pivots)
    return False


def _is_settled(mapping: LayoutMapping) -> bool:
    """Whether a person said what the columns are; what was recognised of them then does not count."""
    return any(entry.role or entry.parameter or entry.dimension for entry in mapping.columns)


def _with_axis(table: FoundTable, read_as: LayoutMapping) -> LayoutMapping:
    """Say that the first column of a table under numbers is its axis: a level there is no result."""
    axis = table.headers[0]
    dimension = find_dimension(read_header(axis.text).name)
    if dimension is None or dimension.name not in ("power_level", "input_level"):
        return read_as
    if read_as.column(axis.text, axis.letter) is not None:
        return read_as
    entry = ColumnMapping(header=axis.text, column=axis.letter, role="condition", dimension=dimension.name)
    return replace(read_as, columns=(*read_as.columns, entry))


def _with_lettered(table: FoundTable, mapping: LayoutMapping) -> FoundTable:
    """Take columns without a header among the headers, where the mapping says by their letters what they are."""
    meant = {
        column
        for column in table.unnamed
        if (entry := mapping.column("", table.grid.column_name(column))) is not None
        and (entry.parameter or entry.dimension or entry.role not in ("", Role.NOT_READ))
    }
    if not meant:
        return table
    row, turned = table.header_row, table.grid.turned
    lettered = [HeaderCell(column, row, f"column #{column}", turned=turned) for column in sorted(meant)]
    headers = tuple(sorted((*table.headers, *lettered), key=lambda header: header.column))
    return replace(table, headers=headers, unnamed=tuple(one for one in table.unnamed if one not in meant))


def _others_unread(table: FoundTable, read_as: LayoutMapping) -> LayoutMapping:
    """Mark the columns that the mapping says nothing of as not read."""
    letters = [(header.text, header.letter) for header in table.headers]
    letters += [("", table.grid.column_name(column)) for column in table.unnamed]
    unread = [
        ColumnMapping(header=text, column=letter, role=Role.NOT_READ.value)
        for text, letter in letters
        if read_as.column(text, letter) is None
        and not any(pivot.is_about(text, letter) for pivot in read_as.pivots)
    ]
    return replace(read_as, columns=(*read_as.columns, *unread))


def _without_rows(table: FoundTable, mapping: LayoutMapping) -> FoundTable:
    left = ~np.isin(table.rows, list(mapping.skip_rows))
    names = ", ".join(map(str, table.rows[~left].tolist()))
    note = (f"not read, as the mapping says: rows {names}",) if names else ()
    return replace(table, rows=table.rows[left], notes=(*table.notes, *note))


def _pivot_parts(table: FoundTable, read_as: LayoutMapping, context: Context) -> list[Part]:
    """One part for each pivot, with the columns that all share; one more where other columns hold values."""
    of_pivots = [
        [header for header in table.headers if pivot.is_about(header.text, header.letter)]
        for pivot in read_as.pivots
    ]
    taken = {header.column for headers in of_pivots for header in headers}
    others = tuple(header for header in table.headers if header.column not in taken)
    values = _values_beside(table, read_as, context)
    parts: list[Part] = []
    if values:
        parts.append((replace(table, headers=others), replace(read_as, pivots=())))
    shared = [header for header in others if header.column not in values]
    for pivot, own in zip(read_as.pivots, of_pivots, strict=True):
        headers = tuple(sorted((*shared, *own), key=lambda header: header.column))
        parts.append((replace(table, headers=headers, part=pivot.header), replace(read_as, pivots=(pivot,))))
    return parts


def _values_beside(table: FoundTable, read_as: LayoutMapping, context: Context) -> set[int]:
    """The columns of values that are no pivot."""
    return {
        header.column
        for header in table.headers
        if not any(pivot.is_about(header.text, header.letter) for pivot in read_as.pivots)
        and _is_value(header, read_as.column(header.text, header.letter), context)
    }


def _is_value(header: HeaderCell, entry: ColumnMapping | None, context: Context) -> bool:
    """Whether a column holds values, as the mapping says, else as its header names a quantity and no condition."""
    if entry is not None and (entry.role or entry.parameter or entry.dimension):
        return entry.role == Role.VALUE or (bool(entry.parameter) and not entry.role)
    parts, unit = read_header(header.text), header.unit
    if find_dimension(parts.name) or role_of_words(parts) or uncertainty_of(parts):
        return False
    return bool(name_quantity(parts, unit or parts.unit, context.dictionary, context.planes).candidates)
