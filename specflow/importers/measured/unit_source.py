"""Which unit the numbers of a column have, and where that was found."""

from __future__ import annotations

import re
from collections import Counter
from dataclasses import dataclass

import numpy as np

from specflow.errors import UnitError
from specflow.importers.measured.header_cells import HeaderCell
from specflow.importers.measured.header_text import HeaderText, known_unit
from specflow.importers.measured.tables import FoundTable
from specflow.importers.readers import OddKind, OddRun, address
from specflow.units import format_unit, parse_reading_with_unit, parse_unit

_MOST_TEXTS = 2000


@dataclass(frozen=True, slots=True)
class FoundUnit:
    """A unit as written and its source in words; ``problem`` says why there is none."""

    unit: str = ""
    source: str = ""
    problem: str = ""


def find_unit(table: FoundTable, header: HeaderCell, parts: HeaderText, mapped: str = "") -> FoundUnit:
    """Look for the unit: mapping, header, units row, number format, cell texts, in this order."""
    if mapped:
        return _checked(mapped, "the mapping")
    written = [(parts.unit, f"the header {header.cell}")] if parts.unit else []
    if header.unit and header.unit_row is not None:
        written.append((header.unit, f"the units row, {address(header.unit_row, header.column)}"))
    if len(written) == 2 and known_unit(written[0][0]) != known_unit(written[1][0]):
        return FoundUnit(problem=f"the header says {written[0][0]}, the units row {written[1][0]}")
    if written:
        return _checked(*written[0])
    if parts.odd_unit:
        return _checked(parts.odd_unit, f"the header {header.cell}")
    return _from_format(table, header) or _from_texts(table, header) or FoundUnit()


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
    return FoundUnit(unit, f"the number format of {address(int(table.rows[0]), header.column)}")


def _from_texts(table: FoundTable, header: HeaderCell) -> FoundUnit | None:
    """The unit written into the cells, where all cells carry the same."""
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
    if len(units) > 1:
        return FoundUnit(problem=f"the cells carry different units: {', '.join(sorted(units))}")
    return None
