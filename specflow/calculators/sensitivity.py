"""Noise floor and sensitivity of a receiver with a source at 290 K."""

from __future__ import annotations

import numpy as np

from specflow.calculators.arguments import Figures, Floats, above, finite, noise_figure
from specflow.calculators.decibel import THERMAL_DENSITY, decibels
from specflow.errors import InfeasibleError


def noise_floor(bandwidth_hz: Figures, nf_db: Figures, density_dbm_hz: Figures = THERMAL_DENSITY) -> Floats:
    """Return the noise floor referred to the input in dBm.

    Formula: kT0 + 10·log B + NF.
    Valid: source at 290 K; B is the noise bandwidth. The density may be given as the rounded -174 where a text does.
    Source: computed from the formula with -174 dBm/Hz.

    >>> print(f"{noise_floor(200e3, 4.0, -174.0):.4f}")
    -116.9897
    """
    band = decibels(above(bandwidth_hz, 0.0, "bandwidth_hz"))
    return finite(density_dbm_hz, "density_dbm_hz") + band + noise_figure(nf_db, "nf_db")


def sensitivity(
    bandwidth_hz: Figures,
    nf_db: Figures,
    snr_db: Figures,
    implementation_loss_db: Figures = 0.0,
    density_dbm_hz: Figures = THERMAL_DENSITY,
) -> Floats:
    """Return the sensitivity in dBm.

    Formula: kT0 + 10·log B + NF + SNR + implementation loss.
    Valid: source at 290 K; otherwise take the minimum input signal for the antenna temperature.
    Source: courseware "Noise in Communication Systems": 200 kHz, 3.4 dB, 12 dB: -105.6 dBm.

    >>> print(f"{sensitivity(200e3, 3.4, 12.0, density_dbm_hz=-174.0):.1f}")
    -105.6
    """
    above_floor = finite(snr_db, "snr_db") + finite(implementation_loss_db, "implementation_loss_db")
    return noise_floor(bandwidth_hz, nf_db, density_dbm_hz) + above_floor


def noise_figure_for_sensitivity(
    sensitivity_dbm: Figures,
    bandwidth_hz: Figures,
    snr_db: Figures,
    implementation_loss_db: Figures = 0.0,
    density_dbm_hz: Figures = THERMAL_DENSITY,
) -> Floats:
    """Return the highest noise figure in dB that meets a sensitivity; refused below 0 dB, saying by how much.

    Formula: sensitivity - (kT0 + 10·log B + SNR + implementation loss).
    Valid: source at 290 K.
    Source: the sensitivity solved for the noise figure; courseware figures above taken back.

    >>> print(f"{noise_figure_for_sensitivity(-105.59, 200e3, 12.0, density_dbm_hz=-174.0):.2f}")
    3.40
    """
    ideal = sensitivity(bandwidth_hz, 0.0, snr_db, implementation_loss_db, density_dbm_hz)
    left = finite(sensitivity_dbm, "sensitivity_dbm") - ideal
    if np.any(left < 0.0):
        raise InfeasibleError(
            f"noise figure: infeasible, and short by {-float(np.min(left)):.3g} dB",
            hint="even a noiseless receiver misses the sensitivity; relax it, the SNR or the bandwidth",
        )
    return left


def implied_snr(
    sensitivity_dbm: Figures,
    bandwidth_hz: Figures,
    nf_db: Figures,
    implementation_loss_db: Figures = 0.0,
    density_dbm_hz: Figures = THERMAL_DENSITY,
) -> Floats:
    """Return the signal-to-noise ratio in dB that a stated sensitivity leaves.

    Formula: sensitivity - (kT0 + 10·log B + NF + implementation loss).
    Valid: source at 290 K.
    Source: 3GPP TS 36.104 Table 7.2.1-1 (-103.0 dBm, 15 resource blocks); NF 5 dB and 2 dB margin from memory.

    >>> print(f"{implied_snr(-103.0, 15 * 180e3, 5.0, 2.0, -174.0):.3f}")
    -0.314
    """
    floor = noise_floor(bandwidth_hz, nf_db, density_dbm_hz)
    loss_db = finite(implementation_loss_db, "implementation_loss_db")
    return finite(sensitivity_dbm, "sensitivity_dbm") - floor - loss_db


def scaled_sensitivity(reference_dbm: Figures, reference_width: Figures, width: Figures) -> Floats:
    """Return a sensitivity in dBm scaled to another bandwidth (widths in any common unit, resource blocks say).

    Formula: reference + 10·log(width/reference width).
    Valid: same noise figure, modulation and SNR.
    Source: E-UTRA UE reference sensitivity of band 1: -100 dBm (25 blocks) to -97 dBm (50 blocks).

    >>> print(f"{scaled_sensitivity(-100.0, 25, 50):.2f}")
    -96.99
    """
    widths = above(width, 0.0, "width") / above(reference_width, 0.0, "reference_width")
    return finite(reference_dbm, "reference_dbm") + decibels(widths)
