"""Radiated power and G/T of arrays of equal elements."""

from __future__ import annotations

import numpy as np

from specflow.calculators.arguments import Figures, Floats, at_least, chain, count, finite
from specflow.calculators.decibel import decibels, total
from specflow.errors import CalculationError


def array_eirp(elements: Figures, element_power_dbm: Figures, element_gain_dbi: Figures) -> Floats:
    """Return the EIRP in dBm of N equally driven elements in phase.

    Formula: P_el + 20·log N + G_el.
    Valid: G_el is the embedded realised gain in the array; do not add mismatch or scan loss again if it holds them.
    Source: coherent sum of N fields; computed: 64 × 10 dBm, 5 dBi. Follow local limits of exposure before radiating.

    >>> print(f"{array_eirp(64, 10.0, 5.0):.3f}")
    51.124
    """
    number = decibels(count(elements, "elements"))
    return (
        finite(element_power_dbm, "element_power_dbm")
        + 2.0 * number
        + finite(element_gain_dbi, "element_gain_dbi")
    )


def array_total_power(elements: Figures, element_power_dbm: Figures) -> Floats:
    """Return the total radiated power in dBm of N equally driven elements.

    Formula: P_el + 10·log N.
    Valid: power accepted by lossless elements.
    Source: power sum; computed.

    >>> print(f"{array_total_power(64, 10.0):.3f}")
    28.062
    """
    return finite(element_power_dbm, "element_power_dbm") + decibels(count(elements, "elements"))


def tapered_eirp(amplitudes: Figures, full_power_dbm: Figures, element_gain_dbi: Figures) -> Floats:
    """Return the EIRP in dBm of elements in phase with amplitudes relative to full drive (elements on the first axis).

    Formula: G_el·(Σ √P_n)², P_n = a_n²·P_full.
    Valid: equal embedded gains.
    Source: coherent sum of fields; computed.

    >>> print(f"{tapered_eirp([0.5, 0.8, 1, 1, 1, 1, 0.8, 0.5], 10.0, 5.0):.3f}")
    31.391
    """
    fields = 2.0 * decibels(total(_taper(amplitudes)))
    return finite(full_power_dbm, "full_power_dbm") + fields + finite(element_gain_dbi, "element_gain_dbi")


def tapered_total_power(amplitudes: Figures, full_power_dbm: Figures) -> Floats:
    """Return the total power in dBm of elements with amplitudes relative to full drive (elements on the first axis).

    Formula: P_full·Σ a².
    Valid: lossless elements.
    Source: power sum; computed.

    >>> print(f"{tapered_total_power([0.5, 0.8, 1, 1, 1, 1, 0.8, 0.5], 10.0):.3f}")
    17.619
    """
    return finite(full_power_dbm, "full_power_dbm") + decibels(total(_taper(amplitudes) ** 2))


def taper_efficiency(amplitudes: Figures) -> Floats:
    """Return the taper efficiency in dB (0 or below) of amplitudes on the first axis.

    Formula: 10·log((Σ a)²/(N·Σ a²)).
    Valid: elements in phase, equal spacing of half a wavelength or more.
    Source: definition; computed.

    >>> print(f"{taper_efficiency([0.5, 0.8, 1, 1, 1, 1, 0.8, 0.5]):.4f}")
    -0.2593
    """
    a = _taper(amplitudes)
    return decibels(total(a) ** 2 / (a.shape[0] * total(a * a)))


def array_g_over_t(elements: Figures, element_gain_dbi: Figures, system_k: Figures) -> Floats:
    """Return the G/T in dB/K of N elements whose channels are combined in phase behind their amplifiers.

    Formula: G_el + 10·log N - 10·log Tsys of one element's channel.
    Valid: independent channel noise; in-phase combining has no splitting loss. Loss behind the amplifiers counts
    divided by their gain, inside Tsys.
    Source: signal adds as N², noise as N; computed: 256 × 5 dBi, 250 K.

    >>> print(f"{array_g_over_t(256, 5.0, 250.0):.3f}")
    5.103
    """
    if np.any(at_least(system_k, 0.0, "system_k") == 0.0):
        raise CalculationError("system_k is 0 K", hint="give the system noise temperature of one channel")
    return finite(element_gain_dbi, "element_gain_dbi") + decibels(
        count(elements, "elements") / finite(system_k, "system_k")
    )


def _taper(amplitudes: Figures) -> Floats:
    a = chain(amplitudes=at_least(amplitudes, 0.0, "amplitudes"))[0]
    if np.any(total(a) == 0.0):
        raise CalculationError("no element is driven", hint="give at least one amplitude above 0")
    return a
