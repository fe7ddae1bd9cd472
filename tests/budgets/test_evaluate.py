"""Nominal evaluation: published chains through the model, conditions of the blocks, margins."""

from __future__ import annotations

from typing import Literal

import numpy as np
import pytest

from specflow.budgets import evaluate_budget
from specflow.conditions import parse_map_entry
from specflow.limits import parse_limit
from specflow.model.budget import Budget, Reserve
from specflow.model.budget_line import ConditionTable, Drift
from specflow.model.conditions import ConditionMap, Span
from specflow.parameters import load_dictionary
from tests.budgets.chains import POZAR_10_2, a_chain, a_position, project_of
from tests.builders import (
    a_budget_line,
    a_conditions_set,
    a_dimension,
    a_quantity,
    a_requirement,
    at_least,
    at_most,
)

DICTIONARY = load_dictionary()


def result_of(budget: Budget, *documents: object, **more: object):  # type: ignore[no-untyped-def]
    return evaluate_budget(budget, project_of(budget, *documents, **more), DICTIONARY)  # type: ignore[arg-type]


def test_pozar_example_10_2_through_the_model() -> None:
    """D. M. Pozar, 4th ed., Example 10.2: NF 2.55 dB, Te 232 K, output noise -96.8 dBm in 10 MHz at TA = 150 K."""
    budget = a_chain(*POZAR_10_2, noise_source=150.0, bandwidth_hz=10e6)
    snapshot = project_of(
        budget,
        requirements=[
            a_requirement(
                "R-1", block="SYS", quantity=a_quantity("noise_figure"), limit=at_most(3), conditions=None
            ),
            a_requirement(
                "R-2", quantity=a_quantity("noise_temperature"), limit=at_most(250, "K"), conditions=None
            ),
            a_requirement(
                "R-3", quantity=a_quantity("noise_density"), limit=at_most(-160, "dBm/Hz"), conditions=None
            ),
            a_requirement("R-4", quantity=a_quantity("gain"), limit=at_least(5), conditions=None),
        ],
    )
    budget = budget.model_copy(update={"requirements": ("R-1", "R-2", "R-3", "R-4")})
    result = evaluate_budget(budget, snapshot, DICTIONARY)
    assert result.of("noise_figure").result == pytest.approx(2.5555, abs=2e-3)
    assert result.of("noise_temperature").result == pytest.approx(232.3, abs=0.5)
    assert result.of("noise_density").result + 70.0 == pytest.approx(-96.78, abs=0.01)
    assert result.of("gain").cumulative[:, 0] == pytest.approx([10.0, 9.0, 6.0])
    assert result.of("gain").served[0].margin == pytest.approx(1.0)
    assert result.of("noise_figure").served[0].closes is True


def test_a_passive_loss_makes_the_noise_of_its_own_baseplate_not_of_the_ambient() -> None:
    """3 dB at 350 K: 3.4266 dB (F = 1 + (L - 1)T/290); with the ambient of 332 K it would be less."""
    budget = a_chain({"block": "FIL", "insertion_loss": 3.0, "passive": True}, conditions="CS")
    conditions = a_conditions_set("CS", a_dimension("temperature_ambient", "°C", values=(58.85,)))
    warm = ConditionMap(
        id="CM", block="FIL", entries=(parse_map_entry("temperature_baseplate = temperature_ambient + 18 K"),)
    )
    assert result_of(budget, conditions, warm).of("noise_figure").result == pytest.approx(3.4266, abs=1e-4)
    assert result_of(budget, conditions).of("noise_figure").result < 3.4


def test_a_table_is_read_at_the_intermediate_frequency_of_the_block() -> None:
    table = ConditionTable(
        dimension="if_frequency", dimension_unit="GHz", at=(2.0, 6.0), values=(8.0, 4.0), between="linear"
    )
    budget = a_chain({"block": "DNC", "gain": table}, parameter="gain", conditions="CS")
    conditions = a_conditions_set("CS", a_dimension("frequency", "GHz", values=(17.7, 20.2)))
    mixed = ConditionMap(
        id="CM", block="DNC", entries=(parse_map_entry("if_frequency = frequency - 15.2 GHz"),)
    )
    found = result_of(budget, conditions, mixed, limit=at_least(1)).of("gain").result
    assert found == pytest.approx([8.0 - 0.5, 8.0 - 3.0])


def test_steps_hold_from_their_entry_on_and_linear_power_bends_between_entries() -> None:
    step = ConditionTable(
        dimension="frequency",
        dimension_unit="GHz",
        at=(1.0, 2.0, 3.0),
        values=(10.0, 20.0, 30.0),
        between="step",
    )
    bent = ConditionTable(
        dimension="frequency", dimension_unit="GHz", at=(1.0, 3.0), values=(10.0, 20.0), drawn_in="linear"
    )
    conditions = a_conditions_set("CS", a_dimension("frequency", "GHz", values=(1.0, 2.0, 2.9)))
    stepped = a_chain({"block": "A", "gain": step}, parameter="gain", conditions="CS")
    assert result_of(stepped, conditions, limit=at_least(1)).of("gain").result == pytest.approx(
        [10.0, 20.0, 20.0]
    )
    curved = a_chain({"block": "A", "gain": bent}, parameter="gain", conditions="CS")
    assert result_of(curved, conditions, limit=at_least(1)).of("gain").result[1] == pytest.approx(
        10 * np.log10((10 + 100) / 2)
    )


