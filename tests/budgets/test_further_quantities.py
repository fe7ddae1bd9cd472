"""DC power, efficiency, desense and blocking of a cascade: against the calculators, a second route, and differences."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

from specflow.budgets import evaluate_budget, line_key, shares_of, slopes_of
from specflow.budgets.result import BudgetResult
from specflow.budgets.solve import solve_line
from specflow.calculators.blocking import desense, reciprocal_mixing, transmit_noise_ratio
from specflow.calculators.intercept_cascade import cascade_iip3
from specflow.calculators.intermodulation import im3_level, out_of_band_ip3
from specflow.errors import SpecflowError
from specflow.model.budget import Budget
from specflow.model.budget_line import ConditionTable
from specflow.parameters import load_dictionary
from tests import receiver
from tests.budgets.chains import a_chain, project_of
from tests.builders import at_least, at_most

DICTIONARY = load_dictionary()
STEP = 1e-4


def result(*stages: dict[str, Any], parameter: str, unit: str, **fields: Any) -> BudgetResult:
    budget = a_chain(*stages, parameter=parameter, **fields)
    return evaluate_budget(budget, project_of(budget, limit=at_most(1e6, unit)), DICTIONARY)


def refused(*stages: dict[str, Any], parameter: str, unit: str, **fields: Any) -> SpecflowError:
    with pytest.raises(SpecflowError) as caught:
        result(*stages, parameter=parameter, unit=unit, **fields)
    return caught.value


# DC power

DRIVER = {"block": "DRV", "gain": 20.0, "dc_power": 0.5, "count": 4}
PA = {"block": "PA", "gain": 10.0, "drain_efficiency": 40.0}
CONTROL = {"block": "CTRL", "dc_power": 3.0}


def test_dc_power_counts_elements_and_takes_efficiency_at_the_output_level() -> None:
    """10 dBm through 30 dB is 40 dBm, 10 W at 40 % is 25 W; 4 × 0.5 W; 3 W of control: 30 W in all."""
    found = result(DRIVER, PA, CONTROL, {"block": "CAB", "insertion_loss": 1.0, "passive": True},
                   parameter="dc_power", unit="W", input_level=10.0).of("dc_power")  # fmt: skip
    assert found.result == pytest.approx(30.0)
    assert found.cumulative[:, 0] == pytest.approx([2.0, 27.0, 30.0, 30.0])


def test_efficiency_is_of_the_power_behind_all_losses() -> None:
    stages = (DRIVER, PA, CONTROL, {"block": "CAB", "insertion_loss": 1.0, "passive": True})
    behind = 10.0 * 10 ** (-0.1)
    total = result(*stages, parameter="total_efficiency", unit="%", input_level=10.0).of("total_efficiency")
    assert total.result == pytest.approx(100 * behind / 30.0)
    added = result(*stages, parameter="pae", unit="%", input_level=10.0).of("pae")
    assert added.result == pytest.approx(100 * (behind - 0.01) / 30.0)


def test_power_added_efficiency_of_a_stage_takes_its_input_off() -> None:
    stage = {"block": "PA", "gain": 10.0, "pae": 36.0}
    found = result(stage, parameter="dc_power", unit="W", input_level=30.0).of("dc_power")
    assert found.result == pytest.approx((10.0 - 1.0) / 0.36)


def test_a_supply_that_tracks_is_read_at_the_output_of_one_element() -> None:
    """Four amplifiers share 36 dBm: 29.98 dBm each, where the table has 2 W."""
    table = ConditionTable(
        dimension="power_level", dimension_unit="dBm", at=(10.0, 29.9794, 33.0), values=(1.0, 2.0, 5.0)
    )
    stage = {"block": "PA", "gain": 20.0, "dc_power": table, "count": 4}
    found = result(stage, parameter="dc_power", unit="W", input_level=16.0)
    assert found.of("dc_power").result == pytest.approx(8.0, abs=1e-4)
    assert any("at the level of one of 4 elements" in note for note in found.notes)


def test_an_amplifier_without_dc_power_is_not_taken_as_free() -> None:
    error = refused(DRIVER, {"block": "PA", "gain": 10.0}, parameter="dc_power", unit="W", input_level=0.0)
    assert "no DC power" in error.message and "(PA)" in error.where


@pytest.mark.parametrize(
    ("stage", "words"),
    [
        ({"block": "PA", "gain": 10.0, "dc_power": 1.0, "drain_efficiency": 40.0}, "in 2 ways"),
        ({"block": "PA", "gain": 10.0, "drain_efficiency": 140.0}, "at most 100 %"),
        ({"block": "PA", "gain": 10.0, "dc_power": -1.0}, "dc_power is -1 W"),
    ],
)
def test_what_no_supply_does_is_refused(stage: dict[str, Any], words: str) -> None:
    error = refused(stage, parameter="dc_power", unit="W", input_level=0.0)
    assert words in f"{error.message}; {error.hint}"


def test_the_efficiency_that_a_limit_on_dc_power_asks_for() -> None:
    budget = a_chain(DRIVER, PA, parameter="dc_power", input_level=10.0)
    solution = solve_line(
        budget, project_of(budget, limit=at_most(22, "W")), DICTIONARY, (2, "drain_efficiency")
    )
    assert solution.at_least is not None and solution.at_least.value == pytest.approx(50.0)


# Interference

LNA = {"block": "LNA", "gain": 15.0, "noise_figure": 2.0, "iip3": -5.0}
MIX = {"block": "MIX", "gain": -6.0, "noise_figure": 7.0, "iip3": 10.0, "phase_noise": -140.0}
FIELDS = {"bandwidth_hz": 271e3}


def noise_floor(*stages: dict[str, Any]) -> float:
    found = result(*stages, parameter="noise_floor", unit="dBm", **FIELDS)
    return float(found.of("noise_floor").result[0])


def test_reciprocal_mixing_raises_the_noise_as_the_calculators_say() -> None:
    """-26 dBm, -140 dBc/Hz, 271 kHz: about -112 dBm (Osmocom umtrx mailing list)."""
    stages = ({**LNA, "blocking_level": -26.0}, MIX)
    found = result(*stages, parameter="desensitisation", unit="dB", **FIELDS).of("desensitisation")
    mixed = float(reciprocal_mixing(-26.0, -140.0, 271e3))
    assert mixed == pytest.approx(-111.67, abs=0.01)
    assert found.result == pytest.approx(float(desense(noise_floor(LNA, MIX), [mixed])))


def test_a_filter_in_front_of_the_mixer_keeps_the_blocker_off() -> None:
    stages = ({**LNA, "blocking_level": -26.0, "rejection": 12.0}, MIX)
    found = result(*stages, parameter="desensitisation", unit="dB", **FIELDS).of("desensitisation")
    mixed = float(reciprocal_mixing(-38.0, -140.0, 271e3))
    assert found.result == pytest.approx(float(desense(noise_floor(LNA, MIX), [mixed])))


@pytest.mark.parametrize(("law", "name"), [("coherent", "coherent"), ("noncoherent", "non-coherent")])
def test_two_tones_make_the_product_of_the_cascade_intercept(law: str, name: str) -> None:
    stages = ({**LNA, "receiver_intermodulation": -45.0}, MIX)
    fields = FIELDS | {"intermodulation": name}
    found = result(*stages, parameter="desensitisation", unit="dB", **fields).of("desensitisation")
    iip3 = float(cascade_iip3([15.0, -6.0], [-5.0, 10.0], law))  # type: ignore[arg-type]
    product = float(im3_level(-45.0, -45.0, iip3))
    assert found.result == pytest.approx(float(desense(noise_floor(LNA, MIX), [product])))


def test_a_rejection_between_stages_helps_the_later_ones_only() -> None:
    """IIP3 of what is behind improves by (2·A + A)/2 for a rejection A of both tones."""
    stages = ({**LNA, "receiver_intermodulation": -40.0, "rejection": 8.0}, MIX)
    found = result(*stages, parameter="desensitisation", unit="dB", **FIELDS).of("desensitisation")
    behind = float(out_of_band_ip3(10.0, 8.0, 8.0))
    product = float(im3_level(-40.0, -40.0, float(cascade_iip3([15.0, -6.0], [-5.0, behind], "coherent"))))
    assert found.result == pytest.approx(float(desense(noise_floor(LNA, MIX), [product])))


def test_transmitter_noise_through_an_isolation() -> None:
    """I/N by densities: (-128 - 50) - (kT + NF)."""
    stages = ({**LNA, "noise_density": -128.0, "isolation": 50.0}, MIX)
    found = result(*stages, parameter="desensitisation", unit="dB", **FIELDS).of("desensitisation")
    nf = float(result(LNA, MIX, parameter="noise_figure", unit="dB").of("noise_figure").result[0])
    ratio = float(transmit_noise_ratio(-128.0, 50.0, nf))
    assert found.result == pytest.approx(10 * math.log10(1 + 10 ** (ratio / 10)))


def test_the_blocker_that_is_allowed_gives_just_the_rise_that_is_allowed() -> None:
    leak = {"noise_density": -135.0, "isolation": 45.0}
    stages = ({**LNA, **leak, "rejection": 5.0, "desensitisation": 3.0}, MIX, {"block": "MX2", "gain": 0.0,
              "noise_figure": 10.0, "phase_noise": -150.0})  # fmt: skip
    level = float(
        result(*stages, parameter="blocking_level", unit="dBm", **FIELDS).of("blocking_level").result[0]
    )
    back = ({**LNA, **leak, "rejection": 5.0, "blocking_level": level}, *stages[1:])
    rise = result(*back, parameter="desensitisation", unit="dB", **FIELDS).of("desensitisation").result
    assert rise == pytest.approx(3.0)


def test_no_blocker_is_allowed_where_the_transmitter_takes_the_whole_rise() -> None:
    stages = ({**LNA, "noise_density": -100.0, "desensitisation": 1.0}, MIX)
    found = result(*stages, parameter="blocking_level", unit="dBm", **FIELDS).of("blocking_level")
    assert np.isneginf(found.result)
    assert found.served[0].margin.tolist() == [math.inf] and found.served[0].closes is True
    budget = a_chain(*stages, parameter="blocking_level", **FIELDS)
    wanted = evaluate_budget(budget, project_of(budget, limit=at_least(-30.0, "dBm")), DICTIONARY)
    assert wanted.of("blocking_level").served[0].closes is False, "no blocker at all is tolerated"


@pytest.mark.parametrize(
    ("figures", "parameter", "words"),
    [
        ({"blocking_level": -30.0}, "desensitisation", "no phase noise"),
        ({"isolation": 30.0, "blocking_level": -30.0}, "desensitisation", "no transmitter's noise"),
        ({}, "desensitisation", "needs the interference"),
        ({"desensitisation": 1.0}, "blocking_level", "needs the phase noise"),
        ({"rejection": -3.0, "receiver_intermodulation": -30.0}, "desensitisation", "rejection is -3 dB"),
    ],
)
def test_half_stated_interference_is_refused(figures: dict[str, float], parameter: str, words: str) -> None:
    mixer = {**MIX}
    if words != "rejection is -3 dB" and "no transmitter" not in words:
        mixer.pop("phase_noise")
    error = refused({**LNA, **figures}, mixer, parameter=parameter, unit=UNITS[parameter], **FIELDS)
    assert words in error.message


UNITS = {"desensitisation": "dB", "blocking_level": "dBm"}


def test_a_stage_without_an_intercept_is_not_taken_as_ideal_for_two_tones() -> None:
    plain = {"block": "MIX", "gain": -6.0, "noise_figure": 7.0}
    error = refused(
        {**LNA, "receiver_intermodulation": -40.0}, plain, parameter="desensitisation", unit="dB", **FIELDS
    )
    assert "third-order intercept" in error.message and "(MIX)" in error.where


# All of them


@pytest.mark.parametrize("intermodulation", ["coherent", "non-coherent"])
def test_slopes_are_those_of_finite_differences(intermodulation: str) -> None:
    budget = receiver.a_receiver(*receiver.NEEDS_FURTHER, intermodulation=intermodulation)
    _check_slopes(budget)


def test_slopes_of_power_added_efficiency() -> None:
    budget = receiver.a_receiver(*receiver.NEEDS_FURTHER)
    lines = tuple(
        one.model_copy(update={"parameter": "pae"}) if one.parameter == "drain_efficiency" else one
        for one in budget.lines
    )
    _check_slopes(budget.model_copy(update={"lines": lines, "input_level": -10.0}))


def _check_slopes(budget: Budget) -> None:
    snapshot = receiver.receiver_project(budget, names=receiver.NEEDS_FURTHER)
    nominal = evaluate_budget(budget, snapshot, DICTIONARY)
    slopes = {one.parameter: one for one in slopes_of(nominal)}
    assert set(slopes) == set(receiver.NEEDS_FURTHER)
    for line in budget.lines:
        value = line.value.value  # type: ignore[union-attr]
        up, down = (
            evaluate_budget(budget, snapshot, DICTIONARY, values={line_key(line): value + step})
            for step in (STEP, -STEP)
        )
        for name, found in slopes.items():
            difference = (up.of(name).result - down.of(name).result) / (2 * STEP)
            assert found.of(line.position, line.parameter) == pytest.approx(difference, rel=2e-5, abs=2e-6), (
                name,
                line.place,
            )


def test_shares_of_dc_power_add_up() -> None:
    budget = a_chain(DRIVER, PA, CONTROL, parameter="dc_power", input_level=10.0)
    found = evaluate_budget(budget, project_of(budget, limit=at_most(40, "W")), DICTIONARY)
    (shares,) = shares_of(found)
    assert shares.shares[:, 0] == pytest.approx([2 / 30, 25 / 30, 3 / 30])


def test_a_limit_on_blocking_is_a_lower_one() -> None:
    budget = a_chain({**LNA, "desensitisation": 3.0}, MIX, parameter="blocking_level", **FIELDS)
    found = evaluate_budget(budget, project_of(budget, limit=at_least(-35, "dBm")), DICTIONARY)
    assert found.served[0].closes is True and found.served[0].smallest_margin == pytest.approx(
        3.3386, abs=1e-3
    )
