"""Intercept points of a chain, input- or output-referred, in phase or as a power sum; positions on the first axis.

A trap that the law names keep apart: adding G/IP is the *coherent* law of third order and the *non-coherent* law of
second order. A stage without intercept (none, +∞) is ideal.
"""

from __future__ import annotations

from typing import Literal

import numpy as np

from specflow.calculators.arguments import Figures, Floats, chain, finite, intercept
from specflow.calculators.decibel import NEPER, decibels, sum_after, total
from specflow.calculators.noise_cascade import Slopes
from specflow.errors import CalculationError

Law = Literal["coherent", "noncoherent"]
THIRD_ORDER = {"coherent": 1.0, "noncoherent": 2.0}
SECOND_ORDER = {"coherent": 0.5, "noncoherent": 1.0}


def cascade_iip3(gain_db: Figures, iip3_dbm: Figures, law: Law = "coherent") -> Floats:
    """Return the input third-order intercept of a chain in dBm.

    Formula: coherent 1/IIP3 = Σ G_before/IIP3_i; non-coherent (1/IIP3)² = Σ (G_before/IIP3_i)².
    Valid: small signals, second-order products not passed on, no filter that changes the tones on the way. The
    coherent law is the worst case of phase.
    Source: D. M. Pozar, Microwave Engineering, cascade-intercept example (values from memory: 20 dB/OIP3 22 dBm,
    -6 dB/IIP3 13 dBm, output 6.4 dBm printed; unrounded 6.485).

    >>> print(f"{cascade_iip3([20.0, -6.0], [2.0, 13.0]) + 14.0:.3f}")
    6.485
    >>> print(f"{cascade_iip3([20.0, -6.0], [2.0, 13.0], 'noncoherent') + 14.0:.3f}")
    6.966
    """
    return referred(gain_db, iip3_dbm, exponent(THIRD_ORDER, law), "iip3_dbm")


def cascade_iip2(gain_db: Figures, iip2_dbm: Figures, law: Law = "coherent") -> Floats:
    """Return the input second-order intercept of a chain in dBm.

    Formula: coherent 1/√IIP2 = Σ √(G_before/IIP2_i); non-coherent 1/IIP2 = Σ G_before/IIP2_i.
    Valid: only where the second-order product passes on to the next stage.
    Source: computed from the formula: four stages, coherent 21.929, non-coherent 26.297 dBm.

    >>> stages = [18.0, -2.5, 8.0, 20.0], [30.0, None, 45.0, 60.0]
    >>> print(f"{cascade_iip2(*stages):.3f} {cascade_iip2(*stages, 'noncoherent'):.3f}")
    21.929 26.297
    """
    return referred(gain_db, iip2_dbm, exponent(SECOND_ORDER, law), "iip2_dbm")


def cascade_oip3(gain_db: Figures, oip3_dbm: Figures, law: Law = "coherent") -> Floats:
    """Return the output third-order intercept of a chain in dBm from output intercepts.

    Formula: coherent 1/OIP3 = Σ 1/(OIP3_i·G_after), the input form plus the gain.
    Valid: as for the input form.
    Source: computed from the formula: driver chain 12/20, 15/30, 13/47 dB/dBm.

    >>> print(f"{cascade_oip3([12.0, 15.0, 13.0], [20.0, 30.0, 47.0]):.3f}")
    40.659
    """
    gain, oip3 = chain(gain_db=finite(gain_db, "gain_db"), oip3_dbm=intercept(oip3_dbm, "oip3_dbm"))
    return cascade_iip3(gain, oip3 - gain, law) + total(gain)


def input_intercept(output_dbm: Figures, gain_db: Figures) -> Floats:
    """Return an intercept referred to the input in dBm (each stage on its own).

    Formula: IIP = OIP - G. (A compression point follows OP1dB = IP1dB + G - 1 instead.)
    Valid: intercepts only.
    Source: definition of the intercept; 22 dBm at the output of a 20 dB amplifier.

    >>> print(input_intercept([22.0, None], [20.0, 10.0]))
    [ 2. inf]
    """
    return intercept(output_dbm, "output_dbm") - finite(gain_db, "gain_db")


