"""Points proved: ranges, conditions not stated, gates, decision rules; k of n is never more than was shown."""

from __future__ import annotations

import numpy as np
import pytest

from specflow.limits import parse_limit
from specflow.model.conditions import Span
from specflow.model.requirement import DecisionRule, RuleName
from specflow.model.verdict import Compliance, Label, PointsState, Verdict
from tests.builders import (
    a_conditions_set,
    a_declared_value,
    a_dimension,
    a_quantity,
    a_requirement,
    a_value_column,
    an_evidence_table,
    at_least,
    at_most,
    between,
    some_columns,
    some_evidence,
)
from tests.verification.evaluating import results_of, status_of

NAN = float("nan")


def ranged(step: float = 1.0) -> object:
    span = Span(low=27.0, high=30.0, step=step)
    return a_conditions_set("CS", a_dimension(span=span, tolerance=0.01))


def sweep(frequency: list[float], values: list[float], **fields: object) -> object:
    return some_evidence(values, conditions=some_columns(frequency=frequency), **fields)


def test_a_range_is_proved_with_both_ends_and_no_gap_above_the_step() -> None:
    status = status_of(ranged(), T_1=sweep([27, 28, 29, 30], [21, 21, 21, 21]))
    assert (status.k, status.n) == (1, 1)


def test_a_range_with_a_gap_is_missing_evidence_not_a_pass() -> None:
    status = status_of(ranged(), T_1=sweep([27, 28, 30], [21, 21, 21]))
    assert (status.k, status.n, status.n_missing, status.n_failing) == (0, 1, 1, 0)
    assert status.compliance is Compliance.NOT_DETERMINED


def test_a_failing_value_inside_a_range_governs_it() -> None:
    """EX-007 of metrology_cases.json in spirit: both ends of the range pass, the interior does not."""
    status = status_of(ranged(), T_1=sweep([27, 28, 29, 30], [21, 19, 21, 21]))
    assert status.label is Label.FAILING
    assert status.governing is not None
    assert status.governing.record is not None
    assert status.governing.record.row == 1


def test_worst_over_evidence_is_not_worst_over_the_required_set() -> None:
    """EX-006 of metrology_cases.json: 24 of 27 corners with evidence are incomplete, however good they are."""
    corners = a_conditions_set(
        "CS",
        a_dimension(values=(27.5, 28.75, 30.0)),
        a_dimension("temperature_ambient", "°C", values=(-40.0, 25.0, 85.0), tolerance=1.0),
        a_dimension("supply_voltage", "V", values=(4.5, 5.0, 5.5), tolerance=0.05),
    )
    grid = np.array(np.meshgrid([27.5, 28.75, 30], [-40, 25, 85], [4.5, 5, 5.5], indexing="ij")).reshape(
        3, -1
    )[:, :24]
    conditions = some_columns(frequency=grid[0], temperature_ambient=grid[1], supply_voltage=grid[2])
    status = status_of(corners, T_1=some_evidence([25.0] * 24, conditions=conditions))
    assert (status.k, status.n) == (24, 27)
    assert status.k / status.n == pytest.approx(0.888888888889)
    assert status.compliance is Compliance.NOT_DETERMINED
    assert status.label is Label.PARTIALLY_VERIFIED


def test_a_record_that_does_not_state_a_required_condition_never_matches() -> None:
    two = a_conditions_set("CS", a_dimension(), a_dimension("temperature_ambient", "°C", values=(85.0,)))
    status = status_of(two)
    assert status.k == 0
    assert [one.kind for one in status.mismatches] == ["conditions"]
    assert "temperature ambient" in status.mismatches[0].what


def test_a_requirement_without_a_conditions_set_has_one_point_that_any_record_serves() -> None:
    status = status_of(a_requirement(conditions=None))
    assert (status.k, status.n) == (1, 1)


def test_an_unknown_conditions_set_is_said_and_nothing_is_determined() -> None:
    status = status_of(a_requirement(conditions="CS-9"))
    assert status.compliance is Compliance.NOT_DETERMINED
    assert any("CS-9 is not in the project" in remark for remark in status.remarks)


