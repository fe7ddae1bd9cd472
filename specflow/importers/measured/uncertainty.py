"""Standard uncertainty of each value: from a column, from what is stated above the table, or from the register.

An expanded uncertainty is divided by its coverage factor; without one it is refused. The result is in the unit of a
difference of the values: dB for levels and ratios in dB, K for °C, otherwise the unit itself.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from specflow.errors import UnitError
from specflow.importers.measured.cells import Rows
from specflow.importers.measured.column import ColumnMeaning
from specflow.importers.measured.readings import read_numbers
from specflow.importers.measured.rejects import Rejects
from specflow.importers.measured.result import Question
from specflow.importers.measured.stated import Said
from specflow.importers.measured.tables import FoundTable
from specflow.model.base import code_key
from specflow.model.columns import UNSTATED, Columns, TextColumn
from specflow.model.declared import UncertaintyEntry
from specflow.units import (
    Unit,
    compatible,
    converter,
    parse_quantity,
    parse_unit,
    to_tolerance,
    tolerance_unit,
)

Floats = NDArray[np.float64]

_STATED = re.compile(
    r"^(?P<mark>[Uu]\s*=|±|\+/-)?\s*(?:±|\+/-)?\s*(?P<amount>[^(,;=]+?)\s*(?:[,;(]?\s*k\s*=\s*(?P<k>[0-9.]+)\s*\)?)?"
    r"\s*(?:\(\s*95\s*%\s*\))?$"
)


@dataclass
class Spread:
    """u of one value column: float64 (NaN where unknown) or None; where it is from; the k it was divided by.

    ``lines`` names the register line of each row where several were used, None where one holds for all.
    """

    u: Floats | None = None
    source: str = ""
    k: float | None = None
    question: Question | None = None
    notes: list[str] = field(default_factory=list)
    lines: TextColumn | None = None


def from_column(
    table: FoundTable, meaning: ColumnMeaning, value: ColumnMeaning, low: Floats, rows: Rows, rejects: Rejects
) -> Spread:
    """Read an uncertainty column that belongs to ``value``, whose readings are ``low``."""
    own = rejects.apart()
    numbers = read_numbers(table, meaning.column, meaning.spelled, rows, own)
    rejects.cells += own.cells
    if numbers.problem:
        return _asked(meaning, numbers.problem, "give the whole column one number format")
    spread = numbers.low / (meaning.k or 1.0)
    for place in np.flatnonzero(spread <= 0).tolist():
        rejects.add(
            int(rows[place]),
            meaning.column,
            float(numbers.low[place]),
            "an uncertainty must be greater than 0",
        )
        spread[place] = np.nan
    try:
        u, note = in_tolerance_unit(spread, parse_unit(meaning.unit), parse_unit(value.unit), low)
    except UnitError as error:
        return _asked(meaning, error.message, error.hint or "settle unit and role of the column in a mapping")
    source = f"{meaning.header.line}, " + ("standard" if meaning.k == 1 else f"U with k = {meaning.k:g}")
    return Spread(u, source, meaning.k, notes=[note] if note else [])


def in_tolerance_unit(spread: Floats, written: Unit, value_unit: Unit, low: Floats) -> tuple[Floats, str]:
    """Bring uncertainties to the tolerance unit of the values; UnitError where they do not fit."""
    unit, why = to_tolerance(written, value_unit)
    wanted = tolerance_unit(value_unit)
    if unit == wanted:
        return spread, why
    if (
        not unit.is_log
        and compatible(unit, wanted)
        and unit.kind is wanted.kind
        and unit.dimension == wanted.dimension
    ):
        return converter(unit, wanted, difference=True)(spread), why
    if unit.dimension == "ratio" and not unit.is_log:
        return np.abs(low) * spread * unit.scale, f"{written} of the value"
    raise UnitError(
        f"an uncertainty in {written} of values in {value_unit}",
        hint=f"write it in {wanted}",
    )


def from_statement(said: Said, value: ColumnMeaning, low: Floats) -> Spread:
    """Take an uncertainty that is stated for the whole table: "0.8 dB (k=2)", "u = 0.4 dB"."""
    found = _STATED.match(said.text)
    what = f"uncertainty {said.text!r}, {said.by}"
    if found is None:
        return _asked(value, f"{what}, cannot be read", "write it like 0.8 dB (k=2)")
    mark = (found["mark"] or "").replace(" ", "").replace("=", "")
    standard = mark == "u" or "standard" in said.key.casefold() or said.key == "u"
    k = float(found["k"]) if found["k"] else 1.0 if standard else None
    if k is None or k <= 0:
        return _asked(value, f"{what}, has no coverage factor k", "write it like 0.8 dB (k=2), or u = 0.4 dB")
    try:
        amount = parse_quantity(found["amount"])
        if not float(amount.value) > 0:
            raise UnitError("it must be greater than 0")
        u, note = in_tolerance_unit(
            np.full(len(low), float(amount.value) / k), amount.unit, parse_unit(value.unit), low
        )
    except UnitError as error:
        return _asked(value, f"{what}: {error.message}", error.hint or "write it in the unit of the values")
    return Spread(u, f"{said.by}: {said.text}", k, notes=[note] if note else [])


@dataclass(frozen=True, slots=True)
class Registered:
    """What the register is asked for: the key of a parameter, the unit of its readings, 10·log or 20·log."""

    parameter: str
    unit: str
    log_factor: int | None


def from_register(
    entries: Sequence[UncertaintyEntry], set_up: str, value: Registered, low: Floats, conditions: Columns
) -> Spread:
    """Look up the register by set-up, parameter, frequency and level; of several lines the greatest u holds."""
    parameter = value.parameter
    mine = [
        entry
        for entry in entries
        if code_key(entry.set_up) == code_key(set_up) and code_key(entry.parameter) == code_key(parameter)
    ]
    if not mine:
        return Spread(
            notes=[f"the uncertainty register has no line for {parameter} on the set-up {set_up}"]
            if set_up
            else []
        )
    u = np.full(len(low), np.nan)
    line = np.full(len(low), UNSTATED, np.int32)
    used: list[str] = []
    notes: list[str] = []
    frequency = _hertz(conditions)
    for entry in mine:
        try:
            amount, _ = in_tolerance_unit(
                np.full(len(low), entry.standard_uncertainty),
                parse_unit(entry.unit),
                parse_unit(value.unit),
                low,
            )
            inside = _within(frequency, entry.frequency_from_hz, entry.frequency_to_hz, len(low))
            inside &= _within(_level(entry, value, low), entry.level_from, entry.level_to, len(low))
        except UnitError as error:
            notes.append(f"register line {entry.id} was not used: {error.message}")
            continue
        inside &= ~np.isnan(low)
        if inside.any():
            greater = inside & ~(u >= amount)
            u[greater], line[greater] = amount[greater], len(used)
            used.append(entry.id)
    if not used:
        return Spread(notes=[*notes, f"no register line of {set_up} covers these frequencies and levels"])
    without = int(np.count_nonzero(np.isnan(u) & ~np.isnan(low)))
    if without:
        notes.append(f"{without} values lie outside the lines of the register and have no uncertainty")
    lines = TextColumn(line, tuple(used)) if len(used) > 1 else None
    return Spread(u, f"register {', '.join(used)}", notes=notes, lines=lines)


def completed(own: Spread, register: Spread) -> Spread:
    """Fill the rows that bring no uncertainty of their own from the register; the source says for how many."""
    if own.u is None or register.u is None or own.question is not None:
        return own
    blank = np.isnan(own.u) & ~np.isnan(register.u)
    count = int(np.count_nonzero(blank))
    if not count:
        return own
    u = np.where(blank, register.u, own.u)
    names = register.source.removeprefix("register ")
    words = [_line_of(register, place, names) if blank[place] else "" for place in range(len(u))]
    source = f"{own.source}; {register.source} in {count} of {len(u)} rows"
    return Spread(u, source, own.k, notes=own.notes, lines=TextColumn.of(words))


def _line_of(register: Spread, place: int, names: str) -> str:
    return names if register.lines is None else register.lines.word(place)


def _within(values: Floats | None, low: float | None, high: float | None, size: int) -> NDArray[np.bool_]:
    if low is None and high is None:
        return np.ones(size, bool)
    if values is None:
        return np.zeros(size, bool)
    inside = ~np.isnan(values)
    if low is not None:
        inside &= values >= low * (1 - 1e-12) if low > 0 else values >= low
    if high is not None:
        inside &= values <= high * (1 + 1e-12) if high > 0 else values <= high
    return inside


def _hertz(conditions: Columns) -> Floats | None:
    values = conditions.numeric.get("frequency")
    if values is None:
        return None
    return converter(parse_unit(conditions.units.get("frequency", "Hz")), parse_unit("Hz"))(values)


def _level(entry: UncertaintyEntry, value: Registered, low: Floats) -> Floats | None:
    if entry.level_from is None and entry.level_to is None:
        return low
    unit = parse_unit(entry.level_unit or value.unit)
    return converter(parse_unit(value.unit), unit, log_factor=value.log_factor)(low)


def _asked(meaning: ColumnMeaning, what: str, remedy: str) -> Spread:
    question = Question(meaning.header.text, meaning.header.cell, f"{meaning.header.line}: {what}", remedy)
    return Spread(question=question)
