"""Worst cases, root sums of squares and Monte Carlo, against the worked tolerance example and against each other."""

from __future__ import annotations

import itertools
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from specflow.budgets import evaluate_budget, line_key, monte_carlo, rss, worst_case
from specflow.budgets.draws import CHUNK, draws_of
from specflow.budgets.evaluate import prepare
from specflow.budgets.trials import percent_words
from specflow.errors import CalculationError
from specflow.model.budget import Budget, BudgetLine, Correlation
from specflow.parameters import load_dictionary
from tests.budgets.chains import a_chain, project_of
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


def limits(amount: float, distribution: str | None = "uniform", **more: Any) -> dict[str, Any]:
    tolerance = {"minus": amount, "plus": amount, "meaning": "limits", "distribution": distribution}
    return {"tolerance": tolerance | more}


def sigma(amount: float, k: float = 2.0) -> dict[str, Any]:
    return {"tolerance": {"minus": amount, "plus": amount, "meaning": "k sigma", "k": k}}


def receiver(**fields: Any) -> Budget:
    """LNA 18/1.2, filter 2.5, mixer -7/7, IF 20/4 dB; ±1/0.2, ±0.3, ±0.5/0.5, ±1/0.3 dB.

    The filter's noise figure is its loss.
    """
    return a_chain(
        {
            "block": "LNA",
            "gain": 18.0,
            "noise_figure": 1.2,
            "more": {"gain": limits(1.0), "noise_figure": limits(0.2)},
        },
        {"block": "FIL", "insertion_loss": 2.5, "passive": True, "more": {"insertion_loss": limits(0.3)}},
        {
            "block": "MIX",
            "gain": -7.0,
            "noise_figure": 7.0,
            "more": {"gain": limits(0.5), "noise_figure": limits(0.5)},
        },
        {
            "block": "IF",
            "gain": 20.0,
            "noise_figure": 4.0,
            "more": {"gain": limits(1.0), "noise_figure": limits(0.3)},
        },
        **fields,
    )


def test_worked_example_worst_case_at_true_corners() -> None:
    """Corners 1.659 to 2.869 dB, linear sum 0.599 dB: the corner is farther, because the law bends."""
    budget = receiver()
    found = worst_case(budget, project_of(budget, limit=at_most(2.5)), DICTIONARY).of("noise_figure")
    assert found.nominal == pytest.approx(2.194, abs=5e-4)
    assert (found.low[0], found.high[0]) == (pytest.approx(1.659, abs=5e-4), pytest.approx(2.869, abs=5e-4))
    assert found.parts.sum() == pytest.approx(0.599, abs=5e-4)
    assert found.is_exact
    assert found.served[0].adverse.smallest_margin == pytest.approx(2.5 - 2.869, abs=5e-4)
    assert found.served[0].favourable.smallest_margin == pytest.approx(2.5 - 1.659, abs=5e-4)


def test_worked_example_root_sum_of_squares() -> None:
    """RSS of the limits 0.285 dB; with uniform distributions that is a standard deviation of 0.285/√3."""
    budget = receiver()
    found = rss(budget, project_of(budget, limit=at_most(2.5)), DICTIONARY).of("noise_figure")
    assert found.high - found.nominal == pytest.approx(0.285, abs=5e-4)
    assert found.means == "limits"
    assert found.deviation is not None and found.deviation[0] == pytest.approx(
        0.2852457 / np.sqrt(3), abs=1e-5
    )


def test_worked_example_monte_carlo() -> None:
    """Uniform: mean 2.203, standard deviation 0.166, 99 % at 2.578 dB, within what sampling leaves open."""
    budget, trials = receiver(), 200_000
    found = monte_carlo(budget, project_of(budget, limit=at_most(2.5)), DICTIONARY, trials=trials, seed=7)
    chance = found.of("noise_figure")
    assert chance.mean[0] == pytest.approx(2.203, abs=1e-3 + 4 * 0.166 / np.sqrt(trials))
    assert chance.deviation[0] == pytest.approx(0.166, abs=1e-3)
    assert 2.5 - chance.served[0].quantiles[0.01] == pytest.approx(2.578, abs=5e-3)
    assert "sampling only" in chance.served[0].joint.words