def test_readings_within_the_tolerance_of_two_points_serve_the_nearest_and_are_named() -> None:
    near = a_conditions_set("CS", a_dimension(values=(28.0, 28.01), tolerance=0.02))
    status = status_of(near, T_1=sweep([28.0, 28.012], [21, 21]))
    assert status.k == 2
    assert {one.row for one in status.ambiguous} == {0, 1}


def test_a_reading_with_an_empty_cell_proves_nothing() -> None:
    status = status_of(T_1=some_evidence([21, NAN, 21]))
    assert (status.k, status.n_missing) == (2, 1)


# Limits that depend on conditions


def limited(text: str, unit: str = "dB") -> object:
    return a_requirement(limit=parse_limit(text, unit_hint=unit))


def test_a_table_of_limits_is_evaluated_at_the_required_point() -> None:
    table = limited(">= 20 dB if frequency <= 28 GHz")
    status = status_of(table, T_1=some_evidence([19, 10, 10]))
    assert (status.k, status.n_failing) == (2, 1)


def test_a_gate_that_is_shut_proves_the_point_without_evidence_and_without_a_margin() -> None:
    gated = limited(">= 20 dB if frequency <= 28 GHz")
    status = status_of(gated, T_1=sweep([27.5], [21]))
    assert status.k == 3
    points = status.activities[0].items["LNA-1"]
    assert points.verdict.tolist() == [Verdict.PASS, Verdict.NOT_TRIGGERED, Verdict.NOT_TRIGGERED]
    assert np.isnan(points.margin[1:]).all()


def test_a_limit_whose_input_is_missing_is_inconclusive_and_says_which() -> None:
    status = status_of(limited(">= gain_rated[dB]"))
    assert status.label is Label.INCONCLUSIVE
    assert any("gain_rated" in remark for remark in status.remarks)


def test_a_limit_relative_to_a_declared_value() -> None:
    declared = a_declared_value("gain_rated", value=21.5, unit="dB")
    status = status_of(limited(">= gain_rated[dB] - 1 dB"), declared, T_1=some_evidence([20.5, 20.4, 21]))
    assert (status.k, status.n_failing) == (2, 1)


# Decision rules on whole requirements


def ruled(name: RuleName, **fields: object) -> object:
    return a_requirement(decision_rule=DecisionRule(name=name, **fields))


def test_equality_passes_unless_the_limit_is_strict() -> None:
    assert status_of(T_1=some_evidence([20, 20, 20])).k == 3
    strict = a_requirement(limit=at_least(20, strict=True))
    assert status_of(strict, T_1=some_evidence([20, 20, 20])).n_failing == 3


def test_guarded_rule_takes_the_guard_band_off_and_reports_both_margins() -> None:
    status = status_of(ruled(RuleName.GUARDED), T_1=some_evidence([21, 20.3, 21], u=0.2))
    assert (status.k, status.n_failing) == (2, 1)
    assert status.governing is not None
    assert status.governing.margin == pytest.approx(0.3)
    assert status.governing.guarded_margin == pytest.approx(-0.1)
    assert status.marginal


def test_guarded_rule_without_uncertainty_is_inconclusive() -> None:
    status = status_of(ruled(RuleName.GUARDED))
    assert status.label is Label.INCONCLUSIVE
    assert any("needs the uncertainty" in remark for remark in status.remarks)


def test_four_way_rule_says_all_four_and_a_conditional_pass_counts_where_it_may() -> None:
    readings = some_evidence([21, 20.1, 19.9], u=0.2)
    status = status_of(ruled(RuleName.FOUR_WAY), T_1=readings)
    verdicts = status.activities[0].items["LNA-1"].verdict.tolist()
    assert verdicts == [Verdict.PASS, Verdict.CONDITIONAL_PASS, Verdict.CONDITIONAL_FAIL]
    assert (status.k, status.n_failing) == (2, 1)
    strict = status_of(ruled(RuleName.FOUR_WAY, conditional_pass_counts=False), T_1=readings)
    assert (strict.k, strict.n_missing) == (1, 1)


