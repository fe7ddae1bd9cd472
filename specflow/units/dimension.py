"""Dimensions as products of base quantities, and the names engineers give to the usual ones.

The bases are those of the SI, plus the ones that radio engineering must not let cancel silently: the angle, the bit,
the symbol, the sample, the resource block, the decade of frequency and the decibel itself (as in dB/m or deg/dB).
"""

from __future__ import annotations

import re
from fractions import Fraction

Exponents = dict[str, Fraction]

BASES = ("kg", "m", "s", "A", "K", "mol", "cd", "rad", "bit", "symbol", "sample", "RB", "decade", "dB")

NAMES = {
    "": "ratio",
    "s^-1": "frequency",
    "s": "time",
    "m": "length",
    "m^2": "area",
    "kg": "mass",
    "A": "current",
    "K": "temperature",
    "rad": "angle",
    "kg m^2 s^-3": "power",
    "kg m^2 s^-2": "energy",
    "kg m^2 s^-3 A^-1": "voltage",
    "kg m^2 s^-3 A^-2": "resistance",
    "kg^-1 m^-2 s^3 A^2": "conductance",
    "kg s^-3": "power flux",
    "kg m s^-3 A^-1": "electric field",
    "m^-1 A": "magnetic field",
    "m^-1 dB": "dB per length",
    "s^-1 bit": "bit rate",
    "s^-1 symbol": "symbol rate",
    "s^-1 sample": "sample rate",
    "RB": "resource blocks",
}

_FACTOR = re.compile(r"^([A-Za-z]+)(?:\^(-?\d+(?:/\d+)?))?$")


def read(text: str) -> Exponents:
    """Read "kg m^2 s^-3" from the table of units."""
    exponents: Exponents = {}
    for factor in text.split():
        match = _FACTOR.match(factor)
        if match is None or match[1] not in BASES:
            raise ValueError(f"not a dimension: {text!r}")
        exponents[match[1]] = Fraction(match[2] or 1)
    return exponents


def multiply(left: Exponents, right: Exponents, power: Fraction) -> Exponents:
    """``left`` times ``right`` to a power; bases that cancel disappear."""
    product = dict(left)
    for base, exponent in right.items():
        product[base] = product.get(base, Fraction(0)) + exponent * power
    return {base: exponent for base, exponent in product.items() if exponent}


def name(exponents: Exponents) -> str:
    """The engineer's name of a dimension, or its bases with exponents where there is none."""
    factors = [_written(base, exponents[base]) for base in BASES if exponents.get(base)]
    text = " ".join(factors)
    return NAMES.get(text, text)


def _written(base: str, exponent: Fraction) -> str:
    return base if exponent == 1 else f"{base}^{exponent}"
