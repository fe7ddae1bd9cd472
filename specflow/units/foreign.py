"""Units that our own table does not have, read by pint: psi, torr, knot, kilowatt.

Pint is imported when a unit is met that the table lacks, never before, and its reading is taken only where it cannot be
a misreading. Pint understands almost any letters as prefix and unit ("pct" is a picocarat to it) and many words of the
trade as old units (link, chain, point), so it is asked for a list of units only, without abbreviated prefixes.
"""

from __future__ import annotations

from fractions import Fraction
from functools import cache, lru_cache
from typing import Any

from specflow.units.names import Name
from specflow.units.table import TRUSTED_TO_PINT

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


@lru_cache(maxsize=1024)
def linear_name(text: str) -> Name | None:
    """The unit as pint reads it, or None when pint does not know it or would have to guess."""
    if len(text) < _SHORTEST or not text.isascii() or not text.isalpha():
        return None
    readings = {(prefix, name) for prefix, name, suffix in _registry().parse_unit_name(text)}
    if len(readings) != 1:
        return None
    prefix, name = readings.pop()
    if name not in TRUSTED_TO_PINT or (prefix and not text.startswith(prefix)):
        return None
    return _converted(text, prefix + name)


def _converted(text: str, name: str) -> Name:
    base = _registry().Quantity(1, name).to_base_units()
    exponents = {_BASES[key]: Fraction(power) for key, power in dict(base.dimensionality).items()}
    return Name(text, Fraction(str(base.magnitude)), Fraction(0), tuple(exponents.items()))


@cache
def _registry() -> Any:
    import pint

    return pint.UnitRegistry(system="mks")
