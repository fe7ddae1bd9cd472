"""Image noise of mixers in a cascade: against the calculators, and against a sum over every source and frequency."""

from __future__ import annotations

import itertools
import math
from typing import Any

import numpy as np
import pytest

from specflow.budgets import evaluate_budget, line_key, monte_carlo, shares_of, slopes_of, worst_case
from specflow.budgets.apportion import apportion
from specflow.budgets.effort import least_effort
from specflow.budgets.solve import solve_line
from specflow.calculators.image_noise import both_sidebands_noise_figure, image_noise_figure
from specflow.errors import SpecflowError
from specflow.model.budget import Budget
from specflow.parameters import load_dictionary
from tests.budgets.chains import a_chain, project_of
from tests.builders import (
    a_conditions_set,
    a_dimension,
    a_quantity,
    a_requirement,
    at_least,
    at_most,
)

DICTIONARY = load_dictionary()
STEP = 1e-4
GAIN = {"minus": 0.5, "plus": 0.5, "meaning": "limits", "distribution": "uniform"}


def mixer(sideband: str, noise: float, **figures: Any) -> dict[str, Any]:
    return {
        "block": "MIX",
        "gain": -6.0,
        "noise_figure": noise,
        "more": {"noise_figure": {"sideband": sideband}},
        **figures,
    }


LNA = {"block": "LNA", "gain": 15.0, "noise_figure": 2.0}


def noise_figure(*stages: dict[str, Any], **fields: Any) -> float:
    budget = a_chain(*stages, **fields)
    return float(evaluate_budget(budget, project_of(budget), DICTIONARY).of("noise_figure").result[0])


@pytest.mark.parametrize("rejection", [0.0, 6.0, 20.0, 200.0])
def test_an_amplifier_in_front_gives_the_calculators_figure(rejection: float) -> None:
    """2 dB, 15 dB, 8 dB DSB: 5.448 without a filter, 2.940 with 20 dB, 2.906 with a perfect one."""
    found = noise_figure(LNA, mixer("DSB", 8.0, image_rejection=rejection))
    assert found == pytest.approx(float(image_noise_figure(2.0, 15.0, 8.0, rejection)), abs=1e-9)


def test_single_and_double_sideband_figures_of_one_mixer_give_one_result() -> None:
    ssb = 8.0 + 10.0 * math.log10(2.0)
    for rejection in (0.0, 20.0):
        double = noise_figure(LNA, mixer("DSB", 8.0, image_rejection=rejection))
        single = noise_figure(LNA, mixer("SSB", ssb, image_rejection=rejection))
        assert single == pytest.approx(double, abs=1e-9)


def test_a_single_sideband_figure_alone_takes_the_image_as_kept_off() -> None:
    ssb = 8.0 + 10.0 * math.log10(2.0)
    plain = noise_figure(LNA, mixer("SSB", ssb))
    assert plain == pytest.approx(noise_figure(LNA, mixer("DSB", 8.0, image_rejection=300.0)), abs=1e-9)


def test_a_mixer_alone_is_3_db_above_its_double_sideband_figure_whatever_filters_at_290_k() -> None:
    for rejection in (0.0, 30.0):
        assert noise_figure(mixer("DSB", 8.0, image_rejection=rejection)) == pytest.approx(11.0103, abs=1e-4)


def test_a_wanted_signal_in_both_sidebands_takes_the_double_sideband_figure_as_it_is() -> None:
    found = noise_figure(LNA, mixer("both", 8.0))
    assert found == pytest.approx(float(both_sidebands_noise_figure(2.0, 15.0, 8.0)), abs=1e-9)


def test_a_double_sideband_temperature_is_that_figure() -> None:
    kelvin = 290.0 * (10 ** (8.0 / 10) - 1)
    stage = mixer("DSB", 8.0, image_rejection=10.0)
    stage = {"block": "MIX", "gain": -6.0, "noise_temperature": kelvin, "image_rejection": 10.0,
             "more": {"noise_temperature": {"sideband": "DSB"}}}  # fmt: skip
    assert noise_figure(LNA, stage) == pytest.approx(
        float(image_noise_figure(2.0, 15.0, 8.0, 10.0)), abs=1e-9
    )


def test_a_rejection_of_the_filter_in_front_is_that_of_the_mixer() -> None:
    filter_ = {"block": "FIL", "insertion_loss": 0.0, "passive": True}
    at_filter = noise_figure(LNA, {**filter_, "image_rejection": 20.0}, mixer("DSB", 8.0))
    assert at_filter == pytest.approx(float(image_noise_figure(2.0, 15.0, 8.0, 20.0)), abs=1e-9)
    behind = noise_figure({**filter_, "image_rejection": 20.0}, LNA, mixer("DSB", 8.0))
    assert behind > at_filter + 2.0  # the amplifier's own noise at the image comes through


