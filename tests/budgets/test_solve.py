"""Solving one unknown: published chains solved backwards, put back in, and what cannot be met."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from specflow.budgets.evaluate import evaluate_budget
from specflow.budgets.solve import Solution, solve_line
from specflow.errors import InfeasibleError
from specflow.model.budget import Budget
from specflow.parameters import load_dictionary
from tests.budgets.chains import POZAR_10_2, a_chain, project_of
from tests.builders import (
    a_conditions_set,
    a_dimension,
    a_quantity,
    a_requirement,
    at_least,
    at_most,
    between,
)

DICTIONARY = load_dictionary()
#: The chain of rf-budget.md section 8: LNA 18/1.2, filter 2.5, mixer -7/7, IF 20/4 (computed by a second route there).
RECEIVER = (
    {"block": "LNA", "gain": 18.0, "noise_figure": 1.2},
    {"block": "FIL", "insertion_loss": 2.5, "passive": True},
    {"block": "MIX", "gain": -7.0, "noise_figure": 7.0},
    {"block": "IF", "gain": 20.0, "noise_figure": 4.0},
)


def solved(budget: Budget, position: int, parameter: str, **more: Any) -> Solution:
    """Solve one line of a budget."""
    return solve_line(budget, project_of(budget, **more), DICTIONARY, (position, parameter))


def worst_margin(budget: Budget, position: int, parameter: str, value: float, **more: Any) -> float:
    """Return the smallest margin with one line put back in."""
    result = evaluate_budget(
        budget, project_of(budget, **more), DICTIONARY, values={(position, parameter): value}
    )
    worst = result.worst
    assert worst is not None
    return worst.smallest_margin


def test_first_noise_figure_follows_from_the_rest_in_closed_form() -> None:
    # Pozar 4th ed. Example 10.2: 2 dB in the first stage make F = 1.80, 2.55 dB; backwards from there.
    solution = solved(a_chain(*POZAR_10_2), 1, "noise_figure", limit=at_most(2.55))
    assert solution.at_most is not None
    assert solution.at_most.is_closed_form
    assert solution.at_most.value == pytest.approx(2.0, abs=0.01)
    assert solution.at_least is None


def test_gain_and_noise_figures_of_the_reference_chain() -> None:
    # calculators.inverse: 6.9064 dB for the last noise figure at -7 dB of mixer, 14.9956 dB for the first gain.
    chain = a_chain(*RECEIVER)
    last = solved(chain, 4, "noise_figure", limit=at_most(3.0))
    first = solved(chain, 1, "gain", limit=at_most(3.0))
    assert last.at_most is not None and last.at_most.value == pytest.approx(6.9064, abs=1e-4)
    assert first.at_least is not None and first.at_least.value == pytest.approx(14.9956, abs=1e-4)
    assert first.at_least.is_closed_form


@pytest.mark.parametrize(
    ("position", "parameter"),
    [
        (1, "noise_figure"),
        (1, "gain"),
        (2, "insertion_loss"),
        (3, "noise_figure"),
        (3, "gain"),
        (4, "noise_figure"),
    ],
)
def test_what_is_solved_and_put_back_in_leaves_no_margin(position: int, parameter: str) -> None:
    chain = a_chain(*RECEIVER)
    solution = solved(chain, position, parameter, limit=at_most(2.6))
    edge = solution.at_least or solution.at_most
    assert edge is not None
    assert worst_margin(chain, position, parameter, edge.value, limit=at_most(2.6)) == pytest.approx(
        0, abs=1e-8
    )


@pytest.mark.parametrize("parameter", ["iip3", "oip3", "iip2", "oip2", "ip1db", "op1db"])
@pytest.mark.parametrize("position", [1, 2])
def test_intercepts_and_compression_go_back_too(parameter: str, position: int) -> None:
    of_chain = parameter.replace("o", "i", 1) if parameter.startswith("o") else parameter
    chain = a_chain(
        {"block": "A", "gain": 10.0, parameter: 20.0, "count": 4},
        {"block": "B", "gain": 5.0, parameter: 25.0},
        parameter=of_chain,
    )
    solution = solved(chain, position, parameter, limit=at_least(3.0, "dBm"))
    assert solution.at_least is not None
    assert solution.at_least.is_closed_form
    margin = worst_margin(chain, position, parameter, solution.at_least.value, limit=at_least(3.0, "dBm"))
    assert margin == pytest.approx(0, abs=1e-8)


@settings(max_examples=40, deadline=None)
@given(
    gains=st.lists(st.floats(-10, 20), min_size=2, max_size=5),
    noise=st.floats(0.5, 8),
    spare=st.floats(0.05, 5),
    position=st.integers(1, 5),
)
def test_back_substitution_holds_for_any_chain(
    gains: list[float], noise: float, spare: float, position: int
) -> None:
    place = min(position, len(gains))
    stages = [{"gain": gain, "noise_figure": noise} for gain in gains]
    chain = a_chain(*stages)
    now = float(evaluate_budget(chain, project_of(chain), DICTIONARY).of("noise_figure").result[0])
    limit = at_most(round(now + spare, 6))
    solution = solved(chain, place, "noise_figure", limit=limit)
    assert solution.at_most is not None
    assert worst_margin(chain, place, "noise_figure", solution.at_most.value, limit=limit) == pytest.approx(
        0, abs=1e-6
    )


def test_bracketing_finds_what_the_formula_finds() -> None:
    # A limit in K has no closed form here; 3 dB are 288.63 K.
    chain = a_chain(*RECEIVER)
    stated = solved(chain, 4, "noise_figure", limit=at_most(3.0))
    in_kelvin = a_chain(*RECEIVER, parameter="noise_temperature")
    bracketed = solved(in_kelvin, 4, "noise_figure", limit=at_most(290 * (10**0.3 - 1), "K"))
    assert stated.at_most is not None and bracketed.at_most is not None
    assert not bracketed.at_most.is_closed_form
    assert bracketed.at_most.value == pytest.approx(stated.at_most.value, abs=1e-6)


def test_two_sided_limit_gives_both_ends() -> None:
    chain = a_chain({"gain": 10.0}, {"gain": 5.0}, parameter="gain")
    solution = solved(chain, 1, "gain", limit=between(14, 17))
    assert solution.at_least is not None and solution.at_most is not None
    assert solution.at_least.value == pytest.approx(9.0, abs=1e-9)
    assert solution.at_most.value == pytest.approx(12.0, abs=1e-9)


def test_loss_turns_the_sides() -> None:
    chain = a_chain({"insertion_loss": 1.0, "passive": True}, {"gain": 15.0}, parameter="gain")
    solution = solved(chain, 1, "insertion_loss", limit=at_least(13))
    assert solution.at_most is not None and solution.at_least is None
    assert solution.at_most.value == pytest.approx(2.0, abs=1e-9)


def test_reserve_is_kept() -> None:
    reserve = {"parameter": "gain", "amount": 0.5, "unit": "dB", "holder": "Systems"}
    chain = a_chain({"gain": 10.0}, {"gain": 5.0}, parameter="gain", reserves=(reserve,))
    solution = solved(chain, 2, "gain", limit=at_least(14))
    assert solution.at_least is not None
    assert solution.at_least.value == pytest.approx(4.5, abs=1e-9)


def test_all_points_close_and_the_binding_one_is_named() -> None:
    slope = {"dimension": "frequency", "dimension_unit": "GHz", "slope": -0.5, "reference": 18.0}
    chain = a_chain(
        {"block": "LNA", "gain": 20.0, "more": {"gain": {"drifts": (slope,)}}},
        {"block": "MIX", "gain": -7.0},
        parameter="gain",
        conditions="CS",
    )
    frequencies = a_conditions_set("CS", a_dimension(values=(18.0, 19.0, 20.0)))
    solution = solve_line(chain, project_of(chain, frequencies, limit=at_least(12)), DICTIONARY, (2, "gain"))
    assert solution.at_least is not None
    assert solution.at_least.value == pytest.approx(-7.0, abs=1e-9)
    assert "20 GHz" in solution.at_least.words
    assert np.allclose(solution.low, [-8.0, -7.5, -7.0])


def test_infeasible_says_by_how_much_even_an_ideal_part_misses() -> None:
    # Filter 2.5 dB and mixer behind 18 dB: 1.2 dB alone are above a limit of 1 dB, whatever the IF amplifier.
    chain = a_chain(*RECEIVER)
    with pytest.raises(InfeasibleError, match=r"IF noise_figure: infeasible, and short by 0\.\d+ dB of R-1"):
        solved(chain, 4, "noise_figure", limit=at_most(1.0))


def test_limits_that_pull_apart_are_both_named() -> None:
    chain = a_chain(
        {"block": "LNA", "gain": 15.0, "noise_figure": 1.0, "iip3": 0.0},
        {"block": "MIX", "gain": -7.0, "noise_figure": 12.0, "iip3": 10.0},
        requirements=("R-NF", "R-IP"),
    )
    noise = a_requirement(
        "R-NF", block="SYS", quantity=a_quantity("noise_figure"), limit=at_most(1.5), conditions=None
    )
    intercept = a_requirement(
        "R-IP", block="SYS", quantity=a_quantity("iip3"), limit=at_least(-5, "dBm"), conditions=None
    )
    snapshot = project_of(chain, requirements=[noise, intercept])
    with pytest.raises(InfeasibleError) as caught:
        solve_line(chain, snapshot, DICTIONARY, (1, "gain"))
    assert "R-NF" in caught.value.message and "R-IP" in caught.value.message
    assert "at least" in caught.value.message and "at most" in caught.value.message


def test_error_vector_and_levels_leave_what_the_others_do_not_take() -> None:
    vector = Budget(
        id="B-1",
        requirements=("R-1",),
        quantity=a_quantity("evm"),
        law="root sum of squares",
        lines=(
            {"position": 1, "block": "MOD", "parameter": "evm", "value": 3.0, "unit": "%"},
            {"position": 2, "block": "PA", "parameter": "evm", "value": 1.0, "unit": "%"},
        ),
    )
    solution = solved(vector, 2, "evm", limit=at_most(5, "%"))
    assert solution.at_most is not None and solution.at_most.is_closed_form
    assert solution.at_most.value == pytest.approx(4.0, abs=1e-9)  # 3-4-5
