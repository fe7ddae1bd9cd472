"""Adding, subtracting and comparing quantities, by kind.

level ± ratio is a level; level - level is a ratio; level + level is refused, because only a power sum can be meant and
that must be asked for by name (``power_sum``). Watts add as they stand: there a sum cannot be anything else. What is
refused says which piece is missing.
"""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from specflow.errors import UnitError
from specflow.units.convert import compatible, converter
from specflow.units.density import density_of, level_of
from specflow.units.kinds import Kind, Spectrum
from specflow.units.parse import parse_unit
from specflow.units.quantity import Quantity
from specflow.units.tolerance import same_within, tolerance_unit
from specflow.units.unit import DB_HERTZ, DECIBEL, Unit

_DB_KELVIN = parse_unit("dBK")
_MERIT = parse_unit("dB/K")
_ANTENNA_FACTOR = parse_unit("dB(1/m)")
# Gauges that take a level to another level: an antenna gain, a level under the carrier or under a reference.
_REFERRED = {"i", "ic", "d", "c", "r"}
_FIELD_OF = {"voltage": "electric field", "current": "magnetic field"}
_RAISED_BY_DB = {Kind.LEVEL: 10, Kind.POWER_FLUX: 10, Kind.FIELD_LEVEL: 20}


def add(a: Quantity, b: Quantity, *, spectrum: Spectrum = Spectrum.UNKNOWN) -> Quantity:
    """The sum, in the unit that it has: level + ratio, level + antenna gain, °C + K, dBm/Hz + dBHz (noise-like only).

    Raises UnitError for what has no sum: two levels, two gains over isotropic, two absolute temperatures.
    """
    for left, right in ((a, b), (b, a)):
        unit = _changed_by(left.unit, right.unit, spectrum)
        if unit is not None:
            base = left.value if unit.bandwidth_hz else _per_hertz(left)
            return Quantity(base + right.value, unit)
        total = _plus(left, right)
        if total is not None:
            return total
    raise UnitError(f"{a.unit} + {b.unit} has no meaning", hint=_why_no_sum(a.unit, b.unit))


def subtract(a: Quantity, b: Quantity, *, spectrum: Spectrum = Spectrum.UNKNOWN) -> Quantity:
    """The difference, in the unit that it has: level - level is a ratio in dB, level - ratio a level, °C - °C is K.

    level - density is the bandwidth in dBHz (a carrier over a noise density), level - dBHz a noise-like density.
    Raises UnitError where the two measure different things.
    """
    unit = _left_after(a.unit, b.unit, spectrum)
    if unit is not None:
        return Quantity(a.value - _per_hertz(b), unit)
    if _is_step(a.unit, b.unit):
        return _stepped(a, b, -1.0)
    raised = _raised(a, b, -1.0)
    if raised is not None:
        return raised
    if b.unit.is_log and not a.unit.is_log:
        return Quantity(_in(a, b.unit) - b.value, tolerance_unit(b.unit))
    return _difference(a, b)


def compare(a: Quantity, b: Quantity) -> int | NDArray[np.int64]:
    """-1, 0 or 1 as ``a`` is below, equal to or above ``b``; an array where either is one.

    Values are compared as written; where ``b`` had to be converted they are equal within 1e-9 dB or 1e-9 relative.
    Raises UnitError where the two cannot be compared without further information, and for NaN.
    """
    resolved = converter(b.unit, a.unit)
    left, right = np.broadcast_arrays(
        np.asarray(a.value, np.float64), np.asarray(resolved(b.value), np.float64)
    )
    if np.isnan(left).any() or np.isnan(right).any():
        raise UnitError("what is not a number cannot be compared")
    equal = same_within(left, right, a.unit, converted=not resolved.is_identity)
    order = np.where(equal, 0, np.where(left < right, -1, 1)).astype(np.int64)
    return int(order) if order.ndim == 0 else order


def _plus(a: Quantity, b: Quantity) -> Quantity | None:
    """``a`` changed by ``b``, or None where ``b`` is not a change of ``a``."""
    if _is_step(a.unit, b.unit):
        return _stepped(a, b, 1.0)
    if _adds_plainly(a.unit, b.unit):
        return Quantity(a.value + _in(b, a.unit), a.unit)
    return _raised(a, b, 1.0)


def _raised(a: Quantity, b: Quantity, sign: float) -> Quantity | None:
    """``a`` raised or lowered by a plain ratio in dB; a linear level is multiplied or divided."""
    if not _is_plain_ratio(b.unit):
        return None
    if a.unit.is_log:
        return Quantity(a.value + sign * b.value, a.unit)
    if a.unit.kind in _RAISED_BY_DB:
        return Quantity(a.value * np.power(10.0, sign * b.value / _RAISED_BY_DB[a.unit.kind]), a.unit)
    return None


