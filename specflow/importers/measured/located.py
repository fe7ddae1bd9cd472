"""The tables of a sheet, each with the mapping of its layout and with what is said above it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

from specflow.importers.measured.context import Context
from specflow.importers.measured.facts import Fact, Preamble, read_across, read_preamble
from specflow.importers.measured.layout import layout_key
from specflow.importers.measured.mapping import LayoutMapping, read_mappings
from specflow.importers.measured.names import NAMES, canonical
from specflow.importers.measured.stated import holds_below
from specflow.importers.measured.tables import FoundTable, cut_table, find_tables, rows_of_numbers
from specflow.importers.readers import Grid
from specflow.model.evidence import TableMapping


@dataclass(frozen=True, slots=True)
class LocatedTable:
    """A table to be read; ``mapping_from`` says where its mapping is from ("" when there is none).

    ``sheet_facts`` are said above an earlier table of the sheet and hold where ``preamble`` says nothing else.
    """

    table: FoundTable
    key: str
    mapping: LayoutMapping
    mapping_from: str
    preamble: Preamble
    sheet_facts: tuple[Fact, ...] = ()


@dataclass(frozen=True, slots=True)
class GivenMappings:
    """The layouts of the mapping file that the person gave, and its name; none without a file."""

    layouts: tuple[LayoutMapping, ...] = ()
    name: str = ""


@dataclass
class LocatedTables:
    """What was found on one sheet; ``skipped`` says what is not read, ``outside`` are rows of numbers in no table."""

    tables: list[LocatedTable] = field(default_factory=list)
    skipped: list[str] = field(default_factory=list)
    outside: list[int] = field(default_factory=list)


def locate_tables(grid: Grid, context: Context, given: GivenMappings) -> LocatedTables:
    """Find the tables of a sheet, with their mappings."""
    found = find_tables(grid, context.recognises)
    located = LocatedTables()
    where = grid.file if grid.name == grid.file else f"sheet {grid.name}"
    if not found:
        located.skipped.append(f"{where}: no table was found (a row of headers with numbers below)")
        return located
    above: tuple[Fact, ...] = ()
    sheet_facts: tuple[Fact, ...] = ()
    for table in found:
        key = layout_key(table)
        mapping, source = _mapping_for(key, given, context)
        preamble = read_preamble(grid, table.top, table.header_row)
        own = (*preamble.facts, *above)
        told = {fact.row for fact in preamble.facts}
        located.outside += [
            row for row in rows_of_numbers(grid, table.top, table.header_row) if row not in told
        ]
        if mapping.skip:
            located.skipped.append(f"{where}, {table.place}: {source} says skip")
        elif not source and _speaks_of_tables_below(table):
            above = (*own, *read_across(grid, table.header_row, int(table.rows[0])))
            continue
        else:
            if mapping.header_rows > 1:
                rows = mapping.header_rows
                table = cut_table(grid, table.top, table.header_row, rows, context.recognises)
            preamble = Preamble(own, preamble.title)
            located.tables.append(LocatedTable(table, key, mapping, source, preamble, sheet_facts))
        sheet_facts = (*filter(holds_below, own), *sheet_facts)
        above = ()
    return located


def _speaks_of_tables_below(table: FoundTable) -> bool:
    """Whether a table of one row is a block of keys with their values below: Date, DUT, Operator."""
    if len(table.rows) != 1 or table.unnamed:
        return False
    names = [canonical(header.text) for header in table.headers]
    return sum(name in NAMES for name in names) * 2 > len(names)


def _mapping_for(key: str, given: GivenMappings, context: Context) -> tuple[LayoutMapping, str]:
    """The mapping of a layout: from the given file (one without a key fits any layout), else as stored."""
    for mapping in given.layouts:
        if mapping.layout == key or (not mapping.layout and len(given.layouts) == 1):
            return mapping, f"the mapping file {given.name}"
    stored = [one for one in context.snapshot.all(TableMapping) if one.layout_key == key]
    if not stored:
        return LayoutMapping(), ""
    latest = stored[-1]
    layouts = read_mappings(latest.toml, f"mapping {latest.id}")
    return layouts[0], f"{latest.id} revision {latest.revision}, recognised by its layout"


def unused_layouts(given: GivenMappings, located: Sequence[LocatedTable]) -> list[str]:
    """The layouts of the mapping file that no table has: it was made for another file, or the layout has changed."""
    keys = {one.key for one in located}
    return [
        mapping.layout
        for mapping in given.layouts
        if mapping.layout and mapping.layout not in keys and not mapping.skip
    ]
