"""Harmonics and intermodulation over whole bands: where they fall, how wide they are, whom they hit.

Frequencies in any one unit. Band edges are closed: a product that touches a victim band hits it. Guard by the width
of the emission, not by its carrier: the skirts of a wide signal reach further than its band edges say.
"""

from __future__ import annotations

import itertools
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from specflow.calculators.arguments import Figures, Floats, at_least, count, finite
from specflow.errors import CalculationError

Band = tuple[float, float]


@dataclass(frozen=True, slots=True)
class Overlap:
    """What two closed bands share: the common band, or the gap between them."""

    hit: bool
    band: Band | None
    gap: float


@dataclass(frozen=True, slots=True)
class Hit:
    """One product that falls into one victim band: coefficients, order, its band, the part of the victim hit."""

    coefficients: tuple[int, ...]
    order: int
    product: Band
    victim: int
    overlap: Band


def product_frequency(frequencies: Figures, coefficients: Sequence[int]) -> Floats:
    """Return the frequency of an intermodulation product (signals on the first axis).

    Formula: |Σ a_i·f_i|.
    Valid: order Σ |a_i|.
    Source: computed: 3·1765 - 3435 MHz as in the dual-uplink test points of 3GPP TS 38.101-3 (from memory).

    >>> print(f"{product_frequency([1765.0, 3435.0], [3, -1]):.0f}")
    1860
    """
    f = at_least(frequencies, 0.0, "frequencies")
    _same_length(len(f) if f.ndim else 0, coefficients)
    return np.abs(np.tensordot(np.asarray(coefficients, np.float64), f, axes=1))


def product_band(bands: Sequence[Band], coefficients: Sequence[int]) -> Band:
    """Return the band (low, high) that an intermodulation product covers while its signals move over their bands.

    Formula: the extremes of Σ a_i·f_i over all corners, folded at zero.
    Valid: signals move independently; the same band twice stands for two signals in it.
    Source: computed, checked by exhaustive search: 3·(1710…1785) - 2·(3300…3800).

    >>> print(product_band([(1710.0, 1785.0), (3300.0, 3800.0)], [3, -2]))
    (1245.0, 2470.0)
    """
    edges = _bands(bands)
    _same_length(len(edges), coefficients)
    corners = np.asarray(coefficients, np.float64)[:, None] * edges
    low, high = float(corners.min(axis=1).sum()), float(corners.max(axis=1).sum())
    if low <= 0.0 <= high:
        return 0.0, max(-low, high)
    return min(abs(low), abs(high)), max(abs(low), abs(high))


def product_width(widths: Figures, coefficients: Sequence[int]) -> float:
    """Return the full width of an intermodulation product of signals of these widths.

    Formula: Σ |a_i|·B_i.
    Valid: full support; the power is concentrated nearer to the centre.
    Source: convolution of supports; computed: 3·20 + 100 MHz.

    >>> print(product_width([20.0, 100.0], [3, -1]))
    160.0
    """
    width = at_least(widths, 0.0, "widths")
    _same_length(len(width) if width.ndim else 0, coefficients)
    return float(np.abs(np.asarray(coefficients, np.float64)) @ width)


def band_overlap(product: Band, victim: Band) -> Overlap:
    """Return what a product and a victim band share, or the gap between them (closed bands: touching is a hit).

    Formula: [max of lows, min of highs].
    Valid: bands as given; widen them by the emission first.
    Source: computed: second harmonic of 777…787 MHz misses 1574.397…1576.443 MHz by 0.397 MHz.

    >>> print(f"{band_overlap((1554.0, 1574.0), (1574.397, 1576.443)).gap:.3f}")
    0.397
    """
    _bands([product, victim])
    low, high = max(product[0], victim[0]), min(product[1], victim[1])
    if low <= high:
        return Overlap(True, (low, high), 0.0)
    return Overlap(False, None, low - high)


def product_coefficients(signals: int, highest_order: int) -> Iterator[tuple[int, ...]]:
    """Return the coefficients of all harmonics and intermodulation products of order 2 up to ``highest_order``.

    Formula: all integers with 2 <= Σ |a_i| <= order; a product and its negative are one, the first is positive.
    Valid: the number grows fast with signals and order.
    Source: counted: two signals up to order 3.

    >>> print(list(product_coefficients(2, 2)))
    [(0, 2), (1, -1), (1, 1), (2, 0)]
    """
    count(signals, "signals")
    count(highest_order, "highest_order", 2)
    steps = range(-highest_order, highest_order + 1)
    for coefficients in itertools.product(steps, repeat=signals):
        first = next((a for a in coefficients if a), 0)
        if first > 0 and 2 <= sum(map(abs, coefficients)) <= highest_order:
            yield coefficients


def victim_hits(
    bands: Sequence[Band], victims: Sequence[Band], highest_order: int, widths: Sequence[float] = ()
) -> tuple[Hit, ...]:
    """Return every product of order 2 up to ``highest_order`` that falls into a victim band, lowest order first.

    Formula: product bands of all coefficients against every victim; with ``widths`` the bands are those of carrier
    centres and each product is wider by half its width on both sides.
    Valid: says where, not how strong. For a mixer give the bands of oscillator and signal: the wanted product
    (1, ±1) is then among the hits.
    Source: computed: band 3 up with n78 into band 3 down: f2 - f1, 3f1 - f2 and others up to order 5.

    >>> hits = victim_hits([(1710.0, 1785.0), (3300.0, 3800.0)], [(1805.0, 1880.0)], 5)
    >>> print([hit.coefficients for hit in hits])
    [(1, -1), (3, -1), (3, -2)]
    """
    _bands(victims)
    found = []
    for coefficients in product_coefficients(len(bands), highest_order):
        low, high = product_band(bands, coefficients)
        half = product_width(widths, coefficients) / 2.0 if len(widths) else 0.0
        product = (max(low - half, 0.0), high + half)
        for number, victim in enumerate(victims):
            shared = band_overlap(product, victim).band
            if shared is not None:
                found.append(Hit(coefficients, sum(map(abs, coefficients)), product, number, shared))
    return tuple(sorted(found, key=lambda hit: (hit.order, hit.victim, hit.coefficients)))


def _bands(bands: Sequence[Band]) -> Floats:
    edges = finite(bands, "bands")
    if edges.ndim != 2 or edges.shape[1] != 2 or np.any(edges < 0) or np.any(edges[:, 0] > edges[:, 1]):
        raise CalculationError(
            "a band is no pair of frequencies", hint="give (low, high), low not above high"
        )
    return edges


def _same_length(signals: int, coefficients: Sequence[int]) -> None:
    if signals != len(coefficients):
        raise CalculationError(
            f"{signals} signals and {len(coefficients)} coefficients",
            hint="give one coefficient for each signal",
        )
    if any(a != int(a) for a in coefficients):
        raise CalculationError("a coefficient is not whole", hint="harmonic numbers are whole")
