"""Noise of converters: quantisation and clock jitter."""

from __future__ import annotations

import math

import numpy as np

from specflow.calculators.arguments import Figures, Floats, above, at_least, finite
from specflow.calculators.decibel import decibels
from specflow.errors import CalculationError


def quantisation_snr(
    bits: Figures, crest_factor_db: Figures, sample_rate_hz: Figures, bandwidth_hz: Figures
) -> Floats:
    """Return the signal-to-quantisation-noise ratio in dB of one real channel of width B sampled at fs.

    Formula: 10·log(3·4^N) - crest factor + 10·log(fs/2B); 6.02·N + 1.76 for a full-scale sine over fs/2.
    Valid: ideal converter driven to full scale at the peak; a real one has its effective number of bits.
    Source: computed: 12 bits, 10 dB, 491.52 MHz, 100 MHz.

    >>> print(f"{quantisation_snr(12, 10.0, 491.52e6, 100e6):.3f}")
    70.924
    """
    spread = above(sample_rate_hz, 0.0, "sample_rate_hz") / (2.0 * above(bandwidth_hz, 0.0, "bandwidth_hz"))
    if np.any(spread < 1.0):
        raise CalculationError(
            "the bandwidth is wider than half the sample rate", hint="give the width of one real channel"
        )
    full = decibels(3.0 * 4.0 ** above(bits, 0.0, "bits"))
    return full - at_least(crest_factor_db, 0.0, "crest_factor_db") + decibels(spread)


def jitter_snr(frequency_hz: Figures, jitter_s: Figures) -> Floats:
    """Return the signal-to-noise ratio in dB that rms clock jitter leaves to a sampled sine.

    Formula: -20·log(2π·f·t).
    Valid: white jitter, small against the period; f is the frequency that is sampled.
    Source: computed: 1 GHz, 100 fs.

    >>> print(f"{jitter_snr(1e9, 100e-15):.3f}")
    64.036
    """
    angle = 2.0 * np.pi * above(frequency_hz, 0.0, "frequency_hz") * above(jitter_s, 0.0, "jitter_s")
    return -2.0 * decibels(angle)


def bits_for_snr(snr_db: Figures) -> Floats:
    """Return the effective number of bits that a full-scale sine's signal-to-noise ratio in dB amounts to.

    Formula: (SNR - 10·log 1.5)/(20·log 2).
    Valid: noise over the whole of fs/2.
    Source: inverse of 6.02·N + 1.76; computed for 12 bits.

    >>> print(f"{bits_for_snr(74.0081):.3f}")
    12.000
    """
    return (finite(snr_db, "snr_db") - 10.0 * math.log10(1.5)) / (20.0 * math.log10(2.0))
