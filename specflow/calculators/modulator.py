"""Image and carrier leakage of quadrature modulators."""

from __future__ import annotations

import numpy as np

from specflow.calculators.arguments import Figures, Floats, above, finite
from specflow.calculators.decibel import amplitude, decibels


def image_rejection(gain_imbalance_db: Figures, phase_imbalance_deg: Figures) -> Floats:
    """Return the image rejection ratio in dB of a quadrature imbalance; +∞ without any.

    Formula: 10·log((1 + 2g·cos φ + g²)/(1 - 2g·cos φ + g²)), g = 10^(dB/20).
    Valid: imbalance that does not depend on frequency.
    Source: K. Sankar, Image Rejection Ratio with transmit IQ gain/phase imbalance, 2013 (formula); computed.

    >>> print(f"{image_rejection(0.1, 1.0):.3f} {image_rejection(1.0, 0.0):.3f}")
    39.614 24.806
    """
    g = amplitude(finite(gain_imbalance_db, "gain_imbalance_db"))
    cross = 2.0 * g * np.cos(np.deg2rad(finite(phase_imbalance_deg, "phase_imbalance_deg")))
    with np.errstate(divide="ignore"):
        return decibels((1.0 + cross + g * g) / np.maximum(1.0 - cross + g * g, 0.0))


def carrier_leakage(offset_i: Figures, offset_q: Figures, rms: Figures) -> Floats:
    """Return the carrier leakage in dBc of offsets in the two branches; all three in one unit of amplitude.

    Formula: 10·log((i² + q²)/rms²), rms of the complex signal.
    Valid: the leakage is fixed: it rises in dBc as the signal is backed off.
    Source: definition; computed: 1 % offset in both branches.

    >>> print(f"{carrier_leakage(0.01, 0.01, 1.0):.2f}")
    -36.99
    """
    power = finite(offset_i, "offset_i") ** 2 + finite(offset_q, "offset_q") ** 2
    return decibels(power / above(rms, 0.0, "rms") ** 2)


def leakage_relative_to_signal(leakage_dbm: Figures, signal_dbm: Figures) -> Floats:
    """Return carrier leakage in dBc at a node where the leakage is a fixed level.

    Formula: leakage - signal.
    Valid: both at the same node.
    Source: definition; computed.

    >>> print(leakage_relative_to_signal(-48.0, [-13.0, -23.0]))
    [-35. -25.]
    """
    return finite(leakage_dbm, "leakage_dbm") - finite(signal_dbm, "signal_dbm")
