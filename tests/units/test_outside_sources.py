"""Our conversions against constants, standards and libraries that we did not write. Each check names its source."""

from __future__ import annotations

import math

import numpy as np
import pint
import pytest
import scipy.constants
import scipy.special
import skrf

from specflow.units import (
    FREE_SPACE_OHM,
    Quantity,
    Spectrum,
    add,
    convert,
    parse_quantity,
    parse_unit,
    subtract,
)

NOISE = Spectrum.NOISE_LIKE


def test_the_wave_impedance_of_free_space_is_that_of_codata() -> None:  # scipy.constants, CODATA
    assert (
        pytest.approx(scipy.constants.value("characteristic impedance of vacuum"), rel=1e-9) == FREE_SPACE_OHM
    )


def test_the_electronvolt_is_that_of_the_si() -> None:  # SI brochure, 9th edition: exact since 2019
    assert convert(1.0, parse_unit("eV"), parse_unit("J")) == scipy.constants.e


def test_thermal_noise_at_290_kelvin() -> None:
    # k from the SI brochure, exact since 2019 (scipy.constants); the -174 dBm/Hz of the trade is this, rounded.
    watts_per_hertz = scipy.constants.k * 290.0
    density = convert(watts_per_hertz, parse_unit("W/Hz"), parse_unit("dBm/Hz"))
    assert density == pytest.approx(-173.975, abs=5e-4)
    bandwidth = Quantity(convert(25 * 12 * 15e3, parse_unit("Hz"), parse_unit("dBHz")), parse_unit("dBHz"))
    noise = add(Quantity(density, parse_unit("dBm/Hz")), bandwidth, spectrum=NOISE)
    assert noise.value == pytest.approx(-107.44, abs=5e-3)  # 4.5 MHz, from the -174 rounded: -107.47


def test_a_half_wave_dipole_has_the_gain_that_its_integral_gives() -> None:
    # Directivity of the thin half-wave dipole, 4 / Cin(2π): Balanis, Antenna Theory, section 4.6 (from memory).
    _, cosine_integral = scipy.special.sici(2 * math.pi)
    cin = np.euler_gamma + math.log(2 * math.pi) - cosine_integral
    exact = 10 * math.log10(4 / cin)
    used = convert(0.0, parse_unit("dBd"), parse_unit("dBi"))
    assert used == round(exact, 2) == 2.15
    assert 10 * math.log10(1.64) == pytest.approx(used, abs=0.005)  # the ratio 1.64 of ITU-R and FCC texts


@pytest.mark.parametrize(
    ("percent", "decibel"), [(17.5, -15.14), (12.5, -18.06), (8.0, -21.94), (3.5, -29.12), (2.5, -32.04)]
)
def test_evm_limits_in_percent_and_in_decibel(percent: float, decibel: float) -> None:
    # EVM limits of TS 38.104 table 6.5.2.2-1 in %; an amplitude ratio, so 20·log.
    assert convert(percent, parse_unit("%"), parse_unit("dB"), log_factor=20) == pytest.approx(
        decibel, abs=5e-3
    )


def test_the_constellation_error_of_ieee_802_11_in_percent() -> None:  # -38 dB for 4096-QAM, IEEE 802.11be
    assert convert(-38.0, parse_unit("dB"), parse_unit("%"), log_factor=20) == pytest.approx(1.26, abs=5e-3)


def test_an_out_of_band_blocker_in_volts_per_metre_as_eirp() -> None:
    # TS 38.104 table 10.6.3.1-1: 0.36 V/m. In the far field S = E²/Z0, and EIRP = S · 4πr²; at 30 m about 36 dBm.
    flux = convert(0.36, parse_unit("V/m"), parse_unit("dBm/m²"), impedance_ohm=FREE_SPACE_OHM)
    eirp = flux + 10 * math.log10(4 * math.pi * 30.0**2)
    assert eirp == pytest.approx(35.9, abs=0.05)
    assert eirp == pytest.approx(
        10 * math.log10(1000 * (0.36 * 30.0) ** 2 / 30.0), abs=0.01
    )  # E²r²/30, Z0 as 120π


