"""The unit of a tolerance, and how close is equal."""

from __future__ import annotations

import math

import numpy as np
import pytest

from specflow.errors import UnitError
from specflow.units import closeness, parse_unit, same_within, to_tolerance, tolerance_unit


@pytest.mark.parametrize(
    ("unit", "difference"),
    [
        ("dBm", "dB"),
        ("dBm/MHz", "dB"),
        ("dBi", "dB"),
        ("dBc/Hz", "dB"),
        ("dB/K", "dB"),
        ("dBHz", "dB"),
        ("°C", "K"),
        ("°F", "Δ°F"),
        ("K", "K"),
        ("GHz", "GHz"),
        ("%", "%"),
        ("dB/m", "dB/m"),
        ("W", "W"),
    ],
)
def test_a_difference_has_its_own_unit(unit: str, difference: str) -> None:
    assert tolerance_unit(parse_unit(unit)) == parse_unit(difference)


@pytest.mark.parametrize(
    ("text", "level", "unit", "sentence"),
    [
        ("dBm", "dBm", "dB", "a tolerance in dBm is a difference of two levels and is read in dB"),
        ("dBW", "dBm", "dB", "a tolerance in dBW is a difference of two levels and is read in dB"),
        ("dBi", "dBi", "dB", "a tolerance in dBi is a difference of two levels and is read in dB"),
        ("dB", "dBm", "dB", ""),
        ("kHz", "GHz", "kHz", ""),
        ("%", "GHz", "%", "a tolerance in % is a part of the value in GHz"),
        ("°C", "°C", "K", "a tolerance in °C is a difference of temperatures and is read in K"),
        ("K", "°C", "K", ""),
        ("%", "%", "%", ""),
        ("dB", "W", "dB", "a tolerance in dB multiplies and divides the value in W"),
    ],
)
def test_a_tolerance_is_read_in_the_unit_that_it_can_have(
    text: str, level: str, unit: str, sentence: str
) -> None:
    assert to_tolerance(parse_unit(text), parse_unit(level)) == (parse_unit(unit), sentence)


@pytest.mark.parametrize(
    ("text", "level"), [("%", "dBm"), ("GHz", "dBm"), ("dBi", "dBm"), ("dBm", "GHz"), ("dB", "V")]
)
def test_a_tolerance_that_does_not_fit_is_refused(text: str, level: str) -> None:
    with pytest.raises(UnitError):
        to_tolerance(parse_unit(text), parse_unit(level))


def test_values_as_written_are_equal_only_when_they_are() -> None:
    assert same_within(0.3, 0.3, parse_unit("dB"))
    assert not same_within(0.3, 0.3 + 5e-10, parse_unit("dB"))


def test_converted_values_are_equal_within_the_stated_closeness() -> None:
    assert same_within(-30.0, -30.0 + 5e-10, parse_unit("dBm"), converted=True)
    assert not same_within(-30.0, -30.0 + 5e-9, parse_unit("dBm"), converted=True)
    assert same_within(1e9, 1e9 + 0.5, parse_unit("Hz"), converted=True)
    assert not same_within(1e9, 1e9 + 5.0, parse_unit("Hz"), converted=True)


def test_infinite_bounds_have_a_closeness_too() -> None:
    assert closeness(-math.inf, parse_unit("Hz"), converted=True) == 0.0
    assert same_within(math.inf, math.inf, parse_unit("dB"), converted=True)
    assert not same_within(math.inf, 3.0, parse_unit("dB"), converted=True)
    np.testing.assert_array_equal(
        same_within(np.array([1.0, -np.inf, 2.0]), np.array([1.0, -np.inf, 3.0]), parse_unit("%")),
        [True, True, False],
    )


def test_closeness_keeps_the_shape_of_its_value() -> None:
    values = np.array([[1.0, 10.0]])
    np.testing.assert_array_equal(closeness(values, parse_unit("dB"), converted=True), [[1e-9, 1e-9]])
    np.testing.assert_allclose(closeness(values, parse_unit("%"), converted=True), [[1e-9, 1e-8]])
    np.testing.assert_array_equal(closeness(values, parse_unit("%"), converted=False), [[0.0, 0.0]])
