"""Adding, subtracting and comparing quantities, by kind.

level ± ratio is a level; level - level is a ratio; level + level is refused, because only a power sum can be meant and
that must be asked for by name (``power_sum``). What is refused says which piece is missing.
"""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from specflow.errors import UnitError
from specflow.units.convert import compatible, converter
from specflow.units.kinds import Kind, Spectrum
from specflow.units.parse import parse_unit
from specflow.units.quantity import Quantity
from specflow.units.tolerance import closeness, tolerance_unit
from specflow.units.unit import DB_HERTZ, DECIBEL, Unit, format_unit

_REFERRED = {"i", "ic", "d", "c", "r"}  # gauges that take a level to another level: an antenna gain, a level under a carrier
_DENSITY_OF = {Kind.LEVEL: "dBm/Hz", Kind.RATIO: "dBc/Hz"}


def add(a: Quantity, b: Quantity, *, spectrum: Spectrum = Spectrum.UNKNOWN) -> Quantity:
    """The sum, in the unit that it has: level + ratio, °C + K, dBm/Hz + dBHz (noise-like only).

    Raises UnitError for what has no sum: two levels, two gains over isotropic, two absolute temperatures.
    """
    for left, right in ((a, b), (b, a)):
        total = _plus(left, right, spectrum)
        if total is not None:
            return total
    raise UnitError(f"{a.unit} + {b.unit} has no meaning", hint=_why_no_sum(a.unit, b.unit))


def subtract(a: Quantity, b: Quantity, *, spectrum: Spectrum = Spectrum.UNKNOWN) -> Quantity:
    """The difference, in the unit that it has: level - level is a ratio in dB, level - ratio a level, °C - °C is K.

    Raises UnitError where the two measure different things.
    """
    if _is_plain_ratio(b.unit) and a.unit.is_log:
        return Quantity(a.value - b.value, a.unit)
    if _takes_referred(a.unit, b.unit) or _is_step(a.unit, b.unit):
        return _stepped(a, b, -1.0)
    joined = _without_bandwidth(a, b, spectrum)
    if joined is not None:
        return joined
    if a.unit.is_log and not b.unit.is_log and compatible(b.unit, a.unit):
        return Quantity(a.value - _in(b, a.unit), tolerance_unit(a.unit))
    if b.unit.is_log and not a.unit.is_log and compatible(a.unit, b.unit):
        return Quantity(_in(a, b.unit) - b.value, tolerance_unit(b.unit))
    return Quantity(a.value - _in(b, a.unit), tolerance_unit(a.unit)) if a.unit.is_log else _linear_difference(a, b)


def compare(a: Quantity, b: Quantity) -> int | NDArray[np.int64]:
    """-1, 0 or 1 as ``a`` is below, equal to or above ``b``; an array where either is one.

    Values are compared as written; where ``b`` had to be converted they are equal within 1e-9 dB or 1e-9 relative.
    Raises UnitError where the two cannot be compared without further information.
    """
    resolved = converter(b.unit, a.unit)
    other: Any = resolved(b.value)
    scale: Any = np.maximum(np.abs(a.value), np.abs(other))
    gap: Any = a.value - other
    close = closeness(scale, a.unit, converted=not resolved.is_identity)
    equal = (np.asarray(a.value) == other) | (np.abs(gap) <= close)
    order = np.where(equal, 0, np.where(np.asarray(a.value) < other, -1, 1)).astype(np.int64)
    return int(order) if order.ndim == 0 else order


def _plus(a: Quantity, b: Quantity, spectrum: Spectrum) -> Quantity | None:
    """``a`` plus ``b`` where ``a`` is what is changed and ``b`` the change, or None."""
    if _is_plain_ratio(b.unit) and (a.unit.is_log or a.unit.kind in (Kind.LEVEL, Kind.FIELD_LEVEL, Kind.POWER_FLUX)):
        return _raised(a, b)
    if _takes_referred(a.unit, b.unit) or _is_step(a.unit, b.unit):
        return _stepped(a, b, 1.0)
    if a.unit.bandwidth_hz is not None and b.unit == DB_HERTZ and a.unit.is_log:
        return _over_bandwidth(a, b, spectrum)
    if _adds_plainly(a.unit, b.unit):
        return Quantity(a.value + _in(b, a.unit), a.unit)
    return None


def _raised(a: Quantity, b: Quantity) -> Quantity:
    """A quantity raised by a ratio in dB; a linear one is multiplied."""
    if a.unit.is_log:
        return Quantity(a.value + b.value, a.unit)
    factor = 20 if a.unit.kind is Kind.FIELD_LEVEL else 10
    return Quantity(a.value * np.power(10.0, b.value / factor), a.unit)


