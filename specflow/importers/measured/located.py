"""The tables of a sheet, each with the mapping of its layout and with what is said above it."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field, replace

from specflow.importers.measured.area import without
from specflow.importers.measured.context import Context
from specflow.importers.measured.facts import Fact, Preamble, read_across, read_preamble
from specflow.importers.measured.finding import find_all
from specflow.importers.measured.layout import layout_key
from specflow.importers.measured.mapping_parts import LayoutMapping
from specflow.importers.measured.names import NAMES, canonical
from specflow.importers.measured.parts import parts_of
from specflow.importers.measured.place_facts import facts_of_cells
from specflow.importers.measured.placed import clipped, first_row_above, table_in_area
from specflow.importers.measured.settled import GivenMappings, Mappings, Settled, kept_under
from specflow.importers.measured.stating import holds_below
from specflow.importers.measured.tables import FoundTable, cut_table, fills_blanks, rows_of_numbers
from specflow.importers.measured.titles import with_titles
from specflow.importers.readers import CellRange, Grid

__all__ = ["GivenMappings", "LocatedTable", "LocatedTables", "Mappings", "locate_tables"]


@dataclass(frozen=True, slots=True)
class LocatedTable:
    """A table to be read; ``mapping_from`` says where its mapping is from ("" when there is none).

    ``mapping`` is as the person wrote it, ``read_as`` what is read of this part of the table. ``sheet_facts`` are said
    above an earlier table of the sheet and hold where ``preamble`` says nothing else. ``kept_under`` is the key under
    which the mapping is kept; ``number`` counts the tables of the sheet: the parts of one share it.
    """

    table: FoundTable
    key: str
    mapping: LayoutMapping
    mapping_from: str
    preamble: Preamble
    sheet_facts: tuple[Fact, ...]
    read_as: LayoutMapping
    kept_under: str
    number: int


@dataclass
class LocatedTables:
    """What was found on one sheet; ``skipped`` says what is not read, ``outside`` are rows of numbers in no table."""

    tables: list[LocatedTable] = field(default_factory=list)
    skipped: list[str] = field(default_factory=list)
    outside: list[int] = field(default_factory=list)


def locate_tables(grid: Grid, context: Context, mappings: Mappings) -> LocatedTables:
    """Find the tables of a sheet, with their mappings: first those whose area a mapping states, then all others."""
    locator = _Locator(grid, context, mappings)
    areas, alone = locator.take_areas()
    if alone is not None:
        locator.found.skipped.append(f"{locator.where}: nothing else is read; {alone.source} says alone")
        return locator.found
    locator.search(without(grid, areas), bool(areas))
    return locator.found


class _Locator:
    """Collects the tables of one sheet."""

    def __init__(self, grid: Grid, context: Context, mappings: Mappings) -> None:
        self.found = LocatedTables()
        self.where = grid.file if grid.name == grid.file else f"sheet {grid.name}"
        self._grid = grid
        self._context = context
        self._mappings = mappings
        self._number = 0

    def take_areas(self) -> tuple[list[CellRange], Settled | None]:
        """Take the tables whose areas are stated; return the areas, and the mapping that says there is no more."""
        areas: list[CellRange] = []
        alone: Settled | None = None
        found: list[tuple[CellRange, FoundTable, str, Settled]] = []
        for one in self._mappings.of_areas(self._grid):
            area = clipped(self._grid, one.mapping.area)
            table = None if area is None else table_in_area(self._grid, one.mapping, self._context.recognises)
            if area is None or table is None or any(area.touches(other) for other in areas):
                continue
            key = layout_key(table)
            if not _is_meant(one, key, table):
                continue
            areas.append(area)
            self._mappings.used.append(one.mapping)
            alone = one if one.mapping.alone else alone
            found.append((area, table, key, one))
        for area, table, key, one in sorted(
            found, key=lambda each: (each[0].first_row, each[0].first_column)
        ):
            if one.mapping.skip:
                self.found.skipped.append(f"{self.where}, {table.place}: {one.source} says skip")
                continue
            top = first_row_above(self._grid, area)
            above = CellRange(top, area.first_column, area.first_row, area.last_column)
            preamble = read_preamble(self._grid.cut(above), top, area.first_row)
            self._add(table, key, one, preamble.facts, preamble.title, ())
        return areas, alone

    def search(self, grid: Grid, has_areas: bool) -> None:
        """Find tables where none was stated."""
        found = with_titles(find_all(grid, self._context), self._context)
        if not found and not has_areas:
            self.found.skipped.append(
                f"{self.where}: no table was found (a row of headers with numbers below)"
            )
        above: tuple[Fact, ...] = ()
        sheet_facts: tuple[Fact, ...] = ()
        for table in found:
            preamble = read_preamble(table.grid, table.top, table.header_row)
            own = (*table.facts, *preamble.facts, *above)
            self._note_outside(table, preamble)
            key = layout_key(table)
            settled = self._mappings.of_table(key, own, table.has_words)
            if settled is not None and settled.mapping.skip:
                self.found.skipped.append(f"{self.where}, {table.place}: {settled.source} says skip")
            elif settled is None and _speaks_of_tables_below(table):
                above = (*own, *read_across(table.grid, table.header_row, int(table.rows[0])))
                continue
            else:
                self._add(table, key, settled, own, preamble.title, sheet_facts)
            sheet_facts = (*filter(holds_below, own), *sheet_facts)
            above = ()

    def _note_outside(self, table: FoundTable, preamble: Preamble) -> None:
        told = {fact.row for fact in preamble.facts}
        rows = rows_of_numbers(table.grid, table.top, table.header_row)
        self.found.outside += [row for row in rows if row not in told and row not in table.title_rows]

    def _add(
        self,
        table: FoundTable,
        key: str,
        settled: Settled | None,
        facts: tuple[Fact, ...],
        title: str,
        sheet_facts: Iterable[Fact],
    ) -> None:
        mapping = settled.mapping if settled else LayoutMapping()
        rows = mapping.header_rows
        if rows == 1 and not any("_" in entry.header for entry in mapping.columns) and fills_blanks(table):
            rows = 2
        if rows > 1 and not mapping.area:
            table = cut_table(table.grid, table.top, table.header_row, rows, self._context.recognises)
        from_cells, doubts = facts_of_cells(self._grid, table, mapping)
        facts = (*from_cells, *facts)
        self._number += 1
        for part, read_as in parts_of(table, mapping, self._context):
            part = replace(part, doubts=(*part.doubts, *doubts))
            said = [
                fact for fact in facts if fact.row != part.group_row
            ]  # each group has its own of that row
            self.found.tables.append(
                LocatedTable(
                    part,
                    key,
                    mapping,
                    settled.source if settled else "",
                    Preamble((*part.facts, *said), title),
                    tuple(sheet_facts),
                    read_as,
                    kept_under(key, mapping),
                    self._number,
                )
            )


def _is_meant(one: Settled, key: str, table: FoundTable) -> bool:
    """Whether what stands in the area is the layout that the mapping was made for; one by hand may name none."""
    if one.by_hand:
        return one.mapping.layout in ("", key)
    return one.mapping.layout == key and table.has_words


def _speaks_of_tables_below(table: FoundTable) -> bool:
    """Whether a table of one row is a block of keys with their values below: Date, DUT, Operator."""
    if len(table.rows) != 1 or table.unnamed:
        return False
    names = [canonical(header.text) for header in table.headers]
    return sum(name in NAMES for name in names) * 2 > len(names)
