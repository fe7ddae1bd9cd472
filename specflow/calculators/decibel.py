"""Decibels and ratios, and the constants of nature that the laws share.

``exp`` is used where a power of ten is meant: numpy's vectorised ``exp`` was measured at about a twentieth of the
time of ``10**x``.
"""

from __future__ import annotations

import math

import numpy as np

from specflow.calculators.arguments import Floats

BOLTZMANN = 1.380649e-23
"""J/K, exact in the SI."""
LIGHT = 299_792_458.0
"""m/s, exact in the SI."""
T0 = 290.0
"""K, the reference temperature of noise figures."""
NEPER = math.log(10.0) / 10.0
"""Natural logarithm of a power ratio of 1 dB."""
THERMAL_DENSITY = 10.0 * math.log10(BOLTZMANN * T0 * 1e3)
"""dBm/Hz at 290 K: -173.975."""


def ratio(db: Floats) -> Floats:
    """Return 10^(dB/10)."""
    return np.exp(np.multiply(db, NEPER))


def decibels(power: Floats) -> Floats:
    """Return 10·log10 of a power ratio; 0 gives -∞."""
    with np.errstate(divide="ignore"):
        return 10.0 * np.log10(power)


def amplitude(db: Floats) -> Floats:
    """Return 10^(dB/20)."""
    return np.exp(np.multiply(db, NEPER / 2.0))


def total(parts: Floats) -> Floats:
    """Return the sum along the first axis."""
    summed: Floats = np.sum(parts, axis=0)
    return summed


def power_total(levels: Floats) -> Floats:
    """Return the level of the summed powers along the first axis."""
    return decibels(total(ratio(levels)))


def gain_before(gain_db: Floats) -> Floats:
    """Return the linear gain in front of each position (first axis); 1 in front of the first."""
    before = np.zeros_like(gain_db)
    np.cumsum(gain_db[:-1], axis=0, out=before[1:])
    before *= NEPER
    return np.exp(before, out=before)


def sum_after(parts: Floats) -> Floats:
    """Return for each position the sum of the parts of all later positions."""
    after = np.zeros_like(parts)
    if len(parts) > 1:
        np.cumsum(parts[:0:-1], axis=0, out=after[-2::-1])
    return after
