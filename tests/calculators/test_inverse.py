"""Every inverse put back into the law that it inverts; what nothing can meet says by how much."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra import numpy as arrays

from specflow.calculators import apportionment, inverse
from specflow.calculators.arguments import Floats
from specflow.calculators.combination.operands import Operand
from specflow.calculators.combination.power_sum import power_sum
from specflow.calculators.combination.rss import root_sum_square
from specflow.calculators.compression import cascade_ip1db
from specflow.calculators.intercept_cascade import Law, cascade_iip2, cascade_iip3
from specflow.calculators.noise_cascade import cascade_noise_figure, excess_noise_shares
from specflow.calculators.sensitivity import noise_figure_for_sensitivity, sensitivity
from specflow.errors import CalculationError, InfeasibleError

CHAINS = arrays.arrays(np.float64, (2, 4), elements=st.floats(0.0, 20.0))
PLACES = st.integers(0, 3)
LAWS = st.sampled_from(["coherent", "noncoherent"])


def replaced(figure: Floats, place: int, value: float) -> Floats:
    return np.where(np.arange(len(figure)) == place, value, figure)


@given(CHAINS, PLACES, st.floats(0.0, 12.0))
def test_noise_figure_bound_put_back_gives_the_target_or_even_an_ideal_stage_misses_it(
    chain: Floats, place: int, target: float
) -> None:
    gain, nf = chain
    bound = inverse.stage_noise_figure(target, gain, nf, place)
    if bound.feasible:
        back = cascade_noise_figure(gain, replaced(nf, place, float(bound.value)))
        assert back == pytest.approx(target, abs=1e-6)
    else:
        ideal = cascade_noise_figure(gain, replaced(nf, place, 0.0))
        assert ideal > target
        assert bound.short_by_db == pytest.approx(ideal - target, abs=1e-9)


@given(CHAINS, PLACES, st.floats(0.1, 12.0))
def test_gain_bound_put_back_gives_the_target_or_even_endless_gain_misses_it(
    chain: Floats, place: int, target: float
) -> None:
    gain, nf = chain
    bound = inverse.stage_gain(target, gain, nf, place)
    if bound.feasible and np.isfinite(bound.value):
        back = cascade_noise_figure(replaced(gain, place, float(bound.value)), nf)
        assert back == pytest.approx(target, abs=1e-6)
    elif not bound.feasible:
        assert cascade_noise_figure(replaced(gain, place, 300.0), nf) >= target - 1e-9


@given(CHAINS, PLACES, st.floats(-40.0, 20.0), LAWS)
def test_intercept_bound_put_back_gives_the_target_or_even_an_ideal_stage_misses_it(
    chain: Floats, place: int, target: float, law: Law
) -> None:
    gain, iip3 = chain
    bound = inverse.stage_iip3(target, gain, iip3, place, law)
    if bound.feasible:
        back = cascade_iip3(gain, replaced(iip3, place, float(bound.value)), law)
        assert back == pytest.approx(target, abs=1e-6)
    else:
        ideal = cascade_iip3(gain, replaced(iip3, place, np.inf), law)
        assert bound.short_by_db == pytest.approx(target - ideal, abs=1e-6)


@given(CHAINS, PLACES, st.floats(-40.0, 20.0), LAWS)
def test_gain_ceiling_put_back_gives_the_target(chain: Floats, place: int, target: float, law: Law) -> None:
    gain, iip3 = chain
    bound = inverse.stage_gain_ceiling(target, gain, iip3, place, law)
    if bound.feasible and np.isfinite(bound.value) and abs(bound.value) < 60:
        back = cascade_iip3(replaced(gain, place, float(bound.value)), iip3, law)
        assert back == pytest.approx(target, abs=1e-6)
    elif not bound.feasible:
        assert cascade_iip3(replaced(gain, place, -300.0), iip3, law) <= target + 1e-9


@given(CHAINS, st.floats(0.5, 15.0), st.floats(-30.0, 20.0), LAWS)
def test_equal_shares_put_back_give_the_target(
    chain: Floats, target_nf: float, target_ip: float, law: Law
) -> None:
    gain = chain[0]
    shares = apportionment.equal_share_noise_figures(target_nf, gain)
    assert cascade_noise_figure(gain, shares) == pytest.approx(target_nf, abs=1e-9)
    intercepts = apportionment.equal_share_iip3(target_ip, gain, law)
    assert cascade_iip3(gain, intercepts, law) == pytest.approx(target_ip, abs=1e-9)


def test_passive_positions_keep_their_figure_and_the_rest_is_shared() -> None:
    gain = [18.0, -2.5, -7.0, 20.0]
    shares = apportionment.equal_share_noise_figures(3.0, gain, [None, 2.5, 7.0, None])
    assert shares[[1, 2]].tolist() == [2.5, 7.0]
    assert cascade_noise_figure(gain, shares) == pytest.approx(3.0, abs=1e-12)
    with pytest.raises(InfeasibleError, match=r"short by 0\.7 dB"):
        apportionment.equal_share_noise_figures(2.5, [-3.0, 20.0], [3.2, None])


@given(CHAINS, st.floats(0.5, 15.0), st.floats(-30.0, 20.0), LAWS)
def test_proportional_shares_put_back_give_the_target_and_keep_the_shares(
    chain: Floats, target_nf: float, target_ip: float, law: Law
) -> None:
    gain, estimate = chain[0], chain[1] + 0.1
    shares = apportionment.proportional_noise_figures(target_nf, gain, estimate)
    assert cascade_noise_figure(gain, shares) == pytest.approx(target_nf, abs=1e-9)
    assert excess_noise_shares(gain, shares) == pytest.approx(excess_noise_shares(gain, estimate), abs=1e-9)
    intercepts = apportionment.proportional_iip3(target_ip, gain, estimate, law)
    assert cascade_iip3(gain, intercepts, law) == pytest.approx(target_ip, abs=1e-9)


def test_proportional_shares_leave_fixed_and_ideal_positions_alone() -> None:
    gain = np.array([[18.0, 17.0], [-2.5, -2.5], [-7.0, -7.0], [20.0, 20.0]])
    shares = apportionment.proportional_noise_figures(3.0, gain, [1.2, 2.5, 7.0, 4.0], [None, 2.5, 7.0, None])
    assert shares[1:3].tolist() == [[2.5, 2.5], [7.0, 7.0]]
    assert cascade_noise_figure(gain, shares) == pytest.approx([3.0, 3.0])
    intercepts = apportionment.proportional_iip3(-12.0, gain, [-2.0, None, 6.0, 12.0])
    assert np.isinf(intercepts[1]).all()
    assert cascade_iip3(gain, intercepts) == pytest.approx([-12.0, -12.0])
    with pytest.raises(CalculationError, match="makes noise by its estimate"):
        apportionment.proportional_noise_figures(3.0, [10.0, 0.0], [0.0, 0.0])
    with pytest.raises(CalculationError, match="all positions are ideal"):
        apportionment.proportional_iip3(-12.0, [10.0, 0.0], [None, None])


@given(CHAINS, PLACES, st.floats(-40.0, 20.0), LAWS)
def test_second_order_and_compression_bounds_put_back_give_the_target(
    chain: Floats, place: int, target: float, law: Law
) -> None:
    gain, figure = chain
    second = inverse.stage_iip2(target, gain, figure, place, law)
    if second.feasible:
        back = cascade_iip2(gain, replaced(figure, place, float(second.value)), law)
        assert back == pytest.approx(target, abs=1e-6)
    else:
        assert cascade_iip2(gain, replaced(figure, place, np.inf), law) <= target + 1e-9
    compression = inverse.stage_ip1db(target, gain, figure, place)
    if compression.feasible:
        back = cascade_ip1db(gain, replaced(figure, place, float(compression.value)))
        assert back == pytest.approx(target, abs=1e-6)
    else:
        assert cascade_ip1db(gain, replaced(figure, place, np.inf)) <= target + 1e-9


def test_a_sensitivity_out_of_reach_says_by_how_much() -> None:
    best = sensitivity(1e6, 0.0, 10.0, 1.0)
    assert noise_figure_for_sensitivity(best + 3.0, 1e6, 10.0, 1.0) == pytest.approx(3.0)
    with pytest.raises(InfeasibleError, match=r"short by 2\.5 dB"):
        noise_figure_for_sensitivity(best - 2.5, 1e6, 10.0, 1.0)


def test_a_target_that_a_noiseless_stage_just_meets_is_feasible() -> None:
    target = float(cascade_noise_figure([10.0, 0.0], [0.0, 7.0]))
    bound = inverse.stage_noise_figure(target, [10.0, 0.0], [None, 7.0], 0)
    assert bound.for_all_points() == pytest.approx(0.0, abs=1e-9)


def test_all_points_close_at_the_tightest_bound() -> None:
    gain = np.array([[18.0, 15.0], [-2.5, -2.5], [20.0, 20.0]])
    bound = inverse.stage_noise_figure(3.0, gain, [1.2, 2.5, None], 2)
    tightest = bound.for_all_points()
    assert tightest == pytest.approx(bound.value.min())
    nf = cascade_noise_figure(gain, [1.2, 2.5, tightest])
    assert nf.max() == pytest.approx(3.0) and nf.min() < 3.0


def test_infeasible_says_at_which_point_and_by_how_much() -> None:
    gain = np.array([[18.0, 3.0], [0.0, 0.0]])
    bound = inverse.stage_noise_figure(1.5, gain, [None, 10.0], 0)
    assert not bound.feasible and np.isfinite(bound.value[0])
    with pytest.raises(InfeasibleError, match=r"short by 5\.91 dB at point 1") as refusal:
        bound.for_all_points()
    assert refusal.value.hint
    assert bound.short_by_db[1] == pytest.approx(cascade_noise_figure([3.0, 0.0], [0.0, 10.0]) - 1.5)


def test_sums_solved_for_one_contribution_put_back_give_the_target() -> None:
    left = inverse.left_of_power_sum(-90.0, [-93.0, -97.0]).for_all_points()
    assert power_sum([-93.0, -97.0, left], Operand.LEVEL) == pytest.approx(-90.0)
    error = inverse.left_of_root_sum_square(3.5, [2.0, 1.5]).for_all_points()
    assert root_sum_square([2.0, 1.5, error], Operand.ERROR) == pytest.approx(3.5)
    with pytest.raises(InfeasibleError, match="short by 3 dB"):
        inverse.left_of_power_sum(-93.0, [-90.0]).for_all_points()
    with pytest.raises(InfeasibleError, match=r"short by 6\.02 dB"):
        inverse.left_of_root_sum_square(1.0, [2.0]).for_all_points()


def test_a_gain_with_nothing_noisy_behind_it_is_free() -> None:
    assert inverse.stage_gain(3.0, [10.0, None], [2.0, 4.0], 1).for_all_points() == -np.inf
    assert inverse.stage_gain_ceiling(-10.0, [10.0, None], [10.0, 15.0], 1).for_all_points() == np.inf


def test_positions_count_from_zero_and_others_must_be_known() -> None:
    with pytest.raises(CalculationError, match="no position 2"):
        inverse.stage_noise_figure(3.0, [10.0, 10.0], [1.0, None], 2)
    with pytest.raises(CalculationError, match=r"nf_db\[1\] is (inf|nan)"):
        inverse.stage_noise_figure(3.0, [10.0, 10.0], [None, None], 0)
