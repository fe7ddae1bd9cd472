"""Setting tolerances and steps as people type them: differences in the unit of a dimension."""

from __future__ import annotations

from dataclasses import dataclass

from specflow.conditions.cells import plain, read_number
from specflow.conditions.recorded import conversion
from specflow.errors import ConditionsError, UnitError
from specflow.units import DECIBEL, Kind, Unit, format_unit, parse_unit, to_tolerance, tolerance_unit


@dataclass(frozen=True, slots=True)
class Setting:
    """A difference: ``value`` in the tolerance unit of the dimension, or in percent of each required value."""

    value: float
    is_percent: bool = False
    notes: tuple[str, ...] = ()


def read_tolerance(text: str, unit: str, name: str) -> Setting:
    """Read "10 MHz", "2 K", "1 %", "0.5", "exact" or nothing, for a dimension in ``unit``.

    Nothing and "exact" are 0. ConditionsError where the unit is not that of a difference of the dimension.
    """
    text = plain(text).removeprefix("±").strip()
    if not text or text.casefold() == "exact":
        return Setting(0.0)
    number = read_number(text)
    if number.value < 0:
        raise ConditionsError(f"'{text}' is below 0", where=name, hint="write one setting tolerance, as 2 K")
    if not number.unit or not unit:
        if number.unit == "%":
            return Setting(number.value, is_percent=True)
        if number.unit:
            raise ConditionsError(f"{name} has no unit, but its tolerance is in {number.unit}", where=name)
        return Setting(number.value)
    own, usual = parse_unit(number.unit), parse_unit(unit)
    try:
        meant, sentence = to_tolerance(own, usual)
    except UnitError as error:
        raise ConditionsError(error.message, where=name, hint=error.hint) from error
    notes = (f"{name}: {sentence}",) if sentence else ()
    return _held(number.value, meant, usual, name, notes)


def _held(value: float, meant: Unit, usual: Unit, name: str, notes: tuple[str, ...]) -> Setting:
    if meant.kind is Kind.RATIO and not meant.is_log and usual.kind is not Kind.RATIO:
        step = conversion(format_unit(meant), "%")
        if isinstance(step, str):
            raise ConditionsError(step, where=name)
        return Setting(float(step(value)), is_percent=True, notes=notes)
    held = tolerance_unit(usual)
    if meant == held:
        return Setting(value, notes=notes)
    if meant == DECIBEL:
        raise ConditionsError(
            f"a tolerance in dB does not suit values in {usual}",
            where=name,
            hint=f"give it in {usual} or in %",
        )
    step = conversion(format_unit(meant), format_unit(held), difference=True)
    if isinstance(step, str):
        raise ConditionsError(step, where=name)
    return Setting(float(step(value)), notes=notes)


def difference_in(value: float, own: str, unit: str, name: str) -> float:
    """Return a difference given in ``own`` ("18 K") in the tolerance unit of ``unit`` (°C).

    ConditionsError where the two are unlike.
    """
    if not own or not unit:
        if own != unit:
            given, values = own or "a plain number", unit or "without a unit"
            raise ConditionsError(f"a difference in {given} does not suit values {values}", where=name)
        return value
    usual = parse_unit(unit)
    try:
        meant, _ = to_tolerance(parse_unit(own), usual)
    except UnitError as error:
        raise ConditionsError(error.message, where=name, hint=error.hint) from error
    held = _held(value, meant, usual, name, ())
    if held.is_percent:
        raise ConditionsError(
            f"{value:g} {own} is a part, not a difference", where=name, hint=f"give it in {unit}"
        )
    return held.value
