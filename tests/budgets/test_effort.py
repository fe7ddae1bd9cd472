"""Least total effort: against hand solutions, several limits together, and what cannot be met."""

from __future__ import annotations

import math

import numpy as np
import pytest

from specflow.budgets.effort import LeastEffort, least_effort
from specflow.errors import InfeasibleError
from specflow.model.budget import Budget
from specflow.parameters import load_dictionary
from tests.budgets.chains import a_chain, project_of
from tests.builders import a_conditions_set, a_dimension, a_quantity, a_requirement, at_least, at_most

DICTIONARY = load_dictionary()
WITHIN = {"minus": 0.5, "plus": 0.5, "meaning": "limits"}


def high(found: LeastEffort, block: str, parameter: str) -> float:
    """Return the upper side of one allotment."""
    return next(one.high for one in found.allotments if (one.block, one.parameter) == (block, parameter))


def receiver(**fields: object) -> Budget:
    """Return three stages with noise figures and intercepts, gains within half a decibel."""
    window = {"gain": {"tolerance": WITHIN}}
    return a_chain(
        {"block": "A", "gain": 15.0, "noise_figure": 2.0, "iip3": 0.0, "more": window},
        {"block": "B", "gain": -6.0, "noise_figure": 8.0, "iip3": 12.0, "more": window},
        {"block": "C", "gain": 20.0, "noise_figure": 5.0, "iip3": 5.0, "more": window},
        **fields,  # type: ignore[arg-type]
    )


def test_one_limit_has_the_shares_of_the_hand_solution() -> None:
    # Lagrange by hand: min sum 10^(d/10) with sum c_k 10^(-d/10) = R gives parts R sqrt(c_k)/sum sqrt(c_j).
    chain = a_chain(
        {"block": "A", "gain": 15.0, "noise_figure": 2.0}, {"block": "B", "noise_figure": 8.0, "gain": 0.0}
    )
    found = least_effort(chain, project_of(chain, limit=at_most(1.5)), DICTIONARY)
    c = np.array([10**0.2 - 1, (10**0.8 - 1) / 10**1.5])
    parts = (10**0.15 - 1) * np.sqrt(c) / np.sqrt(c).sum()
    assert high(found, "A", "noise_figure") == pytest.approx(10 * math.log10(1 + parts[0]), abs=0.0102)
    assert high(found, "B", "noise_figure") == pytest.approx(
        10 * math.log10(1 + parts[1] * 10**1.5), abs=0.0102
    )
    assert [one.requirement for one in found.binding] == ["R-1"]
    assert found.closure.closes is not False


def test_weights_move_the_effort_to_the_others() -> None:
    chain = a_chain(
        {"block": "A", "gain": 10.0, "noise_figure": 3.0}, {"block": "B", "noise_figure": 8.0, "gain": 0.0}
    )
    snapshot = project_of(chain, limit=at_most(3.0))
    plain = least_effort(chain, snapshot, DICTIONARY)
    heavy = least_effort(chain, snapshot, DICTIONARY, weights={"A": 10.0})
    assert high(heavy, "A", "noise_figure") > high(plain, "A", "noise_figure") + 0.1
    assert high(heavy, "B", "noise_figure") < high(plain, "B", "noise_figure") - 0.1


def test_noise_and_linearity_are_met_together_and_the_chain_closes() -> None:
    chain = receiver(requirements=("R-NF", "R-IP"))
    requirements = [
        a_requirement(
            "R-NF", block="SYS", quantity=a_quantity("noise_figure"), limit=at_most(2.5), conditions=None
        ),
        a_requirement(
            "R-IP", block="SYS", quantity=a_quantity("iip3"), limit=at_least(-6, "dBm"), conditions=None
        ),
    ]
    found = least_effort(chain, project_of(chain, requirements=requirements), DICTIONARY)
    assert {one.requirement for one in found.binding} == {"R-NF", "R-IP"}
    assert found.closure.closes is True
    assert all(one.smallest < 0.03 for one in found.closure.limits)