def _changed_by(a: Unit, b: Unit, spectrum: Spectrum) -> Unit | None:
    """The unit of a + b for two logarithmic units of different kinds, or None where they have no sum."""
    if not (a.is_log and b.is_log):
        return None
    if _takes_referred(a, b):
        return a if b.bandwidth_hz is None else density_of(a, b.bandwidth_hz)
    if a.bandwidth_hz is not None and b == DB_HERTZ:
        converter(a, level_of(a), bandwidth_hz=1.0, spectrum=spectrum)  # refuses what is not noise-like
        return level_of(a)
    if a.kind is Kind.LEVEL and b == _ANTENNA_FACTOR and a.dimension in _FIELD_OF:
        return _field_of(a)
    return None


def _left_after(a: Unit, b: Unit, spectrum: Spectrum) -> Unit | None:
    """The unit of a - b for two logarithmic units of different kinds, or None where the plain rules apply."""
    if not (a.is_log and b.is_log):
        return None
    if _takes_referred(a, b) and b.bandwidth_hz is None:
        return a
    if a.kind is Kind.RATIO and a.gauge in ("", "i") and b == _DB_KELVIN:
        return _MERIT
    if a.bandwidth_hz is None and b == DB_HERTZ and a != DB_HERTZ:
        density = density_of(a, 1.0)
        converter(density, a, bandwidth_hz=1.0, spectrum=spectrum)
        return density
    if a.bandwidth_hz is None and b.bandwidth_hz is not None and a == level_of(b):
        return DB_HERTZ
    if a.kind is Kind.FIELD_LEVEL and b == _ANTENNA_FACTOR:
        return parse_unit(a.symbol.removesuffix("/m"))
    if a.kind is Kind.FIELD_LEVEL and b.dimension in _FIELD_OF and a == _field_of(b):
        return _ANTENNA_FACTOR
    return None


def _per_hertz(quantity: Quantity) -> Any:
    """The value of a density in a bandwidth of 1 Hz; the value of anything else as it is."""
    bandwidth = quantity.unit.bandwidth_hz
    return quantity.value - 10 * np.log10(bandwidth) if bandwidth and bandwidth != 1 else quantity.value


def _field_of(level: Unit) -> Unit:
    return replace(
        level, symbol=f"{level.symbol}/m", kind=Kind.FIELD_LEVEL, dimension=_FIELD_OF[level.dimension]
    )


def _stepped(temperature: Quantity, step: Quantity, sign: float) -> Quantity:
    size = converter(step.unit, temperature.unit, difference=True)
    return Quantity(temperature.value + sign * size(step.value), temperature.unit)


def _difference(a: Quantity, b: Quantity) -> Quantity:
    """Two values of one kind: counted in the unit of the first, then in the unit that a difference has."""
    unit = tolerance_unit(a.unit)
    difference: Any = a.value - _in(b, a.unit)
    return Quantity(
        difference if a.unit.is_log else converter(a.unit, unit, difference=True)(difference), unit
    )


def _in(quantity: Quantity, unit: Unit) -> Any:
    return converter(quantity.unit, unit)(quantity.value)


def _is_plain_ratio(unit: Unit) -> bool:
    return replace(unit, measure="") == DECIBEL


def _takes_referred(level: Unit, ratio: Unit) -> bool:
    """dBm + dBi, dBm + dBc, dBm + dBc/Hz: a level and something that is relative to it."""
    if ratio.gauge not in _REFERRED or level.gauge:
        return False
    if ratio.kind is Kind.RATIO_DENSITY:
        return level.kind is Kind.LEVEL
    return ratio.kind is Kind.RATIO and level.kind in (Kind.LEVEL, Kind.LEVEL_DENSITY)


def _is_step(temperature: Unit, step: Unit) -> bool:
    is_difference = step.dimension == "temperature" and not (step.is_log or step.is_absolute_temperature)
    return temperature.is_absolute_temperature and is_difference


def _adds_plainly(a: Unit, b: Unit) -> bool:
    """Linear quantities of one kind add; fields do not, as their phases decide, and absolute temperatures do not."""
    linear = not (a.is_log or b.is_log or a.is_absolute_temperature or b.is_absolute_temperature)
    return linear and a.kind not in (Kind.FIELD_LEVEL, Kind.FIELD_DENSITY) and compatible(a, b)


def _why_no_sum(a: Unit, b: Unit) -> str:
    kinds = {a.kind, b.kind}
    if a.is_absolute_temperature and b.is_absolute_temperature:
        return "two temperatures have no sum: write the difference in K"
    if kinds == {Kind.RATIO} and a.is_log != b.is_log:
        return "whether the linear ratio is 10·log or 20·log is missing: convert it first"
    if kinds == {Kind.RATIO}:
        return "only a plain ratio in dB can be added to a ratio that is relative to something"
    if a.dimension == b.dimension and not kinds & {Kind.PHYSICAL, Kind.RATIO}:
        return "a power sum must be asked for"
    if kinds & {Kind.DB_PER_LENGTH, Kind.DB_SLOPE}:
        return "the length or span of the slope is missing"
    return "they measure different things"