def test_a_drift_moves_a_line_with_the_temperature_of_the_block() -> None:
    line = a_budget_line(
        1,
        "AMP",
        "gain",
        24.0,
        drifts=(Drift(dimension="temperature_baseplate", dimension_unit="°C", slope=-0.02, reference=23.0),),
    )
    budget = Budget(
        id="B-1",
        requirements=("R-1",),
        quantity=a_quantity("gain"),
        law="cascade",
        lines=(line,),
        conditions="CS",
    )
    conditions = a_conditions_set("CS", a_dimension("temperature_ambient", "°C", values=(-25.0, 55.0)))
    warm = ConditionMap(
        id="CM", block="AMP", entries=(parse_map_entry("temperature_baseplate = temperature_ambient + 18 K"),)
    )
    assert result_of(budget, conditions, warm, limit=at_least(1)).of("gain").result == pytest.approx(
        [24.6, 23.0]
    )


def test_gain_by_drive_takes_the_level_at_the_input_of_the_block() -> None:
    table = ConditionTable(
        dimension="input_level", dimension_unit="dBm", at=(-20.0, 10.0), values=(20.0, 17.0)
    )
    budget = a_chain(
        {"block": "DRV", "gain": 15.0},
        {"block": "PA", "gain": table},
        parameter="output_power",
        input_level=-20.0,
    )
    result = result_of(budget, limit=at_least(1, "dBm"))
    assert result.levels is not None
    assert result.levels[:, 0] == pytest.approx([-20.0, -5.0, -5.0 + 18.5])


def test_a_range_is_sampled_at_its_step_so_that_the_worst_place_lies_inside() -> None:
    table = ConditionTable(
        dimension="frequency", dimension_unit="GHz", at=(1.0, 2.0, 3.0), values=(10.0, 7.0, 10.0)
    )
    budget = a_chain({"block": "A", "gain": table}, parameter="gain", conditions="CS")
    conditions = a_conditions_set(
        "CS", a_dimension("frequency", "GHz", span=Span(low=1.0, high=3.0, step=0.5))
    )
    served = result_of(budget, conditions, limit=at_least(8)).of("gain").served[0]
    assert served.smallest_margin == pytest.approx(-1.0)
    assert served.worst == 2 and served.closes is False


def test_the_reserve_is_taken_off_the_margin_and_names_its_holder() -> None:
    reserve = Reserve(parameter="noise_figure", amount=0.2, unit="dB", holder="system lead")
    served = (
        result_of(a_chain(*POZAR_10_2, reserves=(reserve,)), limit=at_most(3)).of("noise_figure").served[0]
    )
    assert served.smallest_margin == pytest.approx(3 - 2.5554 - 0.2, abs=1e-3)
    assert served.reserve_holder == "system lead"


def test_values_handed_in_replace_lines_where_they_are_numbers() -> None:
    budget = a_chain(*POZAR_10_2, conditions="CS")
    snapshot = project_of(budget, a_conditions_set("CS", a_dimension()))
    own = evaluate_budget(budget, snapshot, DICTIONARY).of("noise_figure").result
    new = {(1, "noise_figure"): np.array([1.5, np.nan, 2.5])}
    found = evaluate_budget(budget, snapshot, DICTIONARY, values=new).of("noise_figure").result
    assert found[0] < own[0] and found[1] == own[1] and found[2] > own[2]


def test_identical_elements_bear_n_times_the_power_and_keep_noise_figure_and_gain() -> None:
    one = a_chain({"block": "A", "gain": 20.0, "noise_figure": 2.0, "iip3": 0.0}, parameter="iip3")
    many = a_chain(
        {"block": "A", "gain": 20.0, "noise_figure": 2.0, "iip3": 0.0, "count": 4}, parameter="iip3"
    )
    limit = at_least(-10, "dBm")
    assert result_of(many, limit=limit).of("iip3").result == pytest.approx(
        result_of(one, limit=limit).of("iip3").result + 10 * np.log10(4)
    )


def test_output_intercepts_are_taken_to_the_input_by_the_gain_of_their_position() -> None:
    """Forum example (15/3/OIP3 15 and 15/5/OIP3 20 dB, dBm): NF 3.146 dB, OIP3 19.586 dBm."""
    budget = a_chain(
        {"block": "A", "gain": 15.0, "noise_figure": 3.0, "oip3": 15.0},
        {"block": "B", "gain": 15.0, "noise_figure": 5.0, "oip3": 20.0},
        parameter="oip3",
    )
    result = result_of(budget, limit=at_least(10, "dBm"))
    assert result.of("oip3").result == pytest.approx(19.586, abs=1e-3)
    assert result.of("oip3").cumulative[0] == pytest.approx(15.0)


