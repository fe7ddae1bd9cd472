"""A value with its unit, read from text and written for people."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from decimal import Decimal

import numpy as np
from numpy.typing import NDArray

from specflow.errors import UnitError
from specflow.units.number import parse_number
from specflow.units.parse import parse_unit
from specflow.units.spelling import repaired
from specflow.units.unit import ONE, Unit, format_unit

_NUMBER = re.compile(r"^[+-]? ?(?:\d{1,3}(?:[ '’]\d{3})+(?!\d)(?:[.,]\d+)?|[\d.,]*\d(?:[eE][+-]?\d+)?\.?)")
_DIGITS = 12
_SIZES = (("GHz", 1e9), ("MHz", 1e6), ("kHz", 1e3), ("Hz", 1.0))


@dataclass(frozen=True, slots=True)
class Quantity:
    """One value, or an array of them, in one unit."""

    value: float | NDArray[np.float64]
    unit: Unit

    def __str__(self) -> str:
        if isinstance(self.value, np.ndarray):
            return f"{self.value} {self.unit}"
        return format_quantity(self.value, self.unit)


def split_quantity(text: str) -> tuple[str, str]:
    """The text of the number and the text of the unit; the unit is empty where nothing follows the number."""
    plain = repaired(text)
    match = _NUMBER.match(plain)
    if match is None:
        raise UnitError(f"'{text}' does not begin with a number")
    return match[0].strip(), plain[match.end() :].strip()


def parse_quantity(text: str, *, decimal_comma: bool | None = None) -> Quantity:
    """Read "45 dBm", "-13 dBm/MHz", "27.5GHz", "75 dBm/100 MHz".

    Raises UnitError where number or unit cannot be read, and where there is no unit: a plain number is written "0.5 1".
    """
    number, unit = split_quantity(text)
    if not unit:
        raise UnitError(f"'{text}' has no unit", hint="write the unit, or 1 for a plain number")
    return Quantity(parse_number(number, decimal_comma=decimal_comma), parse_unit(unit))


def format_quantity(value: float, unit: Unit, *, decimals: int | None = None) -> str:
    """Write a value for people: "45 dBm", "-0.4 dB"; without ``decimals`` as short as it was written."""
    number = format_value(value, decimals=decimals)
    return number if unit == ONE else f"{number} {format_unit(unit)}"


def format_value(value: float, *, decimals: int | None = None) -> str:
    """Write a number for people: no binary noise, no minus zero, no exponent for ordinary sizes."""
    if not math.isfinite(value):
        return "not a number" if math.isnan(value) else "inf" if value > 0 else "-inf"
    if decimals is not None:
        return _without_minus_zero(f"{value:.{decimals}f}")
    shortest = f"{value:.{_DIGITS}g}"
    if value and not 1e-4 <= abs(value) < 1e12:
        return shortest
    plain = f"{Decimal(shortest):f}"
    return _without_minus_zero(plain.rstrip("0").rstrip(".") if "." in plain else plain)


def _without_minus_zero(number: str) -> str:
    return number[1:] if number.startswith("-") and not number.strip("-0.") else number


def bandwidth_words(hertz: float) -> str:
    """Say a bandwidth in the unit people use for its size: "1.4 MHz"."""
    unit, size = next((one for one in _SIZES if hertz >= one[1]), _SIZES[-1])
    return f"{format_value(hertz / size)} {unit}"
