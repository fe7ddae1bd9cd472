"""The link from transmitter to receiver in free space."""

from __future__ import annotations

import math

from specflow.calculators.arguments import Figures, Floats, above, at_least, finite
from specflow.calculators.decibel import BOLTZMANN, LIGHT, decibels


def free_space_loss(frequency_hz: Figures, distance_m: Figures) -> Floats:
    """Return the free-space path loss in dB.

    Formula: 20·log(4π·d·f/c) = 32.448 + 20·log MHz + 20·log km; ITU-R P.525 prints 32.4, which is 0.048 dB lower.
    Valid: far field, nothing in the way; atmosphere and rain are losses of their own.
    Source: ITU-R P.525; computed: 28 GHz over 100 m.

    >>> print(f"{free_space_loss(28e9, 100.0):.4f}")
    101.3909
    """
    waves = above(distance_m, 0.0, "distance_m") * above(frequency_hz, 0.0, "frequency_hz") / LIGHT
    return 2.0 * decibels(4.0 * math.pi * waves)


def eirp(power_dbm: Figures, antenna_gain_dbi: Figures, feed_loss_db: Figures = 0.0) -> Floats:
    """Return the EIRP in dBm (or in dBW from dBW).

    Formula: P + G - loss.
    Valid: power and loss at the same plane.
    Source: definition; direct-broadcast example (D. M. Pozar): 120 W, 34 dB: 54.79 dBW.

    >>> print(f"{eirp(20.7918, 34.0):.2f}")
    54.79
    """
    fed = finite(power_dbm, "power_dbm") - at_least(feed_loss_db, 0.0, "feed_loss_db")
    return fed + finite(antenna_gain_dbi, "antenna_gain_dbi")


def received_level(
    eirp_dbm: Figures, path_loss_db: Figures, receive_gain_dbi: Figures, other_loss_db: Figures = 0.0
) -> Floats:
    """Return the received level in dBm (or in dBW from dBW).

    Formula: EIRP - path loss - other losses + G_r.
    Valid: polarisation, pointing, atmosphere and rain belong to the other losses, each with its source.
    Source: PySDR (M. Lichtman), link budgets: 23 dBW, 122.7 dB, 0 dB, 6 dB: -105.7 dBW.

    >>> print(f"{received_level(23.0, 122.7, 0.0, 6.0):.1f}")
    -105.7
    """
    lost = at_least(path_loss_db, 0.0, "path_loss_db") + at_least(other_loss_db, 0.0, "other_loss_db")
    return finite(eirp_dbm, "eirp_dbm") - lost + finite(receive_gain_dbi, "receive_gain_dbi")


def carrier_to_noise(
    eirp_dbw: Figures, g_over_t_db_per_k: Figures, path_loss_db: Figures, bandwidth_hz: Figures
) -> Floats:
    """Return the carrier-to-noise ratio in dB; EIRP in dBW.

    Formula: EIRP + G/T - L + 228.6 - 10·log B (228.6 is -10·log k).
    Valid: all losses in L; B is the noise bandwidth.
    Source: courseware: -86.2 dBm received (0 dBi), 100 K, 36 MHz: 16.8 dB.

    >>> print(f"{carrier_to_noise(-116.2, -20.0, 0.0, 36e6):.1f}")
    16.8
    """
    merit = finite(eirp_dbw, "eirp_dbw") + finite(g_over_t_db_per_k, "g_over_t_db_per_k")
    band = decibels(above(bandwidth_hz, 0.0, "bandwidth_hz"))
    return merit - at_least(path_loss_db, 0.0, "path_loss_db") - 10.0 * math.log10(BOLTZMANN) - band


def signal_to_noise(signal_dbm: Figures, noise_dbm: Figures) -> Floats:
    """Return the signal-to-noise ratio in dB of two levels at one plane in one unit.

    Formula: S - N.
    Valid: noise in the signal's bandwidth.
    Source: PySDR (M. Lichtman), link budgets: -105.7 dBW, -140.8 dBW: 35.1 dB.

    >>> print(f"{signal_to_noise(-105.7, -140.8):.1f}")
    35.1
    """
    return finite(signal_dbm, "signal_dbm") - finite(noise_dbm, "noise_dbm")
