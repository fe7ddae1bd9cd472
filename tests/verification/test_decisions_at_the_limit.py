"""Rules at and near the limit: tightening that leaves nothing, and rounding to the digits of each side."""

from __future__ import annotations

import pytest

from specflow.model.limit import Limit
from specflow.model.requirement import DecisionRule, RuleName
from specflow.model.verdict import RequirementStatus, Verdict
from tests.builders import (
    a_conditions_set,
    a_dimension,
    a_requirement,
    an_evidence_table,
    between,
    some_columns,
    some_evidence,
)
from tests.verification.evaluating import status_of


def one_reading(
    limit: Limit, value: float, rule: DecisionRule, *, u: float | None = None
) -> RequirementStatus:
    """Return the status of one reading."""
    return status_of(
        a_requirement(limit=limit, decision_rule=rule),
        a_conditions_set("CS", a_dimension(values=(27.5,))),
        an_evidence_table(rows=1),
        T_1=some_evidence((value,), u=u, conditions=some_columns(frequency=[27.5])),
    )


TIGHTENED = DecisionRule(greatest_uncertainty=0.5, excess_tightens=True)


@pytest.mark.parametrize(
    ("value", "u", "verdict"),
    [
        (20.0, 1.0, Verdict.UNDECIDABLE),  # U = 2 takes 1.5 dB off both sides of ±1 dB
        (21.5, 1.0, Verdict.FAIL),  # misses the limit itself
        (20.0, 0.5, Verdict.PASS),  # U = 1 leaves ±0.5 dB
        (20.7, 0.5, Verdict.FAIL),
    ],
)
def test_excess_uncertainty_that_leaves_no_interval_is_undecidable(
    value: float, u: float, verdict: Verdict
) -> None:
    assert one_reading(between(19, 21), value, TIGHTENED, u=u).verdict is verdict


def test_a_guard_band_on_top_of_excess_uncertainty_counts_too() -> None:
    rule = DecisionRule(name=RuleName.GUARDED, greatest_uncertainty=0.5, excess_tightens=True)
    assert one_reading(between(19, 21), 20.0, rule, u=0.5).verdict is Verdict.UNDECIDABLE


ROUNDED = DecisionRule(comparison="rounded")


@pytest.mark.parametrize(
    ("low", "high", "value", "verdict"),
    [
        ("19", "21.0", 18.6, Verdict.PASS),  # 19 to whole decibels
        ("19", "21.0", 18.4, Verdict.FAIL),
        ("19", "21.0", 21.04, Verdict.PASS),  # 21.0 to tenths
        ("19", "21.0", 21.06, Verdict.FAIL),
        ("19.0", "21", 18.96, Verdict.PASS),
        ("19.0", "21", 18.94, Verdict.FAIL),
        ("19.0", "21", 21.4, Verdict.PASS),
    ],
)
def test_each_side_rounds_at_its_own_digit(low: str, high: str, value: float, verdict: Verdict) -> None:
    """The rounding method of ASTM E29: the digits of a limit say how well it is meant."""
    assert one_reading(between(low, high), value, ROUNDED).verdict is verdict
