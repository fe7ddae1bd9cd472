"""Which unit the numbers of a column have, and where that was found."""

from __future__ import annotations

import re
from collections import Counter
from dataclasses import dataclass, replace

import numpy as np

from specflow.errors import UnitError
from specflow.importers.measured.cell_units import brought, one_unit, slip_of, unit_column_of, unit_words
from specflow.importers.measured.header_cells import HeaderCell
from specflow.importers.measured.header_text import HeaderText, known_unit
from specflow.importers.measured.tables import FoundTable
from specflow.importers.readers import OddKind, OddRun
from specflow.units import format_unit, parse_reading_with_unit, parse_unit

_MOST_TEXTS = 2000


@dataclass(frozen=True, slots=True)
class FoundUnit:
    """A unit as written and its source in words; ``problem`` says why there is none.

    ``by_row`` is the column that gives the unit of each row (0: none); ``by_cell`` says that each cell gives its own.
    """

    unit: str = ""
    source: str = ""
    problem: str = ""
    by_row: int = 0
    by_cell: bool = False


def find_unit(
    table: FoundTable, header: HeaderCell, parts: HeaderText, mapped: str = "", said_by: str = "the mapping"
) -> FoundUnit:
    """Look for the unit: mapping, header, units row, number format, cell texts, unit column, in this order."""
    if mapped:
        return _beside(table, header, _checked(mapped, said_by))
    found = _found(table, header, parts)
    slip = slip_of(found.unit)
    return FoundUnit(problem=f"{slip}; found in {found.source}") if slip else found


def _found(table: FoundTable, header: HeaderCell, parts: HeaderText) -> FoundUnit:
    written = [(parts.unit, f"the header {header.cell}")] if parts.unit else []
    if header.unit and header.unit_row is not None:
        where = f"the units row, {table.grid.address(header.unit_row, header.column)}"
        written.append((header.unit, header.unit_from or where))
    if len(written) == 2 and known_unit(written[0][0]) != known_unit(written[1][0]):
        return FoundUnit(problem=f"the header says {written[0][0]}, the units row {written[1][0]}")
    if written:
        return _checked(*written[0])
    if parts.odd_unit:
        return _checked(parts.odd_unit, f"the header {header.cell}")
    return (
        _from_format(table, header)
        or _from_texts(table, header)
        or _from_unit_column(table, header)
        or FoundUnit()
    )


def format_runs(table: FoundTable, column: int) -> list[OddRun]:
    """The odd formats of the data rows of a column."""
    runs = table.grid.odd.in_column(column, table.first_row, table.stop_row)
    return [run for run in runs if run.cell.kind in (OddKind.PERCENT, OddKind.UNIT_FORMAT, OddKind.SCALED)]


def _checked(unit: str, source: str) -> FoundUnit:
    try:
        return FoundUnit(format_unit(parse_unit(unit)), source)
    except UnitError as error:
        hint = f" ({error.hint})" if error.hint else ""
        return FoundUnit(problem=f"{error.message}{hint}, found in {source}")


def _from_format(table: FoundTable, header: HeaderCell) -> FoundUnit | None:
    """The unit that the number format writes beside every number of the column."""
    runs = format_runs(table, header.column)
    if not runs:
        return None
    units = {"%" if run.cell.kind is OddKind.PERCENT else run.cell.unit for run in runs}
    if any(run.cell.kind is OddKind.SCALED for run in runs) or len(units) != 1:
        return FoundUnit(problem=f"the number formats of the column say {', '.join(sorted(units))}")
    numeric = table.cells(header.column).numeric
    formatted = np.zeros(len(numeric), bool)
    for run in runs:
        formatted[max(run.first - table.first_row, 0) : run.last + 1 - table.first_row] = True
    unit = units.pop()
    if (numeric & ~formatted).any():
        return FoundUnit(problem=f"only some cells have the number format with {unit}")
    if known_unit(unit) is None:
        return FoundUnit(problem=f"the number format writes {unit!r}, which is no unit")
    return FoundUnit(unit, f"the number format of {table.grid.address(int(table.rows[0]), header.column)}")


def _from_texts(table: FoundTable, header: HeaderCell) -> FoundUnit | None:
    """The unit written into the cells; of several the commonest, where the others can be brought to it."""
    cells = table.cells(header.column)
    if cells.numeric.any() or not cells.odd:
        return None
    units: Counter[str] = Counter()
    decimal_comma = table.grid.decimal == "," if table.grid.is_text else None
    for row in cells.odd[:_MOST_TEXTS]:
        value = cells.value(row)
        if not isinstance(value, str) or not re.search(r"\d\s*\D", value):
            continue
        try:
            unit = parse_reading_with_unit(value, decimal_comma=decimal_comma)[1]
        except UnitError:
            continue
        if unit is not None:
            units[str(unit)] += 1
    if len(units) == 1:
        return FoundUnit(next(iter(units)), "the text of the cells")
    if len(units) > 1 and one_unit(units):
        return FoundUnit(one_unit(units), f"the text of the cells ({_counts(units)})", by_cell=True)
    if len(units) > 1:
        return FoundUnit(problem=f"the cells carry different units: {', '.join(sorted(units))}")
    return None


def _beside(table: FoundTable, header: HeaderCell, mapped: FoundUnit) -> FoundUnit:
    """The unit of a mapping; where a column gives the unit of each row, readings are brought to it if all can be."""
    other = unit_column_of(table, header)
    units = None if other is None else unit_words(table.cells(other.column).at(table.rows))
    if other is None or units is None or not mapped.unit:
        return mapped
    wanted = parse_unit(mapped.unit)
    if not all(brought(parse_unit(unit), wanted) for unit in units):
        return mapped
    return replace(mapped, by_row=other.column)


def _from_unit_column(table: FoundTable, header: HeaderCell) -> FoundUnit | None:
    """The unit that another column gives, row by row; of several the commonest, if the others can be brought to it."""
    other = unit_column_of(table, header)
    units = None if other is None else unit_words(table.cells(other.column).at(table.rows))
    if other is None or units is None or not table.cells(header.column).numeric.any():
        return None
    unit, where = one_unit(units), f"the unit column {other.cell}"
    if not unit:
        return FoundUnit(problem=f"{where} holds different units: {', '.join(sorted(units))}")
    return FoundUnit(unit, where if len(units) == 1 else f"{where} ({_counts(units)})", by_row=other.column)


def _counts(units: Counter[str]) -> str:
    return ", ".join(f"{unit} in {count}" for unit, count in units.most_common())
