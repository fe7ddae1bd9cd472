"""What may be added to what, what comes out, and what is refused."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.errors import UnitError
from specflow.units import Quantity, Spectrum, add, compare, format_unit, parse_quantity, parse_unit, subtract

NOISE = Spectrum.NOISE_LIKE


def _check(result: Quantity, value: float, unit: str) -> None:
    assert format_unit(result.unit) == unit
    assert result.value == pytest.approx(value, abs=1e-9)


@pytest.mark.parametrize(
    ("a", "b", "value", "unit"),
    [
        ("30 dBm", "3 dB", 33.0, "dBm"),
        ("3 dB", "30 dBm", 33.0, "dBm"),
        ("30 dBm", "24 dBi", 54.0, "dBm"),
        ("30 dBm", "-40 dBc", -10.0, "dBm"),
        ("10 dBm", "-100 dBc/Hz", -90.0, "dBm/Hz"),
        ("-114 dBm/MHz", "3 dB", -111.0, "dBm/MHz"),
        ("-114 dBm/MHz", "24 dBi", -90.0, "dBm/MHz"),
        ("60 dBµV", "20 dB(1/m)", 80.0, "dBµV/m"),
        ("5 dBi", "1 dB", 6.0, "dBi"),
        ("-30 dBc", "3 dB", -27.0, "dBc"),
        ("3 dB", "4 dB", 7.0, "dB"),
        ("1 W", "1 mW", 1.001, "W"),
        ("1 W", "10 dB", 10.0, "W"),
        ("2 V/m", "20 dB", 20.0, "V/m"),
        ("1 GHz", "1 MHz", 1.001, "GHz"),
        ("25 °C", "18 K", 43.0, "°C"),
        ("18 K", "25 °C", 43.0, "°C"),
        ("50 °F", "5 K", 59.0, "°F"),
        ("1 %", "2 %", 3.0, "%"),
    ],
)
def test_a_sum_has_the_unit_that_physics_gives_it(a: str, b: str, value: float, unit: str) -> None:
    _check(add(parse_quantity(a), parse_quantity(b)), value, unit)


@pytest.mark.parametrize(
    ("a", "b", "value", "unit"),
    [
        ("30 dBm", "27 dBm", 3.0, "dB"),
        ("30 dBm", "1 W", 0.0, "dB"),
        ("1 W", "27 dBm", 3.0, "dB"),
        ("30 dBm", "3 dB", 27.0, "dBm"),
        ("54 dBm", "24 dBi", 30.0, "dBm"),
        ("1 W", "10 dB", 0.1, "W"),
        ("-90 dBm", "-174 dBm/Hz", 84.0, "dBHz"),
        ("-90 dBm", "-114 dBm/MHz", 84.0, "dBHz"),
        ("25 dBi", "24 dBK", 1.0, "dB/K"),
        ("100 dBµV/m", "80 dBµV", 20.0, "dB(1/m)"),
        ("100 dBµV/m", "20 dB(1/m)", 80.0, "dBµV"),
        ("5 dBi", "2.15 dBd", 0.7, "dB"),
        ("25 °C", "20 °C", 5.0, "K"),
        ("25 °C", "5 K", 20.0, "°C"),
        ("50 °F", "41 °F", 9.0, "Δ°F"),
        ("1 GHz", "1 MHz", 0.999, "GHz"),
        ("8 %", "1 %", 7.0, "%"),
    ],
)
def test_a_difference_has_the_unit_that_physics_gives_it(a: str, b: str, value: float, unit: str) -> None:
    _check(subtract(parse_quantity(a), parse_quantity(b)), value, unit)


def test_a_density_over_a_bandwidth_is_a_level_for_noise_only() -> None:
    density, bandwidth = parse_quantity("-114 dBm/MHz"), parse_quantity("70 dBHz")
    _check(add(density, bandwidth, spectrum=NOISE), -104.0, "dBm")
    _check(add(parse_quantity("-100 dBc/Hz"), parse_quantity("40 dBHz"), spectrum=NOISE), -60.0, "dBc")
    _check(subtract(parse_quantity("-104 dBm"), bandwidth, spectrum=NOISE), -174.0, "dBm/Hz")
    for spectrum in (Spectrum.UNKNOWN, Spectrum.DISCRETE):
        with pytest.raises(UnitError, match=r"noise|line"):
            add(density, bandwidth, spectrum=spectrum)
        with pytest.raises(UnitError, match=r"noise|line"):
            subtract(parse_quantity("-104 dBm"), bandwidth, spectrum=spectrum)


@pytest.mark.parametrize(
    ("a", "b", "says"),
    [
        ("30 dBm", "30 dBm", "a power sum must be asked for"),
        ("30 dBm", "1 W", "a power sum must be asked for"),
        ("-13 dBm/MHz", "-13 dBm/MHz", "a power sum must be asked for"),
        ("60 dBµV/m", "60 dBµV/m", "a power sum must be asked for"),
        ("3 V/m", "3 V/m", "a power sum must be asked for"),
        ("5 dBi", "5 dBi", "only a plain ratio in dB"),
        ("5 dBi", "-30 dBc", "only a plain ratio in dB"),
        ("3 dB", "50 %", "10·log or 20·log is missing"),
        ("20 °C", "20 °C", "write the difference in K"),
        ("30 dBm", "0.1 dB/m", "the length or span of the slope is missing"),
        ("30 dBm", "1 GHz", "they measure different things"),
    ],
)
def test_a_sum_without_meaning_is_refused_with_the_reason(a: str, b: str, says: str) -> None:
    with pytest.raises(UnitError) as refusal:
        add(parse_quantity(a), parse_quantity(b))
    assert says in str(refusal.value)


@pytest.mark.parametrize(
    ("a", "b"),
    [("3 dB", "30 dBm"), ("5 dBi", "5 dBic"), ("8 %", "3 dB"), ("1 GHz", "1 s"), ("30 dBm", "2 GHz")],
)
def test_a_difference_of_unlike_things_is_refused(a: str, b: str) -> None:
    with pytest.raises(UnitError):
        subtract(parse_quantity(a), parse_quantity(b))


_levels = st.sampled_from(["dBm", "dBW", "dBm/MHz", "dBc/Hz", "dBi", "dBc", "dB/K", "dBµV/m", "dBHz", "dB"])
_values = st.floats(-200, 200)


@given(_levels, _values, _values)
def test_subtracting_a_ratio_undoes_adding_it(unit: str, level: float, ratio: float) -> None:
    start, step = Quantity(level, parse_unit(unit)), Quantity(ratio, parse_unit("dB"))
    back = subtract(add(start, step), step)
    assert back.unit == start.unit
    assert back.value == pytest.approx(level, abs=1e-9)


@given(_levels, _values, _values)
def test_a_level_plus_the_difference_to_another_is_the_other(unit: str, a: float, b: float) -> None:
    first, second = Quantity(a, parse_unit(unit)), Quantity(b, parse_unit(unit))
    total = add(first, subtract(second, first))
    assert total.unit == first.unit
    assert total.value == pytest.approx(b, abs=1e-9)


def test_arrays_are_added_like_numbers() -> None:
    trace = Quantity(np.array([-50.0, -40.0]), parse_unit("dBm"))
    np.testing.assert_allclose(add(trace, parse_quantity("3 dB")).value, [-47.0, -37.0])
    np.testing.assert_allclose(subtract(trace, parse_quantity("-10 dBm")).value, [-40.0, -30.0])


@pytest.mark.parametrize(
    ("a", "b", "order"),
    [
        ("30 dBm", "1 W", 0),
        ("30 dBm", "0 dBW", 0),
        ("30.000001 dBm", "1 W", 1),
        ("29.999999 dBm", "1 W", -1),
        ("0.3 dB", "0.3 dB", 0),
        ("0.30000000001 dB", "0.3 dB", 1),
        ("27.5 GHz", "27500 MHz", 0),
        ("2.15 dBi", "0 dBd", 0),
        ("20 °C", "68 °F", 0),
        ("-5 dBm", "-4 dBm", -1),
    ],
)
def test_quantities_are_compared_by_what_they_mean(a: str, b: str, order: int) -> None:
    assert compare(parse_quantity(a), parse_quantity(b)) == order
    assert compare(parse_quantity(b), parse_quantity(a)) == -order


def test_an_array_is_compared_value_by_value() -> None:
    trace = Quantity(np.array([29.0, 30.0, 31.0, -np.inf]), parse_unit("dBm"))
    np.testing.assert_array_equal(compare(trace, parse_quantity("1 W")), [-1, 0, 1, -1])


def test_what_cannot_be_compared_is_refused() -> None:
    with pytest.raises(UnitError, match="carrier level"):
        compare(parse_quantity("-30 dBc"), parse_quantity("-30 dBm"))
    with pytest.raises(UnitError, match="not a number"):
        compare(Quantity(float("nan"), parse_unit("dB")), parse_quantity("1 dB"))