def test_g_over_t_of_an_antenna_in_front_of_a_receiver() -> None:
    """Computed reference: 40 dBi, 50 K, feed 0.5 dB at 290 K, LNA 0.8 dB: 18.204 dB/K."""
    budget = a_chain(
        {"block": "ANT", "antenna_gain": 40.0, "antenna_noise_temperature": 50.0},
        {"block": "FEED", "insertion_loss": 0.5, "passive": True},
        {"block": "LNA", "gain": 50.0, "noise_figure": 0.8},
        {"block": "REST", "gain": 0.0, "noise_figure": 10.0},
        parameter="g_over_t",
    )
    assert result_of(budget, limit=at_least(18, "dB/K")).of("g_over_t").result == pytest.approx(
        18.204, abs=1e-3
    )


def test_leakage_of_a_transmit_chain_into_the_adjacent_channel() -> None:
    """Computed and simulated reference: OIP3 47 dBm, 27 dBm out, 3.84 MHz at 5 MHz: 49.457 dB."""
    budget = a_chain(
        {"block": "PA", "gain": 27.0, "oip3": 47.0},
        parameter="aclr",
        input_level=0.0,
        bandwidth_hz=3.84e6,
        channel_spacing_hz=5e6,
    )
    assert result_of(budget, limit=at_least(45)).of("aclr").result == pytest.approx(49.457, abs=1e-3)


def test_error_vectors_of_several_kinds_combine_by_root_of_squares() -> None:
    """Published list 2, 1.5, 1.5 and 0.5 %: 2.96 %."""
    lines = tuple(
        a_budget_line(order, block, "evm", value, unit="%")
        for order, (block, value) in enumerate((("A", 2.0), ("B", 1.5), ("C", 1.5), ("D", 0.5)), 1)
    )
    budget = Budget(
        id="B-1", requirements=("R-1",), quantity=a_quantity("evm"), law="root sum of squares", lines=lines
    )
    assert result_of(budget, limit=at_most(4, "%")).of("evm").result == pytest.approx(2.96, abs=5e-3)


@pytest.mark.parametrize(
    ("shared", "one", "said"),
    [("per element", 0.5, "independent of each other"), ("common", 4.0, "the same in all")],
)
def test_how_errors_of_elements_add_is_said(
    shared: Literal["per element", "common"], one: float, said: str
) -> None:
    lines = (a_budget_line(1, "A", "evm", 4.0, unit="%", shared=shared),)
    budget = Budget(
        id="B-1", requirements=("R-1",), quantity=a_quantity("evm"), law="root sum of squares", lines=lines,
        positions=(a_position(1, "A", count=64),),
    )  # fmt: skip
    found = result_of(budget, limit=at_most(8, "%"))
    assert found.of("evm").result == pytest.approx(one)
    assert any("64 elements" in note and said in note for note in found.notes)


def test_power_sum_of_two_carriers() -> None:
    """Courseware: uplink carriers of 45.6 and 42.6 dBW sum to 47.4 dBW."""
    lines = (
        a_budget_line(1, "A", "eirp", 45.6, unit="dBW"),
        a_budget_line(2, "B", "eirp", 42.6, unit="dBW"),
    )
    budget = Budget(
        id="B-1", requirements=("R-1",), quantity=a_quantity("eirp"), law="power sum", lines=lines
    )
    result = result_of(budget, limit=at_most(80, "dBm")).of("eirp").result
    assert result - 30.0 == pytest.approx(47.4, abs=0.05)


def test_a_growth_allowance_worsens_a_figure_only_where_it_is_asked_for() -> None:
    stage = {"block": "A", "gain": 10.0, "noise_figure": 2.0}
    asked = a_chain({**stage, "more": {"noise_figure": {"growth": 0.3}, "gain": {"growth": 1.0}}})
    result = result_of(asked)
    assert result.of("noise_figure").result == pytest.approx(2.3)
    assert result.figures["gain"][0] == pytest.approx(9.0)
    assert any("growth allowance of 0.3" in note for note in result.notes)
    assert result_of(a_chain(stage)).of("noise_figure").result == pytest.approx(2.0)


def test_what_is_assumed_is_said() -> None:
    budget = a_chain(*POZAR_10_2, parameter="ip1db")
    lines = tuple(
        a_budget_line(order, block, "ip1db", 0.0, unit="dBm") for order, block in ((1, "AMP"), (3, "MIX"))
    )
    notes = result_of(
        budget.model_copy(update={"lines": (*budget.lines, *lines)}), limit=at_least(-99, "dBm")
    ).notes
    assert any("approximation" in note for note in notes)
    assert any("290 K, no temperature is stated" in note for note in notes)


def test_a_limit_that_depends_on_conditions_is_held_at_each_of_them() -> None:
    limit = parse_limit("by frequency[GHz] (27.5: <= 2 dB; 28.75: <= 3 dB; 30: <= 4 dB)")
    budget = a_chain({"block": "A", "gain": 10.0, "noise_figure": 2.5}, conditions="CS")
    served = (
        result_of(budget, a_conditions_set("CS", a_dimension()), limit=limit).of("noise_figure").served[0]
    )
    assert served.margin == pytest.approx([-0.5, 0.5, 1.5])
    assert served.worst == 0 and served.closes is False