# Two conversions: every source of noise followed by itself through every choice of frequencies

TWO = (
    {"block": "PRE", "insertion_loss": 0.8, "passive": True, "image_rejection": 12.0},
    {"block": "LNA", "gain": 14.0, "noise_figure": 2.0},
    {"block": "FIL", "insertion_loss": 1.5, "passive": True, "image_rejection": 9.0},
    {"block": "MX1", "conversion_loss": 6.0, "noise_figure": 6.5, "image_rejection": 3.0},
    {"block": "IF1", "gain": 12.0, "noise_figure": 3.0, "image_rejection": 7.0},
    {"block": "MX2", "gain": 2.0, "noise_figure": 10.0},
    {"block": "IF2", "gain": 20.0, "noise_figure": 5.0},
)
SIDEBANDS = {"MX1": "DSB", "MX2": "SSB"}


def two(**fields: Any) -> Budget:
    stages = [
        {**stage, "more": {"noise_figure": {"sideband": SIDEBANDS.get(str(stage["block"]), "")}}}
        for stage in TWO
    ]
    return a_chain(*stages, **fields)


def by_sources(source_k: float) -> float:
    """Return the system temperature at the input, each source of noise summed over all the ways it can take.

    A way picks, at each mixer, the signal or the image sideband; a filter weighs the image ways by r and adds (1-r)·290
    K there. This follows sources one by one, where the tool follows two totals along the chain.
    """
    gains, filters, extra = [], [], []
    for stage in TWO:
        loss = stage.get("insertion_loss", stage.get("conversion_loss"))
        gain = 10 ** ((-loss if loss is not None else stage["gain"]) / 10)  # type: ignore[operator]
        factor = 10 ** (stage["noise_figure"] / 10) if "noise_figure" in stage else 1 / gain  # type: ignore[operator]
        if stage["block"] == "MX1":
            factor = 2 * factor
        gains.append(gain)
        filters.append(10 ** (-float(stage.get("image_rejection", 0.0)) / 10))  # type: ignore[arg-type]
        # a mixer's own noise at its output: its single-sideband factor without the two sidebands at its input
        extra.append(factor - (2.0 if stage["block"] in SIDEBANDS else 1.0))
    mixers = [number for number, stage in enumerate(TWO) if stage["block"] in SIDEBANDS]
    starts = [0, mixers[0] + 1]

    def ways(first: int) -> float:
        """How often noise that enters in front of position ``first`` at both frequencies reaches the output."""
        total = 0.0
        behind = [mixer for mixer in mixers if mixer >= first]
        for choice in itertools.product((False, True), repeat=len(behind)):
            weight = 1.0
            for mixer, is_image in zip(behind, choice, strict=True):
                start = max(starts[mixers.index(mixer)], first)
                if is_image:
                    weight *= math.prod(filters[start : mixer + 1])
            total += weight
        return total

    output = source_k * math.prod(gains) * ways(0)
    for number, gain in enumerate(gains):
        rest = math.prod(gains[number + 1 :])
        if number in mixers:
            output += 290.0 * extra[number] * gain * rest * ways(number + 1)
            output += (
                290.0 * (1 - filters[number]) * gain * rest * ways(number + 1)
            )  # its filter, at the image
            continue
        mixer = next((one for one in mixers if one > number), None)
        if mixer is None:
            output += 290.0 * extra[number] * gain * rest
            continue
        # noise of the position at signal and, through its own filter and those behind it, at the image
        through = math.prod(filters[number : mixer + 1])
        output += 290.0 * extra[number] * gain * rest * (1 + through) * ways(mixer + 1)
        of_filter = (1 - filters[number]) * math.prod(filters[number + 1 : mixer + 1])
        output += 290.0 * of_filter * rest * ways(mixer + 1)
    return output / math.prod(gains)


@pytest.mark.parametrize("source_k", [290.0, 40.0, 2000.0])
def test_two_conversions_agree_with_a_sum_over_all_sources_and_ways(source_k: float) -> None:
    budget = two(parameter="system_noise_temperature", noise_source=source_k)
    result = evaluate_budget(budget, project_of(budget, limit=at_most(1e6, "K")), DICTIONARY)
    assert result.of("system_noise_temperature").result == pytest.approx(by_sources(source_k), rel=1e-9)


def test_the_source_counts_at_the_image_with_its_own_temperature() -> None:
    """A cold sky in both sidebands: without a filter T_sys is 2·T_sky and the receiver, not T_sky + 290 K."""
    budget = a_chain(
        mixer("DSB", 3.0, image_rejection=0.0), parameter="system_noise_temperature", noise_source=20.0
    )
    result = evaluate_budget(budget, project_of(budget, limit=at_most(1e6, "K")), DICTIONARY)
    receiver = 2 * 290.0 * (10 ** (3.0 / 10) - 1)
    assert result.of("system_noise_temperature").result == pytest.approx(2 * 20.0 + receiver)
    (shares,) = shares_of(result)
    assert 1.0 - shares.shares.sum() == pytest.approx(40.0 / (40.0 + receiver))


