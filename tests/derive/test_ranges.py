"""Laws over a range, against definitions, numpy and scipy; what must always hold, by properties."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.stats import linregress

from specflow.errors import CalculationError
from specflow.model.parameter import Better
from tests.derive.deriving import law_on, value_of

levels = st.lists(st.floats(-200, 200, allow_nan=False), min_size=3, max_size=40)


def axis_for(values: list[float]) -> list[float]:
    """An axis of as many places, ascending."""
    return [float(place) for place in range(len(values))]


@given(levels)
def test_no_reading_is_worse_than_the_worst(values: list[float]) -> None:
    assert value_of("worst", axis_for(values), values, better=Better.HIGHER) <= min(values)
    assert value_of("worst", axis_for(values), values, better=Better.LOWER) >= max(values)
    assert abs(value_of("worst", axis_for(values), values, better=Better.NEARER_ZERO)) >= max(
        map(abs, values)
    )


@given(levels)
def test_where_neither_side_is_better_the_worst_is_both_ends(values: list[float]) -> None:
    found = law_on("worst", axis_for(values), values, better=Better.NEITHER)
    assert found.high is not None
    assert (found.value[0], found.high[0]) == (min(values), max(values))


@given(levels, st.floats(-50, 50))
def test_ripple_does_not_care_for_a_shift(values: list[float], shift: float) -> None:
    moved = [value + shift for value in values]
    assert value_of("ripple", axis_for(values), values) == pytest.approx(
        value_of("ripple", axis_for(values), moved), abs=1e-9
    )


@given(levels, st.integers(1, 100), st.integers(1, 100))
def test_percentiles_rise_with_the_percentage(values: list[float], first: int, second: int) -> None:
    low, high = sorted((first, second))
    at = [value_of("percentile", axis_for(values), values, percentile=str(one)) for one in (low, high)]
    assert at[0] <= at[1]


@given(levels, st.integers(1, 100))
def test_a_percentile_is_the_inverted_distribution_of_numpy(values: list[float], percent: int) -> None:
    """numpy's method inverted_cdf is the definition 1 of Hyndman and Fan (1996)."""
    wanted = np.percentile(values, percent, method="inverted_cdf")
    assert value_of("percentile", axis_for(values), values, percentile=str(percent)) == wanted


def test_the_mean_is_of_what_was_said() -> None:
    """rf-budget check value: the mean of 0 and 20 dB is 17.03 dB of power, not 10 (computed)."""
    assert value_of("mean", [1, 2], [0, 20], of="power") == pytest.approx(17.0329, abs=1e-4)
    assert value_of("mean", [1, 2], [0, 20], of="dB") == 10
    assert value_of("mean", [1, 2], [0, 20], of="amplitude") == pytest.approx(20 * np.log10(5.5))
    assert value_of("mean", [1, 2], [1, 3], of="values", unit="W") == 2


def test_a_mean_of_levels_needs_to_be_told_of_what() -> None:
    with pytest.raises(CalculationError, match="no mean of values"):
        value_of("mean", [1, 2], [0, 20], of="values")
    with pytest.raises(CalculationError, match="no mean of power"):
        value_of("mean", [1, 2], [1, 2], of="power", unit="W")


def test_a_mean_along_the_axis_is_the_trapezoidal_rule() -> None:
    along, values = [0.0, 1.0, 4.0, 5.0], [1.0, 2.0, 4.0, 3.0]
    wanted = np.trapezoid(values, along) / 5
    assert value_of("mean", along, values, of="dB", weights="axis") == pytest.approx(wanted)
    assert "unevenly spaced" in law_on("mean", along, values, of="dB").notes[0]


@given(levels)
def test_the_slope_is_that_of_scipy(values: list[float]) -> None:
    along = axis_for(values)
    assert value_of("slope", along, values) == pytest.approx(linregress(along, values).slope, abs=1e-9)


def test_the_slope_has_the_unit_of_both() -> None:
    assert law_on("slope", [1, 2, 3], [1, 2, 3], unit="dBm").unit == "dB/GHz"


def test_the_departure_is_that_from_the_line_of_numpy() -> None:
    along = np.linspace(17.7, 20.2, 26)
    values = 3 * along + np.sin(along * 4)
    off = values - np.polyval(np.polyfit(along, values, 1), along)
    found = {
        form: value_of("departure", along, values, form=form) for form in ("peak", "peak-to-peak", "rms")
    }
    assert found["peak"] == pytest.approx(np.abs(off).max())
    assert found["peak-to-peak"] == pytest.approx(np.ptp(off))
    assert found["rms"] == pytest.approx(np.sqrt(np.mean(off**2)))


def test_a_line_through_two_readings_is_refused() -> None:
    with pytest.raises(CalculationError, match="2 readings make no line"):
        value_of("slope", [1, 2], [1, 2])


def test_the_worst_keeps_the_uncertainty_of_its_reading() -> None:
    found = law_on("worst", [1, 2, 3], [3, 1, 2], u=[0.3, 0.1, 0.2])
    assert found.u is not None
    assert (found.rows[0], found.u[0]) == (1, 0.1)
    assert law_on("ripple", [1, 2, 3], [3, 1, 2], u=[0.3, 0.1, 0.2]).u is None