def test_rss_is_refused_where_a_line_does_not_say_what_its_tolerance_means() -> None:
    budget = a_chain(
        {
            "block": "LNA",
            "gain": 18.0,
            "noise_figure": 1.2,
            "more": {"noise_figure": {"tolerance": {"minus": 0.2, "plus": 0.2}}},
        }
    )
    with pytest.raises(CalculationError, match="LNA noise_figure") as error:
        rss(budget, project_of(budget), DICTIONARY)
    assert "limits" in error.value.hint


def test_rss_of_limits_beside_k_sigma_needs_distributions() -> None:
    stage = {"block": "A", "gain": 10.0, "noise_figure": 2.0}
    mixed = a_chain(
        {**stage, "more": {"gain": limits(1.0, None), "noise_figure": sigma(0.4)}}, parameter="gain"
    )
    with pytest.raises(CalculationError, match="do not combine"):
        rss(mixed, project_of(mixed, limit=at_least(1)), DICTIONARY)
    named = a_chain(
        {**stage, "more": {"gain": limits(1.0), "noise_figure": sigma(0.4)}},
        {"block": "B", "gain": 3.0, "noise_figure": 2.0, "more": {"gain": sigma(0.6)}},
        parameter="gain",
    )
    found = rss(named, project_of(named, limit=at_least(1)), DICTIONARY).of("gain")
    assert found.means == "1 sigma"
    assert found.high - found.nominal == pytest.approx(np.hypot(1 / np.sqrt(3), 0.3))


def test_rss_is_refused_where_the_law_bends_over_the_tolerances() -> None:
    budget = a_chain(
        {"block": "A", "gain": 3.0, "noise_figure": 1.0, "more": {"gain": limits(12.0)}},
        {"block": "B", "gain": 10.0, "noise_figure": 10.0},
    )
    with pytest.raises(CalculationError, match="linear"):
        rss(budget, project_of(budget), DICTIONARY)


def test_monte_carlo_is_refused_where_bounds_name_no_distribution() -> None:
    budget = a_chain({"block": "A", "gain": 10.0, "more": {"gain": limits(1.0, None)}}, parameter="gain")
    with pytest.raises(CalculationError, match="bounds are no distribution"):
        monte_carlo(budget, project_of(budget, limit=at_least(1)), DICTIONARY, trials=10, seed=1)


def test_the_result_does_not_depend_on_blocks_or_threads() -> None:
    budget = receiver(conditions="CS")
    snapshot = project_of(budget, a_conditions_set("CS", a_dimension()), limit=at_most(2.4))
    trials = 2 * CHUNK + 100
    first, *others = (
        monte_carlo(budget, snapshot, DICTIONARY, trials=trials, seed=11, block=block, threads=threads)
        for block, threads in ((CHUNK, 1), (10 * CHUNK, 1), (1000, 3))
    )
    for other in others:
        assert np.array_equal(first.of("noise_figure").mean, other.of("noise_figure").mean)
        assert first.of("noise_figure").served[0].quantiles == other.of("noise_figure").served[0].quantiles
        assert first.joint == other.joint


def test_another_line_leaves_the_draws_of_the_others_as_they_were() -> None:
    one = a_chain({"block": "A", "gain": 10.0, "more": {"gain": limits(1.0)}}, parameter="gain")
    two = a_chain(
        {
            "block": "A",
            "gain": 10.0,
            "noise_figure": 3.0,
            "more": {"gain": limits(1.0), "noise_figure": limits(1.0)},
        },
        parameter="gain",
    )
    first, second = (
        draws_of(prepare(one, project_of(one, limit=at_least(1)), DICTIONARY).chain, 5).chunk(3)
        for one in (one, two)
    )
    assert first[0] is not None and second[0] is not None and second[1] is not None
    assert np.array_equal(first[0], second[0])
    assert abs(np.corrcoef(second[0], second[1])[0, 1]) < 0.05


