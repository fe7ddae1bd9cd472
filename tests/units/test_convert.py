"""Conversions: exact where decimal is exact, asked for where physics needs more, and resolved once."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.errors import UnitError
from specflow.units import (
    FREE_SPACE_OHM,
    Spectrum,
    bandwidth_bounds,
    compatible,
    convert,
    converter,
    parse_unit,
)
from specflow.units.convert import resolved

NOISE = Spectrum.NOISE_LIKE


@pytest.mark.parametrize(
    ("value", "source", "target", "expected"),
    [
        (27.5, "GHz", "MHz", 27500.0),
        (2150.0, "kHz", "MHz", 2.15),
        (17.7, "GHz", "kHz", 17_700_000.0),
        (500.0, "µV/m", "mV/m", 0.5),
        (50.0, "ppm", "%", 0.005),
        (30.0, "dBm", "dBW", 0.0),
        (-36.0, "dBm", "dBW", -66.0),
        (1.0, "W", "dBm", 30.0),
        (0.1, "mW", "dBm", -10.0),
        (30.0, "dBm", "W", 1.0),
        (1.0, "V", "dBµV", 120.0),
        (60.0, "dBµV/m", "mV/m", 1.0),
        (1.0, "mW/cm²", "W/m²", 10.0),
        (1e6, "Hz", "dBHz", 60.0),
        (6.0, "dB/100 m", "dB/m", 0.06),
        (25.0, "°C", "K", 298.15),
        (1500.0, "ns", "µs", 1.5),
        (180.0, "deg", "rad", math.pi),
    ],
)
def test_a_conversion_gives_the_expected_value(
    value: float, source: str, target: str, expected: float
) -> None:
    assert convert(value, parse_unit(source), parse_unit(target)) == pytest.approx(
        expected, rel=1e-14, abs=1e-12
    )


@pytest.mark.parametrize(
    ("source", "target"), [("GHz", "MHz"), ("kHz", "MHz"), ("mW", "W"), ("ppm", "%"), ("ms", "µs")]
)
@given(st.integers(-(10**9), 10**9), st.integers(0, 6))
def test_decimal_values_survive_a_decimal_conversion(
    source: str, target: str, digits: int, places: int
) -> None:
    value = digits / 10**places
    there = converter(parse_unit(source), parse_unit(target))
    back = converter(parse_unit(target), parse_unit(source))
    assert back(there(value)) == pytest.approx(value, rel=1e-15)


_PAIRS = [
    ("dBm", "W"),
    ("dBm", "dBW"),
    ("dBm", "fW"),
    ("dBµV", "mV"),
    ("dBµV/m", "V/m"),
    ("dBW/m²", "mW/cm²"),
    ("dBi", "dBd"),
    ("dBHz", "MHz"),
    ("°C", "°F"),
    ("°C", "K"),
    ("dBm/MHz", "mW/MHz"),
    ("dB/m", "dB/100 m"),
]


@pytest.mark.parametrize(("source", "target"), _PAIRS)
@given(st.floats(-150, 150))
def test_there_and_back_is_where_we_started(source: str, target: str, value: float) -> None:
    there = converter(parse_unit(source), parse_unit(target))
    back = converter(parse_unit(target), parse_unit(source))
    assert back(there(value)) == pytest.approx(value, rel=1e-9, abs=1e-9)


@given(st.floats(-150, 150), st.sampled_from([10, 20]))
def test_a_linear_ratio_and_its_decibels_are_inverse(value: float, log_factor: int) -> None:
    there = converter(parse_unit("dB"), parse_unit("%"), log_factor=log_factor)
    back = converter(parse_unit("%"), parse_unit("dB"), log_factor=log_factor)
    assert back(there(value)) == pytest.approx(value, abs=1e-9)


@given(st.floats(-150, 150), st.floats(1.0, 1e3))
def test_a_power_and_a_voltage_over_one_impedance_are_inverse(value: float, ohm: float) -> None:
    there = converter(parse_unit("dBm"), parse_unit("mV"), impedance_ohm=ohm)
    back = converter(parse_unit("mV"), parse_unit("dBm"), impedance_ohm=ohm)
    assert back(there(value)) == pytest.approx(value, abs=1e-9)


def test_the_words_say_what_was_done() -> None:
    def words(source: str, target: str, **keywords: object) -> str:
        return converter(parse_unit(source), parse_unit(target), **keywords).words  # type: ignore[arg-type]

    assert words("dBm", "dBW") == "dBm to dBW: x - 30 dB"
    assert words("W", "dBm") == "W to dBm: 10·log10(x) + 30"
    assert words("dBuV/m", "V/m") == "dBµV/m to V/m: 1e-06 · 10^(x/20)"
    assert words("GHz", "MHz") == "GHz to MHz: x · 1000"
    assert words("degC", "K") == "°C to K: x + 273.15"
    assert "a half-wave dipole has 2.15 dBi" in words("dBd", "dBi")
    assert "noise-like, 1 MHz to 50 MHz is +16.99 dB" in words(
        "dBm/MHz", "dBm", bandwidth_hz=50e6, spectrum=NOISE
    )
    assert "across 50 Ω, rms values" in words("dBm", "dBµV", impedance_ohm=50.0)
    assert "far field" in words("V/m", "W/m²", impedance_ohm=FREE_SPACE_OHM)
    assert "only one of them says rms" in words("% rms", "%")


def test_a_density_becomes_a_level_for_noise_only() -> None:
    density, level = parse_unit("dBm/MHz"), parse_unit("dBm")
    assert convert(-13.0, density, level, bandwidth_hz=1e7, spectrum=NOISE) == pytest.approx(-3.0)
    assert convert(-3.0, level, density, bandwidth_hz=1e7, spectrum=NOISE) == pytest.approx(-13.0)
    with pytest.raises(UnitError, match="the bandwidth is missing"):
        convert(-13.0, density, level)
    with pytest.raises(UnitError, match="a discrete line does not scale with bandwidth"):
        convert(-13.0, density, level, bandwidth_hz=1e7, spectrum=Spectrum.DISCRETE)
    with pytest.raises(UnitError, match="noise-like or a discrete line is missing"):
        convert(-13.0, density, level, bandwidth_hz=1e7)


def test_another_reference_bandwidth_is_a_conversion_too() -> None:
    narrow, wide = parse_unit("dBm/100 kHz"), parse_unit("dBm/MHz")
    assert convert(-36.0, narrow, wide, spectrum=NOISE) == pytest.approx(-26.0, abs=1e-12)
    assert not compatible(narrow, wide)
    for spectrum in (Spectrum.UNKNOWN, Spectrum.DISCRETE):
        with pytest.raises(UnitError):
            convert(-36.0, narrow, wide, spectrum=spectrum)


def test_a_voltage_density_scales_with_the_root_of_the_bandwidth() -> None:
    source, target = parse_unit("dBµV/m/100 kHz"), parse_unit("dBµV/m/MHz")
    assert convert(40.0, source, target, spectrum=NOISE) == pytest.approx(50.0)


def test_an_unknown_spectrum_gives_the_line_and_the_noise_as_bounds() -> None:
    narrow, wide = parse_unit("dBm/100 kHz"), parse_unit("dBm/MHz")
    lo, hi = bandwidth_bounds(np.array([-40.0, -50.0]), narrow, wide)
    np.testing.assert_allclose(lo, [-40.0, -50.0])
    np.testing.assert_allclose(hi, [-30.0, -40.0])
    lo, hi = bandwidth_bounds(np.array([-30.0]), wide, narrow)
    np.testing.assert_allclose([lo[0], hi[0]], [-40.0, -30.0])


@pytest.mark.parametrize(
    ("source", "target", "missing"),
    [
        ("dBi", "dBic", "polarisation loss is missing"),
        ("dBd", "dBic", "polarisation loss is missing"),
        ("dB", "dBi", "the reference is missing"),
        ("dB", "dBc", "the reference is missing"),
        ("dBFS", "dBc", "carrier level in dBFS"),
        ("dBc", "dBm", "the carrier level is missing"),
        ("dBm", "dBc", "the carrier level is missing"),
        ("dBFS", "dBm", "full-scale level"),
        ("dBr", "dBm", "the reference level is missing"),
        ("dB", "dBm", "the reference level is missing"),
        ("dBi", "dBm", "power at the antenna input"),
        ("dBc/Hz", "dBm/Hz", "the carrier level is missing"),
        ("dBc/Hz", "dBc", "the bandwidth is missing"),
        ("dBm", "dBµV", "the impedance is missing"),
        ("V", "W", "the impedance is missing"),
        ("V/m", "W/m²", "the wave impedance is missing"),
        ("dBm", "dBµV/m", "the distance and the antenna gain"),
        ("dBm", "dBW/m²", "the distance and the antenna gain"),
        ("dBm/MHz", "dBW/m²/MHz", "the distance and the antenna gain"),
        ("dBc/Hz", "dBr/Hz", "the reference is missing"),
        ("dB/K", "dBi", "noise temperature is missing"),
        ("dB/K", "dB/°C", "not a slope over temperature"),
        ("dB/m", "dB", "the length is missing"),
        ("dB/MHz", "dB", "the span"),
        ("%", "dB", "10·log"),
        ("dB", "1", "20·log"),
        ("ppm", "Hz", "the reference frequency is missing"),
        ("%", "A", "the current that makes the whole"),
        ("dB", "K", "noise figure and noise temperature"),
        ("deg", "ns", "the frequency is missing"),
        ("GHz", "mm", "velocity is missing"),
        ("RB", "MHz", "subcarrier spacing"),
        ("Mbit/s", "MHz", "spectral efficiency"),
        ("V p-p", "V rms", "the wave form is missing"),
        ("dBm", "GHz", "nothing relates"),
        ("s", "A", "nothing relates"),
    ],
)
def test_a_refusal_names_the_missing_piece(source: str, target: str, missing: str) -> None:
    with pytest.raises(UnitError) as refusal:
        converter(parse_unit(source), parse_unit(target))
    assert missing in str(refusal.value)
    assert source.replace("u", "µ") in str(refusal.value)
    assert not compatible(parse_unit(source), parse_unit(target))


def test_a_peak_to_peak_voltage_has_no_power_without_its_wave_form() -> None:
    with pytest.raises(UnitError, match="wave form"):
        convert(1.0, parse_unit("V p-p"), parse_unit("dBm"), impedance_ohm=50.0)


def test_differences_drop_references_and_zero_points() -> None:
    def difference(value: float, source: str, target: str) -> float:
        return convert(value, parse_unit(source), parse_unit(target), difference=True)

    assert difference(10.0, "°C", "K") == 10.0
    assert difference(9.0, "°F", "K") == pytest.approx(5.0)
    assert difference(1.5, "dBm", "dBW") == 1.5
    assert difference(1.5, "dBm/MHz", "dBm/Hz") == 1.5
    assert difference(1.0, "dBi", "dBd") == 1.0
    assert difference(0.5, "GHz", "MHz") == 500.0
    with pytest.raises(UnitError, match="a difference needs the value"):
        difference(1.0, "W", "dBm")


def test_zero_power_is_minus_infinity_and_negative_power_is_refused() -> None:
    assert convert(0.0, parse_unit("W"), parse_unit("dBm")) == -math.inf
    with pytest.raises(UnitError, match="negative"):
        convert(np.array([1.0, -1e-3]), parse_unit("W"), parse_unit("dBm"))


@pytest.mark.parametrize("keywords", [{"log_factor": 15}, {"bandwidth_hz": 0.0}, {"impedance_ohm": -50.0}])
def test_an_argument_that_cannot_be_is_refused(keywords: dict[str, float]) -> None:
    with pytest.raises(UnitError):
        converter(parse_unit("dBm"), parse_unit("W"), **keywords)  # type: ignore[arg-type]


def test_scalars_stay_floats_and_arrays_keep_their_shape() -> None:
    there = converter(parse_unit("dBm"), parse_unit("mW"))
    assert type(there(0.0)) is float
    grid = np.array([[0.0, 10.0], [20.0, 30.0]])
    np.testing.assert_allclose(there(grid), [[1.0, 10.0], [100.0, 1000.0]])
    assert there(np.array([10, 20])).dtype == np.float64
    same = converter(parse_unit("dBm"), parse_unit("DBM"))
    assert same.is_identity and same(grid) is grid


def test_a_million_values_are_converted_after_one_resolution() -> None:
    resolved.cache_clear()
    values = np.linspace(-120.0, 30.0, 1_000_000)
    source, target = parse_unit("dBm"), parse_unit("W")
    watts = convert(values, source, target)
    again = convert(values, source, target)
    assert resolved.cache_info().misses == 1
    assert isinstance(watts, np.ndarray) and watts.shape == values.shape
    np.testing.assert_allclose(watts, 1e-3 * 10 ** (values / 10), rtol=1e-12)
    np.testing.assert_array_equal(watts, again)


@pytest.mark.parametrize(
    ("a", "b", "answer"),
    [
        ("dBm", "W", True),
        ("V", "dBµV", True),
        ("°C", "K", True),
        ("% rms", "%", True),
        ("dBi", "dBd", True),
        ("dBm/MHz", "dBm/1 MHz", True),
        ("dB", "%", False),
        ("dBm", "dB", False),
        ("dB", "dB/m", False),
        ("dBHz", "dBK", False),
    ],
)
def test_compatible_means_comparable_without_more_information(a: str, b: str, answer: bool) -> None:
    assert compatible(parse_unit(a), parse_unit(b)) is answer
    assert compatible(parse_unit(b), parse_unit(a)) is answer
