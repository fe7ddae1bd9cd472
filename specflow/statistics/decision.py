"""Decision rules: how a reading with its uncertainty becomes a verdict.

Notation as in JCGM 106:2012: tolerance limits T (the limit of the requirement), acceptance limits A = T shifted
inwards by the guard band w, standard uncertainty u, expanded uncertainty U = 2u, w = r·U. Equality passes unless
the bound is strict; the guides leave that open (they say below and above), so it is settled here.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.model.requirement import RuleName
from specflow.model.verdict import Verdict

Floats = float | NDArray[np.float64]
Flags = bool | NDArray[np.bool_]

#: The coverage factor at which all guard bands are stated: U = 2u.
COVERAGE_FACTOR = 2.0

# Looking a member up in an enumeration costs as much as an array operation; these are used for every requirement.
_PASS, _FAIL = int(Verdict.PASS), int(Verdict.FAIL)
_INCONCLUSIVE, _UNDECIDABLE = int(Verdict.INCONCLUSIVE), int(Verdict.UNDECIDABLE)
_NOWHERE = np.zeros((), bool)


@dataclass(frozen=True, slots=True)
class AcceptanceInterval:
    """The two sides a reading is held against: the limits, moved by guard band or test tolerance; None is no bound.

    Strict sides exclude equality. ``slack`` is how far from a bound a value may lie and still be equal to it (values
    that were converted).
    """

    lower: Floats | None = None
    upper: Floats | None = None
    lower_strict: Flags = False
    upper_strict: Flags = False
    slack: Floats = 0.0

    def inward(self, shift: Floats) -> AcceptanceInterval:
        """Return the bounds moved inwards by ``shift`` (a guard band), or outwards where it is negative."""
        return AcceptanceInterval(
            None if self.lower is None else self.lower + shift,
            None if self.upper is None else self.upper - shift,
            self.lower_strict,
            self.upper_strict,
            self.slack,
        )

    def side(self, *, lower: bool) -> AcceptanceInterval:
        """Return one side alone."""
        if lower:
            return AcceptanceInterval(self.lower, None, self.lower_strict, False, self.slack)
        return AcceptanceInterval(None, self.upper, False, self.upper_strict, self.slack)

    def relaxed(self, test_tolerance: Floats) -> AcceptanceInterval:
        """Return the test limits: the core limits relaxed by a test tolerance.

        Lower limits go down and upper limits go up; the reading is never touched (3GPP TS 38.141-2 clause 4.1 in
        spirit; the direction for two-sided limits from memory).
        """
        return self.inward(-test_tolerance)

    @property
    def leave_room(self) -> Flags:
        """Whether any value lies between the two sides; a guard band above half the tolerance leaves none."""
        if self.lower is None or self.upper is None:
            return True
        return np.asarray(self.lower <= self.upper + self.slack)

    def met(self, low: NDArray[np.float64], high: NDArray[np.float64]) -> NDArray[np.bool_]:
        """Return where the whole interval [low, high] meets both sides."""
        above = None if self.lower is None else _not_below(low, self.lower, self.slack, self.lower_strict)
        if self.upper is None:
            return np.ones(low.shape, bool) if above is None else above
        below = _not_above(high, self.upper, self.slack, self.upper_strict)
        return below if above is None else above & below

    def missed(self, low: NDArray[np.float64], high: NDArray[np.float64]) -> NDArray[np.bool_]:
        """Return where no value of the interval meets the bounds: all of it lies beyond one side."""
        result = np.zeros(low.shape, bool)
        if self.lower is not None:
            result |= _below(high, self.lower, self.slack, self.lower_strict)
        if self.upper is not None:
            result |= _above(low, self.upper, self.slack, self.upper_strict)
        return result


def _not_below(value: NDArray[np.float64], edge: Floats, slack: Floats, strict: Flags) -> NDArray[np.bool_]:
    if isinstance(strict, bool | np.bool_):
        return np.asarray(value > edge + slack if strict else value >= edge - slack)
    return np.where(strict, value > edge + slack, value >= edge - slack)


def _not_above(value: NDArray[np.float64], edge: Floats, slack: Floats, strict: Flags) -> NDArray[np.bool_]:
    if isinstance(strict, bool | np.bool_):
        return np.asarray(value < edge - slack if strict else value <= edge + slack)
    return np.where(strict, value < edge - slack, value <= edge + slack)


def _below(value: NDArray[np.float64], edge: Floats, slack: Floats, strict: Flags) -> NDArray[np.bool_]:
    if isinstance(strict, bool | np.bool_):
        return np.asarray(value <= edge + slack if strict else value < edge - slack)
    return np.where(strict, value <= edge + slack, value < edge - slack)


def _above(value: NDArray[np.float64], edge: Floats, slack: Floats, strict: Flags) -> NDArray[np.bool_]:
    if isinstance(strict, bool | np.bool_):
        return np.asarray(value >= edge - slack if strict else value > edge + slack)
    return np.where(strict, value >= edge - slack, value > edge + slack)


def decide(
    rule: RuleName,
    low: NDArray[np.float64],
    high: NDArray[np.float64],
    bounds: AcceptanceInterval,
    guard: Floats = 0.0,
) -> NDArray[np.int8]:
    """Return the verdict (codes of ``Verdict``) of each reading [low, high] under a decision rule.

    ``guard`` is the guard band w in the unit of the bounds; NaN where the uncertainty is unknown, which is
    inconclusive under every rule that needs it. Sources: ILAC-G8:09/2019 4.2.1 (simple acceptance), 4.2.2 (binary with
    guard band), 4.2.3 (non-binary); readings as intervals: an interval meets a bound when all of it does and misses it
    when none of it does.
    """
    if rule is RuleName.SIMPLE:
        return _binary(low, high, bounds)
    inner = bounds.inward(guard)
    if rule is RuleName.GUARDED:
        verdicts = _binary(low, high, inner)
    else:
        verdicts = _four_way(low, high, bounds, inner, guard)
    no_room, unknown = _no_room(low, high, bounds, inner, guard), np.isnan(guard)
    if np.count_nonzero(no_room):
        verdicts[np.broadcast_to(no_room, low.shape)] = _UNDECIDABLE
    if np.count_nonzero(unknown):
        verdicts[np.broadcast_to(unknown, low.shape)] = _INCONCLUSIVE
    return verdicts


def _binary(
    low: NDArray[np.float64], high: NDArray[np.float64], bounds: AcceptanceInterval
) -> NDArray[np.int8]:
    verdicts = np.empty(low.shape, np.int8)
    verdicts.fill(_INCONCLUSIVE)
    verdicts[bounds.missed(low, high)] = _FAIL
    verdicts[bounds.met(low, high)] = _PASS
    return verdicts


def _four_way(
    low: NDArray[np.float64],
    high: NDArray[np.float64],
    bounds: AcceptanceInterval,
    inner: AcceptanceInterval,
    guard: Floats,
) -> NDArray[np.int8]:
    verdicts = np.full(low.shape, Verdict.INCONCLUSIVE, np.int8)
    verdicts[bounds.missed(low, high)] = Verdict.CONDITIONAL_FAIL
    verdicts[_beyond_doubt(low, high, bounds, guard)] = Verdict.FAIL
    verdicts[bounds.met(low, high)] = Verdict.CONDITIONAL_PASS
    verdicts[inner.met(low, high)] = Verdict.PASS
    return verdicts


def _beyond_doubt(
    low: NDArray[np.float64], high: NDArray[np.float64], bounds: AcceptanceInterval, guard: Floats
) -> NDArray[np.bool_]:
    """Return where the reading lies outside by more than the guard band: a proven violation."""
    outer = bounds.inward(-np.asarray(guard))
    return AcceptanceInterval(outer.lower, outer.upper, False, False, bounds.slack).missed(low, high)


def _no_room(
    low: NDArray[np.float64],
    high: NDArray[np.float64],
    bounds: AcceptanceInterval,
    inner: AcceptanceInterval,
    guard: Floats,
) -> NDArray[np.bool_]:
    """Return where no reading could pass (w above half the tolerance), unless the violation is proven."""
    room = inner.leave_room
    if room is True or np.all(room):
        return _NOWHERE
    return ~np.asarray(room) & ~_beyond_doubt(low, high, bounds, guard)


def nothing_acceptable(
    low: NDArray[np.float64],
    high: NDArray[np.float64],
    bounds: AcceptanceInterval,
    tightened: Floats,
    guard: Floats = 0.0,
) -> NDArray[np.bool_]:
    """Return where tightening (by excess uncertainty, and a guard band) leaves no value that could be accepted.

    There a reading is undecidable, unless it misses the limits themselves by more than the guard band.
    """
    room = np.asarray(bounds.inward(np.asarray(tightened) + guard).leave_room)
    if room.all():
        return np.zeros(low.shape, bool)
    return np.broadcast_to(~room, low.shape) & ~_beyond_doubt(low, high, bounds, guard)


def expanded(standard_uncertainty: Floats, coverage_factor: float = COVERAGE_FACTOR) -> Floats:
    """Return U = k·u."""
    return coverage_factor * standard_uncertainty


def guard_band(factor: float, standard_uncertainty: Floats) -> Floats:
    """Return w = r·U with U = 2u; 0 when the factor is 0, whatever is known of u."""
    return 0.0 if factor == 0 else factor * COVERAGE_FACTOR * standard_uncertainty


def admissible(standard_uncertainty: Floats, greatest: float) -> Flags:
    """Return whether U = 2u is within the ceiling of a rule that gates evidence by uncertainty (EN 300 328 5.2)."""
    return np.asarray(COVERAGE_FACTOR * standard_uncertainty <= greatest * (1 + 1e-9))


def excess(standard_uncertainty: Floats, greatest: float) -> Floats:
    """Return max(0, U - U_greatest): what is taken off the limit (CISPR 16-4-2 clause 4, from memory)."""
    return np.maximum(0.0, COVERAGE_FACTOR * standard_uncertainty - greatest)


def margins(
    low: NDArray[np.float64], high: NDArray[np.float64], bounds: AcceptanceInterval
) -> NDArray[np.float64]:
    """Return the distance to the bounds: positive is good, the smaller side of two; the worse end of the reading.

    An open end has no distance: there the other end is taken ("at least" for a pass, "at most" for a fail).
    NaN without any bound.
    """
    sides: list[NDArray[np.float64]] = []
    if bounds.lower is not None:
        worse = low if high is low else np.where(np.isneginf(low), high, low)
        sides.append(worse - bounds.lower)
    if bounds.upper is not None:
        worse = low if high is low else np.where(np.isposinf(high), low, high)
        sides.append(bounds.upper - worse)
    if not sides:
        return np.full(low.shape, np.nan)
    return sides[0] if len(sides) == 1 else np.fmin(sides[0], sides[1])


def conformance_probability(
    value: Floats,
    standard_uncertainty: Floats,
    lower: Floats | None = None,
    upper: Floats | None = None,
    *,
    degrees_of_freedom: float | None = None,
) -> Floats:
    """Return the probability that the true value lies within the limits (JCGM 106:2012 clause 7, flat prior).

    p_c = Phi((T_U - y)/u) - Phi((T_L - y)/u); Student's distribution instead of Phi with few degrees of freedom.
    """
    from scipy import special

    def below(limit: Floats) -> Floats:
        z = (limit - value) / standard_uncertainty
        if degrees_of_freedom is None:
            return np.asarray(special.ndtr(z), np.float64)
        return np.asarray(special.stdtr(degrees_of_freedom, z), np.float64)

    return (1.0 if upper is None else below(upper)) - (0.0 if lower is None else below(lower))


def guard_factor_for_probability(probability: Floats) -> Floats:
    """Return z with w = z·u, so that a reading at the acceptance limit conforms with this probability (one side).

    JCGM 106:2012 8.3.2. ISO 14253-1:2017 has 95 % as its default: w = 1.645 u = 0.822 U (k = 2); the editions of
    1998 and 2013 used w = U (split of editions from memory).
    """
    from scipy import special

    return np.asarray(special.ndtri(probability), np.float64)


def specific_risk(guard_factor: Floats, coverage_factor: float = COVERAGE_FACTOR) -> Floats:
    """Return the risk of a false accept of a reading exactly at a one-sided acceptance limit: Phi(-k·r)."""
    from scipy import special

    return np.asarray(special.ndtr(-coverage_factor * np.asarray(guard_factor)), np.float64)


def least_half_tolerance(probability: Floats) -> Floats:
    """Return the smallest T/u (half width over u) at which a centred reading reaches this p_c (JCGM 106 7.4)."""
    from scipy import special

    return np.asarray(special.ndtri((1 + np.asarray(probability)) / 2), np.float64)


def chance_of_any(probability: Floats, count: int) -> Floats:
    """Return 1 - (1-p)^n: the chance that at least one of n independent points goes wrong."""
    return np.asarray(-np.expm1(count * np.log1p(-np.asarray(probability))), np.float64)
