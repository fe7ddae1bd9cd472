"""The fused cascade against the plainest numpy, in one run: trials of a Monte Carlo, condition points, slopes.

The floor computes gain, noise figure, IIP3 and IP1dB from the same figures as one would write them down: powers of ten,
a running sum of gains, sums over the positions. It is timed with positions on the first and on the last axis, and the
faster of the two counts.
"""

from __future__ import annotations

import gc
import time
import tracemalloc
from collections.abc import Callable

import numpy as np
import pytest

from specflow.calculators.arguments import Floats
from specflow.calculators.cascade import cascade_results, cascade_slopes

Chain = tuple[Floats, Floats, Floats, Floats]


def a_chain(positions: int, points: int) -> Chain:
    """Return invented figures (positions, points): uniform tolerances about one nominal chain."""
    drawn = np.random.default_rng(12)
    gain, nf = drawn.uniform(-6.0, 15.0, positions), drawn.uniform(1.0, 9.0, positions)
    iip3 = drawn.uniform(0.0, 25.0, positions)

    def spread(nominal: Floats, tolerance: float) -> Floats:
        return nominal[:, None] + tolerance * drawn.uniform(-1.0, 1.0, (positions, points))

    return spread(gain, 1.0), spread(nf, 0.5), spread(iip3, 1.0), spread(iip3 - 10.0, 1.0)


def plain(gain: Floats, nf: Floats, iip3: Floats, ip1db: Floats, axis: int) -> tuple[Floats, ...]:
    """Return the four results in plain numpy."""
    before = 10 ** ((np.cumsum(gain, axis=axis) - gain) / 10)
    factor = 1 + np.sum((10 ** (nf / 10) - 1) / before, axis=axis)
    third = np.sum(before / 10 ** (iip3 / 10), axis=axis)
    first = np.sum(before / 10 ** (ip1db / 10), axis=axis)
    return np.sum(gain, axis=axis), 10 * np.log10(factor), -10 * np.log10(third), -10 * np.log10(first)


def best_of(times: int, task: Callable[[], object]) -> float:
    """Return the least seconds the task took."""
    taken = []
    for _ in range(times):
        gc.collect()
        start = time.perf_counter()
        task()
        taken.append(time.perf_counter() - start)
    return min(taken)


def floor_of(times: int, chain: Chain) -> float:
    """Return the seconds of the plain computation in its faster order of axes."""
    first = best_of(times, lambda: plain(*chain, 0))
    gain, nf, iip3, ip1db = (np.ascontiguousarray(figure.T) for figure in chain)
    return min(first, best_of(times, lambda: plain(gain, nf, iip3, ip1db, 1)))


def test_a_million_trials_take_at_most_seven_tenths_of_plain_numpy_and_keep_16_bytes_each() -> None:
    trials = 10**6
    chain = a_chain(12, trials)

    tracemalloc.start()
    results = cascade_results(*chain, keep=np.float32)
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    kept = (results.gain_db, results.nf_db, results.iip3_dbm, results.ip1db_dbm)
    for mine, theirs in zip(kept, plain(*chain, 0), strict=True):
        np.testing.assert_allclose(mine, theirs, rtol=0, atol=1e-5)
    assert sum(row.nbytes for row in kept) <= 16 * trials
    assert (
        peak <= 16 * trials + 10 * 2**20
    )  # beside the results only a workspace that does not grow with them

    taken, floor = best_of(3, lambda: cascade_results(*chain, keep=np.float32)), floor_of(3, chain)
    print(f"\n10^6 trials × 12: {taken:.3f} s, plain numpy {floor:.3f} s, ratio {taken / floor:.2f}")
    assert taken <= 0.7 * floor


@pytest.fixture(scope="module")
def many_points() -> Chain:
    return a_chain(40, 10**4)


def test_ten_thousand_points_of_40_positions_take_at_most_twice_plain_numpy(many_points: Chain) -> None:
    taken, floor = best_of(10, lambda: cascade_results(*many_points)), floor_of(10, many_points)
    print(
        f"\n10^4 points × 40: {taken * 1e3:.2f} ms, plain numpy {floor * 1e3:.2f} ms, ratio {taken / floor:.2f}"
    )
    assert taken <= 2.0 * floor


def test_slopes_take_at_most_three_times_the_nominal(many_points: Chain) -> None:
    nominal, taken = (
        best_of(10, lambda: cascade_results(*many_points)),
        best_of(10, lambda: cascade_slopes(*many_points)),
    )
    print(f"\nslopes {taken * 1e3:.2f} ms, nominal {nominal * 1e3:.2f} ms, ratio {taken / nominal:.2f}")
    assert taken <= 3.0 * nominal