def iip3_shares(gain_db: Figures, iip3_dbm: Figures, law: Law = "coherent") -> Floats:
    """Return each position's share of the third-order distortion (sum 1; all 0 if every position is ideal).

    Formula: c_i = (IIP3·G_before/IIP3_i)^p, p = 1 coherent, 2 non-coherent.
    Valid: as for the cascade.
    Source: the cascade term by term, computed; four-stage example.

    >>> print(np.round(iip3_shares([18, -2.5, 8, 20], [-2, None, 6, 12]), 4))
    [0.0644 0.     0.362  0.5737]
    """
    return _shares(gain_db, iip3_dbm, exponent(THIRD_ORDER, law), "iip3_dbm")


def iip3_slopes(gain_db: Figures, iip3_dbm: Figures, law: Law = "coherent") -> Slopes:
    """Return the derivatives of the cascade IIP3, in dB per dB.

    Formula: dIIP3/dIIP3_i = c_i (the share); dIIP3/dG_i = -Σ_{j>i} c_j.
    Valid: as for the cascade.
    Source: the cascade differentiated; checked by finite differences.

    >>> slopes = iip3_slopes([18, -2.5, 8, 20], [-2, None, 6, 12])
    >>> print(np.round(slopes.to_gain, 4) + 0.0)
    [-0.9356 -0.9356 -0.5737  0.    ]
    """
    shares = _shares(gain_db, iip3_dbm, exponent(THIRD_ORDER, law), "iip3_dbm")
    return Slopes(shares, -sum_after(shares))


def iip2_slopes(gain_db: Figures, iip2_dbm: Figures, law: Law = "coherent") -> Slopes:
    """Return the derivatives of the cascade IIP2, in dB per dB.

    Formula: dIIP2/dIIP2_i = c_i, dIIP2/dG_i = -Σ_{j>i} c_j with c_i the share of √(G_before/IIP2_i) (coherent) or of
    G_before/IIP2_i (non-coherent).
    Valid: as for the cascade.
    Source: the cascade differentiated; checked by finite differences. Two equal contributions share by half.

    >>> print(np.round(iip2_slopes([10.0, 0.0], [30.0, 40.0]).to_figure, 6))
    [0.5 0.5]
    """
    shares = _shares(gain_db, iip2_dbm, exponent(SECOND_ORDER, law), "iip2_dbm")
    return Slopes(shares, -sum_after(shares))


def exponent(order: dict[str, float], law: str) -> float:
    """Return the power p of the law Σ (G_before/IP_i)^p; laws by any other name are refused."""
    if law not in order:
        raise CalculationError(f"'{law}' is no law of intercepts", hint="say coherent or noncoherent")
    return order[law]


def referred(gain_db: Figures, ip_dbm: Figures, power: float, name: str) -> Floats:
    """Return the input-referred figure of a chain in dBm by the law Σ (G_before/IP_i)^power."""
    return -decibels(total(_parts(gain_db, ip_dbm, power, name))) / power


def _parts(gain_db: Figures, ip_dbm: Figures, power: float, name: str) -> Floats:
    """Return (G_before/IP_i)^power for each position."""
    gain, ip = chain(gain_db=finite(gain_db, "gain_db"), **{name: intercept(ip_dbm, name)})
    before = np.zeros(np.broadcast_shapes(gain.shape, ip.shape))
    before[1:] = np.cumsum(gain[:-1], axis=0)
    before -= ip
    before *= power * NEPER
    return np.exp(before, out=before)


def _shares(gain_db: Figures, ip_dbm: Figures, power: float, name: str) -> Floats:
    parts = _parts(gain_db, ip_dbm, power, name)
    whole = total(parts)
    return np.divide(parts, whole, out=np.zeros_like(parts), where=whole > 0)
