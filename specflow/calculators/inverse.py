"""Backwards in closed form: the bound on one unknown so that a target is met.

Positions count from 0; the figure of the unknown position is not looked at (none will do). A bound that nothing can
meet is NaN beside the amount by which even an ideal part misses the target.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from specflow.calculators.arguments import (
    Figures,
    Floats,
    above,
    chain,
    finite,
    intercept,
    noise_figure,
    without,
)
from specflow.calculators.decibel import decibels, gain_before, ratio, total
from specflow.calculators.intercept_cascade import SECOND_ORDER, THIRD_ORDER, Law, exponent
from specflow.errors import InfeasibleError


@dataclass(frozen=True, slots=True)
class Bound:
    """The bound on an unknown, point by point.

    ``value`` is NaN where no figure meets the target; ``short_by_db`` says there by how much an ideal part still misses
    it (0 elsewhere). ``at_most``: the unknown must stay at or below the value, else at or above it.
    """

    what: str
    value: Floats
    short_by_db: Floats
    at_most: bool

    @property
    def feasible(self) -> bool:
        """Whether every point has a bound."""
        return not bool(np.isnan(self.value).any())

    def for_all_points(self) -> float:
        """Return the bound that meets the target at all points; raises InfeasibleError where one has none."""
        if not self.feasible:
            missed = np.where(np.isnan(self.value), self.short_by_db, -np.inf)
            place = int(np.argmax(missed))
            point = f" at point {place}" if missed.size > 1 else ""
            raise InfeasibleError(
                f"{self.what}: infeasible, and short by {float(missed.flat[place]):.3g} dB{point}",
                hint="relax the target, or change gain or figures of the other positions",
            )
        return float(np.min(self.value) if self.at_most else np.max(self.value))


def noise_factor_bound(target_nf_db: Figures, gain_db: Figures, nf_db: Figures, position: int) -> Floats:
    """Return the highest noise factor (a ratio) of one position; below 1 means that none is low enough.

    Formula: F_k = 1 + G_before(k)·(F_target - F_without_k).
    Valid: as Friis.
    Source: Friis solved for one term; back-substituted in the tests.

    >>> print(f"{noise_factor_bound(1.5, [3.0, 0.0], [None, 10.0], 0):.4f}")
    -3.0981
    """
    target, before, others = _noise_without(target_nf_db, gain_db, nf_db, position)
    factor: Floats = 1.0 + before[position] * (target - 1.0 - total(others))
    return factor


def stage_noise_figure(target_nf_db: Figures, gain_db: Figures, nf_db: Figures, position: int) -> Bound:
    """Return the highest noise figure in dB of one position.

    Formula: F_k <= 1 + G_before(k)·(F_target - F_without_k).
    Valid: as Friis; a passive position cannot go below its own loss at 290 K.
    Source: Friis solved for one term; back-substituted in the tests.

    >>> bound = stage_noise_figure(3.0, [18.0, -2.5, -7.0, 20.0], [1.2, 2.5, 7.0, None], 3)
    >>> print(f"{bound.for_all_points():.4f}")
    6.9064
    """
    target, _, others = _noise_without(target_nf_db, gain_db, nf_db, position)
    factor = noise_factor_bound(target_nf_db, gain_db, nf_db, position)
    short = decibels(1.0 + total(others)) - decibels(target)
    return _bound(
        f"noise figure of position {position}",
        factor >= 1.0 - 1e-12,  # a noiseless stage that just meets the target may come out a rounding below 1
        np.maximum(factor, 1.0),
        short,
        at_most=True,
    )


def stage_gain(target_nf_db: Figures, gain_db: Figures, nf_db: Figures, position: int) -> Bound:
    """Return the least gain in dB of one position that keeps the noise of those behind it small enough.

    Formula: G_k >= [Σ_{j>k} (F_j - 1)/(G_{k+1}…G_{j-1})]/(G_before(k)·(F_target - Σ_{j<=k} terms)); -∞ if nothing
    behind makes noise.
    Valid: as Friis. More gain relaxes later noise figures and tightens later intercepts: iterate both.
    Source: Friis solved for one gain; back-substituted in the tests.

    >>> bound = stage_gain(3.0, [None, -2.5, -7.0, 20.0], [1.2, 2.5, 7.0, 4.0], 0)
    >>> print(f"{bound.for_all_points():.4f}")
    14.9956
    """
    gain, nf = chain(
        gain_db=finite(without(gain_db, position, "gain_db", 0.0), "gain_db"),
        nf_db=noise_figure(nf_db, "nf_db"),
    )
    target = ratio(noise_figure(target_nf_db, "target_nf_db"))
    terms = (ratio(nf) - 1.0) / gain_before(gain)
    upto, behind = 1.0 + total(terms[: position + 1]), total(terms[position + 1 :])
    left = target - upto
    possible = (left > 0.0) | ((behind == 0.0) & (left >= 0.0))
    least = np.divide(behind, left, out=np.zeros(np.broadcast(behind, left).shape), where=left > 0.0)
    return _bound(
        f"gain of position {position}", possible, least, decibels(upto) - decibels(target), at_most=False
    )


def stage_iip3(
    target_iip3_dbm: Figures, gain_db: Figures, iip3_dbm: Figures, position: int, law: Law = "coherent"
) -> Bound:
    """Return the least third-order input intercept in dBm of one position.

    Formula: IIP3_k >= G_before(k)/(1/IIP3_target - Σ others), every term to the power p (1 coherent, 2 not).
    Valid: as the cascade.
    Source: the cascade solved for one term; back-substituted in the tests.

    >>> bound = stage_iip3(-12.0, [18.0, -2.5, 8.0, 20.0], [-2.0, None, None, 12.0], 2)
    >>> print(f"{bound.for_all_points():.4f}")
    24.0804
    """
    return _stage_intercept(
        target_iip3_dbm, gain_db, iip3_dbm, position, exponent(THIRD_ORDER, law), "iip3_dbm"
    )


def stage_iip2(
    target_iip2_dbm: Figures, gain_db: Figures, iip2_dbm: Figures, position: int, law: Law = "coherent"
) -> Bound:
    """Return the least second-order input intercept in dBm of one position.

    Formula: IIP2_k^p >= G_before(k)^p/(1/IIP2_target^p - Σ others), p = 1/2 coherent, 1 non-coherent.
    Valid: as the cascade.
    Source: the cascade solved for one term; back-substituted in the tests. Two equal coherent shares of 6.02 dB:

    >>> print(f"{stage_iip2(30.0, [10.0, 0.0], [36.0206, None], 1).for_all_points():.3f}")
    46.021
    """
    return _stage_intercept(
        target_iip2_dbm, gain_db, iip2_dbm, position, exponent(SECOND_ORDER, law), "iip2_dbm"
    )


def stage_ip1db(target_ip1db_dbm: Figures, gain_db: Figures, ip1db_dbm: Figures, position: int) -> Bound:
    """Return the least input compression point in dBm of one position: as approximate as the cascade's law.

    Formula: IP1_k >= G_before(k)/(1/IP1_target - Σ others).
    Valid: no better than about 0.5 dB.
    Source: the cascade solved for one term; back-substituted in the tests. Two equal shares of 3.01 dB:

    >>> print(f"{stage_ip1db(-20.0, [10.0, 0.0], [-16.9897, None], 1).for_all_points():.3f}")
    -6.990
    """
    return _stage_intercept(target_ip1db_dbm, gain_db, ip1db_dbm, position, 1.0, "ip1db_dbm")


def stage_gain_ceiling(
    target_iip3_dbm: Figures, gain_db: Figures, iip3_dbm: Figures, position: int, law: Law = "coherent"
) -> Bound:
    """Return the highest gain in dB of one position that keeps the intercept of the chain; +∞ if all behind is ideal.

    Formula: G_k^p <= (1/IIP3_target^p - Σ_{j<=k} terms)/Σ_{j>k} terms at G_k = 1.
    Valid: as the cascade.
    Source: the cascade solved for one gain; back-substituted in the tests.

    >>> bound = stage_gain_ceiling(-7.0, [None, 10.0], [10.0, 3.0], 0)
    >>> print(f"{bound.for_all_points():.4f}")
    9.9125
    """
    power, target = exponent(THIRD_ORDER, law), finite(target_iip3_dbm, "target_iip3_dbm")
    gain, ip = chain(
        gain_db=finite(without(gain_db, position, "gain_db", 0.0), "gain_db"),
        iip3_dbm=intercept(iip3_dbm, "iip3_dbm"),
    )
    terms = gain_before(gain) ** power * ratio(-power * ip)
    upto, behind = total(terms[: position + 1]), total(terms[position + 1 :])
    left = ratio(-power * target) - upto
    most = np.divide(left, behind, out=np.full(np.broadcast(left, behind).shape, np.inf), where=behind > 0.0)
    short = target + decibels(upto) / power
    return _bound(f"gain of position {position}", left > 0.0, most, short, at_most=True, scale=1.0 / power)


def left_of_power_sum(target_db: Figures, others_db: Figures) -> Bound:
    """Return the highest level in dB of one contribution to a power sum (others on the first axis).

    Formula: 10·log(10^(t/10) - Σ 10^(x/10)).
    Valid: as the power sum.
    Source: the power sum solved for one term; -90 less -93 dBm.

    >>> print(f"{left_of_power_sum(-90.0, [-93.0]).for_all_points():.3f}")
    -93.021
    """
    target, others = finite(target_db, "target_db"), chain(others_db=finite(others_db, "others_db"))[0]
    left = ratio(target) - total(ratio(others))
    short = decibels(total(ratio(others))) - target
    return _bound("remaining level", left > 0.0, left, short, at_most=True)


def left_of_root_sum_square(target: Figures, others: Figures) -> Bound:
    """Return the largest error of one contribution to a root sum of squares (others on the first axis), in their unit.

    Formula: √(t² - Σ x²); short by 20·log of what the others make over the target.
    Valid: uncorrelated errors.
    Source: the root sum of squares solved for one term; 5 less 3 and 0.

    >>> print(f"{left_of_root_sum_square(5.0, [3.0, 0.0]).for_all_points():.1f}")
    4.0
    """
    t, parts = above(target, 0.0, "target"), chain(others=finite(others, "others"))[0]
    square = total(parts * parts)
    left = t * t - square
    value = np.where(left >= 0.0, np.sqrt(np.maximum(left, 0.0)), np.nan)
    short = np.where(left >= 0.0, 0.0, decibels(np.maximum(square, t * t) / (t * t)))
    return Bound("remaining error", value, short, True)


def _noise_without(
    target_nf_db: Figures, gain_db: Figures, nf_db: Figures, position: int
) -> tuple[Floats, Floats, Floats]:
    """Return the target factor, the gain before each position, and the noise terms with the unknown as noiseless."""
    gain, nf = chain(
        gain_db=finite(gain_db, "gain_db"),
        nf_db=noise_figure(without(nf_db, position, "nf_db", 0.0), "nf_db"),
    )
    before = gain_before(gain)
    return ratio(noise_figure(target_nf_db, "target_nf_db")), before, (ratio(nf) - 1.0) / before


def _stage_intercept(
    target_dbm: Figures, gain_db: Figures, ip_dbm: Figures, position: int, power: float, name: str
) -> Bound:
    """Return the least figure of one position under the law Σ (G_before/IP_i)^power."""
    target = finite(target_dbm, f"target_{name}")
    unknown = without(ip_dbm, position, name, np.inf)
    gain, ip = chain(gain_db=finite(gain_db, "gain_db"), **{name: intercept(unknown, name)})
    before = gain_before(gain) ** power
    others = total(before * ratio(-power * ip))
    left = ratio(-power * target) - others
    shape = np.broadcast(before[position], left).shape
    least = np.divide(before[position], left, out=np.zeros(shape), where=left > 0.0)
    short = target + decibels(others) / power
    what = f"{name.partition('_')[0].upper()} of position {position}"
    return _bound(what, left > 0.0, least, short, at_most=False, scale=1.0 / power)


def _bound(
    what: str,
    feasible: npt.NDArray[np.bool_],
    linear: Floats,
    short_db: Floats,
    *,
    at_most: bool,
    scale: float = 1.0,
) -> Bound:
    """Return a bound in dB from a linear one, with NaN and the shortfall where it is not feasible."""
    known = np.where(feasible, linear, 1.0)
    value = np.where(feasible, decibels(known) * scale, np.nan)
    return Bound(what, value, np.where(feasible, 0.0, np.maximum(short_db, 0.0)), at_most)
