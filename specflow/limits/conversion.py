"""Conversions between the units that meet in a limit, resolved once for each pair of spellings."""

from __future__ import annotations

from collections.abc import Callable
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from specflow.errors import ExpressionError, UnitError
from specflow.units import Kind, Unit, converter, format_unit, parse_unit, tolerance_unit

Floats = NDArray[np.float64]
PLAIN = ("", "1")


@lru_cache(maxsize=4096)
def unit_of(symbol: str) -> Unit:
    """Return the unit of a canonical spelling."""
    return parse_unit(symbol)


@lru_cache(maxsize=4096)
def difference_unit(symbol: str) -> str:
    """Return the unit that a difference or tolerance has: dB for dBm, K for °C."""
    return format_unit(tolerance_unit(unit_of(symbol))) if symbol not in PLAIN else symbol


@lru_cache(maxsize=4096)
def same_unit_spelling(left: str, right: str) -> bool:
    """Tell whether two spellings mean the same unit."""
    if left == right or (left in PLAIN and right in PLAIN):
        return True
    return left not in PLAIN and right not in PLAIN and unit_of(left) == unit_of(right)


@lru_cache(maxsize=4096)
def conversion(source: str, target: str) -> Callable[[Floats], Floats] | None:
    """Return the conversion of values in ``source`` to ``target``; None when physics has none."""
    if same_unit_spelling(source, target):
        return _unchanged
    if source in PLAIN or target in PLAIN:
        source, target = source or "1", target or "1"
    try:
        convert = converter(unit_of(source), unit_of(target))
    except UnitError:
        return None
    return lambda values: np.asarray(convert(values), dtype=np.float64)


def _unchanged(values: Floats) -> Floats:
    return values


def is_difference(source: str, target: str) -> bool:
    """Tell whether ``source`` counts differences of ``target``, and not values of it: dB beside dBm, K beside °C."""
    if same_unit_spelling(source, target) or source in PLAIN or target in PLAIN:
        return False
    difference = difference_unit(target)
    if same_unit_spelling(difference, target):
        return False
    unit = unit_of(source)
    plain_ratio = unit.kind is Kind.RATIO and unit.is_log and not unit.gauge
    return same_unit_spelling(source, difference) or (plain_ratio and unit_of(difference).is_log)


def convert_to(values: Floats, source: str, target: str) -> Floats:
    """Convert values, or differences, to the unit of a limit; raises ExpressionError naming both units."""
    if is_difference(source, target):
        if same_unit_spelling(source, difference_unit(target)):
            return values
        return convert_to(values, source, difference_unit(target))
    convert = conversion(source, target)
    if convert is None:
        raise ExpressionError(
            f"{source or 'a plain number'} cannot be read in {target or 'plain numbers'}",
            hint="say the unit of names in brackets, as in P_rated[dBm], and give declared values a fitting unit",
        )
    return convert(values)
