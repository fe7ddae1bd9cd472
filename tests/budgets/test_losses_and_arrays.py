"""Sums of losses, and antennas of N elements: each against the textbook by hand."""

from __future__ import annotations

import math
from typing import Any

import pytest

from specflow.budgets import evaluate_budget, monte_carlo
from specflow.budgets.solve import solve_line
from specflow.errors import SpecflowError
from specflow.limits import parse_limit
from specflow.model.budget import Budget
from specflow.model.budget_line import Distribution, LineTolerance, Meaning
from specflow.parameters import load_dictionary
from tests.budgets.chains import a_chain, project_of
from tests.builders import at_least, at_most

DICTIONARY = load_dictionary()


def result(budget: Budget, **more: Any) -> float:
    found = evaluate_budget(budget, project_of(budget, **more), DICTIONARY)
    return float(found.of(budget.quantity.parameter).result[0])


def losses(**more: Any) -> Budget:
    return a_chain(
        {"block": "CAB", "insertion_loss": 1.0, "more": {"insertion_loss": more}},
        {"block": "FIL", "insertion_loss": 2.0},
        parameter="insertion_loss",
        law="sum",
    )


def test_losses_add_to_a_loss_and_are_held_against_the_limit_with_the_right_sign() -> None:
    budget = losses()
    project = project_of(budget, limit=at_most(2.5))
    found = evaluate_budget(budget, project, DICTIONARY).of("insertion_loss")
    assert found.result[0] == pytest.approx(3.0)
    assert found.served[0].margin[0] == pytest.approx(-0.5)


def test_a_gain_is_taken_off_a_loss_as_a_loss_is_off_a_gain() -> None:
    stages = {"block": "CAB", "insertion_loss": 4.0}, {"block": "AMP", "gain": 3.0}
    assert result(a_chain(*stages, parameter="insertion_loss", law="sum")) == pytest.approx(1.0)
    assert result(a_chain(*stages, parameter="gain", law="sum"), limit=at_least(-9)) == pytest.approx(-1.0)


def test_a_loss_in_a_sum_of_losses_solved_for_is_a_loss() -> None:
    budget = losses()
    solution = solve_line(budget, project_of(budget, limit=at_most(2.5)), DICTIONARY, (1, "insertion_loss"))
    assert solution.at_most is not None and solution.at_most.value == pytest.approx(0.5)


@pytest.mark.parametrize("law", ["sum", "cascade"])
def test_a_negative_loss_is_refused_by_every_law(law: str) -> None:
    budget = a_chain({"block": "CAB", "insertion_loss": -1.0}, parameter="gain", law=law)
    with pytest.raises(SpecflowError, match="insertion_loss is -1 dB"):
        evaluate_budget(budget, project_of(budget, limit=at_least(-9)), DICTIONARY)


def test_a_passive_block_with_gain_is_refused_in_a_sum_too() -> None:
    budget = a_chain({"block": "CAB", "gain": 1.2, "passive": True}, parameter="gain", law="sum")
    with pytest.raises(SpecflowError, match=r"gain of 1\.2 dB"):
        evaluate_budget(budget, project_of(budget, limit=at_least(-9)), DICTIONARY)


def test_limits_of_a_loss_that_reach_beyond_0_are_refused_in_a_sum_of_losses() -> None:
    wide = LineTolerance(minus=2, plus=2, meaning=Meaning.LIMITS, distribution=Distribution.UNIFORM)
    budget = losses(tolerance=wide)
    with pytest.raises(SpecflowError, match="1 dB beyond 0"):
        monte_carlo(budget, project_of(budget), DICTIONARY, trials=10, seed=1)


def test_eirp_of_16_elements_is_the_power_of_one_and_20_log_n_and_the_gain_of_one() -> None:
    """EIRP = P_el + 20·log N + G_el; the same as P_total + 10·log N + G_el (textbook)."""
    stages = (
        {"block": "PA", "output_power": 20.0, "count": 16},
        {"block": "ANT", "antenna_gain": 5.0, "count": 16},
    )
    hand = 20.0 + 20.0 * math.log10(16) + 5.0
    for law in ("cascade", "sum"):
        assert result(a_chain(*stages, parameter="eirp", law=law), limit=at_least(1, "dBm")) == (
            pytest.approx(hand)
        )


def test_g_over_t_of_16_elements_is_10_log_n_above_that_of_one() -> None:
    """G/T = G_el + 10·log N - 10·log T_sys of the channel of one element (textbook)."""
    antenna = {"block": "ANT", "antenna_gain": 5.0, "antenna_noise_temperature": 60.0, "count": 16}
    budget = a_chain(antenna, {"block": "LNA", "gain": 20.0, "noise_figure": 2.0}, parameter="g_over_t")
    kelvin = 60.0 + 290.0 * (10**0.2 - 1.0)
    found = evaluate_budget(budget, project_of(budget, limit=at_least(-99, "dB/K")), DICTIONARY)
    assert found.of("g_over_t").result[0] == pytest.approx(
        5.0 + 10 * math.log10(16) - 10 * math.log10(kelvin)
    )
    assert any("16 elements, which add in phase" in note for note in found.notes)


def test_the_gain_of_one_element_is_solved_for_from_the_eirp_of_all() -> None:
    budget = a_chain(
        {"block": "PA", "output_power": 20.0, "count": 16},
        {"block": "ANT", "antenna_gain": 1.0, "count": 16},
        parameter="eirp",
    )
    wanted = 20.0 + 20.0 * math.log10(16) + 5.0
    project = project_of(budget, limit=at_least(wanted, "dBm"))
    solution = solve_line(budget, project, DICTIONARY, (2, "antenna_gain"))
    assert solution.at_least is not None and solution.at_least.value == pytest.approx(5.0, abs=1e-6)


def test_specimens_that_meet_no_known_limit_have_no_probability() -> None:
    budget = a_chain({"block": "A", "gain": 10.0}, parameter="gain")
    drawn = monte_carlo(budget, project_of(budget, limit=parse_limit("TBD")), DICTIONARY, trials=10, seed=1)
    assert math.isnan(drawn.joint.value) and "not known" in drawn.joint.words
