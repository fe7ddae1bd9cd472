"""Readings judged: every reading that serves a required point, held against the limit at that point.

A limit that depends on conditions is evaluated at the conditions that the point requires; what the conditions set
does not name (the axis of a mask, the actual frequency along a range) is taken from the record.
"""

from __future__ import annotations

from dataclasses import dataclass
from decimal import Decimal
from functools import reduce

import numpy as np
from numpy.typing import NDArray

from specflow.limits.bounds import ALL_FLAG, NO_FLAG, Bounds, LimitContext
from specflow.limits.conversion import unit_of
from specflow.limits.evaluation import evaluate_limit
from specflow.model.expression import Expression, Negative, Number
from specflow.model.limit import Between, Bound, Limit
from specflow.model.project import Policy
from specflow.model.requirement import DecisionRule, RuleName
from specflow.model.verdict import Verdict
from specflow.statistics.decision import (
    AcceptanceInterval,
    Floats,
    admissible,
    decide,
    excess,
    guard_band,
    margins,
    nothing_acceptable,
)
from specflow.statistics.rounding import digit_of, round_values
from specflow.units import Unit, closeness, converter, parse_unit, tolerance_unit
from specflow.verification.bandwidths import in_bandwidth_of_limit
from specflow.verification.limit_inputs import is_plain
from specflow.verification.records import Records

Array = NDArray[np.float64]
Rows = NDArray[np.intp]
Codes = NDArray[np.int8]
Flags = NDArray[np.bool_]
NO_BOUND = np.array([np.nan])
_PASS, _FAIL = int(Verdict.PASS), int(Verdict.FAIL)


@dataclass(frozen=True, slots=True)
class Served:
    """Pairs (p,) before they are judged: which reading serves which point, its interval and standard uncertainty."""

    record: Rows
    point: Rows
    low: Array
    high: Array
    u: Array

    def take(self, kept: NDArray[np.bool_] | Rows) -> Served:
        """Return the pairs chosen."""
        return Served(self.record[kept], self.point[kept], self.low[kept], self.high[kept], self.u[kept])


@dataclass(frozen=True, slots=True)
class Readings:
    """Pairs (p,): reading ``record[i]`` serves ``point[i]``; sorted by point.

    ``low``, ``high`` as read and ``lower``, ``upper`` (the core limit, NaN where a side has no bound; one value where
    it is the same everywhere) are in the unit of the limit; ``u``, ``margin``, ``guarded`` in its tolerance unit, NaN
    where there is none. ``margin`` is the distance to the core limit; ``guarded`` that to the acceptance limit (guard
    band, test tolerance, excess uncertainty). ``marginal``: a pass or fail nearer to the limit than U, or than the
    threshold of the project without one. ``why`` are sentences about what could not be decided. ``served`` are the
    readings before anything was done to them (``low`` and ``high`` are in the bandwidth of the limit).
    """

    served: Served
    record: Rows
    point: Rows
    low: Array
    high: Array
    u: Array
    lower: Array
    upper: Array
    verdict: Codes
    margin: Array
    guarded: Array
    marginal: NDArray[np.bool_]
    why: tuple[str, ...] = ()

    @property
    def size(self) -> int:
        """How many pairs there are."""
        return len(self.record)


@dataclass(frozen=True, slots=True)
class Judgement:
    """What readings are held against: the limit, the rule, the house's thresholds, the declared values."""

    limit: Limit
    unit: str
    rule: DecisionRule
    policy: Policy
    context: LimitContext

    @property
    def parsed_unit(self) -> Unit:
        """The unit of the limit."""
        return unit_of(self.unit or "1")


def serving(records: Records, record: Rows, point: Rows) -> tuple[Rows, Rows]:
    """Return the pairs of record and point of which the record has a value and may still count."""
    if records.usable is None:
        return record, point
    kept = records.usable[record]
    return record[kept], point[kept]


def readings_of(records: Records, record: Rows, point: Rows) -> Served:
    """Return the readings that serve points, as recorded."""
    low = records.low[record]
    high = low if records.high is records.low else records.high[record]
    u = np.full(len(record), np.nan) if records.u is None else records.u[record]
    return Served(record, point, low, high, u)


def judge(records: Records, served: Served, judgement: Judgement) -> Readings:
    """Judge the readings; the context of the judgement has one row for each, or the limit needs no input."""
    bounds = evaluate_limit(judgement.limit, judgement.context)
    low, high, lost = in_bandwidth_of_limit(
        records, served.record, served.low, served.high, bounds.bandwidth_hz, judgement.parsed_unit
    )
    exact = records.exact if isinstance(records.exact, bool) else records.exact[served.record]
    return held_against(bounds, served, (low, high, lost), judgement, exact=exact)