@pytest.mark.parametrize(
    ("parameter", "unit"),
    [
        ("noise_figure", "dB"),
        ("noise_temperature", "K"),
        ("system_noise_temperature", "K"),
        ("noise_density", "dBm/Hz"),
    ],
)
def test_slopes_are_those_of_finite_differences(parameter: str, unit: str) -> None:
    budget = two(parameter=parameter, noise_source=60.0)
    snapshot = project_of(budget, limit=at_most(1e6, unit))
    (slopes,) = slopes_of(evaluate_budget(budget, snapshot, DICTIONARY))
    for line in budget.lines:
        value = line.value.value  # type: ignore[union-attr]
        up, down = (
            evaluate_budget(budget, snapshot, DICTIONARY, values={line_key(line): value + step})
            for step in (STEP, -STEP)
        )
        difference = (up.of(parameter).result - down.of(parameter).result) / (2 * STEP)
        assert slopes.of(line.position, line.parameter) == pytest.approx(difference, rel=1e-5, abs=1e-5), (
            line.place
        )


def test_parallel_paths_in_front_count_at_the_image_as_one_stage() -> None:
    budget = a_chain(LNA, LNA, mixer("DSB", 8.0, image_rejection=10.0))
    positions = tuple(
        one.model_copy(update={"path": path})
        for one, path in zip(budget.positions, ("A", "B", ""), strict=True)
    )
    budget = budget.model_copy(update={"positions": positions})
    result = evaluate_budget(budget, project_of(budget), DICTIONARY)
    assert result.of("noise_figure").result == pytest.approx(float(image_noise_figure(2.0, 15.0, 8.0, 10.0)))


def test_specimens_and_corners_carry_the_image() -> None:
    window = {"minus": 1.0, "plus": 1.0, "meaning": "limits", "distribution": "uniform"}
    stage = mixer("DSB", 8.0, image_rejection=10.0)
    stage["more"] = {"noise_figure": {"sideband": "DSB"}, "image_rejection": {"tolerance": window}}
    budget = a_chain(LNA, stage)
    snapshot = project_of(budget)
    found = worst_case(budget, snapshot, DICTIONARY).of("noise_figure")
    assert found.high == pytest.approx(float(image_noise_figure(2.0, 15.0, 8.0, 9.0)))
    assert found.low == pytest.approx(float(image_noise_figure(2.0, 15.0, 8.0, 11.0)))
    drawn = monte_carlo(budget, snapshot, DICTIONARY, trials=4000, seed=3).of("noise_figure")
    at = np.linspace(9.0, 11.0, 2001)
    assert drawn.mean == pytest.approx(np.mean(image_noise_figure(2.0, 15.0, 8.0, at)), abs=0.005)


def test_the_rejection_that_a_limit_asks_for_is_found_and_holds() -> None:
    budget = a_chain(LNA, mixer("DSB", 8.0, image_rejection=30.0))
    snapshot = project_of(budget, limit=at_most(3.2))
    solution = solve_line(budget, snapshot, DICTIONARY, (2, "image_rejection"))
    assert solution.at_least is not None
    assert float(image_noise_figure(2.0, 15.0, 8.0, solution.at_least.value)) == pytest.approx(3.2, abs=1e-6)
    noise = solve_line(budget, snapshot, DICTIONARY, (2, "noise_figure"))
    assert noise.at_most is not None
    assert float(image_noise_figure(2.0, 15.0, noise.at_most.value, 30.0)) == pytest.approx(3.2, abs=1e-6)


def refused(*stages: dict[str, Any], **fields: Any) -> SpecflowError:
    with pytest.raises(SpecflowError) as caught:
        noise_figure(*stages, **fields)
    return caught.value


def test_a_double_sideband_figure_without_a_word_on_the_image_is_refused() -> None:
    error = refused(LNA, mixer("DSB", 8.0))
    assert (
        "double-sideband" in error.message
        and "MIX noise_figure" in error.where
        and "image_rejection" in error.hint
    )


def test_a_rejection_behind_the_mixer_does_not_stand_for_one_in_front() -> None:
    assert "no mixer stands here" in refused(mixer("SSB", 9.0), {**LNA, "image_rejection": 20.0}).message


def test_a_single_sideband_figure_below_3_db_is_one_of_the_other_kind() -> None:
    assert "below 3.01 dB" in refused(LNA, mixer("SSB", 2.5, image_rejection=20.0)).message


def test_a_sideband_said_of_a_gain_is_refused() -> None:
    stage = {**LNA, "more": {"gain": {"sideband": "DSB"}}}
    assert "only the noise figure of a mixer" in refused(stage).message


