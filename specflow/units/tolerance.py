"""Differences: the unit of a tolerance or a margin, and how close is equal."""

from __future__ import annotations

from dataclasses import replace
from typing import overload

import numpy as np
from numpy.typing import NDArray

from specflow.errors import UnitError
from specflow.units.convert import compatible
from specflow.units.kinds import Kind
from specflow.units.refusal import no_conversion
from specflow.units.unit import DECIBEL, KELVIN, Unit

Array = NDArray[np.float64]

CLOSE_DB = 1e-9
CLOSE_RELATIVE = 1e-9

_FAHRENHEIT_STEP = Unit("Δ°F", Kind.PHYSICAL, "temperature", 5 / 9)


def tolerance_unit(unit: Unit) -> Unit:
    """The unit of a difference of two values: dB of levels and ratios in dB, K of °C, otherwise the unit itself."""
    if unit.is_log:
        return DECIBEL
    if unit.is_absolute_temperature:
        return KELVIN if unit.scale == 1 else replace(_FAHRENHEIT_STEP, scale=unit.scale)
    return unit


def to_tolerance(text_unit: Unit, level_unit: Unit) -> tuple[Unit, str]:
    """The unit in which a tolerance written in ``text_unit`` applies to a value in ``level_unit``, and why.

    "54 ± 1.5 dBm" is read as 1.5 dB and the sentence says so; it is empty where nothing had to be decided. A tolerance
    in % or ppm of a linear value comes back in that unit: it is a part of the value it belongs to. Raises UnitError
    where the tolerance does not fit the value.
    """
    if level_unit.is_log:
        return _of_level(text_unit, level_unit)
    if text_unit.is_absolute_temperature and level_unit.dimension == text_unit.dimension:
        step = tolerance_unit(text_unit)
        return step, f"a tolerance in {text_unit} is a difference of temperatures and is read in {step}"
    if compatible(text_unit, level_unit) and not text_unit.is_log:
        return text_unit, ""
    if text_unit.kind is Kind.RATIO and not text_unit.is_log:
        return text_unit, f"a tolerance in {text_unit} is a part of the value in {level_unit}"
    if text_unit == DECIBEL and level_unit.kind not in (Kind.PHYSICAL, Kind.RATIO):
        return DECIBEL, f"a tolerance in dB multiplies and divides the value in {level_unit}"
    raise no_conversion(text_unit, level_unit)


def _of_level(text_unit: Unit, level_unit: Unit) -> tuple[Unit, str]:
    if replace(text_unit, measure="") == DECIBEL:
        return DECIBEL, ""
    if text_unit.is_log and (text_unit.kind, text_unit.gauge) == (level_unit.kind, level_unit.gauge):
        return DECIBEL, f"a tolerance in {text_unit} is a difference of two levels and is read in dB"
    if text_unit.kind is Kind.RATIO and not text_unit.is_log:
        hint = f"write the tolerance of a value in {level_unit} in dB: 10·log or 20·log of {text_unit} is missing"
        raise UnitError(f"a tolerance in {text_unit} does not fit a value in {level_unit}", hint=hint)
    hint = f"write the tolerance of a value in {level_unit} in dB"
    raise UnitError(f"a tolerance in {text_unit} does not fit a value in {level_unit}", hint=hint)


@overload
def closeness(value: float, unit: Unit, *, converted: bool) -> float: ...


@overload
def closeness(value: Array, unit: Unit, *, converted: bool) -> Array: ...


def closeness(value: float | Array, unit: Unit, *, converted: bool) -> float | Array:
    """How far from ``value`` another may lie and still be equal: 0 as written, 1e-9 dB or relative once converted."""
    size = np.abs(np.asarray(value, dtype=np.float64))
    allowed = np.where(np.isfinite(size), size * CLOSE_RELATIVE, 0.0)
    if unit.is_log or not converted:
        allowed = np.full_like(size, CLOSE_DB if converted else 0.0)
    return allowed if isinstance(value, np.ndarray) else float(allowed)


@overload
def same_within(a: float, b: float, unit: Unit, *, converted: bool = False) -> bool: ...


@overload
def same_within(a: Array, b: float | Array, unit: Unit, *, converted: bool = False) -> NDArray[np.bool_]: ...


def same_within(
    a: float | Array, b: float | Array, unit: Unit, *, converted: bool = False
) -> bool | NDArray[np.bool_]:
    """Whether two values in one unit are equal: as written in decimal, or within 1e-9 once one was converted."""
    left, right = np.asarray(a, dtype=np.float64), np.asarray(b, dtype=np.float64)
    with np.errstate(invalid="ignore"):  # two infinities of one sign are equal by the first test
        near = np.abs(left - right) <= closeness(
            np.maximum(np.abs(left), np.abs(right)), unit, converted=converted
        )
    same = (left == right) | near
    return bool(same) if same.ndim == 0 else same