def test_one_specimen_serves_all_points_so_that_probabilities_are_not_multiplied() -> None:
    """Gain 10 ± 1 dB uniform, at least 9.5 dB at each of three equal points: 75 % at each, and 75 % at all."""
    budget = a_chain(
        {"block": "A", "gain": 10.0, "more": {"gain": limits(1.0)}}, parameter="gain", conditions="CS"
    )
    snapshot = project_of(budget, a_conditions_set("CS", a_dimension()), limit=at_least(9.5))
    served = monte_carlo(budget, snapshot, DICTIONARY, trials=40_000, seed=3).of("gain").served[0]
    assert served.probability == pytest.approx(0.75, abs=0.01)
    assert served.joint.value == pytest.approx(served.probability[0])
    assert served.joint.low < served.joint.value < served.joint.high


def test_where_every_specimen_meets_the_limit_the_point_nearest_to_it_is_named() -> None:
    drift = {"dimension": "frequency", "dimension_unit": "GHz", "slope": -0.5, "reference": 18.0}
    more = {"gain": limits(1.0) | {"drifts": (drift,)}}
    budget = a_chain({"block": "A", "gain": 10.0, "more": more}, parameter="gain", conditions="CS")
    points = a_conditions_set("CS", a_dimension(values=(18.0, 19.0, 20.0)))
    snapshot = project_of(budget, points, limit=at_least(5))
    served = monte_carlo(budget, snapshot, DICTIONARY, trials=1000, seed=3).of("gain").served[0]
    assert list(served.probability) == [1.0, 1.0, 1.0]
    assert served.place == 2


def test_a_share_that_is_not_all_never_reads_100() -> None:
    assert percent_words(1.0) == "100" and percent_words(0.5) == "50"
    assert percent_words(0.99999) == "99.999"


@pytest.mark.parametrize("count", [4, 64])
def test_elements_that_move_each_by_itself_average(count: int) -> None:
    def spread(shared: str) -> float:
        budget = a_chain(
            {"block": "A", "gain": 10.0, "count": count, "more": {"gain": limits(1.0) | {"shared": shared}}},
            parameter="gain",
        )
        snapshot = project_of(budget, limit=at_least(1))
        return float(monte_carlo(budget, snapshot, DICTIONARY, trials=30_000, seed=3).of("gain").deviation[0])

    assert spread("common") == pytest.approx(1 / np.sqrt(3), rel=0.02)
    assert spread("per element") == pytest.approx(1 / np.sqrt(3 * count), rel=0.02)


def correlated(*correlations: Correlation) -> Budget:
    return a_chain(
        {"block": "A", "gain": 10.0, "more": {"gain": sigma(2.0) | {"correlation_group": "heat"}}},
        {"block": "B", "gain": 10.0, "more": {"gain": sigma(2.0) | {"correlation_group": "heat"}}},
        {"block": "C", "gain": 10.0, "more": {"gain": sigma(2.0) | {"correlation_group": "supply"}}},
        parameter="gain",
        correlations=correlations,
    )


@pytest.mark.parametrize("coefficient", [0.0, 0.5, -0.8])
def test_correlated_lines_add_as_their_covariance_says(coefficient: float) -> None:
    """σ of 1 dB each: two together 2 dB, with the third √(4 + 1 + 4ρ); RSS and Monte Carlo agree."""
    budget = correlated(Correlation(first="heat", second="supply", coefficient=coefficient))
    snapshot = project_of(budget, limit=at_least(20))
    expected = np.sqrt(5 + 4 * coefficient)
    found = rss(budget, snapshot, DICTIONARY).of("gain")
    assert found.deviation is not None and found.deviation[0] == pytest.approx(expected)
    drawn = monte_carlo(budget, snapshot, DICTIONARY, trials=60_000, seed=2).of("gain")
    assert drawn.deviation[0] == pytest.approx(expected, rel=0.02)


