"""What is refused: one message with the place and the remedy."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import pytest
from pydantic import ValidationError

from specflow.budgets import evaluate_budget
from specflow.conditions import parse_map_entry
from specflow.errors import SpecflowError
from specflow.model.base import Document
from specflow.model.budget import Budget, Correlation
from specflow.model.budget_line import ConditionTable, Drift, LineTolerance, Meaning, Trace
from specflow.model.conditions import ConditionMap
from specflow.parameters import load_dictionary
from tests.budgets.chains import POZAR_10_2, a_chain, project_of
from tests.builders import (
    a_block,
    a_budget_line,
    a_conditions_set,
    a_dimension,
    a_quantity,
    a_requirement,
    a_snapshot,
    at_least,
    at_most,
)

DICTIONARY = load_dictionary()


def refusal(
    budget: Budget, *documents: Document, requirements: Sequence[Document] = (), **more: Any
) -> SpecflowError:
    with pytest.raises(SpecflowError) as caught:
        evaluate_budget(budget, project_of(budget, *documents, requirements=requirements, **more), DICTIONARY)
    assert caught.value.where and caught.value.hint, caught.value
    return caught.value


def gains(**more: Any) -> Budget:
    return a_chain({"block": "A", "gain": 10.0, "more": {"gain": more}}, parameter="gain")


def by_frequency(at: tuple[float, ...] = (18.0, 20.0)) -> ConditionTable:
    return ConditionTable(dimension="frequency", dimension_unit="GHz", at=at, values=(10.0,) * len(at))


def test_a_line_without_a_unit() -> None:
    error = refusal(gains(unit=""))
    assert "no unit" in error.message and "A gain" in error.where


def test_a_unit_that_does_not_fit_the_figure() -> None:
    error = refusal(gains(unit="dBm"), limit=at_least(1))
    assert "gain in dBm" in error.message


def test_a_gain_missing_before_a_noisy_position() -> None:
    error = refusal(
        a_chain({"block": "A", "noise_figure": 2.0}, {"block": "B", "gain": 3.0, "noise_figure": 2.0})
    )
    assert "no gain or loss" in error.message and "position 1 (A)" in error.where


def test_a_noise_figure_missing_of_an_active_position() -> None:
    error = refusal(a_chain({"block": "A", "gain": 2.0}, {"block": "B", "gain": 3.0, "noise_figure": 2.0}))
    assert "no noise figure" in error.message and "passive" in error.hint


def test_an_intercept_missing_is_not_taken_as_ideal() -> None:
    error = refusal(a_chain({"block": "A", "gain": 2.0}, parameter="iip3"), limit=at_least(1, "dBm"))
    assert "third-order intercept" in error.message


def test_a_loss_entered_as_positive_gain_of_a_passive_block() -> None:
    error = refusal(a_chain({"block": "FIL", "gain": 2.5, "passive": True}))
    assert "passive block has a gain of 2.5 dB" in error.message


def test_a_negative_loss() -> None:
    assert (
        "insertion_loss is -1 dB"
        in refusal(a_chain({"block": "F", "insertion_loss": -1.0, "passive": True})).message
    )


def test_a_noise_figure_below_that_of_the_passive_loss() -> None:
    error = refusal(a_chain({"block": "F", "insertion_loss": 3.0, "noise_figure": 1.0, "passive": True}))
    assert "below that of the loss" in error.message


@pytest.mark.parametrize(
    ("name", "value", "words"),
    [("noise_figure", -0.5, "below 0 dB"), ("noise_temperature", -3.0, "below 0 K")],
)
def test_noise_below_nothing(name: str, value: float, words: str) -> None:
    assert words in refusal(a_chain({"block": "A", "gain": 3.0, name: value})).message


def test_an_intercept_without_its_port() -> None:
    error = refusal(a_chain({"block": "A", "gain": 3.0, "ip3": 10.0}, parameter="gain"))
    assert "ip3" in error.message and "port" in error.hint


def test_a_double_sideband_figure_in_a_single_sideband_slot() -> None:
    budget = a_chain(*POZAR_10_2)
    lines = tuple(
        line.model_copy(update={"sideband": "DSB"})
        if (line.position, line.parameter) == (3, "noise_figure")
        else line
        for line in budget.lines
    )
    error = refusal(budget.model_copy(update={"lines": lines}))
    assert "double-sideband" in error.message and "MIX noise_figure" in error.where


def test_a_budget_that_serves_nothing_has_no_limit() -> None:
    budget = a_chain(*POZAR_10_2, requirements=())
    assert "no limit" in refusal(budget, requirements=[a_requirement()]).message


def test_a_requirement_that_is_not_there() -> None:
    assert "R-1" in refusal(a_chain(*POZAR_10_2), requirements=[a_requirement("R-9")]).message


def test_a_quantity_that_the_law_does_not_give() -> None:
    requirement = a_requirement("R-1", quantity=a_quantity("evm"), limit=at_most(8, "%"), conditions=None)
    error = refusal(a_chain(*POZAR_10_2), requirements=[requirement])
    assert "gives no evm" in error.message and "noise_figure" in error.hint


def test_a_limit_in_a_unit_that_the_result_cannot_have() -> None:
    requirement = a_requirement(
        "R-1", quantity=a_quantity("noise_figure"), limit=at_most(3, "dBm"), conditions=None
    )
    assert "limit is in dBm" in refusal(a_chain(*POZAR_10_2), requirements=[requirement]).message


def test_a_requirement_at_another_plane_than_the_budget() -> None:
    budget = a_chain(*POZAR_10_2, quantity=a_quantity("noise_figure", plane="LNA input"))
    requirement = a_requirement(
        "R-1", quantity=a_quantity("noise_figure", plane="array face"), limit=at_most(3), conditions=None
    )
    error = refusal(budget, requirements=[requirement])
    assert "plane LNA input" in error.message and "array face" in error.hint


def test_a_table_that_does_not_reach_a_required_point_says_what_it_has_and_what_is_needed() -> None:
    budget = a_chain({"block": "A", "gain": by_frequency()}, parameter="gain", conditions="CS")
    error = refusal(budget, a_conditions_set("CS", a_dimension("frequency", "GHz", values=(17.7, 20.2))))
    assert "from 18 to 20 GHz" in error.message and "17.7 to 20.2 GHz" in error.message
    assert "nothing is extrapolated or clamped" in error.hint


def test_a_drift_beyond_where_it_is_known() -> None:
    drift = Drift(
        dimension="temperature_baseplate",
        dimension_unit="°C",
        slope=-0.02,
        reference=23.0,
        low=-40.0,
        high=85.0,
    )
    budget = a_chain(
        {"block": "A", "gain": 10.0, "more": {"gain": {"drifts": (drift,)}}},
        parameter="gain",
        conditions="CS",
    )
    hot = a_conditions_set("CS", a_dimension("temperature_baseplate", "°C", values=(95.0,)))
    assert "needed is 95 to 95 °C" in refusal(budget, hot).message


def test_system_conditions_without_a_map_to_a_block_that_needs_one() -> None:
    table = ConditionTable(
        dimension="temperature_baseplate", dimension_unit="°C", at=(-40.0, 85.0), values=(10.0, 9.0)
    )
    budget = a_chain({"block": "A", "gain": table}, parameter="gain", conditions="CS")
    error = refusal(budget, a_conditions_set("CS", a_dimension("temperature_ambient", "°C", values=(23.0,))))
    assert "temperature_baseplate" in error.message and "temperature_ambient" in error.message
    assert "condition map" in error.hint and "A gain" in error.where


def test_a_gain_by_the_level_behind_its_own_block_is_a_loop() -> None:
    table = ConditionTable(
        dimension="power_level", dimension_unit="dBm", at=(-20.0, 20.0), values=(10.0, 9.0)
    )
    budget = a_chain({"block": "PA", "gain": table}, parameter="gain", input_level=0.0)
    error = refusal(budget)
    assert "depends on the gain" in error.message and "input_level" in error.hint


def test_a_source_that_depends_on_the_level_it_makes_is_a_loop() -> None:
    table = ConditionTable(
        dimension="input_level", dimension_unit="dBm", at=(-20.0, 20.0), values=(10.0, 9.0)
    )
    budget = a_chain(
        {"block": "SRC", "output_power": table}, {"block": "PA", "gain": 10.0}, parameter="output_power"
    )
    assert "depends on a level of the chain" in refusal(budget, limit=at_least(1, "dBm")).message


def test_an_unknown_block() -> None:
    budget = a_chain(*POZAR_10_2)
    snapshot = a_snapshot(
        a_block("AMP"), a_requirement("R-1", quantity=budget.quantity, conditions=None), budget
    )
    with pytest.raises(SpecflowError, match="block FIL is not in the project") as caught:
        evaluate_budget(budget, snapshot, DICTIONARY)
    assert "position 2" in caught.value.where


def test_unknown_conditions_and_maps() -> None:
    assert "CS-9" in refusal(a_chain(*POZAR_10_2, conditions="CS-9")).message
    assert (
        "CM-9"
        in refusal(a_chain({"block": "A", "gain": 1.0, "noise_figure": 1.0, "condition_map": "CM-9"})).message
    )


def test_requirements_over_several_sets_without_one_of_the_budget() -> None:
    budget = a_chain(*POZAR_10_2, requirements=("R-1", "R-2"))
    requirements = [
        a_requirement(name, quantity=a_quantity("noise_figure"), limit=at_most(3), conditions=conditions)
        for name, conditions in (("R-1", "CS-1"), ("R-2", "CS-2"))
    ]
    error = refusal(budget, a_conditions_set("CS-1"), a_conditions_set("CS-2"), requirements=requirements)
    assert "several conditions sets" in error.message


def test_what_a_quantity_needs_besides_the_lines() -> None:
    for name, unit, words in (
        ("output_power", "dBm", "input level"),
        ("noise_floor", "dBm", "bandwidth"),
        ("g_over_t", "dB/K", "noise source"),
        ("sensitivity", "dBm", "bandwidth"),
    ):
        budget = a_chain(*POZAR_10_2, parameter=name)
        assert words in refusal(budget, limit=at_least(-999, unit)).message


def test_levels_do_not_add_in_a_plain_sum_nor_combine_as_squares() -> None:
    lines = (a_budget_line(1, "A", "eirp", 40.0, unit="dBm"), a_budget_line(2, "B", "eirp", 40.0, unit="dBm"))
    for law, words in (("sum", "levels do not add"), ("root sum of squares", "not of decibels")):
        budget = Budget(id="B-1", requirements=("R-1",), quantity=a_quantity("eirp"), law=law, lines=lines)
        assert words in refusal(budget, limit=at_most(60, "dBm")).message


def test_gains_do_not_add_as_powers() -> None:
    lines = (a_budget_line(1, "A", "gain", 4.0), a_budget_line(2, "B", "gain", 4.0))
    budget = Budget(id="B-1", requirements=("R-1",), quantity=a_quantity(), law="power sum", lines=lines)
    assert "does not add as powers" in refusal(budget, limit=at_most(60)).message


def test_a_line_that_the_law_does_not_take() -> None:
    error = refusal(a_chain({"block": "A", "gain": 1.0, "vswr": 1.2}, parameter="gain"))
    assert "takes no vswr" in error.message


def test_a_growth_allowance_without_a_worse_direction() -> None:
    lines = (a_budget_line(1, "A", "eirp", 40.0, unit="dBm", growth=1.0),)
    budget = Budget(id="B-1", requirements=("R-1",), quantity=a_quantity("eirp"), law="sum", lines=lines)
    assert "worse one" in refusal(budget, limit=at_most(60, "dBm")).message


def test_a_correlation_of_groups_that_no_line_is_in() -> None:
    budget = a_chain(*POZAR_10_2, correlations=(Correlation(first="x", second="y", coefficient=0.5),))
    assert "correlation group x" in refusal(budget).message


def test_a_value_for_a_line_that_is_not_there() -> None:
    budget = a_chain(*POZAR_10_2)
    with pytest.raises(SpecflowError, match="no such line"):
        evaluate_budget(budget, project_of(budget), DICTIONARY, values={(2, "gain"): 1.0})


def test_a_trace_of_a_table_that_is_not_there() -> None:
    budget = a_chain({"block": "A", "gain": Trace(table="T-9", column="Gain")}, parameter="gain")
    assert "T-9" in refusal(budget).message


@pytest.mark.parametrize(
    ("tolerance", "words"),
    [
        ({"minus": 1, "plus": 1, "meaning": "k sigma"}, "says its k"),
        ({"minus": 1, "plus": 2, "meaning": "k sigma", "k": 2}, "same on both sides"),
        ({"minus": 1, "plus": 1, "meaning": "limits", "distribution": "normal"}, "no limits"),
        (
            {"minus": 1, "plus": 1, "meaning": "limits", "distribution": "truncated normal"},
            "says limits, and k",
        ),
        ({"minus": 1, "plus": 1, "distribution": "uniform"}, "say that these are limits"),
        ({"minus": 1, "plus": 1, "meaning": "limits", "k": 2}, "k belongs"),
    ],
)
def test_tolerances_that_contradict_themselves(tolerance: dict[str, Any], words: str) -> None:
    with pytest.raises(ValidationError, match=words):
        LineTolerance.model_validate(tolerance)


def test_documents_that_contradict_themselves() -> None:
    line = a_budget_line(1, "A")
    whole: dict[str, Any] = {"id": "B", "requirements": ("R",), "quantity": a_quantity(), "law": "cascade"}
    for fields, words in (
        ({"lines": (line, line)}, "given twice"),
        ({"positions": ({"order": 2, "block": "A"},), "lines": (line,)}, "not there"),
        ({"positions": ({"order": 1, "block": "B"},), "lines": (line,)}, "names A"),
        ({"positions": ({"order": 1, "block": "A"},) * 2, "lines": (line,)}, "there twice"),
    ):
        with pytest.raises(ValidationError, match=words):
            Budget.model_validate(whole | fields)
    with pytest.raises(ValidationError, match="rising"):
        by_frequency((20.0, 18.0))
    with pytest.raises(ValidationError, match="no correlation group"):
        a_budget_line(shared="per element", correlation_group="heat")
    with pytest.raises(ValidationError):
        a_budget_line(value=float("nan"))


def test_a_map_whose_sources_the_set_does_not_state_leaves_the_blocks_own_terms_alone() -> None:
    table = ConditionTable(
        dimension="temperature_baseplate", dimension_unit="°C", at=(-40.0, 85.0), values=(10.0, 10.0)
    )
    budget = a_chain({"block": "A", "gain": table}, parameter="gain", conditions="CS")
    warm = ConditionMap(
        id="CM", block="A", entries=(parse_map_entry("temperature_baseplate = temperature_ambient + 18 K"),)
    )
    conditions = a_conditions_set("CS", a_dimension("temperature_baseplate", "°C", values=(41.0,)))
    snapshot = project_of(budget, conditions, warm, limit=at_least(1))
    assert evaluate_budget(budget, snapshot, DICTIONARY).of("gain").result == pytest.approx(10.0)


@pytest.mark.parametrize(
    ("first", "second"),
    [
        (("noise_figure", 1.4), ("noise_temperature", 500.0)),
        (("iip3", 5.0), ("oip3", 25.0)),
        (("ip1db", 5.0), ("op1db", 15.0)),
    ],
)
def test_one_figure_of_a_position_stated_in_two_ways(
    first: tuple[str, float], second: tuple[str, float]
) -> None:
    error = refusal(a_chain({"block": "A", "gain": 10.0, first[0]: first[1], second[0]: second[1]}))
    assert f"{second[0]} says again what {first[0]}" in error.message and "A" in error.where


def test_a_source_behind_the_input_of_a_chain() -> None:
    budget = a_chain(
        {"block": "A", "gain": 10.0}, {"block": "PA", "output_power": 30.0}, parameter="output_power"
    )
    error = refusal(budget.model_copy(update={"input_level": -5.0}))
    assert "a source stands at the input" in error.message and "PA output_power (position 2)" in error.where


def test_a_source_beside_an_input_level() -> None:
    budget = a_chain(
        {"block": "A", "output_power": 0.0}, {"block": "B", "gain": 3.0}, parameter="output_power"
    )
    error = refusal(budget.model_copy(update={"input_level": -10.0}))
    assert "input level of -10 dBm besides the source" in error.message


def test_a_temperature_below_absolute_zero_names_block_and_condition() -> None:
    cold = a_conditions_set("CS", a_dimension("temperature_ambient", "degC", values=(-300.0, 20.0)))
    budget = a_chain({"block": "CAB", "insertion_loss": 1.0, "passive": True}, conditions="CS")
    error = refusal(budget, cold)
    assert "temperature_ambient is -26.85 K, below 0 K" in error.message and "CAB" in error.where


def test_correlations_that_cannot_hold_together_name_their_lines_however_the_budget_is_evaluated() -> None:
    sigma = LineTolerance(minus=0.3, plus=0.3, meaning=Meaning.SIGMA, k=2)
    stages = [
        {
            "block": name,
            "gain": 1.0,
            "more": {"gain": {"tolerance": sigma, "correlation_group": name.lower()}},
        }
        for name in ("A", "B", "C")
    ]
    pairs = (("a", "b", 0.9), ("b", "c", 0.9), ("a", "c", -0.9))
    correlations = tuple(Correlation(first=one, second=two, coefficient=value) for one, two, value in pairs)
    error = refusal(a_chain(*stages, parameter="gain", correlations=correlations))
    assert "not positive semi-definite" in error.message and "A gain (position 1)" in error.message
