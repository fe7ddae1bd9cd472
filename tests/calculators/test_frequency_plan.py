"""Bands of products against exhaustive search, and the table of band 3 with n78."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.calculators.frequency_plan import (
    Band,
    band_overlap,
    product_band,
    product_coefficients,
    product_frequency,
    product_width,
    victim_hits,
)
from specflow.calculators.mixer_spurs import crossing_spurs, mixer_responses, spurious_inputs

BANDS = st.tuples(st.integers(0, 50), st.integers(0, 20)).map(lambda pair: (float(pair[0]), float(sum(pair))))
COEFFICIENTS = st.tuples(st.integers(-4, 4), st.integers(-4, 4))


@given(BANDS, BANDS, COEFFICIENTS)
def test_product_band_holds_every_product_of_a_grid_and_reaches_its_ends(
    first: Band, second: Band, coefficients: tuple[int, int]
) -> None:
    low, high = product_band([first, second], coefficients)
    grids = [np.linspace(*band, 41) for band in (first, second)]
    products = product_frequency(np.array(list(itertools.product(*grids))).T, coefficients)
    assert products.min() >= low - 1e-9 and products.max() == pytest.approx(high)
    if low > 0:
        assert products.min() == pytest.approx(low)


@given(BANDS, BANDS)
def test_overlap_is_symmetric_and_touching_hits(first: Band, second: Band) -> None:
    overlap = band_overlap(first, second)
    assert overlap == band_overlap(second, first)
    points = np.arange(0.0, 71.0)  # band edges are whole: a shared point is on this grid
    inside = [(points >= band[0]) & (points <= band[1]) for band in (first, second)]
    assert overlap.hit == bool((inside[0] & inside[1]).any())
    assert overlap.hit == (overlap.gap == 0.0)


def test_band_edges_are_closed() -> None:
    assert band_overlap((1.0, 2.0), (2.0, 3.0)).band == (2.0, 2.0)


def test_band_3_with_n78_hits_its_own_receiver_and_n78_as_the_table_says() -> None:
    """The table of rf-budget section 6; band edges of 3GPP, products computed."""
    hits = victim_hits([(1710.0, 1785.0), (3300.0, 3800.0)], [(1805.0, 1880.0), (3300.0, 3800.0)], 5)
    found = {(hit.coefficients, hit.victim): hit for hit in hits}
    for coefficients, victim in [
        ((1, -1), 0),
        ((3, -1), 0),
        ((3, -2), 0),
        ((2, 0), 1),
        ((4, -1), 1),
        ((2, -2), 1),
    ]:
        assert (coefficients, victim) in found
    assert ((2, -1), 0) not in found and ((1, -2), 0) not in found
    assert found[(1, -1), 0].overlap == (1805.0, 1880.0)
    assert found[(4, -1), 1].order == 5
    assert [hit.order for hit in hits] == sorted(hit.order for hit in hits)


def test_a_wide_emission_hits_where_its_centre_misses() -> None:
    gps = [(1574.397, 1576.443)]
    assert not victim_hits([(777.0, 787.0)], gps, 2)
    (hit,) = victim_hits([(777.0, 787.0)], gps, 2, widths=[1.0])
    assert hit.product == (1553.0, 1575.0)


def test_coefficients_are_all_there_once() -> None:
    """Counted by hand of two signals: order 2 has 4 products, order 3 has 6, each with its negative left out."""
    found = list(product_coefficients(2, 3))
    assert len(found) == len(set(found)) == 4 + 6
    assert not any(tuple(-a for a in one) in found for one in found)


def test_crossing_spurs_agree_with_an_exhaustive_search_over_signs() -> None:
    lo, intermediate, output = 1200.0, 400.0, 1600.0
    found = {
        max((m, n), (-m, -n))
        for m, n in itertools.product(range(-4, 5), range(-6, 7))
        if m * lo + n * intermediate == output and (abs(m), abs(n)) != (1, 1)
    }
    assert set(crossing_spurs(lo, intermediate, output, 4, 6)) == found


def test_every_spurious_input_reaches_the_intermediate_frequency() -> None:
    for (m, n), inputs in spurious_inputs(2100.0, 341.75, 4).items():
        for frequency in inputs:
            assert abs(abs(m * frequency) - n * 2100.0) == pytest.approx(341.75)
    upper, lower, half_lower, half_upper = mixer_responses(2100.0, 341.75)
    assert spurious_inputs(2100.0, 341.75, 1)[1, 1] == (float(lower), float(upper))
    assert spurious_inputs(2100.0, 341.75, 2)[2, 2] == (float(half_lower), float(half_upper))


def test_width_adds_in_harmonic_numbers() -> None:
    assert product_width([20.0, 100.0], [-2, 3]) == 340.0
