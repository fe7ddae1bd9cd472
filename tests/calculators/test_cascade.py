"""The fused cascade against the single laws and plain numpy; all slopes against finite differences."""

from __future__ import annotations

from typing import Literal

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra import numpy as arrays

from specflow.calculators import cascade
from specflow.calculators.arguments import Floats
from specflow.calculators.cascade import cascade_results, cascade_slopes
from specflow.calculators.compression import cascade_ip1db
from specflow.calculators.intercept_cascade import cascade_iip2, cascade_iip3, iip2_slopes, iip3_slopes
from specflow.calculators.noise_cascade import (
    cascade_gain,
    cascade_noise_figure,
    excess_noise_shares,
    noise_figure_slopes,
)

LAWS = ("coherent", "noncoherent")
Law = Literal["coherent", "noncoherent"]
STEP = 1e-4


def chains(positions: int, *points: int, seed: int = 3) -> tuple[Floats, Floats, Floats, Floats]:
    """Return invented gains, noise figures, IIP3 and IP1dB of a chain (positions, …)."""
    drawn = np.random.default_rng(seed)
    shape = (positions, *points)
    return (
        drawn.uniform(-8.0, 18.0, shape),
        drawn.uniform(0.0, 9.0, shape),
        drawn.uniform(-5.0, 30.0, shape),
        drawn.uniform(-15.0, 20.0, shape),
    )


def plain(gain: Floats, nf: Floats, iip3: Floats, ip1db: Floats) -> tuple[Floats, ...]:
    """The textbook in plain numpy, the long way: powers of ten, one position after the other."""
    before, noise, third, first = np.ones(gain.shape[1:]), np.ones(gain.shape[1:]), 0.0, 0.0
    for k in range(len(gain)):
        noise = noise + (10 ** (nf[k] / 10) - 1) / before
        third = third + before / 10 ** (iip3[k] / 10)
        first = first + before / 10 ** (ip1db[k] / 10)
        before = before * 10 ** (gain[k] / 10)
    return gain.sum(axis=0), 10 * np.log10(noise), -10 * np.log10(third), -10 * np.log10(first)


@pytest.mark.parametrize("points", [(), (1,), (7,), (cascade.BLOCK + 5,), (3, 11)])
def test_fused_results_equal_plain_numpy_for_any_shape_and_across_blocks(points: tuple[int, ...]) -> None:
    figures = chains(6, *points)
    results = cascade_results(*figures)
    got = (results.gain_db, results.nf_db, results.iip3_dbm, results.ip1db_dbm)
    for mine, theirs in zip(got, plain(*figures), strict=True):
        assert np.shape(mine) == points
        np.testing.assert_allclose(mine, theirs, rtol=0, atol=1e-10)


@pytest.mark.parametrize("law", LAWS)
def test_fused_results_and_slopes_equal_the_single_laws(law: Law) -> None:
    gain, nf, iip3, ip1db = chains(5, 40)
    results, slopes = cascade_results(gain, nf, iip3, ip1db, law), cascade_slopes(gain, nf, iip3, ip1db, law)
    pairs = [
        (results.gain_db, cascade_gain(gain)),
        (results.nf_db, cascade_noise_figure(gain, nf)),
        (results.iip3_dbm, cascade_iip3(gain, iip3, law)),
        (results.ip1db_dbm, cascade_ip1db(gain, ip1db)),
        (slopes.nf.to_figure, noise_figure_slopes(gain, nf).to_figure),
        (slopes.nf.to_gain, noise_figure_slopes(gain, nf).to_gain),
        (slopes.iip3.to_figure, iip3_slopes(gain, iip3, law).to_figure),
        (slopes.iip3.to_gain, iip3_slopes(gain, iip3, law).to_gain),
        (slopes.ip1db.to_gain, iip3_slopes(gain, ip1db).to_gain),
    ]
    for mine, theirs in pairs:
        np.testing.assert_allclose(mine, theirs, rtol=0, atol=1e-10)


def test_a_figure_with_fewer_axes_holds_for_all_points() -> None:
    gain, nf, iip3, ip1db = chains(4, 9)
    wide_nf, wide_iip3 = (np.repeat(figure[:, :1], 9, axis=1) for figure in (nf, iip3))
    mixed = cascade_results(gain, nf[:, 0], iip3[:, :1], ip1db)
    full = cascade_results(gain, wide_nf, wide_iip3, ip1db)
    np.testing.assert_allclose(mixed.nf_db, full.nf_db, atol=1e-12)
    np.testing.assert_allclose(mixed.iip3_dbm, full.iip3_dbm, atol=1e-12)


def test_trials_and_points_broadcast_against_each_other() -> None:
    by_trial, by_point = chains(3, 5, 1, seed=1), chains(3, 1, 4, seed=2)
    results = cascade_results(by_trial[0], by_point[1], by_trial[2], by_point[3])
    again = cascade_results(by_trial[0][:, 2], by_point[1][:, 0], by_trial[2][:, 2], by_point[3][:, 0])
    assert np.shape(results.nf_db) == (5, 4)
    np.testing.assert_allclose(results.nf_db[2], again.nf_db, atol=1e-12)