def test_undecidable_when_the_guard_bands_leave_no_room() -> None:
    narrow = a_requirement(limit=between(19.5, 20.5), decision_rule=DecisionRule(name=RuleName.GUARDED))
    assert status_of(narrow, T_1=some_evidence([20, 20, 20], u=0.3)).label is Label.UNDECIDABLE


def test_evidence_above_the_uncertainty_ceiling_is_not_admissible() -> None:
    """DR-051 of metrology_cases.json: no verdict comes from it."""
    ceiling = ruled(RuleName.SIMPLE, greatest_uncertainty=0.3)
    status = status_of(ceiling, T_1=some_evidence([21, 21, 21], u=0.2))
    assert (status.verdict, status.n_missing) == (Verdict.NONE, 3)
    assert any("not admissible" in remark for remark in status.remarks)


def test_excess_uncertainty_tightens_the_limit() -> None:
    """The form of DR-053: U 6.5 against 5.2 takes 1.3 dB off."""
    tight = a_requirement(
        limit=at_most(46), decision_rule=DecisionRule(greatest_uncertainty=5.2, excess_tightens=True)
    )
    status = status_of(tight, T_1=some_evidence([45.0, 44.7, 44.6], u=3.25))
    assert (status.k, status.n_failing) == (2, 1)


def test_a_test_tolerance_relaxes_once_and_the_margin_stays_that_to_the_core_limit() -> None:
    relaxed = a_requirement(limit=parse_limit(">= 20 dB test tolerance 0.5 dB"))
    status = status_of(relaxed, T_1=some_evidence([19.5, 21, 21]))
    assert status.k == 3
    assert status.governing is not None
    assert (status.governing.margin, status.governing.guarded_margin) == (-0.5, 0.0)
    assert status_of(relaxed, T_1=some_evidence([19.4, 21, 21])).n_failing == 1


def test_the_rounding_method_compares_at_the_digits_of_the_limit() -> None:
    rounded = a_requirement(limit=at_most("2.5"), decision_rule=DecisionRule(comparison="rounded"))
    absolute = a_requirement(limit=at_most("2.5"))
    readings = some_evidence([2.54, 2.55, 2.5])
    assert status_of(rounded, T_1=readings).n_failing == 1
    assert status_of(absolute, T_1=readings).n_failing == 2


def test_values_are_compared_as_written_when_units_agree() -> None:
    status = status_of(a_requirement(limit=at_least("20.3")), T_1=some_evidence([20.3, 20.3, 20.299999999]))
    assert (status.k, status.n_failing) == (2, 1)


def test_values_that_were_converted_are_equal_within_a_billionth_of_a_decibel() -> None:
    power = a_requirement(quantity=a_quantity("output_power"), limit=at_least("30", "dBm"))
    column = a_value_column("Power", quantity=a_quantity("output_power"), unit="W")
    table = an_evidence_table(values=(column,))
    status = status_of(power, table, T_1=some_evidence({"Power": [1.0, 1 - 1e-11, 0.9999]}))
    assert (status.k, status.n_failing) == (2, 1)


def test_without_uncertainty_the_house_threshold_flags_marginal() -> None:
    assert status_of(T_1=some_evidence([20.4, 21, 21])).label is Label.MARGINAL
    assert status_of(T_1=some_evidence([20.6, 21, 21])).label is Label.READY


def test_the_smallest_plain_margin_is_reported_beside_the_governing_point() -> None:
    guarded = ruled(RuleName.GUARDED)
    status = status_of(guarded, T_1=some_evidence([20.6, 21.0, 25], u=[0.05, 0.4, 0.1]))
    assert status.governing is not None
    assert status.smallest_margin is not None
    assert (status.governing.point, status.smallest_margin.point) == (1, 0)


def test_states_of_an_activity() -> None:
    assert results_of().of("R-1").activities[0].state is PointsState.PLANNED
    assert status_of(T_1=some_evidence([21, NAN, NAN])).activities[0].state is PointsState.PARTIALLY_VERIFIED
    assert status_of().activities[0].state is PointsState.FULLY_COVERED