def test_a_negative_rejection_is_refused() -> None:
    assert "image_rejection is -20 dB" in refused(LNA, mixer("DSB", 8.0, image_rejection=-20.0)).message


def test_an_image_to_reject_where_both_sidebands_are_wanted_is_refused() -> None:
    assert "both sidebands" in refused(LNA, mixer("both", 8.0, image_rejection=20.0)).message


def test_what_is_taken_of_the_image_is_said() -> None:
    for stage, words in (
        (mixer("SSB", 9.0), "taken as kept off"),
        (mixer("SSB", 9.0, image_rejection=20.0), "noise at its image counts"),
        (mixer("both", 9.0), "in both sidebands"),
    ):
        budget = a_chain(LNA, stage)
        notes = evaluate_budget(budget, project_of(budget), DICTIONARY).notes
        assert any(words in note for note in notes), words


def test_an_intercept_of_a_chain_with_a_filter_is_not_touched() -> None:
    budget = a_chain(
        {**LNA, "iip3": 0.0}, mixer("DSB", 8.0, image_rejection=20.0, iip3=10.0), requirements=("R-1", "R-2")
    )
    both = [
        a_requirement("R-1", quantity=a_quantity("noise_figure"), limit=at_most(9), conditions=None),
        a_requirement("R-2", quantity=a_quantity("iip3"), limit=at_least(-20, "dBm"), conditions=None),
    ]
    found = evaluate_budget(budget, project_of(budget, requirements=both), DICTIONARY).of("iip3").result
    assert found == pytest.approx(-10 * math.log10(1.0 + 10 ** ((15 - 10) / 10)))


@pytest.mark.parametrize("rejection", [0.0, 3.0, 40.0])
def test_a_passive_chain_in_equilibrium_makes_the_noise_of_its_temperature_at_the_image_too(
    rejection: float,
) -> None:
    """Source, filter and mixer's termination at 350 K: the mixer sees 350 K in both sidebands, whatever is rejected."""
    hot = a_conditions_set("CS", a_dimension("temperature_ambient", "K", values=(350.0,)))
    budget = a_chain(
        {"block": "FIL", "insertion_loss": 2.0, "passive": True, "image_rejection": rejection},
        mixer("DSB", 3.0),
        parameter="system_noise_temperature",
        noise_source=350.0,
        conditions="CS",
    )
    result = evaluate_budget(budget, project_of(budget, hot, limit=at_most(1e6, "K")), DICTIONARY)
    loss = 10**0.2
    expected = loss * (2 * 350.0 + 2 * 290.0 * (10**0.3 - 1))
    assert result.of("system_noise_temperature").result == pytest.approx(expected)


@pytest.mark.parametrize("way", ["equal", "proportional"])
def test_shares_leave_out_what_the_image_adds(way: Any) -> None:
    """What is shared of the mixer is its own noise, 2·(F_DSB - 1): the image's is nobody's share."""
    chain = (
        {"block": "LNA", "gain": 15.0, "noise_figure": 2.0, "more": {"gain": {"tolerance": GAIN}}},
        mixer("DSB", 8.0, image_rejection=20.0),
        {"block": "IF", "gain": 20.0, "noise_figure": 4.0},
    )
    budget = a_chain(*chain)
    snapshot = project_of(budget, limit=at_most(3.8))
    found = apportion(budget, snapshot, DICTIONARY, way=way, at_nominal=True)
    figures = {one.block: one.high for one in found.allotments if one.parameter == "noise_figure"}
    front = {"LNA": 1.0, "MIX": 10**1.5, "IF": 10**0.9}

    def own(name: str, figure: float) -> float:
        return (2 if name == "MIX" else 1) * (10 ** (figure / 10) - 1) / front[name]

    estimate = {"LNA": 2.0, "MIX": 8.0, "IF": 4.0}
    parts = [
        own(name, figures[name]) / (1.0 if way == "equal" else own(name, estimate[name])) for name in front
    ]
    assert max(parts) / min(parts) == pytest.approx(1.0, abs=0.02)
    stages = [{**stage, "noise_figure": figures[str(stage["block"])]} for stage in chain]
    assert noise_figure(*stages) == pytest.approx(3.8, abs=0.02)


def test_the_least_effort_takes_a_double_sideband_figure() -> None:
    budget = a_chain(LNA, mixer("DSB", 8.0, image_rejection=20.0))
    found = least_effort(budget, project_of(budget, limit=at_most(2.6)), DICTIONARY)
    figures = {one.block: one.high for one in found.allotments if one.parameter == "noise_figure"}
    stages = ({**LNA, "noise_figure": figures["LNA"]}, mixer("DSB", figures["MIX"], image_rejection=20.0))
    assert noise_figure(*stages) == pytest.approx(2.6, abs=0.02)
