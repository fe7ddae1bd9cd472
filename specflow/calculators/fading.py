"""Fade margins for a wanted availability."""

from __future__ import annotations

import numpy as np

from specflow.calculators.arguments import Figures, Floats, above, at_least
from specflow.calculators.decibel import decibels
from specflow.errors import CalculationError


def rayleigh_fade_margin(outage: Figures) -> Floats:
    """Return the margin in dB below the mean power of a Rayleigh channel for an outage probability.

    Formula: -10·log(-ln(1 - p)).
    Valid: no diversity, no dominant path.
    Source: distribution of the power; computed: 19.98 dB at 1 %.

    >>> print(f"{rayleigh_fade_margin(0.01):.2f}")
    19.98
    """
    return -decibels(-np.log1p(-_probability(outage, "outage")))


def lognormal_fade_margin(sigma_db: Figures, availability: Figures) -> Floats:
    """Return the margin in dB against lognormal shadowing for an availability at one place.

    Formula: σ·z(availability).
    Valid: median path loss; at the edge, not averaged over an area.
    Source: normal quantile; computed: 8 dB, 90 %.

    >>> print(f"{lognormal_fade_margin(8.0, 0.9):.3f}")
    10.252
    """
    from scipy import special

    quantile: Floats = special.ndtri(_probability(availability, "availability"))
    return at_least(sigma_db, 0.0, "sigma_db") * quantile


def _probability(value: Figures, name: str) -> Floats:
    share = above(value, 0.0, name)
    if np.any(share >= 1.0):
        raise CalculationError(f"{name} is not below 1", hint="give a probability between 0 and 1, not %")
    return share
