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
from specflow.importers.measured.cells import Rows
from specflow.importers.measured.placeholders import reject_placeholders
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

_FAULTY_BLANKS = ("not a number", "error in the cell", "SCPI")


@dataclass
class Numbers:
    """``low`` and ``high`` are one array where all readings are points; NaN where there is none."""

    low: Floats
    high: Floats
    notes: list[str] = field(default_factory=list)
    problem: str = ""


def read_numbers(table: FoundTable, column: int, unit: str, rows: Rows, rejects: Rejects) -> Numbers:
    """Read the rows of one column in ``unit``; ``problem`` says when its number formats contradict it as a whole."""
    cells = table.cells(column)
    low = cells.numbers_at(rows)
    numbers = Numbers(low, low)
    reject_placeholders(low, column, rows, rejects)
    _apply_formats(table, column, parse_unit(unit or "1"), rows, numbers, rejects)
    if cells.odd:
        _read_odd(table, column, parse_unit(unit or "1"), rows, numbers, rejects)
        if numbers.high is numbers.low:  # a bound is no placeholder
            reject_placeholders(numbers.low, column, rows, rejects)
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
                numbers.low[place] = np.nan


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


def _read_odd(
    table: FoundTable, column: int, unit: Unit, rows: Rows, numbers: Numbers, rejects: Rejects
) -> None:
    cells = table.cells(column)
    places = (
        dict(zip(rows.tolist(), range(len(rows)), strict=True)) if len(rows) != len(cells.numbers) else None
    )
    decimal_comma = (
        (table.grid.decimal == "," if table.grid.decimal else None) if table.grid.is_text else None
    )
    texts = 0
    for row in cells.odd:
        place = row - cells.first if places is None else places.get(row)
        if place is None:
            continue
        value = cells.value(row)
        ends = _ends(table.grid, row, column, value, unit, decimal_comma, rejects)
        if ends is None:
            continue
        if ends[0] != ends[1] and numbers.high is numbers.low:
            numbers.high = numbers.low.copy()
        numbers.low[place], numbers.high[place] = ends
        texts += ends[0] == ends[1]
    if texts and not table.grid.is_text:
        numbers.notes.append(f"{texts} numbers stored as text were read")


def _ends(
    grid: Grid, row: int, column: int, value: Value, unit: Unit, decimal_comma: bool | None, rejects: Rejects
) -> tuple[float, float] | None:
    reason = _not_text(grid, row, column, value)
    if reason:
        rejects.add(row, column, value, reason)
        return None
    text = str(value)
    try:
        reading, written = _parsed(text, decimal_comma)
    except UnitError as error:
        rejects.add(row, column, value, error.message + (f" ({error.hint})" if error.hint else ""))
        return None
    if isinstance(reading, Blank):
        if any(word in reading.reason for word in _FAULTY_BLANKS):
            rejects.add(row, column, value, reading.reason)
        else:
            rejects.blank[f"{reading.reason}: {text.strip()}"] += 1
        return None
    if written is not None and not _agree(written, unit):
        rejects.add(row, column, value, f"the cell says {written}, the column {unit}")
        return None
    return reading.lo, reading.hi


@lru_cache(maxsize=8192)
def _parsed(text: str, decimal_comma: bool | None) -> tuple[Reading | Blank, Unit | None]:
    try:
        return parse_reading(text, decimal_comma=decimal_comma), None
    except UnitError as error:
        try:
            return parse_reading_with_unit(text, decimal_comma=decimal_comma)
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