def test_results_do_not_depend_on_the_block(monkeypatch: pytest.MonkeyPatch) -> None:
    figures = chains(4, 1000)
    whole, slopes = cascade_results(*figures), cascade_slopes(*figures)
    monkeypatch.setattr(cascade, "BLOCK", 17)
    np.testing.assert_array_equal(cascade_results(*figures).nf_db, whole.nf_db)
    np.testing.assert_array_equal(cascade_slopes(*figures).iip3.to_gain, slopes.iip3.to_gain)


def test_single_precision_keeps_16_bytes_a_trial_and_ten_microdecibels() -> None:
    figures = chains(12, 500)
    kept, exact = cascade_results(*figures, keep=np.float32), cascade_results(*figures)
    rows = (kept.gain_db, kept.nf_db, kept.iip3_dbm, kept.ip1db_dbm)
    assert sum(row.nbytes for row in rows) == 16 * 500
    np.testing.assert_allclose(kept.iip3_dbm, exact.iip3_dbm, rtol=0, atol=1e-5)


def test_inputs_are_left_as_they_were() -> None:
    figures = chains(3, 50)
    copies = [figure.copy() for figure in figures]
    cascade_results(*figures)
    cascade_slopes(*figures)
    for figure, copy in zip(figures, copies, strict=True):
        np.testing.assert_array_equal(figure, copy)


@pytest.mark.parametrize("law", LAWS)
def test_slopes_agree_with_finite_differences(law: Law) -> None:
    figures = chains(6, 8)
    slopes = cascade_slopes(*figures, law)

    def difference(which: int, position: int, result: str) -> Floats:
        ends = []
        for step in (STEP, -STEP):
            gain, nf, iip3, ip1db = (figure.copy() for figure in figures)
            (gain, nf, iip3, ip1db)[which][position] += step
            ends.append(getattr(cascade_results(gain, nf, iip3, ip1db, law), result))
        return np.asarray((ends[0] - ends[1]) / (2 * STEP))

    for k in range(6):
        for own, name, slope in (
            (1, "nf_db", slopes.nf),
            (2, "iip3_dbm", slopes.iip3),
            (3, "ip1db_dbm", slopes.ip1db),
        ):
            np.testing.assert_allclose(slope.to_figure[k], difference(own, k, name), atol=1e-7)
            np.testing.assert_allclose(slope.to_gain[k], difference(0, k, name), atol=1e-7)


@pytest.mark.parametrize("law", LAWS)
def test_second_order_slopes_agree_with_finite_differences(law: Law) -> None:
    gain, _, iip2, _ = chains(4)
    slopes = iip2_slopes(gain, iip2, law)
    for k in range(4):
        nudge = np.where(np.arange(4) == k, STEP, 0.0)
        own = cascade_iip2(gain, iip2 + nudge, law) - cascade_iip2(gain, iip2 - nudge, law)
        by_gain = cascade_iip2(gain + nudge, iip2, law) - cascade_iip2(gain - nudge, iip2, law)
        assert slopes.to_figure[k] == pytest.approx(own / (2 * STEP), abs=1e-7)
        assert slopes.to_gain[k] == pytest.approx(by_gain / (2 * STEP), abs=1e-7)


def test_ideal_stages_have_no_share_and_no_slope() -> None:
    slopes = cascade_slopes([10.0, 5.0], [1.0, 2.0], [None, None], [None, 3.0])
    assert np.all(slopes.iip3.to_figure == 0) and np.all(slopes.iip3.to_gain == 0)
    assert slopes.ip1db.to_figure.tolist() == [0.0, 1.0]
    assert excess_noise_shares([10.0, 5.0], [0.0, 0.0]).tolist() == [0.0, 0.0]


FIGURES = arrays.arrays(np.float64, (2, 5), elements=st.floats(0.0, 25.0))


@given(FIGURES)
def test_a_chain_is_as_good_as_its_two_halves_in_a_row(figures: Floats) -> None:
    gain, nf = figures
    parts = [slice(0, 2), slice(2, 5)]
    halves = [(cascade_gain(gain[p]), cascade_noise_figure(gain[p], nf[p])) for p in parts]
    joined = cascade_noise_figure([h[0] for h in halves], [h[1] for h in halves])
    assert joined == pytest.approx(cascade_noise_figure(gain, nf), abs=1e-9)


@given(FIGURES)
def test_more_gain_never_raises_noise_and_never_raises_the_intercept(figures: Floats) -> None:
    gain, other = figures
    more = gain.copy()
    more[1] += 3.0
    assert cascade_noise_figure(more, other) <= cascade_noise_figure(gain, other) + 1e-12
    assert cascade_iip3(more, other) <= cascade_iip3(gain, other) + 1e-12
    assert cascade_iip3(gain, other) <= cascade_iip3(gain, other, "noncoherent") + 1e-12
