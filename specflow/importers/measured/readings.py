"""Cells of one column to numbers: readings as intervals [low, high], whatever is no reading rejected with its reason.

The happy path is whole arrays: only cells that hold no plain number, and runs of odd formats, are looked at.
"""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from datetime import date, datetime, time, timedelta
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from specflow.errors import UnitError
from specflow.importers.measured.cell_units import brought, slip_of, to_unit
from specflow.importers.measured.cells import Rows
from specflow.importers.measured.placeholders import without_placeholders
from specflow.importers.measured.rejects import Rejects
from specflow.importers.measured.tables import FoundTable
from specflow.importers.measured.unit_source import format_runs
from specflow.importers.readers import Grid, OddKind, OddRun, Value, is_blank
from specflow.units import (
    ONE,
    PERCENT,
    Blank,
    Kind,
    Reading,
    Unit,
    parse_reading,
    parse_reading_with_unit,
    parse_unit,
)

Floats = NDArray[np.float64]

#: Blanks behind which there was a reading: out of the range of the instrument, or lost. It may be the one that fails.
_FAULTY_BLANKS = ("not a number", "error in the cell", "SCPI", "overload", "invalid")


@dataclass
class Numbers:
    """``low`` and ``high`` are one array where all readings are points; NaN where there is none.

    The arrays may be the grid's own, which are locked: ``put`` and ``drop`` copy them before they write.
    """

    low: Floats
    high: Floats
    notes: list[str] = field(default_factory=list)
    problem: str = ""

    def put(self, place: int, low: float, high: float) -> None:
        """Write the reading of one row."""
        if not self.low.flags.writeable:
            points = self.high is self.low
            self.low = self.low.copy()
            self.high = self.low if points else self.high
        if low < high and self.high is self.low:
            self.high = self.low.copy()
        self.low[place], self.high[place] = low, high

    def drop(self, place: int) -> None:
        """Leave out the reading of one row."""
        self.put(place, np.nan, np.nan)


@dataclass(frozen=True, slots=True)
class Spelled:
    """How the readings of a column are written: in ``unit``, or each in its own; times ``scale``.

    ``by_row`` is the column with the unit of each row (0: none); ``by_cell`` says that a cell without a unit of its own
    has none.
    """

    unit: str
    by_row: int = 0
    by_cell: bool = False
    scale: float = 1.0


def read_numbers(table: FoundTable, column: int, spelled: Spelled, rows: Rows, rejects: Rejects) -> Numbers:
    """Read the rows of one column; ``problem`` says when its number formats contradict its unit as a whole."""
    cells = table.cells(column)
    unit = parse_unit(spelled.unit or "1")
    low = without_placeholders(cells.numbers_at(rows), column, rows, rejects)
    numbers = Numbers(low, low)
    _apply_formats(table, column, unit, rows, numbers, rejects)
    if cells.odd:
        _read_odd(table, column, unit, spelled.by_cell, rows, numbers, rejects)
        if numbers.high is numbers.low:  # a bound is no placeholder
            numbers.low = numbers.high = without_placeholders(numbers.low, column, rows, rejects)
    if spelled.by_row:
        _bring_rows(table, column, spelled.by_row, unit, rows, numbers, rejects)
    if spelled.scale != 1:
        _scale(numbers, spelled)
    empty = int(np.count_nonzero(~cells.filled[rows - cells.first]))
    if empty:
        rejects.blank["nothing written"] += empty
    return numbers


def _apply_formats(
    table: FoundTable, column: int, unit: Unit, rows: Rows, numbers: Numbers, rejects: Rejects
) -> None:
    """What number formats say: percent under % is scaled, a unit must agree, anything else is doubted."""
    runs = format_runs(table, column)
    if not runs:
        return
    percent = _marked(runs, OddKind.PERCENT, rows) & ~np.isnan(numbers.low)
    numeric = ~np.isnan(numbers.low)
    is_percent = unit.kind is Kind.RATIO and not unit.is_log and unit.scale == PERCENT.scale
    if percent.any():
        if not is_percent and unit != ONE:
            numbers.problem = f"cells in a percent format under the unit {unit}"
        elif is_percent and (numeric & ~percent).any():
            numbers.problem = _mixed(rows, percent, numeric)
        elif is_percent:
            low = np.round(numbers.low * 100, 12)  # 0.031 in binary times 100 is not 3.1
            example = float(numbers.low[percent][0])
            numbers.low = numbers.high = low
            numbers.notes.append(
                f"percent format: {example:g} is shown as {example * 100:.12g} % and read so, "
                f"{int(percent.sum())} cells"
            )
    for run in runs:
        if run.cell.kind is OddKind.PERCENT:
            continue
        reason = _format_reason(run, unit)
        if reason:
            for place in np.flatnonzero((rows >= run.first) & (rows <= run.last) & numeric).tolist():
                rejects.add(int(rows[place]), column, float(numbers.low[place]), reason)
                numbers.drop(place)


