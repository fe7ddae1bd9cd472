"""Lines by words: each gain state with its own figures, and limits on children by state."""

from __future__ import annotations

import numpy as np
import pytest

from specflow.budgets import evaluate_budget
from specflow.budgets.apportion import apportion
from specflow.calculators.intercept_cascade import cascade_iip3
from specflow.calculators.noise_cascade import cascade_noise_figure
from specflow.errors import ConditionsError
from specflow.model.budget import Budget
from specflow.model.budget_line import WordTable
from specflow.model.snapshot import Snapshot
from specflow.parameters import load_dictionary
from specflow.workflows.allocated_limit import limit_text_of
from tests.budgets.chains import a_chain, project_of
from tests.builders import a_conditions_set, a_dimension, a_quantity, a_requirement, at_least, at_most

DICTIONARY = load_dictionary()


def by_state(**values: float) -> WordTable:
    return WordTable(dimension="gain_state", words=tuple(values), values=tuple(values.values()))


def receiver(*words: str) -> tuple[Budget, Snapshot]:
    """Return a receiver with two gain states, over the states named and two frequencies."""
    budget = a_chain(
        {
            "block": "LNA",
            "gain": by_state(high=18.0, low=-2.0),
            "noise_figure": by_state(high=1.5, low=8.0),
            "iip3": by_state(high=-6.0, low=15.0),
        },
        {"block": "MIX", "gain": -7.0, "noise_figure": 8.0, "iip3": 12.0},
        requirements=("R-1", "R-2"),
        conditions="CS",
    )
    states = a_dimension("gain_state", "", words=words)
    conditions = a_conditions_set("CS", a_dimension(values=(18.0, 20.0)), states)
    requirements = [
        a_requirement("R-1", quantity=a_quantity("noise_figure"), limit=at_most(30), conditions="CS"),
        a_requirement("R-2", quantity=a_quantity("iip3"), limit=at_least(-50, "dBm"), conditions="CS"),
    ]
    return budget, project_of(budget, conditions, requirements=requirements)


def test_each_gain_state_is_evaluated_with_its_own_figures() -> None:
    """Never the best noise figure of one state with the best intercept of the other."""
    result = evaluate_budget(*receiver("high", "LOW"), DICTIONARY)
    said = [result.required.words(place) for place in range(result.required.size)]
    for gain, noise, iip3, state in ((18.0, 1.5, -6.0, "high"), (-2.0, 8.0, 15.0, "LOW")):
        places = [place for place, words in enumerate(said) if state in words]
        assert len(places) == 2
        expected = float(cascade_noise_figure([gain, -7.0], [noise, 8.0]))
        assert result.of("noise_figure").result[places] == pytest.approx(expected)
        expected = float(cascade_iip3([gain, -7.0], [iip3, 12.0], "coherent"))
        assert result.of("iip3").result[places] == pytest.approx(expected)


def test_a_state_without_a_value_is_refused() -> None:
    with pytest.raises(ConditionsError, match="high, low, needed is medium") as caught:
        evaluate_budget(*receiver("high", "medium"), DICTIONARY)
    assert "LNA" in caught.value.where


def test_a_state_that_the_conditions_do_not_state_is_refused() -> None:
    budget = a_chain({"block": "LNA", "gain": by_state(high=18.0)}, parameter="gain")
    with pytest.raises(ConditionsError, match="depends on gain_state, which the block's conditions do not"):
        evaluate_budget(budget, project_of(budget), DICTIONARY)


def test_shares_by_state_become_a_limit_by_state() -> None:
    budget, snapshot = receiver("high", "low")
    found = apportion(budget, snapshot, DICTIONARY, way="equal")
    noise = next(one for one in found.allotments if (one.block, one.parameter) == ("MIX", "noise_figure"))
    assert noise.at is None
    each = apportion(budget, snapshot, DICTIONARY, way="equal", by_conditions=True)
    limit = next(one for one in each.allotments if (one.block, one.parameter) == ("MIX", "noise_figure"))
    required = evaluate_budget(budget, snapshot, DICTIONARY).required
    assert limit_text_of(limit, required).startswith("by gain_state ('high': <= ")
    assert limit.at is not None and np.ptp(limit.at[1]) > 0
