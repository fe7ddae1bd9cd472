"""Beamwidth and side lobes of patterns known in closed form."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray

from specflow.errors import CalculationError
from tests.derive.deriving import law_on, value_of

THETA = np.arange(-90.0, 90.01, 0.25)
ANGLE = {"axis": "theta", "axis_unit": "deg"}


def uniform_line(elements: int, spacing: float = 0.5) -> NDArray[np.float64]:
    """Array factor of a uniform broadside line in dB, spacing in wavelengths."""
    half = np.pi * spacing * np.sin(np.radians(THETA))
    with np.errstate(divide="ignore", invalid="ignore"):
        factor = np.where(half == 0, 1.0, np.sin(elements * half) / (elements * np.sin(half)))
    return 20 * np.log10(np.maximum(np.abs(factor), 1e-9))


@pytest.mark.parametrize("n", [1, 2, 4, 8, 16])
def test_the_half_power_beamwidth_of_a_cosine_pattern(n: int) -> None:
    """cosⁿθ in power is half at acos(2^(-1/n))."""
    values = 10 * n * np.log10(np.maximum(np.cos(np.radians(THETA)), 1e-9))
    found = value_of("beamwidth", THETA, values, unit="dBi", below=f"{10 * np.log10(2)} dB", **ANGLE)
    assert found == pytest.approx(2 * np.degrees(np.arccos(2 ** (-1 / n))), abs=0.005)


def test_a_linear_pattern_has_the_same_beam() -> None:
    values = np.cos(np.radians(THETA)) ** 4 + 1e-12
    found = value_of("beamwidth", THETA, values, unit="W", below=f"{10 * np.log10(2)} dB", **ANGLE)
    assert found == pytest.approx(2 * np.degrees(np.arccos(0.5**0.25)), abs=0.005)


def test_the_first_side_lobe_of_a_long_uniform_line() -> None:
    """-13.26 dB for a continuous aperture: sin x/x at x = 4.4934, tan x = x (handbook figure)."""
    found = law_on("side lobe level", THETA, uniform_line(64), unit="dB", **ANGLE)
    assert found.value[0] == pytest.approx(20 * np.log10(abs(np.sin(4.4934) / 4.4934)), abs=0.06)
    assert value_of("side lobe level", THETA, uniform_line(64), unit="dB", sign="suppression", **ANGLE) > 13


def test_the_main_lobe_ends_at_its_first_nulls() -> None:
    """A shoulder at -8 dB fills no null of 10 dB: it belongs to the main lobe; the lobe beyond the null does not."""
    values = np.array([-30.0, -25, -40, -9, -8, -9, 0, -9, -40, -28, -40])
    found = law_on("side lobe level", np.arange(11.0), values, unit="dBi", **ANGLE)
    assert (found.value[0], found.rows[0]) == (-25, 1)


def test_a_side_without_a_null_is_told_and_none_at_all_refused() -> None:
    values = np.array([0.0, -3, -40, -20, -40])
    found = law_on("side lobe level", np.arange(5.0), values, unit="dBi", **ANGLE)
    assert found.value[0] == -20
    assert found.notes == ("on the lower side no null lies within the cut, so no side lobe is known there",)
    with pytest.raises(CalculationError, match="no null at least 10 dB below the peak"):
        value_of("side lobe level", np.arange(5.0), [0, -1, -2, -3, -4], unit="dBi", **ANGLE)


def test_a_beam_that_the_cut_does_not_hold_is_refused() -> None:
    with pytest.raises(CalculationError, match="the upper edge lies beyond the range"):
        value_of("beamwidth", np.arange(5.0), [-10, -5, 0, -1, -2], unit="dBi", **ANGLE)


def test_a_beam_across_the_ends_of_a_full_turn_is_one_beam() -> None:
    """An azimuth cut from 0 to 360° with its beam at 0°: turned so that the beam is whole."""
    around = np.arange(0.0, 360.01, 1.0)
    off = np.abs((around + 180) % 360 - 180)
    values = np.maximum(-3 * (off / 5) ** 2, -40) + np.where((off > 60) & (off < 70), 15.0, 0.0)
    fields = {"unit": "dBi", "axis": "azimuth", "axis_unit": "deg"}
    width = law_on("beamwidth", around, values, below="3 dB", **fields)
    assert width.value[0] == pytest.approx(10)
    assert width.rows[0] == 0
    lobes = law_on("side lobe level", around, values, **fields)
    assert lobes.value[0] == -25
    assert 60 < around[lobes.rows[0]] < 70 or 290 < around[lobes.rows[0]] < 300
