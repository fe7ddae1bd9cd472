"""Bandwidth, centre, crossing and interpolation: closed forms, and what is refused rather than extrapolated."""

from __future__ import annotations

import numpy as np
import pytest

from specflow.errors import CalculationError
from tests.derive.deriving import law_on, value_of

FREQUENCY = np.linspace(9.0, 11.0, 401)


def resonance(loaded_q: float = 10.0, centre: float = 10.0) -> np.ndarray:
    """The transmission of a single resonator in dB: |S21|² = 1/(1 + Q²(f/f0 - f0/f)²) (handbook form)."""
    detuning = FREQUENCY / centre - centre / FREQUENCY
    return -10 * np.log10(1 + (loaded_q * detuning) ** 2)


def test_the_half_power_bandwidth_of_a_resonator_is_its_frequency_over_its_q() -> None:
    """Δf = f0/Q exactly for this form: the edges solve f/f0 - f0/f = ±1/Q, and their difference is f0/Q."""
    half = f"{10 * np.log10(2)} dB"
    assert value_of("bandwidth", FREQUENCY, resonance(), below=half) == pytest.approx(1.0, abs=2e-4)
    edges = np.roots([1, -1.0, -100]), np.roots([1, 1.0, -100])
    middle = (edges[0].max() + edges[1].max()) / 2
    assert value_of("centre", FREQUENCY, resonance(), below=half) == pytest.approx(middle, abs=2e-4)


def test_a_loss_has_its_band_about_its_least_value() -> None:
    wanted = value_of("bandwidth", FREQUENCY, resonance(), below="3 dB")
    assert value_of("bandwidth", FREQUENCY, -resonance(), below="3 dB", peak="lowest") == wanted


def test_edges_on_straight_flanks_are_exact() -> None:
    found = law_on("bandwidth", [0, 10, 20, 30], [0, 10, 10, 0], below="3 dB")
    assert found.value[0] == pytest.approx(16)
    assert found.at == ("edges at 7 GHz and 23 GHz, interpolated",)
    assert value_of(
        "bandwidth", [0, 10, 20, 30], [0, 10, 10, 0], below="3 dB", reference="8 dB"
    ) == pytest.approx(20)


def test_an_edge_beyond_the_range_is_refused() -> None:
    with pytest.raises(CalculationError, match="the upper edge lies beyond the range"):
        value_of("bandwidth", [0, 10, 20], [0, 10, 9], below="3 dB")


def test_a_second_pass_band_is_told() -> None:
    found = law_on("bandwidth", [0, 1, 2, 3, 4, 5], [0, 10, 0, 9, 0, 0], below="3 dB")
    assert found.notes == ("beyond an edge the level is met again; the width is that about the peak",)


@pytest.mark.parametrize(
    ("direction", "which", "wanted"),
    [("rising", "first", 0.5), ("falling", "first", 1.5), ("either", "last", 3.5), ("rising", "last", 2.5)],
)
def test_a_crossing_is_found_by_direction_and_turn(direction: str, which: str, wanted: float) -> None:
    found = value_of(
        "crossing", [0, 1, 2, 3, 4], [0, 2, 0, 2, 0], level="1 dB", direction=direction, which=which
    )
    assert found == wanted


def test_a_level_that_is_not_met_is_refused_with_what_there_is() -> None:
    with pytest.raises(
        CalculationError, match=r"the level 5 is not met in 0 to 2 GHz; the readings run from 0 to 2 dB"
    ):
        value_of("crossing", [0, 1, 2], [0, 2, 0], level="5 dB", direction="either")


def test_an_interpolated_value_lies_on_the_line_and_says_where_it_is() -> None:
    found = law_on("interpolated", [1, 3], [10, 20], u=[0.1, 0.3], at="2 GHz")
    assert found.u is not None
    assert (found.value[0], found.u[0]) == (15, pytest.approx(0.2))
    assert found.axes["frequency"][0] == 2  # it proves that place, not the range between
    assert value_of("interpolated", [1, 100], [0, 20], at="10 GHz", scale="log") == pytest.approx(10)


def test_nothing_is_extrapolated() -> None:
    with pytest.raises(CalculationError, match="4 GHz lies outside the readings, 1 to 3 GHz"):
        value_of("interpolated", [1, 3], [10, 20], at="4 GHz")
