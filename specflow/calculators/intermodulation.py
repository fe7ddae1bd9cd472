"""Intermodulation products and harmonics of one device; all levels and intercepts at the same port."""

from __future__ import annotations

import math

from specflow.calculators.arguments import Figures, Floats, count, finite, intercept, loss
from specflow.calculators.decibel import decibels


def im3_level(double_dbm: Figures, single_dbm: Figures, ip3_dbm: Figures) -> Floats:
    """Return the third-order product in dBm of a tone taken twice and a tone taken once.

    Formula: IM3 = 2·P_double + P_single - 2·IP3.
    Valid: well below compression; tones and intercept at one port.
    Source: definition of the intercept; 0 dBm per tone at OIP3 30 dBm gives -60 dBm.

    >>> print(f"{im3_level(0.0, 0.0, 30.0):.1f} {im3_level(-40.0, -25.0, 0.0):.1f}")
    -60.0 -105.0
    """
    tones = 2.0 * finite(double_dbm, "double_dbm") + finite(single_dbm, "single_dbm")
    return tones - 2.0 * intercept(ip3_dbm, "ip3_dbm")


def ip3_for_product(double_dbm: Figures, single_dbm: Figures, im3_dbm: Figures) -> Floats:
    """Return the least third-order intercept in dBm that keeps a product at ``im3_dbm``; all at one port.

    Formula: IP3 = (2·P_double + P_single - IM3)/2.
    Valid: as the product.
    Source: the product solved for the intercept; tones of -40 and -25 dBm, product -105 dBm.

    >>> print(f"{ip3_for_product(-40.0, -25.0, -105.0):.1f}")
    0.0
    """
    tones = 2.0 * finite(double_dbm, "double_dbm") + finite(single_dbm, "single_dbm")
    return (tones - finite(im3_dbm, "im3_dbm")) / 2.0


def im2_level(first_dbm: Figures, second_dbm: Figures, ip2_dbm: Figures) -> Floats:
    """Return the second-order product in dBm of two tones.

    Formula: IM2 = P1 + P2 - IP2.
    Valid: well below compression; tones and intercept at one port.
    Source: definition of the intercept; two tones of -10 dBm at OIP2 50 dBm.

    >>> print(f"{im2_level(-10.0, -10.0, 50.0):.1f}")
    -70.0
    """
    return finite(first_dbm, "first_dbm") + finite(second_dbm, "second_dbm") - intercept(ip2_dbm, "ip2_dbm")


def im3_below_tone(total_dbm: Figures, oip3_dbm: Figures, tones: Figures = 2) -> Floats:
    """Return how far third-order products of equal tones lie below one tone, in dB, from the total power.

    Formula: 2·(OIP3 - (P_total - 10·log n)).
    Valid: products of the kind 2a - b; three-tone beats lie 6.02 dB higher.
    Source: worked line of a public forum thread on multitone IMD, October 2009: 58.2 dB.

    >>> print(f"{im3_below_tone(-8.0, 18.1):.2f}")
    58.22
    """
    per_tone = finite(total_dbm, "total_dbm") - decibels(count(tones, "tones", 2))
    return 2.0 * (intercept(oip3_dbm, "oip3_dbm") - per_tone)


def triple_beat_level(per_tone_dbm: Figures, ip3_dbm: Figures) -> Floats:
    """Return the product a + b - c of three equal tones in dBm.

    Formula: IM3 + 20·log 2.
    Valid: memoryless, well below compression.
    Source: H. Hausman, Microwave Journal (6 dB rule); the number is computed.

    >>> print(f"{triple_beat_level(0.0, 30.0):.2f}")
    -53.98
    """
    return im3_level(per_tone_dbm, per_tone_dbm, ip3_dbm) + 20.0 * math.log10(2.0)


def second_harmonic_level(level_dbm: Figures, oip2_dbm: Figures) -> Floats:
    """Return the second harmonic of a memoryless device in dBm.

    Formula: H2 = 2·P - OIP2 - 6.02.
    Valid: memoryless; a filter or match at the harmonic changes it.
    Source: computed from the power series: a2·A²/2 against a2·A².

    >>> print(f"{second_harmonic_level(-10.0, 50.0):.2f}")
    -76.02
    """
    return 2.0 * finite(level_dbm, "level_dbm") - intercept(oip2_dbm, "oip2_dbm") - 20.0 * math.log10(2.0)


def third_harmonic_level(level_dbm: Figures, oip3_dbm: Figures) -> Floats:
    """Return the third harmonic of a memoryless device in dBm.

    Formula: H3 = 3·P - 2·OIP3 - 9.54.
    Valid: memoryless cubic; a filter or match at the harmonic changes it.
    Source: computed from the power series: a3·A³/4 against 3·a3·A³/4.

    >>> print(f"{third_harmonic_level(-10.0, 30.0):.4f}")
    -99.5424
    """
    return (
        3.0 * finite(level_dbm, "level_dbm") - 2.0 * intercept(oip3_dbm, "oip3_dbm") - 20.0 * math.log10(3.0)
    )


def out_of_band_ip3(iip3_dbm: Figures, double_rejection_db: Figures, single_rejection_db: Figures) -> Floats:
    """Return the input intercept in dBm towards tones that a filter in front rejects.

    Formula: IIP3 + (2·A_double + A_single)/2.
    Valid: a filter that adds no products itself; rejection of each tone relative to the wanted signal.
    Source: computed from IM3 = 2·P_double + P_single - 2·IIP3 with each tone lowered.

    >>> print(f"{out_of_band_ip3(-10.0, 20.0, 30.0):.1f}")
    25.0
    """
    rejection = 2.0 * loss(double_rejection_db, "double_rejection_db") + loss(
        single_rejection_db, "single_rejection_db"
    )
    return intercept(iip3_dbm, "iip3_dbm") + rejection / 2.0