def held_against(
    bounds: Bounds,
    served: Served,
    seen: tuple[Array, Array, Flags],
    judgement: Judgement,
    *,
    exact: Flags | bool,
) -> Readings:
    """Judge readings by the bounds that the limit sets for them.

    ``seen`` are the values in the bandwidth of the limit, and where they cannot be had; ``exact`` says which of them
    are compared as written.
    """
    u = served.u
    low, high, lost = seen
    compared, why = _compared(low, high, judgement)
    shift, inadmissible = _shift(u, judgement, bounds)
    guard = 0.0 if judgement.rule.name is RuleName.SIMPLE else guard_band(judgement.rule.guard_factor, u)
    verdict, margin = _decided(compared, _core(bounds, judgement, exact), shift, guard, judgement.rule)
    guarded = margin - shift - guard
    _overrule(verdict, np.isnan(shift) | lost if isinstance(shift, np.ndarray) else lost, inadmissible)
    whys = [*why, *_unsure_words(u, judgement, lost)]
    if not _everywhere(bounds):
        whys.extend(_outside(bounds, verdict, margin, guarded))
    if why:
        verdict[:] = Verdict.INCONCLUSIVE
    return Readings(
        served,
        served.record,
        served.point,
        low,
        high,
        u,
        NO_BOUND if bounds.lower is None else bounds.lower,
        NO_BOUND if bounds.upper is None else bounds.upper,
        verdict,
        margin,
        guarded,
        _marginal(verdict, margin, u, bounds, judgement),
        tuple(dict.fromkeys(whys)),
    )


def _core(bounds: Bounds, judgement: Judgement, exact: NDArray[np.bool_] | bool) -> AcceptanceInterval:
    """Return the core limit as sides, with the slack that values, or limits, that were computed are allowed."""
    lower, upper = bounds.lower, bounds.upper
    slack: Floats = 0.0
    if not (_as_written(judgement) and np.all(exact)):
        sizes = [
            closeness(side, judgement.parsed_unit, converted=True)
            for side in (lower, upper)
            if side is not None
        ]
        slack = reduce(np.maximum, sizes) if sizes else 0.0
    return AcceptanceInterval(lower, upper, _flag(bounds.lower_strict), _flag(bounds.upper_strict), slack)


def _as_written(judgement: Judgement) -> bool:
    """Whether the limit is compared as it was typed: plain numbers, nothing added or taken off."""
    limit, rule = judgement.limit, judgement.rule
    changed = rule.greatest_uncertainty or limit.test_tolerance or limit.rounding
    return rule.name is RuleName.SIMPLE and not changed and is_plain(limit)


def _flag(flags: NDArray[np.bool_]) -> NDArray[np.bool_] | bool:
    return bool(flags[0]) if flags.size == 1 else flags


#: Readings (low, high) as they are compared with the lower and the upper side of a limit.
Seen = tuple[tuple[Array, Array], tuple[Array, Array]]


def _decided(
    seen: Seen, core: AcceptanceInterval, shift: Floats, guard: Floats, rule: DecisionRule
) -> tuple[Codes, Array]:
    """Return verdict and plain margin of the readings; each side has its own where they are rounded differently."""
    of_lower, of_upper = seen
    if of_lower is of_upper:
        verdict = decide(rule.name, *of_lower, core.inward(shift), guard)
        margin = margins(*of_lower, core)
    else:
        lower, upper = core.side(lower=True), core.side(lower=False)
        verdict = np.maximum(
            decide(rule.name, *of_lower, lower.inward(shift), guard),
            decide(rule.name, *of_upper, upper.inward(shift), guard),
        )
        margin = np.fmin(margins(*of_lower, lower), margins(*of_upper, upper))
    if rule.excess_tightens or of_lower is not of_upper:
        verdict[nothing_acceptable(*of_lower, core, shift, guard)] = Verdict.UNDECIDABLE
    return verdict, margin


def _compared(low: Array, high: Array, judgement: Judgement) -> tuple[Seen, list[str]]:
    """Return the values that are compared with either side: as they are, or rounded as that side is written.

    The rounding method (ASTM E29) rounds to the last digit of the limit; the two sides may be written to different
    ones.
    """
    as_read = low, high
    if judgement.rule.comparison == "absolute":
        return (as_read, as_read), []
    texts = _limit_digits(judgement.limit)
    if texts is None:
        words = "the rounding method needs a limit written as a number, or with a rounding step"
        return (as_read, as_read), [words]
    exact = judgement.limit.rounding is None
    first, second = (digit_of(text) if exact else abs(digit_of(text)) for text in texts)
    of_lower = _rounded(low, high, first)
    return (of_lower, of_lower if first == second else _rounded(low, high, second)), []


def _rounded(low: Array, high: Array, step: Decimal) -> tuple[Array, Array]:
    seen = round_values(low, step)
    return seen, seen if high is low else round_values(high, step)


def _limit_digits(limit: Limit) -> tuple[str, str] | None:
    """Return the numbers whose last digits the two sides are rounded to."""
    if limit.rounding is not None:
        return limit.rounding.step.text, limit.rounding.step.text
    match limit.tree:
        case Bound(value=Number(text=text)) | Bound(value=Negative(operand=Number(text=text))):
            return text, text
        case Between(lower=lower, upper=upper):
            texts = _number_text(lower), _number_text(upper)
            return None if texts[0] is None or texts[1] is None else (texts[0], texts[1])
    return None


