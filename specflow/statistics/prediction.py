"""Prediction: what few items say about the next one, and how uncertainties of few degrees of freedom combine."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]


def prediction_factor(n: int, probability: float) -> float:
    """Return k with mean + k·s above the next value of a normal population with this probability.

    k = t(probability; n-1)·√(1 + 1/n) (ISO 16269-8, one future value, one-sided, σ unknown; from memory).
    """
    from scipy import special

    if n < 2:
        raise ValueError(f"{n} value says nothing about a spread; at least 2 are needed")
    return float(special.stdtrit(n - 1, probability)) * math.sqrt(1.0 + 1.0 / n)


def effective_freedom(variances: Floats, freedom: Floats) -> Floats:
    """Return the effective degrees of freedom of a sum of variances, both (parts, ...); ∞ where nothing is uncertain.

    ν = (Σ v_i)²/Σ(v_i²/ν_i), Welch and Satterthwaite (JCGM 100:2008, G.4.1); at least 1, so that a quantile exists.
    """
    whole = variances.sum(axis=0)
    parts = np.where(np.isinf(freedom), 0.0, variances**2 / np.where(np.isinf(freedom), 1.0, freedom)).sum(
        axis=0
    )
    found = np.divide(whole**2, parts, out=np.full(whole.shape, np.inf), where=parts > 0)
    return np.asarray(np.maximum(found, 1.0))


def one_sided_quantile(probability: float, freedom: Floats) -> Floats:
    """Return the quantile of Student's t; of the normal distribution where the degrees of freedom are infinite."""
    from scipy import special

    finite = np.isfinite(freedom)
    student = special.stdtrit(np.where(finite, freedom, 1.0), probability)
    return np.where(finite, student, special.ndtri(probability))


def probability_below(distance: Floats, freedom: Floats) -> Floats:
    """Return the probability that a Student's t (or a normal) value stays below a distance in standard deviations."""
    from scipy import special

    finite = np.isfinite(freedom)
    bounded = np.clip(distance, -1e12, 1e12)
    return np.where(finite, special.stdtr(np.where(finite, freedom, 1.0), bounded), special.ndtr(bounded))