def test_correlations_that_contradict_each_other_are_refused() -> None:
    groups = ("a", "b", "c")
    budget = a_chain(
        *(
            {"block": f"S{name}", "gain": 5.0, "more": {"gain": sigma(1.0) | {"correlation_group": name}}}
            for name in groups
        ),
        parameter="gain",
        correlations=(
            Correlation(first="a", second="b", coefficient=0.9),
            Correlation(first="b", second="c", coefficient=0.9),
            Correlation(first="a", second="c", coefficient=-0.9),
        ),
    )
    with pytest.raises(CalculationError, match="positive semi-definite"):
        monte_carlo(budget, project_of(budget, limit=at_least(1)), DICTIONARY, trials=10, seed=1)


@pytest.mark.parametrize(
    ("tolerance", "mean", "deviation"),
    [
        ({"minus": 1.0, "plus": 3.0, "meaning": "limits", "distribution": "uniform"}, 1.0, 4 / np.sqrt(12)),
        (
            {"minus": 1.0, "plus": 3.0, "meaning": "limits", "distribution": "triangular"},
            2 / 3,
            np.sqrt((1 + 9 + 3) / 18),
        ),
        ({"minus": 1.0, "plus": 1.0, "meaning": "limits", "distribution": "u-shaped"}, 0.0, 1 / np.sqrt(2)),
        # standard normal cut at ±2: variance 1 - 2·2·φ(2)/(2Φ(2) - 1) = 0.7737 (definition; σ here is 0.5)
        (
            {"minus": 1.0, "plus": 1.0, "meaning": "limits", "distribution": "truncated normal", "k": 2.0},
            0.0,
            0.5 * np.sqrt(0.77374),
        ),
        ({"minus": 1.0, "plus": 1.0, "meaning": "k sigma", "k": 2.0}, 0.0, 0.5),
    ],
)
@pytest.mark.parametrize("group", ["", "together"])
def test_distributions_have_the_moments_of_their_definition(
    tolerance: dict[str, Any], mean: float, deviation: float, group: str
) -> None:
    """Drawn directly, or by the ranks of a correlation group: the same distribution."""
    budget = a_chain(
        {"block": "A", "gain": 10.0, "more": {"gain": {"tolerance": tolerance, "correlation_group": group}}},
        parameter="gain",
    )
    found = monte_carlo(budget, project_of(budget, limit=at_least(1)), DICTIONARY, trials=60_000, seed=4).of(
        "gain"
    )
    assert found.mean[0] - 10 == pytest.approx(mean, abs=0.02)
    assert found.deviation[0] == pytest.approx(deviation, rel=0.02)
    stated = rss(budget, project_of(budget, limit=at_least(1)), DICTIONARY).of("gain").deviation
    assert stated is not None and stated[0] == pytest.approx(deviation, rel=1e-4)


def test_more_requirements_than_are_counted_at_once_give_the_same_joint_probability() -> None:
    budget = a_chain(
        {"block": "A", "gain": 10.0, "more": {"gain": limits(1.0)}},
        parameter="gain",
        requirements=tuple(f"R-{number}" for number in range(6)),
    )
    requirements = [
        a_requirement(f"R-{n}", quantity=a_quantity("gain"), limit=at_least(9.2 + n / 10), conditions=None)
        for n in range(6)
    ]
    found = monte_carlo(
        budget, project_of(budget, requirements=requirements), DICTIONARY, trials=30_000, seed=1
    )
    values = [one.joint.value for one in found.of("gain").served]
    assert values == sorted(values, reverse=True)
    assert found.joint.value == values[-1] == pytest.approx(0.65, abs=0.01)


