"""Verdicts of interval readings against a slow second route, and the edges of each decision rule."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.model.requirement import RuleName
from specflow.model.verdict import Verdict
from specflow.statistics.decision import AcceptanceInterval, decide, margins

NUMBERS = st.integers(-30, 30).map(lambda number: number / 2)
ENDS = st.one_of(NUMBERS, st.sampled_from([-math.inf, math.inf]))


def verdict_of(rule: RuleName, low: float, high: float, bounds: AcceptanceInterval, guard: float) -> Verdict:
    return Verdict(decide(rule, np.array([low]), np.array([high]), bounds, guard)[0])


def samples(low: float, high: float) -> list[float]:
    """Return members of the interval fine enough to meet every edge at quarters, its ends included."""
    first, last = max(low, -60.0), min(high, 60.0)
    inside = np.arange(first, last + 0.125, 0.25).tolist()
    return [low, *inside, high]


def inside(value: float, bounds: AcceptanceInterval) -> bool:
    above = bounds.lower is None or (value > bounds.lower if bounds.lower_strict else value >= bounds.lower)
    below = bounds.upper is None or (value < bounds.upper if bounds.upper_strict else value <= bounds.upper)
    return above and below


@st.composite
def cases(draw: st.DrawFn) -> tuple[float, float, AcceptanceInterval, float]:
    low, high = sorted((draw(ENDS), draw(ENDS)))
    if low == high and math.isinf(low):
        low, high = -math.inf, math.inf
    edges = sorted((draw(NUMBERS), draw(NUMBERS)))
    lower = draw(st.sampled_from([None, edges[0]]))
    upper = edges[1] if lower is None else draw(st.sampled_from([None, edges[1]]))
    room = (
        lower is None or upper is None or lower < upper
    )  # strict at both ends of nothing could never be met
    strict = (draw(st.booleans()), draw(st.booleans())) if room else (False, False)
    return low, high, AcceptanceInterval(lower, upper, *strict), draw(st.integers(0, 16)) / 2


@given(cases())
def test_simple_rule_agrees_with_asking_every_member_of_the_reading(
    case: tuple[float, float, AcceptanceInterval, float],
) -> None:
    low, high, bounds, _ = case
    members = [inside(value, bounds) for value in samples(low, high)]
    verdict = verdict_of(RuleName.SIMPLE, low, high, bounds, 0.0)
    if all(members):
        assert verdict is Verdict.PASS
    elif not any(members):
        assert verdict is Verdict.FAIL
    else:
        assert verdict is Verdict.INCONCLUSIVE


@given(cases())
def test_four_way_rule_agrees_with_the_zones_of_a_point_reading(
    case: tuple[float, float, AcceptanceInterval, float],
) -> None:
    low, _, bounds, guard = case
    if math.isinf(low):
        low = 0.0
    verdict = verdict_of(RuleName.FOUR_WAY, low, low, bounds, guard)
    inner, outer = bounds.inward(guard), bounds.inward(-guard)
    outer = AcceptanceInterval(outer.lower, outer.upper)
    if not inside(low, outer):
        assert verdict is Verdict.FAIL
    elif not bool(np.all(inner.leave_room)):
        assert verdict is Verdict.UNDECIDABLE
    elif inside(low, inner):
        assert verdict is Verdict.PASS
    else:
        assert verdict is (Verdict.CONDITIONAL_PASS if inside(low, bounds) else Verdict.CONDITIONAL_FAIL)


@given(cases())
def test_a_guarded_pass_is_a_simple_pass(case: tuple[float, float, AcceptanceInterval, float]) -> None:
    low, high, bounds, guard = case
    if verdict_of(RuleName.GUARDED, low, high, bounds, guard) is Verdict.PASS:
        assert verdict_of(RuleName.SIMPLE, low, high, bounds, guard) is Verdict.PASS
        assert verdict_of(RuleName.FOUR_WAY, low, high, bounds, guard) is Verdict.PASS


def test_a_reading_below_minus_90_proves_at_most_minus_87_and_fails_at_least_minus_85() -> None:
    below = -math.inf, -90.0
    assert verdict_of(RuleName.SIMPLE, *below, AcceptanceInterval(upper=-87.0), 0) is Verdict.PASS
    assert verdict_of(RuleName.SIMPLE, *below, AcceptanceInterval(lower=-85.0), 0) is Verdict.FAIL
    assert verdict_of(RuleName.SIMPLE, *below, AcceptanceInterval(upper=-95.0), 0) is Verdict.INCONCLUSIVE
    assert verdict_of(RuleName.SIMPLE, *below, AcceptanceInterval(lower=-95.0), 0) is Verdict.INCONCLUSIVE


@pytest.mark.parametrize("rule", [RuleName.GUARDED, RuleName.FOUR_WAY])
def test_without_uncertainty_a_rule_that_needs_it_is_inconclusive(rule: RuleName) -> None:
    assert verdict_of(rule, 1e6, 1e6, AcceptanceInterval(lower=0.0), math.nan) is Verdict.INCONCLUSIVE


def test_no_room_inside_the_guard_bands_is_undecidable_but_a_proven_violation_fails() -> None:
    bounds = AcceptanceInterval(-0.5, 0.5)
    for rule in (RuleName.GUARDED, RuleName.FOUR_WAY):
        assert verdict_of(rule, 0.0, 0.0, bounds, 0.6) is Verdict.UNDECIDABLE
        assert verdict_of(rule, 0.9, 0.9, bounds, 0.6) is Verdict.UNDECIDABLE
        assert verdict_of(rule, 1.2, 1.2, bounds, 0.6) is Verdict.FAIL


def test_slack_forgives_what_a_conversion_did_and_no_more() -> None:
    bounds = AcceptanceInterval(lower=20.0, slack=1e-9)
    assert verdict_of(RuleName.SIMPLE, 20 - 5e-10, 20 - 5e-10, bounds, 0) is Verdict.PASS
    assert verdict_of(RuleName.SIMPLE, 20 - 2e-9, 20 - 2e-9, bounds, 0) is Verdict.FAIL
    strict = AcceptanceInterval(lower=20.0, lower_strict=True, slack=1e-9)
    assert verdict_of(RuleName.SIMPLE, 20 + 5e-10, 20 + 5e-10, strict, 0) is Verdict.FAIL


def test_margin_is_the_smaller_side_and_the_worse_end() -> None:
    low, high = np.array([18.0, 21.0, -np.inf]), np.array([18.5, 21.0, 18.0])
    found = margins(low, high, AcceptanceInterval(17.0, 22.0))
    assert found.tolist() == [1.0, 1.0, 1.0]
