"""Apportionment in closed form: a target shared over many positions, equally or in proportion to their estimates.

Fixed positions (passive ones, or those already agreed) keep their figure and take their part first.
"""

from __future__ import annotations

import numpy as np

from specflow.calculators.arguments import Figures, Floats, chain, finite, intercept, noise_figure
from specflow.calculators.decibel import decibels, gain_before, ratio, total
from specflow.calculators.intercept_cascade import THIRD_ORDER, Law, exponent, referred
from specflow.errors import CalculationError, InfeasibleError


def equal_share_noise_figures(
    target_nf_db: Figures, gain_db: Figures, fixed_nf_db: Figures | None = None
) -> Floats:
    """Return noise figures in dB of all positions that share the target's excess noise equally.

    Formula: F_i = 1 + G_before(i)·R/n, R = F_target - 1 less the excess noise of the fixed positions.
    Valid: ``fixed_nf_db`` holds what is not to be shared (passive positions), none elsewhere; they come back as given.
    A passive position's share may lie below its loss: fix it.
    Source: Friis with equal terms; back-substituted in the tests.

    >>> print(np.round(equal_share_noise_figures(3.0, [18.0, -2.5, -7.0, 20.0]), 3))
    [ 0.965 12.227  9.925  4.411]
    """
    gain, fixed = _with_fixed(gain_db, fixed_nf_db)
    shared, before = np.isinf(fixed), gain_before(gain)
    left = _left_of_noise(target_nf_db, before, np.where(shared, 0.0, fixed))
    return np.where(shared, decibels(1.0 + before * left / np.maximum(total(shared), 1)), fixed)


def proportional_noise_figures(
    target_nf_db: Figures, gain_db: Figures, estimate_nf_db: Figures, fixed_nf_db: Figures | None = None
) -> Floats:
    """Return noise figures in dB of all positions whose excess noise keeps the proportions of the estimates.

    Formula: F_i - 1 = (F_est,i - 1)·R/Σ_shared (F_est,j - 1)/G_before(j), R = F_target - 1 less that of the fixed ones.
    Valid: at least one shared position makes noise by its estimate.
    Source: Friis scaled term by term; back-substituted in the tests. A target equal to the estimate changes nothing:

    >>> print(np.round(proportional_noise_figures(2.193805, [18, -2.5, -7, 20], [1.2, 2.5, 7.0, 4.0]), 3))
    [1.2 2.5 7.  4. ]
    """
    gain, fixed = _with_fixed(gain_db, fixed_nf_db)
    gain, fixed, estimate = chain(
        gain_db=gain, fixed_nf_db=fixed, estimate_nf_db=noise_figure(estimate_nf_db, "estimate_nf_db")
    )
    shared, before = np.isinf(fixed), gain_before(gain)
    left = _left_of_noise(target_nf_db, before, np.where(shared, 0.0, fixed))
    excess = np.where(shared, ratio(estimate) - 1.0, 0.0)
    whole = total(excess / before)
    if np.any(whole == 0.0):
        raise CalculationError(
            "no shared position makes noise by its estimate",
            hint="estimate one above 0 dB, or share equally",
        )
    return np.where(shared, decibels(1.0 + excess * left / whole), fixed)


def equal_share_iip3(target_iip3_dbm: Figures, gain_db: Figures, law: Law = "coherent") -> Floats:
    """Return input intercepts in dBm of all positions that share the target's distortion equally.

    Formula: target + G_before(i) + 10·log n (coherent) or + 5·log n (non-coherent).
    Valid: as the cascade.
    Source: the cascade with equal terms; back-substituted in the tests.

    >>> print(np.round(equal_share_iip3(-10.0, [18.0, -2.5, -7.0, 20.0], "noncoherent"), 3))
    [-6.99 11.01  8.51  1.51]
    """
    gain = chain(gain_db=finite(gain_db, "gain_db"))[0]
    before = np.zeros_like(gain)
    before[1:] = np.cumsum(gain[:-1], axis=0)
    each = 10.0 * np.log10(len(gain)) / exponent(THIRD_ORDER, law)
    shared: Floats = finite(target_iip3_dbm, "target_iip3_dbm") + before + each
    return shared


def proportional_iip3(
    target_iip3_dbm: Figures, gain_db: Figures, estimate_iip3_dbm: Figures, law: Law = "coherent"
) -> Floats:
    """Return input intercepts in dBm of all positions whose distortion keeps the proportions of the estimates.

    Formula: IIP3_i = IIP3_est,i + (target - IIP3 of the estimates): every one moves by the same dB; ideal ones stay.
    Valid: as the cascade; at least one position is not ideal.
    Source: the cascade scaled; back-substituted in the tests: four stages of -13.913 dBm brought to -12.

    >>> print(np.round(proportional_iip3(-12.0, [18, -2.5, 8, 20], [-2, None, 6, 12]), 3))
    [-0.087    inf  7.913 13.913]
    """
    estimate = intercept(estimate_iip3_dbm, "estimate_iip3_dbm")
    now = referred(gain_db, estimate, exponent(THIRD_ORDER, law), "estimate_iip3_dbm")
    if np.any(np.isinf(now)):
        raise CalculationError(
            "all positions are ideal by their estimates", hint="estimate one intercept, or share equally"
        )
    moved = finite(target_iip3_dbm, "target_iip3_dbm") - now
    return estimate.reshape(estimate.shape + (1,) * (np.ndim(moved) - estimate.ndim + 1)) + moved


def _with_fixed(gain_db: Figures, fixed_nf_db: Figures | None) -> tuple[Floats, Floats]:
    """Return gains and fixed noise figures, +∞ where a position is to be shared."""
    gain = chain(gain_db=finite(gain_db, "gain_db"))[0]
    given = np.full(gain.shape[0], np.inf) if fixed_nf_db is None else intercept(fixed_nf_db, "fixed_nf_db")
    gain, fixed = chain(gain_db=gain, fixed_nf_db=given)
    return gain, fixed


def _left_of_noise(target_nf_db: Figures, before: Floats, fixed_nf_db: Floats) -> Floats:
    """Return what the fixed positions leave of the target's excess noise."""
    target = noise_figure(target_nf_db, "target_nf_db")
    taken = total((ratio(noise_figure(fixed_nf_db, "fixed_nf_db")) - 1.0) / before)
    left = ratio(target) - 1.0 - taken
    if np.any(left < 0.0):
        short = float(np.max(decibels(1.0 + taken) - target))
        raise InfeasibleError(
            f"shares: infeasible, and short by {short:.3g} dB",
            hint="the fixed positions alone exceed the target",
        )
    return left