def _marked(runs: list[OddRun], kind: OddKind, rows: Rows) -> NDArray[np.bool_]:
    marked = np.zeros(len(rows), bool)
    for run in runs:
        if run.cell.kind is kind:
            marked |= (rows >= run.first) & (rows <= run.last)
    return marked


def _mixed(rows: Rows, percent: NDArray[np.bool_], numeric: NDArray[np.bool_]) -> str:
    plain = rows[numeric & ~percent]
    return (
        f"{int(percent.sum())} cells are in a percent format (from row {int(rows[percent][0])}), "
        f"{len(plain)} are not (from row {int(plain[0])})"
    )


def _format_reason(run: OddRun, unit: Unit) -> str:
    if run.cell.kind is OddKind.SCALED:
        return f"the number format {run.cell.detail!r} shows another size than the value that is stored"
    try:
        if _agree(parse_unit(run.cell.unit), unit):
            return ""
    except UnitError:
        return f"the number format writes {run.cell.unit!r} beside the number"
    return f"the number format says {run.cell.unit}, the column {unit}"


def _agree(written: Unit, unit: Unit) -> bool:
    """Whether two units are the same; "%" in a cell under "% rms" leaves the statistic to the header."""
    return replace(written, measure=written.measure or unit.measure) == unit


def _scale(numbers: Numbers, spelled: Spelled) -> None:
    """Multiply all readings; a factor is positive, so that bounds stay bounds."""
    points = numbers.high is numbers.low
    numbers.low = numbers.low * spelled.scale
    numbers.high = numbers.low if points else numbers.high * spelled.scale
    numbers.notes.append(f"every reading was multiplied by {spelled.scale:g} to be in {spelled.unit or '1'}")


def _bring_rows(
    table: FoundTable, column: int, beside: int, unit: Unit, rows: Rows, numbers: Numbers, rejects: Rejects
) -> None:
    """Bring readings to the unit of the column where the unit beside them is another one."""
    words = [str(value).strip() for value in table.cells(beside).at(rows)]
    for word in dict.fromkeys(words):
        there = np.array([one == word for one in words]) & ~np.isnan(numbers.low)
        written = parse_unit(word) if word else None
        if not there.any() or written == unit:
            continue
        changed = []
        for place in np.flatnonzero(there).tolist():
            where = table.grid.address(int(rows[place]), beside)
            slip = f"no unit beside the reading, in {where}" if not word else ""
            ends = _brought(numbers.low[place], numbers.high[place], written, unit, slip or slip_of(word))
            if isinstance(ends, str):
                rejects.add(int(rows[place]), column, float(numbers.low[place]), ends)
                ends = (np.nan, np.nan)
            else:
                changed.append(table.grid.address(int(rows[place]), column))
            numbers.put(place, *ends)
        if changed:
            numbers.notes.append(_conversion(len(changed), changed[0], str(written), unit))


def _brought(
    low: float, high: float, written: Unit | None, unit: Unit, problem: str = ""
) -> tuple[float, float] | str:
    """The ends of a reading in the unit of its column, or why they cannot be brought to it."""
    if problem or written is None:
        return problem
    if not brought(written, unit):
        return f"the cell says {written}, the column {unit}"
    try:
        return to_unit(float(low), written, unit), to_unit(float(high), written, unit)
    except UnitError as error:
        return error.message


