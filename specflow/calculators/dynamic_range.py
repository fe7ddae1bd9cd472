"""Spurious-free and linear dynamic range."""

from __future__ import annotations

from specflow.calculators.arguments import Figures, Floats, finite, intercept


def sfdr3(ip3_dbm: Figures, noise_dbm: Figures, snr_db: Figures = 0.0) -> Floats:
    """Return the third-order spurious-free dynamic range in dB; intercept and noise at the same port.

    Formula: 2/3·(IP3 - N) - SNR.
    Valid: some books subtract the SNR and some do not; a requirement must say which. Noise in the stated bandwidth.
    Source: D. M. Pozar, Microwave Engineering, 4th ed., Example 10.5: 44.9 dB with 10 dB SNR; textbook example 3.14
    with 20 dBm and -123 dBm: 95.3 dB.

    >>> print(f"{sfdr3(35.0, -47.43, 10.0):.2f} {sfdr3(20.0, -123.0):.2f}")
    44.95 95.33
    """
    span = intercept(ip3_dbm, "ip3_dbm") - finite(noise_dbm, "noise_dbm")
    return span * (2.0 / 3.0) - finite(snr_db, "snr_db")


def sfdr2(ip2_dbm: Figures, noise_dbm: Figures, snr_db: Figures = 0.0) -> Floats:
    """Return the second-order spurious-free dynamic range in dB; intercept and noise at the same port.

    Formula: 1/2·(IP2 - N) - SNR.
    Valid: as for third order.
    Source: computed: IIP2 50 dBm, noise -109 dBm.

    >>> print(f"{sfdr2(50.0, -109.0):.1f}")
    79.5
    """
    span = intercept(ip2_dbm, "ip2_dbm") - finite(noise_dbm, "noise_dbm")
    return span / 2.0 - finite(snr_db, "snr_db")


def linear_dynamic_range(p1db_dbm: Figures, noise_dbm: Figures) -> Floats:
    """Return the linear dynamic range in dB; compression point and noise at the same port.

    Formula: P1dB - N.
    Valid: noise in the stated bandwidth.
    Source: D. M. Pozar, Microwave Engineering, 4th ed., Example 10.5: 25 dBm, -47.4 dBm: 72.4 dB.

    >>> print(f"{linear_dynamic_range(25.0, -47.4):.1f}")
    72.4
    """
    return intercept(p1db_dbm, "p1db_dbm") - finite(noise_dbm, "noise_dbm")