def test_a_limit_on_gain_does_not_make_limits_on_distortion_look_infeasible() -> None:
    chain = receiver(requirements=("R-NF", "R-IP", "R-G"))
    requirements = [
        a_requirement("R-G", block="SYS", quantity=a_quantity("gain"), limit=at_least(28), conditions=None),
        a_requirement(
            "R-NF", block="SYS", quantity=a_quantity("noise_figure"), limit=at_most(2.5), conditions=None
        ),
        a_requirement(
            "R-IP", block="SYS", quantity=a_quantity("iip3"), limit=at_least(-14, "dBm"), conditions=None
        ),
    ]
    found = least_effort(chain, project_of(chain, requirements=requirements), DICTIONARY)
    assert found.closure.closes is True
    assert {one.requirement for one in found.binding} == {"R-NF", "R-IP", "R-G"}
    assert all(abs(one.harder_db) < 10.0 for one in found.strains)


def test_free_gain_lowers_the_effort() -> None:
    chain = receiver(requirements=("R-NF", "R-IP"))
    requirements = [
        a_requirement(
            "R-NF", block="SYS", quantity=a_quantity("noise_figure"), limit=at_most(2.2), conditions=None
        ),
        a_requirement(
            "R-IP", block="SYS", quantity=a_quantity("iip3"), limit=at_least(-14, "dBm"), conditions=None
        ),
    ]
    snapshot = project_of(chain, requirements=requirements)
    kept = least_effort(chain, snapshot, DICTIONARY)
    freed = least_effort(chain, snapshot, DICTIONARY, free_gains=["A"])
    moved = next(one for one in freed.strains if one.line == "A gain")
    assert freed.effort - moved.effort < kept.effort
    assert abs(moved.harder_db) > 0.1
    assert freed.closure.closes is True


def test_all_places_hold_and_the_binding_one_is_named() -> None:
    drift = {"dimension": "frequency", "dimension_unit": "GHz", "slope": -0.5, "reference": 18.0}
    chain = a_chain(
        {"block": "A", "gain": 15.0, "noise_figure": 1.5, "more": {"gain": {"drifts": (drift,)}}},
        {"block": "B", "gain": 0.0, "noise_figure": 8.0},
        conditions="CS",
    )
    frequencies = a_conditions_set("CS", a_dimension(values=(18.0, 19.0, 20.0)))
    found = least_effort(chain, project_of(chain, frequencies, limit=at_most(2.0)), DICTIONARY)
    assert "20 GHz" in found.binding[0].words


def test_one_share_for_all_conditions_starts_from_the_worst_estimate() -> None:
    drift = {"dimension": "frequency", "dimension_unit": "GHz", "slope": 0.3, "reference": 18.0}
    chain = a_chain(
        {"block": "A", "gain": 15.0, "noise_figure": 1.5, "more": {"noise_figure": {"drifts": (drift,)}}},
        {"block": "B", "gain": 0.0, "noise_figure": 8.0},
        conditions="CS",
    )
    frequencies = a_conditions_set("CS", a_dimension(values=(18.0, 19.0, 20.0)))
    found = least_effort(chain, project_of(chain, frequencies, limit=at_most(3.0)), DICTIONARY)
    assert found.closure.limits[0].smallest < 0.02  # nothing is given away to conditions that are easier


def test_what_even_hard_parts_do_not_meet_is_short_by_so_much() -> None:
    chain = a_chain(
        {"block": "FIL", "insertion_loss": 2.5, "passive": True},
        {"block": "LNA", "gain": 18.0, "noise_figure": 1.0},
    )
    with pytest.raises(InfeasibleError, match=r"R-1: infeasible, and short by 0\.5"):
        least_effort(chain, project_of(chain, limit=at_most(2.0)), DICTIONARY)


def test_error_vector_parts_follow_the_hand_solution() -> None:
    lines = tuple(
        {"position": order, "block": block, "parameter": "evm", "value": value, "unit": "%"}
        for order, (block, value) in enumerate((("A", 3.0), ("B", 1.0)), 1)
    )
    vector = Budget(
        id="B-1", requirements=("R-1",), quantity=a_quantity("evm"), law="root sum of squares", lines=lines
    )
    found = least_effort(vector, project_of(vector, limit=at_most(2, "%")), DICTIONARY)
    # Squares share as the roots of what they are: 9 and 1 as 3 and 1.
    assert high(found, "A", "evm") == pytest.approx(math.sqrt(4 * 3 / 4), abs=0.002)
    assert high(found, "B", "evm") == pytest.approx(math.sqrt(4 * 1 / 4), abs=0.002)
