"""Adjacent-channel leakage of noise-like signals from third-order distortion, and of stages together."""

from __future__ import annotations

import math
from typing import Literal

import numpy as np

from specflow.calculators.arguments import Figures, Floats, above, chain, count, finite, intercept
from specflow.calculators.decibel import decibels, power_total
from specflow.errors import CalculationError

Sum = Literal["power", "coherent"]


def channel_gap_constant(occupied_width: Figures, spacing: Figures) -> Floats:
    """Return the constant in dB by which the adjacent channel is better than 2·(OIP3 - P); widths in one unit.

    Formula: -10·log((1.5 - s)³/3), s = spacing/width - 0.5.
    Valid: complex Gaussian signal, flat over the width, memoryless cubic, measured over the same width; s from 0.5
    (contiguous) to 1.5, beyond which third order does not reach.
    Source: computed and simulated: contiguous 4.771, 98.28/100 MHz 5.001, 3.84/5 MHz 9.457 dB.

    >>> print(f"{channel_gap_constant(3.84, 5.0):.3f} {channel_gap_constant(98.28, 100.0):.3f}")
    9.457 5.001
    """
    start = above(spacing, 0.0, "spacing") / above(occupied_width, 0.0, "occupied_width") - 0.5
    if np.any(start < 0.5) or np.any(start >= 1.5):
        raise CalculationError(
            f"the spacing is {float(np.ravel(start)[0]) + 0.5:.4g} times the width",
            hint="third-order leakage is known for a spacing of 1 to 2 times the width, 2 not included",
        )
    return -decibels((1.5 - start) ** 3 / 3.0)


def aclr_from_oip3(
    output_dbm: Figures, oip3_dbm: Figures, occupied_width: Figures, spacing: Figures
) -> Floats:
    """Return the adjacent-channel leakage ratio in dB (positive) of a noise-like signal.

    Formula: 2·(OIP3 - P) + channel-gap constant.
    Valid: third order only; neither near compression nor with memory, predistortion or clipping.
    Source: computed and simulated: OIP3 47 dBm, 27 dBm, 3.84 MHz at 5 MHz.

    >>> print(f"{aclr_from_oip3(27.0, 47.0, 3.84, 5.0):.3f}")
    49.457
    """
    distance = intercept(oip3_dbm, "oip3_dbm") - finite(output_dbm, "output_dbm")
    return 2.0 * distance + channel_gap_constant(occupied_width, spacing)


def contiguous_aclr_from_imr(imr_db: Figures) -> Floats:
    """Return the contiguous adjacent-channel leakage ratio in dB from the two-tone ratio at equal total power.

    Formula: ACLR = IMR + 10·log(3/4).
    Valid: Gaussian flat signal, contiguous channel, third order.
    Source: computed; a count with 100 random-phase tones gives -1.216 dB.

    >>> print(f"{contiguous_aclr_from_imr(40.0):.3f}")
    38.751
    """
    return finite(imr_db, "imr_db") + 10.0 * math.log10(0.75)


def multitone_aclr_minus_imr(tones: int) -> float:
    """Return ACLR - IMR in dB for n equal tones of random phase, by counting the beats above the top tone.

    Formula: beats 2a - b (power weight 1) and a + b - c (weight 4) in the n slots above the band, each against n
    tones of 1/n of the power; IMR of two tones at equal total power.
    Valid: equally spaced tones, third order, random phases.
    Source: counted: 4 tones 0.000, 10 tones -0.864, 100 tones -1.216 dB.

    >>> print([f"{multitone_aclr_minus_imr(n):.3f}" for n in (4, 10, 100)])
    ['0.000', '-0.864', '-1.216']
    """
    count(tones, "tones", 2)
    tone = np.arange(tones)
    first, second = np.triu_indices(tones, 1)
    doubles = np.maximum(2 * tone - tones + 1, 0).sum()
    triples = np.maximum(
        first + second - tones + 1, 0
    ).sum()  # a beat above the band has c below both a and b
    beats = int(doubles + 4 * triples)
    # Leakage/signal in units of (P/OIP3)²: beats·(1/n)³ over power 1; the two-tone ratio is (1/2)².
    return 10.0 * math.log10(tones**3 / (4.0 * beats))


def in_band_distortion(output_dbm: Figures, oip3_dbm: Figures) -> Floats:
    """Return the error vector in dB that third-order distortion leaves inside a noise-like signal.

    Formula: 2·(P - OIP3) + 10·log(4/3).
    Valid: as for the adjacent channel; the part correlated with the signal counts as gain, not as error.
    Source: computed (simulated 1.27 against 1.249 dB): 27 dBm, OIP3 47 dBm.

    >>> print(f"{in_band_distortion(27.0, 47.0):.3f}")
    -38.751
    """
    distance = finite(output_dbm, "output_dbm") - intercept(oip3_dbm, "oip3_dbm")
    return 2.0 * distance + 10.0 * math.log10(4.0 / 3.0)


def in_band_distortion_from_aclr(aclr_db: Figures) -> Floats:
    """Return the error vector in dB that goes with a contiguous adjacent-channel leakage ratio.

    Formula: -ACLR + 10·log 4.
    Valid: contiguous adjacent channel, third order alone.
    Source: computed from the two formulas above.

    >>> print(f"{in_band_distortion_from_aclr(45.0):.4f}")
    -38.9794
    """
    return -finite(aclr_db, "aclr_db") + 10.0 * math.log10(4.0)


def cascade_aclr(aclr_db: Figures, law: Sum = "power") -> Floats:
    """Return the adjacent-channel leakage ratio in dB of stages together (first axis).

    Formula: power -10·log Σ 10^(-A/10); coherent -20·log Σ 10^(-A/20).
    Valid: power for a typical, coherent for a guaranteed value; say which. Measured for two equal stages: 4.1 to 4.5 dB
    of degradation between the 3.01 and 6.02 dB of the two laws (Kang et al., IMOC 2001, abstract).
    Source: computed: 45 and 57 dB.

    >>> print(f"{cascade_aclr([45.0, 57.0]):.3f} {cascade_aclr([45.0, 57.0], 'coherent'):.3f}")
    44.734 43.054
    """
    stages = chain(aclr_db=finite(aclr_db, "aclr_db"))[0]
    if law == "power":
        return -power_total(-stages)
    if law == "coherent":
        return -2.0 * power_total(-stages / 2.0)
    raise CalculationError(f"'{law}' is no law of leakage ratios", hint="say power or coherent")
