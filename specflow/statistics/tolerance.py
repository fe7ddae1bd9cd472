"""Tolerance limits: what a sample of items says about the population they come from.

"95/95" is coverage 0.95 with confidence 0.95. Exact factors are used throughout: the usual two-sided approximation is
0.3 % low at n = 10. Repeats on one item are not items.
"""

from __future__ import annotations

import math

import numpy as np


def one_sided_factor(n: int, coverage: float, confidence: float) -> float:
    """Return k1 with mean ± k1·s the one-sided tolerance limit of a normal population.

    k1 = t'(confidence; n-1, z_P·√n)/√n with the noncentral t quantile (ISO 16269-6).
    """
    from scipy import special

    _check(n, coverage, confidence)
    shift = special.ndtri(coverage) * math.sqrt(n)
    return float(special.nctdtrit(n - 1, shift, confidence)) / math.sqrt(n)


def two_sided_factor(n: int, coverage: float, confidence: float) -> float:
    """Return k2 with mean ± k2·s holding ``coverage`` of a normal population.

    Root of √(2n/π)·∫₀^∞ Pr[χ²_ν > ν·r(x)²/k²]·exp(-n·x²/2) dx = confidence with Φ(x+r) - Φ(x-r) = coverage and
    ν = n-1 (ISO 16269-6 annex F). The integrand is smooth and even, so the trapezoid rule converges exponentially.
    """
    from scipy import optimize, special

    _check(n, coverage, confidence)
    x = np.linspace(0.0, 9.0 / math.sqrt(n), 401)
    radius = _coverage_radius(x, coverage)
    weights = math.sqrt(2 * n / math.pi) * np.exp(-n * x**2 / 2) * (x[1] - x[0])
    weights[[0, -1]] /= 2
    dof = n - 1

    def shortfall(k: float) -> float:
        return float(np.sum(weights * special.chdtrc(dof, dof * (radius / k) ** 2))) - confidence

    return float(optimize.brentq(shortfall, 1e-3, 1e6, xtol=1e-12))


def _coverage_radius(x: np.ndarray, coverage: float) -> np.ndarray:
    """Return r(x) with Φ(x+r) - Φ(x-r) = coverage, by Newton's method from beyond the root."""
    from scipy import special

    radius = x + special.ndtri((1 + coverage) / 2)
    for _ in range(60):
        value = special.ndtr(x + radius) - special.ndtr(x - radius) - coverage
        density = np.exp(-((x + radius) ** 2) / 2) + np.exp(-((x - radius) ** 2) / 2)
        step = value * math.sqrt(2 * math.pi) / density
        radius = radius - step
        if np.abs(step).max() < 1e-13:
            break
    return radius


def coverage_of_extreme(n: int, confidence: float) -> float:
    """Return the share of any population that lies within the extreme of n items: (1-confidence)^(1/n)."""
    return float((1 - confidence) ** (1 / n))


def confidence_of_extreme(n: int, coverage: float) -> float:
    """Return the confidence that the extreme of n items bounds ``coverage`` of the population: 1 - P^n."""
    return 1 - coverage**n


def rank_from_extreme(n: int, coverage: float, confidence: float) -> int:
    """Return j: the j-th largest (or smallest) of n values is a tolerance limit for any population; 0: none is.

    Largest j with binom.cdf(j-1; n, 1-P) <= 1-confidence (Meeker, Hahn & Escobar 2017, section 5).
    """
    from scipy import special

    _check(n, coverage, confidence)
    ranks = np.arange(1, n + 1)
    risk = special.bdtr(ranks - 1.0, n, 1 - coverage)
    return int(np.count_nonzero(risk <= (1 - confidence) * (1 + 1e-12)))


def items_needed(coverage: float, confidence: float, *, sides: int = 1, discarded: int = 0) -> int:
    """Return the least n whose extremes bound ``coverage`` with ``confidence`` (Wilks 1941).

    One side: the (discarded+1)-th extreme value; two sides: from the (discarded+1)-th smallest to the largest. The
    same numbers answer how many items with so many failures demonstrate a reliability (binomial demonstration).
    """
    from scipy import special

    beyond = discarded + 1 if sides == 2 else discarded
    n = beyond + 1
    while special.bdtr(float(beyond), n, 1 - coverage) > (1 - confidence) * (1 + 1e-12):
        n += 1
    return n


def clopper_pearson(failures: int, n: int, confidence: float) -> tuple[float, float]:
    """Return the exact two-sided confidence interval of a proportion (Clopper and Pearson 1934)."""
    tail = (1 - confidence) / 2
    return proportion_bound(failures, n, tail), proportion_bound(failures, n, 1 - tail)


def proportion_bound(failures: int, n: int, probability: float) -> float:
    """Return the Clopper–Pearson bound at one tail: below 0.5 the lower, above the upper bound."""
    from scipy import special

    if not 0 <= failures <= n or n < 1:
        raise ValueError(f"{failures} of {n} is no proportion")
    if probability < 0.5:
        return 0.0 if failures == 0 else float(special.betaincinv(failures, n - failures + 1, probability))
    return 1.0 if failures == n else float(special.betaincinv(failures + 1, n - failures, probability))


def yield_lower_bound(distance: float, n: int, confidence: float) -> float:
    """Return the least share of a normal population inside a limit that lies ``distance`` sample s from the mean.

    Inverse of the one-sided factor: z with nct.cdf(√n·K; n-1, √n·z) = confidence, yield = Φ(z).
    """
    from scipy import optimize, special

    root = math.sqrt(n)

    def surplus(z: float) -> float:
        return float(special.nctdtr(n - 1, root * z, root * distance)) - confidence

    return float(special.ndtr(optimize.brentq(surplus, distance - 8, distance + 8, xtol=1e-12)))


def _check(n: int, coverage: float, confidence: float) -> None:
    if n < 2:
        raise ValueError(f"{n} value{'s' * (n != 1)} say nothing about a spread; at least 2 are needed")
    if not (0 < coverage < 1 and 0 < confidence < 1):
        raise ValueError("coverage and confidence lie between 0 and 1")