def _number_text(value: Expression) -> str | None:
    match value:
        case Number(text=text) | Negative(operand=Number(text=text)):
            return text
    return None


def _shift(u: Array, judgement: Judgement, bounds: Bounds) -> tuple[Floats, NDArray[np.bool_]]:
    """Return how far the limit moves inwards before the guard band, and which readings are not admissible.

    Excess uncertainty tightens (positive), a test tolerance relaxes (negative); the core limit has neither in it.
    """
    rule = judgement.rule
    shift: Floats = -_test_tolerance(judgement.limit, bounds.unit)
    nothing = np.zeros((), bool)
    if rule.greatest_uncertainty is None:
        return shift, nothing
    if rule.excess_tightens:
        return shift + excess(u, rule.greatest_uncertainty), nothing
    known = ~np.isnan(u)
    refused = known & ~np.asarray(admissible(u, rule.greatest_uncertainty))
    return np.asarray(np.where(known, shift, np.nan)), np.asarray(refused)


def _test_tolerance(limit: Limit, unit: str) -> float:
    tolerance = limit.test_tolerance
    if tolerance is None or tolerance.place == "stimulus":
        return 0.0
    amount = tolerance.amount
    if not amount.unit:
        return amount.value
    difference = tolerance_unit(unit_of(unit or "1"))
    return converter(parse_unit(amount.unit), difference, difference=True)(amount.value)


def _overrule(verdict: Codes, unsure: NDArray[np.bool_], inadmissible: NDArray[np.bool_]) -> None:
    if np.count_nonzero(unsure):
        verdict[np.broadcast_to(unsure, verdict.shape)] = Verdict.INCONCLUSIVE
    if np.count_nonzero(inadmissible):
        verdict[inadmissible] = Verdict.NONE


def _unsure_words(u: Array, judgement: Judgement, lost: NDArray[np.bool_]) -> list[str]:
    rule = judgement.rule
    words = []
    needed = (
        rule.name is not RuleName.SIMPLE and rule.guard_factor > 0
    ) or rule.greatest_uncertainty is not None
    missing = int(np.count_nonzero(np.isnan(u))) if needed else 0
    if missing:
        words.append(f"the rule needs the uncertainty, and {missing} readings have none")
    if rule.greatest_uncertainty is not None and not rule.excess_tightens:
        above = int(np.count_nonzero(~admissible(u, rule.greatest_uncertainty) & ~np.isnan(u)))
        if above:
            most = 2 * float(np.nanmax(u))
            words.append(
                f"{above} readings are not admissible: U up to {most:.3g}, allowed is {rule.greatest_uncertainty:g}"
            )
    if np.count_nonzero(lost):
        words.append(
            "the limit states a measurement bandwidth: some readings state none, or are not in dB and of another"
        )
    return words


def _everywhere(bounds: Bounds) -> bool:
    """Whether the limit asks for something known of every reading."""
    if bounds.applies is ALL_FLAG and bounds.unknown is NO_FLAG:
        return True
    return bool(bounds.applies.all() and not bounds.unknown.any())


def _outside(bounds: Bounds, verdict: Codes, margin: Array, guarded: Array) -> list[str]:
    """Settle readings that a limit does not reach or is not triggered for, or for which it is unknown.

    Where nothing is required on purpose the limit is *not triggered*. A reading beside the mask, or in no case of the
    table, is none of this limit's: it proves nothing.
    """
    beside = np.broadcast_to(bounds.outside & ~bounds.unknown, verdict.shape)
    closed = np.broadcast_to(~bounds.applies & ~bounds.unknown, verdict.shape) & ~beside
    unknown = np.broadcast_to(bounds.unknown, verdict.shape)
    verdict[closed] = Verdict.NOT_TRIGGERED
    verdict[beside] = Verdict.NONE
    verdict[unknown] = Verdict.INCONCLUSIVE
    for values in (margin, guarded):
        values[beside | closed | unknown] = np.nan
    count = int(np.count_nonzero(beside))
    words = []
    if count:
        words.append(
            f"{count} reading{'s' * (count != 1)} beside the limit: outside its mask, or in no case of it"
        )
    if unknown.any() and bounds.why:
        words.append(f"the limit is unknown for some readings: {bounds.why}")
    return words


def _marginal(
    verdict: Codes, margin: Array, u: Array, bounds: Bounds, judgement: Judgement
) -> NDArray[np.bool_]:
    near = 2 * u
    unknown = near != near
    if np.count_nonzero(unknown):
        near = np.where(unknown, _house_threshold(bounds, judgement), near)
    return np.asarray((np.abs(margin) < near) & ((verdict == _PASS) | (verdict == _FAIL)))


def _house_threshold(bounds: Bounds, judgement: Judgement) -> Floats:
    if judgement.parsed_unit.is_log:
        return judgement.policy.marginal_db
    sizes = [
        np.where(np.isfinite(side), np.abs(side), 0.0)
        for side in (bounds.lower, bounds.upper)
        if side is not None
    ]
    if not sizes:
        return 0.0
    return np.asarray(judgement.policy.marginal_relative * reduce(np.maximum, sizes))