def test_a_budget_without_tolerances_is_as_certain_as_its_nominal_result() -> None:
    budget = a_chain({"block": "A", "gain": 10.0}, parameter="gain")
    for limit, share in ((9.0, 1.0), (11.0, 0.0)):
        found = monte_carlo(budget, project_of(budget, limit=at_least(limit)), DICTIONARY, trials=100, seed=1)
        served = found.of("gain").served[0]
        assert served.probability[0] == served.joint.value == found.joint.value == share
        assert served.quantile(0.5) == pytest.approx(10 - limit)


def test_draws_beyond_zero_are_taken_back_and_said() -> None:
    budget = a_chain({"block": "A", "gain": 10.0, "noise_figure": 0.2, "more": {"noise_figure": sigma(0.4)}})
    found = monte_carlo(budget, project_of(budget, limit=at_most(2)), DICTIONARY, trials=5000, seed=1)
    assert any("beyond 0 dB" in note for note in found.notes)
    fixed = a_chain({"block": "A", "gain": 10.0, "noise_figure": 0.2, "more": {"noise_figure": limits(0.4)}})
    with pytest.raises(CalculationError, match="beyond 0"):
        worst_case(fixed, project_of(fixed, limit=at_most(2)), DICTIONARY)


def test_a_law_that_is_not_monotonic_says_so() -> None:
    budget = a_chain(
        {
            "block": "A",
            "gain": 10.0,
            "noise_figure": 3.0,
            "iip3": 0.0,
            "more": {"gain": limits(3.0)},
        },
        {"block": "B", "gain": 10.0, "noise_figure": 8.0, "iip3": 5.0},
        parameter="sfdr",
        bandwidth_hz=1e6,
    )
    snapshot = project_of(budget, limit=at_least(50))
    found = worst_case(budget, snapshot, DICTIONARY).of("sfdr")
    assert not found.is_exact and "not monotonic" in found.words
    assert found.low[0] <= found.nominal[0] <= found.high[0]


figure = st.floats(0.5, 12.0)
wide = st.floats(0.05, 0.4)


@settings(max_examples=25, deadline=None)
@given(
    st.lists(
        st.tuples(st.floats(-4.0, 18.0), figure, st.floats(-10.0, 20.0), wide, wide, wide),
        min_size=1,
        max_size=5,
    )
)
def test_the_worst_case_brackets_every_specimen(stages: list[tuple[float, ...]]) -> None:
    budget = a_chain(
        *(
            {
                "block": f"S{number}",
                "gain": gain,
                "noise_figure": nf,
                "iip3": iip3,
                "more": {
                    "gain": limits(a),
                    "noise_figure": limits(b, "triangular"),
                    "iip3": limits(c, "u-shaped"),
                },
            }
            for number, (gain, nf, iip3, a, b, c) in enumerate(stages)
        ),
        requirements=("R-1", "R-2", "R-3"),
    )
    # ``more`` replaces the unit that the chain states for levels
    lines = tuple(
        line.model_copy(update={"unit": "dBm"}) if line.parameter == "iip3" else line for line in budget.lines
    )
    budget = budget.model_copy(update={"lines": lines})
    requirements = [
        a_requirement("R-1", quantity=a_quantity("noise_figure"), limit=at_most(50), conditions=None),
        a_requirement("R-2", quantity=a_quantity("oip3"), limit=at_least(-100, "dBm"), conditions=None),
        a_requirement("R-3", quantity=a_quantity("gain"), limit=at_least(-100), conditions=None),
    ]
    snapshot = project_of(budget, requirements=requirements)
    ends = worst_case(budget, snapshot, DICTIONARY)
    drawn = monte_carlo(budget, snapshot, DICTIONARY, trials=1000, seed=1)
    for name in ("noise_figure", "oip3", "gain"):
        worst = ends.of(name).served[0].adverse.smallest_margin
        best = ends.of(name).served[0].favourable.smallest_margin
        edges = drawn.of(name).served[0].edges
        assert worst - 1e-5 <= edges[0] and edges[-1] <= best + 1e-5