def _stepped(a: Quantity, b: Quantity, sign: float) -> Quantity:
    """A level and a gain or a level under it; a temperature and a difference of temperatures."""
    if b.unit.kind is Kind.RATIO_DENSITY:
        assert b.unit.bandwidth_hz is not None
        suffix = format_unit(b.unit).partition("/")[2]
        return Quantity(a.value + sign * b.value, parse_unit(f"{format_unit(a.unit)}/{suffix}"))
    if b.unit.is_log:
        return Quantity(a.value + sign * b.value, a.unit)
    step = converter(b.unit, a.unit, difference=True)
    return Quantity(a.value + sign * step(b.value), a.unit)


def _over_bandwidth(a: Quantity, b: Quantity, spectrum: Spectrum) -> Quantity:
    """A density over a bandwidth in dBHz is a level, for noise-like signals."""
    bandwidth = a.unit.bandwidth_hz or 1.0
    level = parse_unit(format_unit(a.unit).rpartition("/")[0])
    converter(a.unit, level, bandwidth_hz=1.0, spectrum=spectrum)  # refuses what is not noise-like
    return Quantity(a.value + b.value - 10 * np.log10(bandwidth), level)


def _without_bandwidth(a: Quantity, b: Quantity, spectrum: Spectrum) -> Quantity | None:
    """level - density is a bandwidth in dBHz (carrier over noise density); level - dBHz is a noise-like density."""
    if not (a.unit.is_log and b.unit.is_log) or a.unit.bandwidth_hz is not None:
        return None
    if b.unit == DB_HERTZ and a.unit.kind is Kind.LEVEL:
        density = parse_unit(f"{format_unit(a.unit)}/Hz")
        converter(density, a.unit, bandwidth_hz=1.0, spectrum=spectrum)
        return Quantity(a.value - b.value, density)
    same = (a.unit.dimension, a.unit.gauge) == (b.unit.dimension, b.unit.gauge)
    if same and b.unit.bandwidth_hz is not None:
        whole = replace(b.unit, kind=a.unit.kind, bandwidth_hz=None)
        per_hertz = b.value - 10 * np.log10(b.unit.bandwidth_hz)
        return Quantity(_in(a, whole) - per_hertz, DB_HERTZ)
    return None


def _linear_difference(a: Quantity, b: Quantity) -> Quantity:
    unit = tolerance_unit(a.unit)
    size = converter(a.unit, unit, difference=True)
    return Quantity(size(a.value - _in(b, a.unit)), unit)


def _in(quantity: Quantity, unit: Unit) -> Any:
    return converter(quantity.unit, unit)(quantity.value)


def _is_plain_ratio(unit: Unit) -> bool:
    return replace(unit, measure="") == DECIBEL


def _takes_referred(level: Unit, ratio: Unit) -> bool:
    """dBm + dBi, dBm + dBc, dBm + dBc/Hz: a level and something that is relative to it."""
    if not level.is_log or ratio.gauge not in _REFERRED:
        return False
    if ratio.kind is Kind.RATIO_DENSITY:
        return level.kind is Kind.LEVEL and ratio.gauge in ("c", "r")
    return ratio.kind is Kind.RATIO and level.kind in (Kind.LEVEL, Kind.LEVEL_DENSITY)


def _is_step(temperature: Unit, step: Unit) -> bool:
    return (
        temperature.is_absolute_temperature
        and step.dimension == "temperature"
        and not step.is_log
        and not step.is_absolute_temperature
    )


def _adds_plainly(a: Unit, b: Unit) -> bool:
    """Linear quantities of one kind add; fields do not, as their phases decide, and absolute temperatures do not."""
    linear = not (a.is_log or b.is_log or a.is_absolute_temperature or b.is_absolute_temperature)
    return linear and a.kind not in (Kind.FIELD_LEVEL, Kind.FIELD_DENSITY) and compatible(a, b)


def _why_no_sum(a: Unit, b: Unit) -> str:
    if a.is_absolute_temperature and b.is_absolute_temperature:
        return "two temperatures have no sum: write the difference in K"
    if a.kind is Kind.RATIO and b.kind is Kind.RATIO and a.is_log != b.is_log:
        return "whether the linear ratio is 10·log or 20·log is missing: convert it first"
    if a.kind is Kind.RATIO and b.kind is Kind.RATIO:
        return "only a plain ratio in dB can be added to a ratio that is relative to something"
    if a.dimension == b.dimension and not {a.kind, b.kind} & {Kind.PHYSICAL, Kind.RATIO}:
        return "a power sum must be asked for"
    if {a.kind, b.kind} & {Kind.DB_PER_LENGTH, Kind.DB_SLOPE}:
        return "the length or span of the slope is missing"
    return "they measure different things"
