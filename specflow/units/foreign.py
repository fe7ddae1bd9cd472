"""Units that our own table does not have, read by pint: psi, torr, gauss, furlong.

Pint is imported when a unit is met that the table lacks, never before, and its reading is taken only where it cannot be
a misreading: pint understands almost any letters as prefix and unit ("pct" is a picocarat to it), so an abbreviation
with a prefix is refused, and a dimensionless answer too.
"""

from __future__ import annotations

from fractions import Fraction
from functools import cache
from typing import Any

from specflow.units.names import Name

_SHORTEST = 3
_BASES = {
    "[length]": "m",
    "[mass]": "kg",
    "[time]": "s",
    "[current]": "A",
    "[temperature]": "K",
    "[substance]": "mol",
    "[luminosity]": "cd",
}


@cache
def linear_name(text: str) -> Name | None:
    """The unit as pint reads it, or None when pint does not know it or would have to guess."""
    if len(text) < _SHORTEST or not text.isascii() or not text.isalpha():
        return None
    readings = {(prefix, name) for prefix, name, suffix in _registry().parse_unit_name(text)}
    if len(readings) != 1:
        return None
    prefix, name = readings.pop()
    if prefix and text.rstrip("s") != (prefix + name).rstrip("s"):
        return None
    return _converted(text, prefix + name)


def _converted(text: str, name: str) -> Name | None:
    import pint

    try:
        base = _registry().Quantity(1, name).to_base_units()
        doubled = _registry().Quantity(2, name).to_base_units()
    except pint.PintError:
        return None
    dimensions = dict(base.dimensionality)
    is_multiple = abs(doubled.magnitude - 2 * base.magnitude) < 1e-9 * abs(base.magnitude)
    if not dimensions or not is_multiple or not set(dimensions) <= set(_BASES):
        return None
    exponents = {_BASES[key]: Fraction(power) for key, power in dimensions.items()}
    if any(exponent.denominator != 1 for exponent in exponents.values()):
        return None  # a unit of the CGS systems, which has no place among SI quantities
    return Name(text, Fraction(str(base.magnitude)), Fraction(0), tuple(exponents.items()))


@cache
def _registry() -> Any:
    import pint

    return pint.UnitRegistry(system="mks")
