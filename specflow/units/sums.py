"""Sums and averages of levels, each under its own name: the mean of 20 and 30 dBm is 27.4 dBm of power, 25 of dB."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import Any

import numpy as np

from specflow.errors import UnitError
from specflow.units.convert import converter
from specflow.units.kinds import Kind
from specflow.units.quantity import Quantity
from specflow.units.table import AMPLITUDES
from specflow.units.unit import Unit


def power_sum(levels: Iterable[Quantity]) -> Quantity:
    """The level of the summed powers, in the unit of the first: what uncorrelated signals give together."""
    values, unit = _aligned(levels)
    return Quantity(_from_power(np.sum(_to_power(values, unit), axis=0), unit), unit)


def mean_of_power(levels: Iterable[Quantity]) -> Quantity:
    """The level of the mean power, in the unit of the first."""
    values, unit = _aligned(levels)
    return Quantity(_from_power(np.mean(_to_power(values, unit), axis=0), unit), unit)


def mean_of_db(levels: Iterable[Quantity]) -> Quantity:
    """The mean of the numbers in dB, in the unit of the first: the geometric mean of the powers.

    Raises UnitError for linear units, which have no dB to average.
    """
    values, unit = _aligned(levels)
    if not unit.is_log:
        raise UnitError(f"values in {unit} are not in dB", hint="convert them, or take the mean of power")
    return Quantity(_scalar(np.mean(values, axis=0)), unit)


def mean(quantities: Iterable[Quantity]) -> Quantity:
    """The plain mean of linear quantities; levels and ratios in dB are refused because two means exist."""
    values, unit = _aligned(quantities)
    if unit.is_log or unit.kind in (Kind.FIELD_LEVEL, Kind.FIELD_DENSITY):
        raise UnitError(f"the mean of values in {unit} is not defined", hint="say 'of power' or 'of dB'")
    return Quantity(_scalar(np.mean(values, axis=0)), unit)


def _aligned(levels: Iterable[Quantity]) -> tuple[Any, Unit]:
    """The values in the unit of the first, stacked on axis 0; one quantity with an array is its own list."""
    given: Sequence[Quantity] = [levels] if isinstance(levels, Quantity) else list(levels)
    if not given or any(np.size(level.value) == 0 for level in given):
        raise UnitError("there is nothing to sum or average")
    unit = given[0].unit
    values = [converter(level.unit, unit)(level.value) for level in given]
    stacked = values[0] if len(values) == 1 and np.ndim(values[0]) else values
    return np.asarray(stacked, dtype=np.float64), unit


def _to_power(values: Any, unit: Unit) -> Any:
    if unit.is_log:
        return np.power(10.0, values / 10)
    if unit.dimension in AMPLITUDES:
        return np.square(values)
    if unit.kind in (Kind.LEVEL, Kind.LEVEL_DENSITY, Kind.POWER_FLUX, Kind.POWER_FLUX_DENSITY):
        return values
    raise UnitError(f"values in {unit} have no power", hint="levels, fields, fluxes and ratios in dB do")


def _from_power(power: Any, unit: Unit) -> Any:
    if unit.is_log:
        with np.errstate(divide="ignore"):
            return _scalar(10 * np.log10(power))
    return _scalar(np.sqrt(power) if unit.dimension in AMPLITUDES else power)


def _scalar(value: Any) -> Any:
    return float(value) if np.ndim(value) == 0 else value
