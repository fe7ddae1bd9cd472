"""Reflection: coefficient magnitude, return loss, VSWR and mismatch loss as relations between parameters."""

from __future__ import annotations

import numpy as np

from specflow.calculators.arguments import Figures, Floats, at_least, loss, within
from specflow.calculators.decibel import amplitude, decibels
from specflow.errors import CalculationError


def reflection_from_return_loss(return_loss_db: Figures) -> Floats:
    """Return |Γ| from a return loss in dB, a positive number (|S11| in dB has the other sign).

    Formula: 10^(-RL/20).
    Valid: passive loads.
    Source: definition; computed.

    >>> print(f"{reflection_from_return_loss(15.0):.5f}")
    0.17783
    """
    hint = "return loss is positive; |S11| in dB is its negative"
    return amplitude(-at_least(return_loss_db, 0.0, "return_loss_db", hint=hint))


def return_loss(reflection: Figures) -> Floats:
    """Return the return loss in dB (positive) of |Γ|; +∞ for a perfect match.

    Formula: -20·log |Γ|.
    Valid: |Γ| from 0 to 1.
    Source: definition; computed.

    >>> print(f"{return_loss(0.2):.4f}")
    13.9794
    """
    return -2.0 * decibels(within(reflection, 0.0, 1.0, "reflection"))


def reflection_from_vswr(vswr: Figures) -> Floats:
    """Return |Γ| from a VSWR.

    Formula: (V - 1)/(V + 1).
    Valid: V at least 1.
    Source: definition; computed.

    >>> print(f"{reflection_from_vswr(1.5):.3f}")
    0.200
    """
    v = at_least(vswr, 1.0, "vswr", hint="a VSWR is a ratio of at least 1")
    return (v - 1.0) / (v + 1.0)


def vswr(reflection: Figures) -> Floats:
    """Return the VSWR of |Γ|; +∞ for total reflection.

    Formula: (1 + |Γ|)/(1 - |Γ|).
    Valid: |Γ| from 0 to 1.
    Source: definition; computed.

    >>> print(f"{vswr(0.1):.4f}")
    1.2222
    """
    g = within(reflection, 0.0, 1.0, "reflection")
    with np.errstate(divide="ignore"):
        return (1.0 + g) / (1.0 - g)


def mismatch_loss(reflection: Figures) -> Floats:
    """Return the mismatch loss in dB of |Γ| fed from a matched source.

    Formula: -10·log(1 - |Γ|²).
    Valid: |Γ| below 1, one mismatch only: two mismatches need the transfer between them.
    Source: definition; computed.

    >>> print(f"{mismatch_loss(0.2):.4f}")
    0.1773
    """
    g = within(reflection, 0.0, 1.0, "reflection")
    if np.any(g == 1.0):
        raise CalculationError("reflection is 1", hint="no power passes a total reflection")
    return -decibels(1.0 - g * g)


def return_loss_through_attenuator(load_return_loss_db: Figures, attenuation_db: Figures) -> Floats:
    """Return the return loss in dB seen through a matched attenuator.

    Formula: RL + 2·A.
    Valid: attenuator matched on both sides; its own reflection limits what is reached.
    Source: two passes; computed.

    >>> print(f"{return_loss_through_attenuator(10.0, 3.0):.1f}")
    16.0
    """
    seen = loss(load_return_loss_db, "load_return_loss_db")
    return seen + 2.0 * loss(attenuation_db, "attenuation_db")
