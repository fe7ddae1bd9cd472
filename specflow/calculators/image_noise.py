"""Noise at the image frequency of a mixer: single- and double-sideband noise figures kept apart."""

from __future__ import annotations

import math

from specflow.calculators.arguments import Figures, Floats, finite, loss, noise_figure
from specflow.calculators.decibel import decibels, ratio


def ssb_noise_figure(dsb_nf_db: Figures) -> Floats:
    """Return the single-sideband noise figure in dB of a mixer from its double-sideband figure.

    Formula: F_SSB = 2·F_DSB.
    Valid: equal conversion gain in both sidebands; the image's source noise at 290 K is counted.
    Source: computed from the formula; IEEE definitions of noise figure recalled from memory.

    >>> print(f"{ssb_noise_figure(8.0):.4f}")
    11.0103
    """
    return noise_figure(dsb_nf_db, "dsb_nf_db") + 10.0 * math.log10(2.0)


def image_noise_figure(
    lna_nf_db: Figures, lna_gain_db: Figures, mixer_dsb_nf_db: Figures, image_rejection_db: Figures
) -> Floats:
    """Return the noise figure in dB of amplifier, image filter and mixer for a signal in one sideband.

    Formula: F = F1·(1 + r) + (1 - r)/G1 + 2·(F_DSB - 1)/G1, r = 10^(-rejection/10).
    Valid: lossless filter terminated at 290 K at the image; equal conversion gain in both sidebands. The mixer figure
    is the double-sideband one: entering a single-sideband figure counts 3 dB twice.
    Source: computed from the formula: 2 dB, 15 dB, 8 dB with 20 dB filter 2.940, without any 5.448 dB.

    >>> print(f"{image_noise_figure(2.0, 15.0, 8.0, 20.0):.3f} {image_noise_figure(2.0, 15.0, 8.0, 0.0):.3f}")
    2.940 5.448
    """
    first, gain = ratio(noise_figure(lna_nf_db, "lna_nf_db")), ratio(finite(lna_gain_db, "lna_gain_db"))
    passed = ratio(-loss(image_rejection_db, "image_rejection_db"))
    mixer = 2.0 * (ratio(noise_figure(mixer_dsb_nf_db, "mixer_dsb_nf_db")) - 1.0) / gain
    return decibels(first * (1.0 + passed) + (1.0 - passed) / gain + mixer)


def both_sidebands_noise_figure(lna_nf_db: Figures, lna_gain_db: Figures, mixer_dsb_nf_db: Figures) -> Floats:
    """Return the noise figure in dB of amplifier and mixer when the wanted signal is in both sidebands.

    Formula: F = F1 + (F_DSB - 1)/G1.
    Valid: radiometers and zero-IF receivers; not for a signal in one sideband.
    Source: computed from the formula: 2 dB, 15 dB, 8 dB DSB.

    >>> print(f"{both_sidebands_noise_figure(2.0, 15.0, 8.0):.3f}")
    2.437
    """
    mixer = (ratio(noise_figure(mixer_dsb_nf_db, "mixer_dsb_nf_db")) - 1.0) / ratio(
        finite(lna_gain_db, "lna_gain_db")
    )
    return decibels(ratio(noise_figure(lna_nf_db, "lna_nf_db")) + mixer)
