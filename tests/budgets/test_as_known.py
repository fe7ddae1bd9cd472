"""Budgets as known: ranks, spreads of few specimens, serial as built, misses and what could make up for them."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

import numpy as np
import pytest

from specflow.budgets.as_known import AsKnown, as_known
from specflow.budgets.knowledge import Knowledge, Rank
from specflow.budgets.probe import Probe
from specflow.budgets.reallocation import Reallocation, reallocate
from specflow.model.block import Maturity
from specflow.model.budget import Budget, Correlation
from specflow.parameters import load_dictionary
from tests.budgets.chains import a_chain, project_of
from tests.budgets.receiver import within
from tests.builders import a_conditions_set, a_dimension, a_quantity, a_requirement, at_least, at_most

DICTIONARY = load_dictionary()


def knowledge(
    position: int,
    parameter: str,
    values: Sequence[float],
    *,
    places: Sequence[int] | None = None,
    rank: Rank = Rank.TEST,
    items: Sequence[str] = (),
    u: float = math.nan,
    source: str = "EV-1",
) -> Knowledge:
    """Return readings, one a place unless said otherwise, each of its own item unless said otherwise."""
    m = len(values)
    names = list(items) or [f"SN{number}" for number in range(m)]
    labels = tuple(dict.fromkeys(names))
    return Knowledge(
        position,
        parameter,
        np.array(places if places is not None else [0] * m, np.intp),
        np.array(values, float),
        np.full(m, u),
        np.full(m, int(rank), np.intp),
        np.array([labels.index(name) for name in names], np.intp),
        labels,
        np.zeros(m, np.intp),
        (source,),
    )


def a_gain_chain(**fields: Any) -> Budget:
    """Return two gains, the first within a decibel (uniform)."""
    return a_chain(
        {"block": "A", "gain": 20.0, "more": {"gain": {"tolerance": within(1.0)}}},
        {"block": "B", "gain": -7.0},
        parameter="gain",
        **fields,
    )


def known(budget: Budget, *found: Knowledge, **more: Any) -> AsKnown:
    """Return a budget as known; its limit is at least 12 dB."""
    return as_known(budget, project_of(budget, limit=at_least(12)), DICTIONARY, found, **more)


def test_the_best_rank_at_each_place_is_taken_and_said() -> None:
    chain = a_gain_chain(conditions="CS")
    points = a_conditions_set("CS", a_dimension(values=(18.0, 19.0, 20.0)))
    found = as_known(
        chain,
        project_of(chain, points, limit=at_least(12)),
        DICTIONARY,
        [
            knowledge(
                1,
                "gain",
                [21.0, 21.0, 21.0],
                places=[0, 1, 2],
                rank=Rank.ANALYSIS,
                items=[""] * 3,
                source="SIM",
            ),
            knowledge(1, "gain", [19.5], places=[1], rank=Rank.EARLIER_TEST, source="EM"),
            knowledge(1, "gain", [19.0, 18.0], places=[2, 1], rank=Rank.TEST, items=["Q", "Q"], source="QM"),
            knowledge(1, "gain", [30.0], places=[0], rank=Rank.SIMILARITY, source="OLD"),
        ],
    )
    line = found.lines[0]
    assert list(line.value) == [21.0, 18.0, 19.0]
    assert [line.source_words(place) for place in range(3)] == [
        "analysis: SIM",
        "test on qualification or production hardware: QM, 1 item",
        "test on qualification or production hardware: QM, 1 item",
    ]
    assert list(found.result.of("gain").result) == [14.0, 11.0, 12.0]
    assert found.served[0].served.closes is False
    assert not found.lines[1].is_known.any()
    assert found.lines[1].source_words(0).startswith("estimate: line of the budget")


def test_a_line_of_higher_rank_than_the_evidence_stays() -> None:
    chain = a_gain_chain()
    lines = tuple(line.model_copy(update={"maturity": Maturity.QUALIFICATION}) for line in chain.lines)
    chain = Budget.model_validate(chain.model_dump() | {"lines": [one.model_dump() for one in lines]})
    found = known(chain, knowledge(1, "gain", [15.0], rank=Rank.DATASHEET))
    assert found.lines[0].value[0] == 20.0


def test_what_is_allocated_is_only_a_target() -> None:
    chain = a_gain_chain()
    lines = [line.model_dump() | {"source": "allocated"} for line in chain.lines]
    chain = Budget.model_validate(chain.model_dump() | {"lines": lines})
    found = known(chain, knowledge(1, "gain", [19.0], rank=Rank.ESTIMATE, items=[""]))
    assert found.lines[0].value[0] == 19.0
    assert found.lines[1].source_words(0).startswith("allocated, a target")


def test_few_items_predict_the_next_one_with_their_degrees_of_freedom() -> None:
    # By hand: mean 20, s = 1, n = 3: the next one above 20 - t(0.95; 2) s sqrt(1 + 1/3) = 20 - 2.91999 * 1.1547.
    found = known(a_gain_chain(), knowledge(1, "gain", [19.0, 20.0, 21.0]))
    served = found.served[0]
    assert served.freedom[0] == pytest.approx(2.0)
    assert served.spread[0] == pytest.approx(math.sqrt(4 / 3))
    assert served.predicted[0] == pytest.approx(1.0 - 2.919986 * math.sqrt(4 / 3), abs=1e-5)
    assert 0.5 < served.probability[0] < 1.0


def test_repeats_on_one_item_are_not_more_items() -> None:
    found = known(a_gain_chain(), knowledge(1, "gain", [19.0, 21.0, 20.0], items=["S1", "S1", "S1"]))
    line = found.lines[0]
    assert line.items[0] == 1 and line.value[0] == pytest.approx(20.0)
    assert line.spread[0] == pytest.approx(1.0 / math.sqrt(3))  # the line's own uniform tolerance
    assert any("one specimen says nothing about the spread" in note for note in found.notes)


def test_uncertainty_common_to_all_items_is_counted_once() -> None:
    many = known(a_gain_chain(), knowledge(1, "gain", [20.0] * 8, u=0.3))
    assert many.served[0].spread[0] == pytest.approx(0.3)


def test_elements_of_one_position_average_when_each_moves_by_itself() -> None:
    # Four elements: var of their mean s²/4 and of the estimated mean s²/2, by hand with s² = 2.
    line = {"tolerance": within(1.0), "shared": "per element"}
    chain = a_chain(
        {"block": "A", "gain": 20.0, "count": 4, "more": {"gain": line}},
        {"block": "B", "gain": -7.0},
        parameter="gain",
    )
    found = known(chain, knowledge(1, "gain", [19.0, 21.0]))
    assert found.lines[0].spread[0] == pytest.approx(math.sqrt(2 * (1 / 4 + 1 / 2)))


def test_serial_as_built_takes_its_own_specimens_and_predicts_the_others() -> None:
    evidence = [
        knowledge(1, "gain", [19.0, 20.0, 21.0], items=["A1", "A2", "A3"], u=0.1),
        knowledge(2, "gain", [-7.5, -6.5], items=["B1", "B2"]),
    ]
    found = known(a_gain_chain(), *evidence, serial="SYS-1", built_in={"a": {"A3"}})
    assert found.lines[0].value[0] == 21.0 and found.lines[0].spread[0] == 0.0
    assert found.lines[0].common[0] == pytest.approx(0.1)
    assert found.lines[1].value[0] == pytest.approx(-7.0) and found.lines[1].spread[0] > 0
    assert any("no specimen of B is recorded as built into SYS-1" in note for note in found.notes)


def test_growth_is_an_allowance_for_estimates_only() -> None:
    chain = a_gain_chain()
    lines = [line.model_dump() | {"growth": 1.0} for line in chain.lines]
    chain = Budget.model_validate(chain.model_dump() | {"lines": lines})
    found = known(chain, knowledge(1, "gain", [20.5]))
    assert found.result.of("gain").result[0] == pytest.approx(20.5 - 8.0)


def children(noise: float) -> list[Any]:
    """Return requirements on the noise figures and gains of the blocks."""
    common: dict[str, Any] = {"conditions": None}
    return [
        a_requirement("A-NF", block="A", quantity=a_quantity("noise_figure"), limit=at_most(noise), **common),
        a_requirement("B-NF", block="B", quantity=a_quantity("noise_figure"), limit=at_most(8), **common),
        a_requirement("A-G", block="A", limit=at_least(17), **common),
    ]


def proposal(noise: float, *found: Knowledge, limit: float) -> Reallocation:
    """Return the re-allocation of two stages with noise."""
    chain = a_chain(
        {"block": "A", "gain": 18.0, "noise_figure": 1.2}, {"block": "B", "noise_figure": 7.0, "gain": 0.0}
    )
    snapshot = project_of(chain, limit=at_most(limit))
    state = as_known(chain, snapshot, DICTIONARY, found)
    return reallocate(Probe.of(chain, snapshot, DICTIONARY), state.lines, children(noise))


def test_a_miss_is_judged_by_what_it_costs_the_system() -> None:
    found = proposal(1.5, knowledge(1, "noise_figure", [1.8], source="EV-7"), limit=2.5)
    (miss,) = found.misses
    assert miss.line == "A noise_figure" and miss.short == pytest.approx(0.3)
    assert "EV-7" in miss.source
    before = 2.5 - 10 * math.log10(10**0.15 + (10**0.8 - 1) / 10**1.7)
    after = 2.5 - 10 * math.log10(10**0.18 + (10**0.8 - 1) / 10**1.7)
    (cost,) = miss.costs
    assert (cost.before, cost.after) == (pytest.approx(before), pytest.approx(after))
    assert found.with_misses.closes is True and not found.proposal


def test_slack_elsewhere_covers_a_miss_as_a_proposal_that_closes() -> None:
    evidence = [knowledge(1, "noise_figure", [1.8]), knowledge(2, "noise_figure", [5.0])]
    found = proposal(1.5, *evidence, limit=2.0)
    assert found.with_misses.closes is False
    assert [one.line for one in found.slack] == ["B noise_figure"]
    assert found.slack[0].amount == pytest.approx(3.0)
    assert 0 < found.part < 1
    limits = {(one.block, one.parameter): one.high for one in found.proposal}
    assert limits[("A", "noise_figure")] == pytest.approx(1.8)
    assert 5.0 < limits[("B", "noise_figure")] < 8.0
    assert found.closure.closes is True
    assert "covers it" in found.sentence


def test_one_number_for_all_conditions_is_not_tightened_beyond_what_is_known_at_any() -> None:
    chain = a_chain(
        {"block": "A", "gain": 18.0, "noise_figure": 1.2},
        {"block": "B", "noise_figure": 7.0, "gain": 0.0},
        conditions="CS",
    )
    points = a_conditions_set("CS", a_dimension(values=(18.0, 19.0)))
    snapshot = project_of(chain, points, limit=at_most(2.0))
    evidence = [
        knowledge(1, "noise_figure", [1.75, 1.75], places=[0, 1], items=["SN1"] * 2),
        knowledge(2, "noise_figure", [4.0, 7.0], places=[0, 1], items=["SN1"] * 2),
    ]
    state = as_known(chain, snapshot, DICTIONARY, evidence)
    found = reallocate(Probe.of(chain, snapshot, DICTIONARY), state.lines, children(1.5))
    assert found.slack[0].amount == pytest.approx(1.0)
    limits = {(one.block, one.parameter): one.high for one in found.proposal}
    assert 7.0 <= limits[("B", "noise_figure")] < 8.0
    assert found.closure.closes is True


def test_slack_that_is_not_enough_is_said() -> None:
    found = proposal(1.5, knowledge(1, "noise_figure", [2.1]), knowledge(2, "noise_figure", [7.9]), limit=2.0)
    assert math.isnan(found.part)
    assert "does not cover" in found.sentence
    assert found.closure.closes is False


def spread_of(*tolerances: float, groups: tuple[str, ...], **fields: Any) -> float:
    stages = [
        {
            "block": f"S{number}",
            "gain": 10.0,
            "more": {
                "gain": {
                    "tolerance": {"minus": amount, "plus": amount, "meaning": "k sigma", "k": 1.0},
                    "correlation_group": group,
                }
            },
        }
        for number, (amount, group) in enumerate(zip(tolerances, groups, strict=True))
    ]
    budget = a_chain(*stages, parameter="gain", **fields)
    return float(known(budget).served[0].spread[0])


def test_spreads_of_lines_that_move_together_add_as_they_are() -> None:
    """σ of 0.3 and 0.4 dB: 0.5 dB apart, 0.7 dB together, √(0.25 + 2·0.5·0.12) with a correlation of 0.5."""
    assert spread_of(0.3, 0.4, groups=("", "")) == pytest.approx(0.5)
    assert spread_of(0.3, 0.4, groups=("lot", "lot")) == pytest.approx(0.7)
    between = (Correlation(first="heat", second="lot", coefficient=0.5),)
    both = spread_of(0.3, 0.4, groups=("lot", "heat"), correlations=between)
    assert both == pytest.approx(math.sqrt(0.25 + 0.12))


def test_a_group_of_which_one_line_is_known_by_few_items_has_their_freedom() -> None:
    group = {"correlation_group": "lot"}
    budget = a_chain(
        {"block": "A", "gain": 10.0, "more": {"gain": group}},
        {"block": "B", "gain": 10.0, "more": {"gain": group | {
            "tolerance": {"minus": 0.4, "plus": 0.4, "meaning": "k sigma", "k": 1.0}}}},
        parameter="gain",
    )  # fmt: skip
    served = known(budget, knowledge(1, "gain", [9.0, 10.0, 11.0])).served[0]
    assert served.spread[0] == pytest.approx(math.sqrt(4 / 3) + 0.4)
    assert served.freedom[0] == pytest.approx(2.0)


def test_a_tolerance_with_unlike_sides_moves_what_is_predicted() -> None:
    """+0.9/-0.3 dB uniform: mean 0.3 dB, σ 1.2/√12; a loss that is likelier more than less."""
    uneven = {"tolerance": {"minus": 0.3, "plus": 0.9, "meaning": "limits", "distribution": "uniform"}}
    budget = a_chain(
        {"block": "A", "gain": 20.0}, {"block": "B", "attenuation": 3.0, "more": {"attenuation": uneven}},
        parameter="gain",
    )  # fmt: skip
    served = known(budget).served[0]
    assert served.served.margin[0] == pytest.approx(5.0)
    assert served.predicted[0] == pytest.approx(5.0 - 0.3 - 1.644854 * 1.2 / math.sqrt(12), abs=1e-5)
    measured = known(budget, knowledge(2, "attenuation", [3.0, 3.1, 2.9])).served[0]
    assert measured.predicted[0] == pytest.approx(5.0 - 2.919986 * 0.1 * math.sqrt(4 / 3), abs=1e-5)