def test_a_base_station_limit_scaled_to_half_its_bandwidth() -> None:  # 47 CFR 30.202: 75 dBm per 100 MHz
    limit = convert(75.0, parse_unit("dBm/100 MHz"), parse_unit("dBm"), bandwidth_hz=50e6, spectrum=NOISE)
    assert limit == pytest.approx(71.99, abs=5e-3)


def test_a_signal_generator_over_50_ohm() -> None:  # common practice, no source: 0 dBm is 107 dBµV over 50 Ω
    level = convert(0.0, parse_unit("dBm"), parse_unit("dBµV"), impedance_ohm=50.0)
    assert level == pytest.approx(106.99, abs=5e-3)


def test_the_wave_of_one_volt_per_metre() -> (
    None
):  # common practice, no source: E in dBµV/m is H in dBµA/m + 51.5 dB
    magnetic = convert(120.0, parse_unit("dBµV/m"), parse_unit("dBµA/m"), impedance_ohm=FREE_SPACE_OHM)
    assert 120.0 - magnetic == pytest.approx(51.5, abs=0.03)


def test_decibels_agree_with_scikit_rf() -> None:
    values = np.array([1e-6, 0.1, 1.0, 17.5])
    np.testing.assert_allclose(
        convert(values, parse_unit("1"), parse_unit("dB"), log_factor=20), skrf.mathFunctions.mag_2_db(values)
    )
    np.testing.assert_allclose(
        convert(values, parse_unit("1"), parse_unit("dB"), log_factor=10),
        skrf.mathFunctions.mag_2_db10(values),
    )
    np.testing.assert_allclose(
        convert(-values, parse_unit("dB"), parse_unit("1"), log_factor=20),
        skrf.mathFunctions.db_2_mag(-values),
    )


@pytest.mark.parametrize(
    ("source", "target"),
    [
        ("inch", "mm"),
        ("ft", "m"),
        ("nautical_mile", "km"),
        ("degF", "degC"),
        ("deg", "mrad"),
        ("arcmin", "deg"),
        ("rpm", "rad/s"),
        ("year", "s"),
        ("lb", "kg"),
        ("bar", "kPa"),
        ("Wh", "kJ"),
    ],
)
def test_physical_units_agree_with_pint(source: str, target: str) -> None:
    registry: pint.UnitRegistry[float] = pint.UnitRegistry()
    theirs = registry.Quantity(37.5, source).to(target).magnitude
    ours = convert(37.5, parse_unit({"nautical_mile": "nmi"}.get(source, source)), parse_unit(target))
    assert ours == pytest.approx(theirs, rel=1e-9)


def test_pint_takes_a_mil_for_an_angle_and_a_gauss_for_another_system() -> None:
    registry: pint.UnitRegistry[float] = pint.UnitRegistry()
    assert registry.Quantity(1, "mil").dimensionless
    assert not registry.Quantity(1, "gauss").is_compatible_with("tesla")
    assert convert(1.0, parse_unit("mil"), parse_unit("µm")) == pytest.approx(
        25.4
    )  # one thousandth of an inch
    assert convert(1.0, parse_unit("gauss"), parse_unit("mT")) == pytest.approx(
        0.1
    )  # SI brochure: 1 G = 10⁻⁴ T


def test_pint_agrees_on_dbm_and_is_wrong_on_a_difference_of_levels() -> None:
    registry: pint.UnitRegistry[float] = pint.UnitRegistry(autoconvert_offset_to_baseunit=True)
    theirs = registry.Quantity(30.0, "dBm").to("W").magnitude
    assert convert(30.0, parse_unit("dBm"), parse_unit("W")) == pytest.approx(theirs)
    difference = registry.Quantity(30.0, "dBm") - registry.Quantity(27.0, "dBm")
    assert "decibel" not in str(difference.units)  # pint: no dB
    ours = subtract(parse_quantity("30 dBm"), parse_quantity("27 dBm"))
    assert (ours.value, ours.unit) == (3.0, parse_unit("dB"))
