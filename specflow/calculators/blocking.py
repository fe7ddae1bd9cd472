"""Blocking and desense: reciprocal mixing, transmitter noise, intermodulation, and the rise of the noise they cause."""

from __future__ import annotations

from specflow.calculators.arguments import Figures, Floats, above, chain, finite, loss, noise_figure
from specflow.calculators.decibel import THERMAL_DENSITY, decibels, power_total, ratio, total


def reciprocal_mixing(blocker_dbm: Figures, phase_noise_dbc_hz: Figures, bandwidth_hz: Figures) -> Floats:
    """Return the noise in dBm that the local oscillator's phase noise puts into the channel beside a blocker.

    Formula: Pb + L(Δf) + 10·log B.
    Valid: L flat over B; otherwise integrate the profile.
    Source: mailing-list worked line (Osmocom umtrx): -26 dBm, -140 dBc/Hz, 271 kHz, printed about -112 dBm.

    >>> print(f"{reciprocal_mixing(-26.0, -140.0, 271e3):.2f}")
    -111.67
    """
    density = finite(blocker_dbm, "blocker_dbm") + finite(phase_noise_dbc_hz, "phase_noise_dbc_hz")
    return density + decibels(above(bandwidth_hz, 0.0, "bandwidth_hz"))


def phase_noise_limit(
    carrier_dbm: Figures, rejection_db: Figures, interferer_dbm: Figures, bandwidth_hz: Figures
) -> Floats:
    """Return the highest phase noise in dBc/Hz that keeps the wanted ratio beside an interferer.

    Formula: L = C - S - I - 10·log B.
    Valid: L flat over B, reciprocal mixing alone.
    Source: D. M. Pozar, Microwave Engineering, 4th ed., chapter 13, GSM example: -138 dBc/Hz at 3 MHz.

    >>> print(f"{phase_noise_limit(-99.0, 9.0, -23.0, 200e3):.1f}")
    -138.0
    """
    left = finite(carrier_dbm, "carrier_dbm") - finite(rejection_db, "rejection_db")
    band = decibels(above(bandwidth_hz, 0.0, "bandwidth_hz"))
    return left - finite(interferer_dbm, "interferer_dbm") - band


def noise_rise(i_over_n_db: Figures) -> Floats:
    """Return the rise of the noise in dB (desense) from one interference-to-noise ratio.

    Formula: 10·log(1 + I/N).
    Valid: noise-like interference.
    Source: computed: -6 dB gives 0.973 dB, -10 dB 0.414 dB.

    >>> print(f"{noise_rise(-6.0):.3f} {noise_rise(-10.0):.3f}")
    0.973 0.414
    """
    return decibels(1.0 + ratio(finite(i_over_n_db, "i_over_n_db")))


def i_over_n_for_rise(rise_db: Figures) -> Floats:
    """Return the interference-to-noise ratio in dB that causes a rise of the noise.

    Formula: 10·log(10^(rise/10) - 1).
    Valid: rise above 0 dB. A rise of 1 dB means -5.87 dB, not -6.
    Source: computed.

    >>> print(f"{i_over_n_for_rise(1.0):.3f}")
    -5.868
    """
    return decibels(ratio(above(rise_db, 0.0, "rise_db")) - 1.0)


def desense(noise_dbm: Figures, interference_dbm: Figures) -> Floats:
    """Return the rise of the noise in dB from several interferers (first axis).

    Formula: 10·log(1 + Σ I_k/N).
    Valid: independent, noise-like interference at the same plane and in the same bandwidth as the noise.
    Source: computed: IM3 -119 dBm and reciprocal mixing -113.01 dBm on -102.01 dBm.

    >>> print(f"{desense(-102.0103, [-119.0, -113.0103]):.4f}")
    0.4117
    """
    interference = chain(interference_dbm=finite(interference_dbm, "interference_dbm"))[0]
    return decibels(1.0 + total(ratio(interference - finite(noise_dbm, "noise_dbm"))))


def total_interference(levels_dbm: Figures) -> Floats:
    """Return the power sum in dBm of noise and interference (first axis).

    Formula: 10·log Σ 10^(P/10).
    Valid: independent contributions at one plane in one bandwidth.
    Source: computed: -102.01, -119 and -113.01 dBm.

    >>> print(f"{total_interference([-102.0103, -119.0, -113.0103]):.4f}")
    -101.5986
    """
    return power_total(chain(levels_dbm=finite(levels_dbm, "levels_dbm"))[0])


def transmit_noise_ratio(
    transmit_noise_dbm_hz: Figures,
    isolation_db: Figures,
    nf_db: Figures,
    density_dbm_hz: Figures = THERMAL_DENSITY,
) -> Floats:
    """Return the interference-to-noise ratio in dB of transmitter noise in the receive channel.

    Formula: I/N = (N_tx - isolation) - (kT + NF), all densities.
    Valid: noise and isolation at the receive frequency.
    Source: computed: -128 dBm/Hz, 50 dB, NF 5 dB at -174 dBm/Hz.

    >>> print(f"{transmit_noise_ratio(-128.0, 50.0, 5.0, -174.0):.1f}")
    -9.0
    """
    leaked = finite(transmit_noise_dbm_hz, "transmit_noise_dbm_hz") - loss(isolation_db, "isolation_db")
    return leaked - finite(density_dbm_hz, "density_dbm_hz") - noise_figure(nf_db, "nf_db")
