"""Groups of columns under a cell that says what they have in common: "+85 °C" or "SN 7" over Gain and NF.

Each group becomes a part of its own, with the columns that all groups share, and with the cell as a fact of the part.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from specflow.importers.measured.context import Context
from specflow.importers.measured.facts import Fact, pair_in
from specflow.importers.measured.header_cells import HeaderCell
from specflow.importers.measured.header_text import header_key, known_unit, read_header
from specflow.importers.measured.items import is_item
from specflow.importers.measured.names import canonical
from specflow.importers.measured.place_facts import amounts_of
from specflow.importers.measured.tables import FoundTable
from specflow.importers.readers import is_blank


@dataclass(frozen=True, slots=True)
class Group:
    """Headers under one cell, and what the cell says."""

    fact: Fact
    headers: tuple[HeaderCell, ...]


def group_parts(table: FoundTable, context: Context) -> list[FoundTable]:
    """Return one part for each group; the table itself where the row above its headers makes no groups."""
    row = table.header_row - 1
    if row < table.top or row < table.grid.first_row:
        return [table]
    named = _with_names_above(table, row)
    groups = _groups(named, row, context)
    if len(groups) < 2:
        return [table]
    table = named
    grouped = {header.column for group in groups for header in group.headers}
    shared = [header for header in table.headers if header.column not in grouped]
    if not shared and not _repeat(groups):
        return [table]
    parts = []
    for group in groups:
        headers = tuple(sorted((*shared, *group.headers), key=lambda header: header.column))
        parts.append(
            replace(
                table,
                headers=headers,
                part=f"{group.fact.key} {group.fact.value}",
                facts=(group.fact, *table.facts),
                title_rows=(*table.title_rows, row),
                group_row=row,
            )
        )
    return parts


def _with_names_above(table: FoundTable, row: int) -> FoundTable:
    """Join a header that is a unit alone, "(dBm)", with the word over it: "Pin" beside the cells that make groups."""
    return replace(table, headers=tuple(_named(table, header, row) for header in table.headers))


def _named(table: FoundTable, header: HeaderCell, row: int) -> HeaderCell:
    above = table.grid.value(row, header.column)
    is_unit = not read_header(header.text).name and known_unit(header.text.strip("()[] ")) is not None
    if not is_unit or not isinstance(above, str) or is_blank(above):
        return header
    if table.grid.merged_range(row, header.column) is not None or read_header(above).unit:
        return header
    unit = header.text.strip("()[] ")
    return replace(header, row=row, text=f"{' '.join(above.split())} ({unit})")


def _groups(table: FoundTable, row: int, context: Context) -> list[Group]:
    """The groups of the row above, where all that is written over the headers makes one."""
    grid = table.grid
    columns = [header.column for header in table.headers]
    starts = [
        column for column in range(columns[0], columns[-1] + 1) if not is_blank(grid.value(row, column))
    ]
    groups: list[Group] = []
    is_merged = True
    names = {header.column for header in table.headers if header.row == row}
    for place, start in enumerate(starts):
        if start in names:
            continue
        text = " ".join(str(grid.value(row, start)).split())
        fact = fact_of(text, grid.address(row, start), row, context)
        if fact is None:
            return []
        area = grid.merged_range(row, start)
        is_merged &= area is not None and area.first_column < area.last_column
        after = starts[place + 1] if place + 1 < len(starts) else columns[-1] + 1
        stop = area.last_column + 1 if area is not None else after
        groups.append(Group(fact, tuple(header for header in table.headers if start <= header.column < stop)))
    if not is_merged and not _repeat(groups):
        return []
    return [group for group in groups if group.headers]


def _repeat(groups: Sequence[Group]) -> bool:
    """Whether each group has headers that the first one has: cells that are not merged speak of the columns to their
    right only where these begin again."""
    keys = [[header_key(header.text) for header in group.headers] for group in groups]
    return len(keys) > 1 and all(key and key[0] == keys[0][0] for key in keys)


def fact_of(text: str, cell: str, row: int, context: Context) -> Fact | None:
    """What a cell over columns says beyond doubt: an item, a frequency, a temperature, a key with its value."""
    pair = pair_in(text)
    if pair is not None and canonical(pair[0]):
        return Fact(pair[0], pair[1], cell, row)
    if is_item(text, context):
        return Fact("item", text, cell, row)
    for key, unit in (("frequency", "Hz"), ("temperature", "°C")):
        found = amounts_of(text, [unit])
        if found and found[0] == text:
            return Fact(key, text, cell, row)
    return None