def test_a_two_sided_limit_is_missed_at_either_end() -> None:
    budget = a_chain({"block": "A", "gain": 10.0, "more": {"gain": limits(1.0)}}, parameter="gain")
    from tests.builders import between

    held = worst_case(budget, project_of(budget, limit=between(9.5, 12)), DICTIONARY).of("gain").served[0]
    assert held.adverse.smallest_margin == pytest.approx(-0.5)
    assert held.favourable.smallest_margin == pytest.approx(1.25)


def test_a_power_sum_and_a_plain_sum_have_worst_cases_too() -> None:
    lines = tuple(
        a_budget_line(order, block, "eirp", 40.0, unit="dBm", **limits(1.0))
        for order, block in enumerate(("A", "B"), 1)
    )
    budget = Budget(
        id="B-1", requirements=("R-1",), quantity=a_quantity("eirp"), law="power sum", lines=lines
    )
    found = worst_case(budget, project_of(budget, limit=at_most(50, "dBm")), DICTIONARY).of("eirp")
    assert found.high[0] == pytest.approx(44.0103, abs=1e-4)
    assert found.low[0] == pytest.approx(42.0103, abs=1e-4)


def test_k_sigma_of_a_noise_figure_ends_at_0_db_and_says_so() -> None:
    """0.3 dB ± 0.5 dB (2σ): the favourable end is a noiseless stage, not one of -0.2 dB."""
    budget = a_chain(
        {"block": "LNA", "gain": 20.0, "noise_figure": 0.3, "more": {"noise_figure": sigma(0.5)}}
    )
    found = worst_case(budget, project_of(budget), DICTIONARY)
    assert (found.of("noise_figure").low[0], found.of("noise_figure").high[0]) == pytest.approx((0.0, 0.8))
    assert any("cut at 0 dB" in note and "LNA noise_figure" in note for note in found.notes)


def test_k_sigma_of_a_passive_loss_ends_at_0_db() -> None:
    loss = {"block": "FIL", "insertion_loss": 0.2, "passive": True, "more": {"insertion_loss": sigma(0.5)}}
    gain = {"block": "FIL", "gain": -0.2, "passive": True, "more": {"gain": sigma(0.5)}}
    for stage in (loss, gain):
        budget = a_chain(stage, parameter="gain")
        found = worst_case(budget, project_of(budget), DICTIONARY).of("gain")
        assert (found.low[0], found.high[0]) == pytest.approx((-0.7, 0.0))


def test_rss_at_a_chosen_k_lies_about_the_mean_and_says_so() -> None:
    """+0.4/-0.2 dB triangular about 0: mean (0.4 - 0.2)/3, variance (0.2² + 0.4² + 0.2·0.4)/18; and 0.3 dB at 2σ."""
    skew = {"tolerance": {"minus": 0.2, "plus": 0.4, "meaning": "limits", "distribution": "triangular"}}
    budget = a_chain({"block": "A", "gain": 10.0, "more": {"gain": skew}},
                     {"block": "B", "gain": 5.0, "more": {"gain": sigma(0.3)}}, parameter="gain")  # fmt: skip
    snapshot = project_of(budget, limit=at_least(1))
    deviation = np.hypot(np.sqrt((0.04 + 0.16 + 0.08) / 18.0), 0.15)
    for k in (1.0, 3.0):
        found = rss(budget, snapshot, DICTIONARY, k=k).of("gain")
        assert found.means == f"{k:g} sigma"
        assert found.high == pytest.approx(15.0 + 0.2 / 3.0 + k * deviation)
        assert found.low == pytest.approx(15.0 + 0.2 / 3.0 - k * deviation)