def _conversion(count: int, first: str, written: str, unit: Unit) -> str:
    cells = f"{count} readings in {written} were" if count > 1 else f"the reading in {written} was"
    return f"{cells} converted to {unit} ({'the first is ' if count > 1 else ''}{first})"


def _read_odd(
    table: FoundTable, column: int, unit: Unit, by_cell: bool, rows: Rows, numbers: Numbers, rejects: Rejects
) -> None:
    cells = table.cells(column)
    places = (
        dict(zip(rows.tolist(), range(len(rows)), strict=True)) if len(rows) != len(cells.numbers) else None
    )
    decimal_comma = (
        (table.grid.decimal == "," if table.grid.decimal else None) if table.grid.is_text else None
    )
    texts = 0
    reader = _OddCells(table.grid, column, unit, decimal_comma, by_cell, rejects)
    for row in cells.odd:
        place = row - cells.first if places is None else places.get(row)
        if place is None:
            continue
        value = cells.value(row)
        ends = reader.ends(row, value)
        if ends is None:
            continue
        numbers.put(place, *ends)
        texts += ends[0] == ends[1]
    if texts and not table.grid.is_text:
        numbers.notes.append(f"{texts} numbers stored as text were read")
    for written, cells_brought in reader.brought.items():
        numbers.notes.append(_conversion(len(cells_brought), cells_brought[0], written, unit))


@dataclass
class _OddCells:
    """Reads cells that hold something else than a plain number; ``brought`` are cells converted, by their unit."""

    grid: Grid
    column: int
    unit: Unit
    decimal_comma: bool | None
    by_cell: bool
    rejects: Rejects
    brought: dict[str, list[str]] = field(default_factory=dict)

    def ends(self, row: int, value: Value) -> tuple[float, float] | None:
        """The ends of a reading; None where it is rejected or blank."""
        found = self._read(row, value)
        if isinstance(found, str):
            self.rejects.add(row, self.column, value, found)
            return None
        return found

    def _read(self, row: int, value: Value) -> tuple[float, float] | str | None:
        reason = _not_text(self.grid, row, self.column, value)
        if reason:
            return reason
        text = str(value)
        try:
            reading, written = _parsed(text, self.decimal_comma, self.grid.grouped)
        except UnitError as error:
            return error.message + (f" ({error.hint})" if error.hint else "")
        if isinstance(reading, Blank):
            if any(word in reading.reason for word in _FAULTY_BLANKS):
                return reading.reason
            self.rejects.blank[f"{reading.reason}: {text.strip()}"] += 1
            return None
        return self._in_unit(row, reading, written)

    def _in_unit(self, row: int, reading: Reading, written: Unit | None) -> tuple[float, float] | str:
        if written is None and self.by_cell:
            return "the cell states no unit, and other cells of the column state several"
        if written is None or _agree(written, self.unit):
            return reading.lo, reading.hi
        ends = _brought(reading.lo, reading.hi, written, self.unit, slip_of(str(written)))
        if not isinstance(ends, str):
            self.brought.setdefault(str(written), []).append(self.grid.address(row, self.column))
        return ends


@lru_cache(maxsize=8192)
def _parsed(text: str, decimal_comma: bool | None, grouped: bool) -> tuple[Reading | Blank, Unit | None]:
    try:
        return parse_reading(text, decimal_comma=decimal_comma, grouped=grouped), None
    except UnitError as error:
        try:
            return parse_reading_with_unit(text, decimal_comma=decimal_comma, grouped=grouped)
        except UnitError:
            raise error from None


def _not_text(grid: Grid, row: int, column: int, value: Value) -> str:
    """Why a cell that is no plain number is not even a text that might be one; "" when it is."""
    odd = grid.odd.at(row, column)
    if odd is not None and odd.kind is OddKind.ERROR:
        return f"an error of the spreadsheet ({odd.detail or 'error'})"
    if odd is not None and odd.kind is OddKind.NO_VALUE:
        return (
            "a formula whose value was never calculated: open the file in a spreadsheet program and save it"
        )
    if isinstance(value, bool):
        return "a truth value where a number belongs"
    if isinstance(value, datetime | date | time | timedelta):
        return "a date or time where a number belongs"
    if not isinstance(value, str):
        return "not a finite number"
    if is_blank(value):
        return "the cell cannot be read"
    return ""
