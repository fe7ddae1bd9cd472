"""Contributions of N parallel elements to the beam: independent ones average, common ones do not."""

from __future__ import annotations

import numpy as np

from specflow.calculators.arguments import Figures, Floats, at_least, count, finite, within
from specflow.calculators.decibel import decibels, ratio


def array_evm(per_element_percent: Figures, common_percent: Figures, elements: Figures) -> Floats:
    """Return the error vector magnitude of the beam in %.

    Formula: √(common² + per element²/N).
    Valid: equal elements in phase, errors independent from element to element; the shared oscillator, the digital
    signal and distortion that every element makes alike are common.
    Source: sum of N fields with independent errors; computed: 4 % in each of 64, 1 % common.

    >>> print(f"{array_evm(4.0, 1.0, 64):.4f}")
    1.1180
    """
    common, each = (
        at_least(common_percent, 0.0, "common_percent"),
        at_least(per_element_percent, 0.0, "per_element"),
    )
    return np.sqrt(common**2 + each**2 / count(elements, "elements"))


def array_relative_noise(per_element_dbc: Figures, common_dbc: Figures, elements: Figures) -> Floats:
    """Return the noise of the beam in dBc (or dBc/Hz) from that of each element and that which all share.

    Formula: 10·log(10^(common/10) + 10^(per element/10)/N).
    Valid: equal elements in phase; noise of a shared driver or oscillator is common.
    Source: signal adds as N², independent noise as N; computed.

    >>> print(f"{array_relative_noise(-40.0, -60.0, 100):.3f}")
    -56.990
    """
    each = ratio(finite(per_element_dbc, "per_element_dbc")) / count(elements, "elements")
    return decibels(ratio(finite(common_dbc, "common_dbc")) + each)


def array_intermodulation(product_dbc: Figures, elements: Figures, alike: Figures = 1.0) -> Floats:
    """Return the intermodulation of the beam in dBc when each element makes ``product_dbc``.

    Formula: product + 10·log(ρ + (1 - ρ)/N), ρ the share of its power that is alike in all elements.
    Valid: in the direction of the beam with all tones steered there: products of equal elements then add like the
    signal (ρ = 1) and do not average. Tones of different beams make products in other directions.
    Source: sum of fields; computed: alike -40 dBc, unlike in 100 elements -60 dBc.

    >>> print(f"{array_intermodulation(-40.0, 100):.1f} {array_intermodulation(-40.0, 100, alike=0.0):.1f}")
    -40.0 -60.0
    """
    share = within(alike, 0.0, 1.0, "alike")
    return finite(product_dbc, "product_dbc") + decibels(share + (1.0 - share) / count(elements, "elements"))