def test_rss_at_a_chosen_k_needs_distributions_and_a_k_that_is_one() -> None:
    budget = a_chain({"block": "A", "gain": 10.0, "more": {"gain": limits(1.0, None)}}, parameter="gain")
    snapshot = project_of(budget, limit=at_least(1))
    with pytest.raises(CalculationError, match=r"3 σ need standard deviations.*A gain"):
        rss(budget, snapshot, DICTIONARY, k=3.0)
    with pytest.raises(CalculationError, match="no number of standard deviations"):
        rss(budget, snapshot, DICTIONARY, k=0.0)


def test_trials_tell_how_far_they_are() -> None:
    budget = receiver()
    heard: list[int] = []
    for threads in (1, 2):
        monte_carlo(
            budget,
            project_of(budget),
            DICTIONARY,
            trials=2 * CHUNK + 5,
            seed=1,
            block=CHUNK,
            threads=threads,
            told=heard.append,
        )
    assert heard == 2 * [CHUNK, 2 * CHUNK, 2 * CHUNK + 5]


def grouped(amount: float, group: str) -> dict[str, Any]:
    return limits(amount) | {"correlation_group": group}


def test_lines_that_move_together_reach_a_corner_together() -> None:
    """Two gains of one lot add up; a gain and a loss that rise together work against each other."""
    both = a_chain(
        {"block": "A", "gain": 10.0, "more": {"gain": grouped(1.0, "lot")}},
        {"block": "B", "gain": 10.0, "more": {"gain": grouped(0.5, "lot")}},
        parameter="gain",
    )
    found = worst_case(both, project_of(both, limit=at_least(1)), DICTIONARY).of("gain")
    assert (found.low[0], found.high[0], found.is_exact) == (pytest.approx(18.5), pytest.approx(21.5), True)
    against = a_chain(
        {"block": "A", "gain": 10.0, "more": {"gain": grouped(1.0, "heat")}},
        {"block": "B", "attenuation": 3.0, "more": {"attenuation": grouped(1.5, "Heat")}},
        parameter="gain",
    )
    found = worst_case(against, project_of(against, limit=at_least(1)), DICTIONARY).of("gain")
    assert (found.low[0], found.high[0]) == (pytest.approx(6.5), pytest.approx(7.5))
    assert not found.is_exact and "work against each other (A gain" in found.words


@settings(max_examples=40, deadline=None)
@given(
    st.lists(
        st.tuples(st.floats(0.0, 20.0), st.floats(0.2, 8.0), st.sampled_from(["", "a", "b"])),
        min_size=2,
        max_size=4,
    )
)
def test_corners_of_groups_are_those_of_an_exhaustive_search(stages: list[tuple[float, float, str]]) -> None:
    """Noise figure with gains and noise figures in groups: every combination of ends of groups is tried."""
    budget = a_chain(
        *(
            {
                "block": f"S{number}",
                "gain": gain,
                "noise_figure": nf,
                "more": {"gain": grouped(0.5, group), "noise_figure": grouped(0.2, group and f"{group}n")},
            }
            for number, (gain, nf, group) in enumerate(stages)
        )
    )
    snapshot = project_of(budget)
    found = worst_case(budget, snapshot, DICTIONARY).of("noise_figure")
    units: dict[str, list[BudgetLine]] = {}
    for number, line in enumerate(budget.lines):
        units.setdefault(line.correlation_group or f"#{number}", []).append(line)
    results = []
    for signs in itertools.product((-1, 1), repeat=len(units)):
        moved = {
            line_key(line): line.value.value + sign * line.tolerance.plus  # type: ignore[union-attr]
            for sign, lines in zip(signs, units.values(), strict=True)
            for line in lines
        }
        results.append(
            evaluate_budget(budget, snapshot, DICTIONARY, values=moved).of("noise_figure").result[0]
        )
    assert found.low[0] == pytest.approx(min(results)) and found.high[0] == pytest.approx(max(results))
