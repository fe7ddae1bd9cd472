"""Integrated phase noise: closed forms and scipy's quadrature as the second route."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import quad

from specflow.errors import CalculationError
from tests.derive.deriving import value_of

OFFSET, DENSITY = [1e3, 1e4, 1e5, 1e6, 1e7], [-80.0, -90, -100, -120, -140]
AXIS = {"axis": "offset", "axis_unit": "Hz"}


def test_the_five_point_example() -> None:
    """rf-budget section 2: the five-point profile gives 0.6061° rms."""
    assert value_of("phase error", OFFSET, DENSITY, unit="dBc/Hz", **AXIS) == pytest.approx(0.6061, abs=5e-5)


def test_a_flat_profile_in_closed_form() -> None:
    """σ² = 2·L·(f2 - f1): -100 dBc/Hz from 10 kHz to 1.01 MHz is 2e-4 rad², -36.99 dBc."""
    fields = {"unit": "dBc/Hz", **AXIS}
    assert value_of("integrated phase noise", [1e4, 1.01e6], [-100, -100], **fields) == pytest.approx(
        -36.9897, abs=1e-4
    )
    found = value_of("jitter", [1e4, 1.01e6], [-100, -100], carrier="10 GHz", **fields)
    assert found == pytest.approx(np.sqrt(2e-4) / (2 * np.pi * 1e10) * 1e15)


def test_a_part_of_the_profile_against_numerical_integration() -> None:
    def density(f: float) -> float:
        return float(10 ** (np.interp(np.log10(f), np.log10(OFFSET), DENSITY) / 10))

    places = [1e4, 1e5, 1e6]
    area = sum(quad(density, low, high)[0] for low, high in zip([5e3, *places], [*places, 3e6], strict=True))
    found = value_of("phase error", OFFSET, DENSITY, unit="dBc/Hz", span=(5e3, 3e6), **AXIS)
    assert found == pytest.approx(np.degrees(np.sqrt(2 * area)), rel=1e-6)


def test_offsets_in_other_units_are_the_same() -> None:
    found = value_of(
        "phase error", [one / 1e3 for one in OFFSET], DENSITY, unit="dBc/Hz", axis="offset", axis_unit="kHz"
    )
    assert found == pytest.approx(0.6061, abs=5e-5)


@pytest.mark.parametrize("span", [(1e2, 1e7), (1e3, 2e7)])
def test_an_integral_beyond_the_readings_is_refused_in_words(span: tuple[float, float]) -> None:
    with pytest.raises(
        CalculationError, match="reaches beyond the readings: there is offset 1000 to 10000000 Hz"
    ):
        value_of("phase error", OFFSET, DENSITY, unit="dBc/Hz", span=span, **AXIS)
