"""Parallel paths: what they are together, and the way back to the figures of their positions."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from specflow.budgets import evaluate_budget, line_key, monte_carlo, slopes_of
from specflow.errors import CalculationError
from specflow.model.budget import Budget
from specflow.model.budget_line import ConditionTable
from specflow.parameters import load_dictionary
from tests.budgets.chains import a_chain, project_of
from tests.builders import a_budget_line, a_quantity, a_requirement, at_least, at_most

DICTIONARY = load_dictionary()
QUANTITIES = {"gain": "dB", "noise_figure": "dB", "iip3": "dBm", "oip3": "dBm", "iip2": "dBm", "op1db": "dBm"}
FIGURES = {"noise_figure": 2.0, "iip3": 5.0, "iip2": 40.0, "ip1db": -5.0}


def with_paths(budget: Budget, **paths: str) -> Budget:
    """Put positions, by block, into paths."""
    positions = tuple(one.model_copy(update={"path": paths.get(one.block, "")}) for one in budget.positions)
    return budget.model_copy(update={"positions": positions})


def results(budget: Budget, **more: Any) -> Any:
    names = tuple(f"R-{number}" for number in range(len(QUANTITIES)))
    requirements = [
        a_requirement(name, quantity=a_quantity(quantity), limit=at_least(-999, unit), conditions=None)
        for name, (quantity, unit) in zip(names, QUANTITIES.items(), strict=True)
    ]
    budget = budget.model_copy(update={"requirements": names})
    return evaluate_budget(budget, project_of(budget, requirements=requirements), DICTIONARY, **more), budget


def stage(block: str, gain: float, **more: Any) -> dict[str, Any]:
    return {"block": block, "gain": gain, **FIGURES, **more}


def test_equal_paths_are_like_as_many_elements_in_parallel() -> None:
    apart, _ = results(
        with_paths(
            a_chain(stage("IN", 10.0), stage("A", 12.0), stage("B", 12.0), stage("OUT", 5.0)), A="a", B="b"
        )
    )
    together, _ = results(a_chain(stage("IN", 10.0), stage("A", 12.0, count=2), stage("OUT", 5.0)))
    for name in QUANTITIES:
        assert apart.of(name).result == pytest.approx(together.of(name).result), name


def test_two_unequal_paths_by_waves() -> None:
    """Half the power into each, amplitudes added, powers of added noise added: by hand for 10 and 4 dB gain."""
    gains, noise = 10 ** (np.array([10.0, 4.0]) / 10), 10 ** (np.array([2.0, 5.0]) / 10)
    whole = (np.sqrt(gains).sum() / 2) ** 2
    factor = 1 + ((noise - 1) * gains).sum() / (2 * whole)
    budget = with_paths(a_chain(stage("A", 10.0), stage("B", 4.0, noise_figure=5.0)), A="upper", B="lower")
    found, _ = results(budget)
    assert found.of("gain").result == pytest.approx(10 * np.log10(whole))
    assert found.of("noise_figure").result == pytest.approx(10 * np.log10(factor))


def test_slopes_through_unequal_paths_are_those_of_finite_differences() -> None:
    budget = with_paths(
        a_chain(
            stage("IN", 3.0),
            stage("A1", 8.0, iip3=0.0),
            {"block": "A2", "insertion_loss": 1.5, "passive": True},
            stage("B1", 12.0, noise_figure=4.0, iip2=30.0),
            {"block": "B2", "gain": 2.0, "noise_figure": 6.0, "oip3": 12.0, "oip2": 35.0, "op1db": 1.0},
            stage("OUT", 5.0),
        ),
        A1="a",
        A2="a",
        B1="b",
        B2="b",
    )
    result, budget = results(budget)
    for found in slopes_of(result):
        for line in budget.lines:
            value, step = line.value.value, 1e-4  # type: ignore[union-attr]
            up, down = (results(budget, values={line_key(line): value + one})[0] for one in (step, -step))
            difference = (up.of(found.parameter).result - down.of(found.parameter).result) / (2 * step)
            assert found.of(line.position, line.parameter) == pytest.approx(difference, abs=2e-6), (
                found.parameter,
                line.place,
            )


def test_a_path_is_driven_by_its_share_of_the_level() -> None:
    table = ConditionTable(
        dimension="input_level", dimension_unit="dBm", at=(-20.0, 20.0), values=(20.0, 0.0)
    )
    budget = with_paths(
        a_chain(
            {"block": "IN", "gain": 3.0103},
            {"block": "A", "gain": table},
            {"block": "B", "gain": table},
            {"block": "OUT", "gain": 0.0},
            parameter="output_power",
            input_level=0.0,
        ),
        A="a",
        B="b",
    )
    result = evaluate_budget(budget, project_of(budget, limit=at_least(-99, "dBm")), DICTIONARY)
    assert result.of("output_power").result == pytest.approx(3.0103 + 10.0, abs=1e-4)


def test_specimens_of_paths_spread_less_than_those_of_one() -> None:
    tolerance = {
        "gain": {"tolerance": {"minus": 1, "plus": 1, "meaning": "limits", "distribution": "uniform"}}
    }
    one = a_chain({"block": "A", "gain": 10.0, "more": tolerance}, parameter="gain")
    two = with_paths(
        a_chain(*({"block": name, "gain": 10.0, "more": tolerance} for name in "AB"), parameter="gain"),
        A="a",
        B="b",
    )
    single, double = (
        monte_carlo(budget, project_of(budget, limit=at_least(1)), DICTIONARY, trials=20_000, seed=1).of(
            "gain"
        )
        for budget in (one, two)
    )
    assert double.deviation[0] == pytest.approx(single.deviation[0] / np.sqrt(2), rel=0.03)


def test_a_sum_has_no_paths() -> None:
    budget = Budget(
        id="B-1",
        requirements=("R-1",),
        quantity=a_quantity("gain"),
        law="sum",
        positions=({"order": 1, "block": "A", "path": "a"},),  # type: ignore[arg-type]
        lines=(a_budget_line(1, "A"),),
    )
    with pytest.raises(CalculationError, match="no parallel paths"):
        evaluate_budget(budget, project_of(budget, limit=at_most(60)), DICTIONARY)
