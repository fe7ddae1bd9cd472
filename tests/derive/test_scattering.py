"""Laws of network files, against closed forms, scikit-rf and published figures."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra import numpy as arrays

from specflow.derive import LAW_BY_NAME, Outcome, Readings, Samples, complete_settings
from specflow.derive.said import typed_settings
from specflow.derive.samples import Range
from specflow.derive.scattering import entry, magnitude_db
from specflow.derive.scattering_laws import SCATTERING_LAWS
from specflow.errors import CalculationError

UNITS = {"DB": ("dB", "deg"), "MA": ("1", "deg"), "RI": ("1", "1")}
FORMATS = ("DB", "MA", "RI")


def pair(
    values: Any, pair_format: str = "RI", names: Sequence[str] = ("first", "second")
) -> dict[str, Readings]:
    """The two columns of an entry as a file of that format has them."""
    s = np.asarray(values, np.complex128)
    angle = np.angle(s, deg=True)
    first, second = {
        "DB": (20 * np.log10(np.abs(s), where=s != 0, out=np.full(s.shape, -np.inf)), angle),
        "MA": (np.abs(s), angle),
        "RI": (s.real, s.imag),
    }[pair_format]
    return {
        name: Readings(column, column, unit)
        for name, column, unit in zip(names, (first, second), UNITS[pair_format], strict=True)
    }


def law(
    name: str, readings: dict[str, Readings], along: Any = None, axis_unit: str = "GHz", **settings: str
) -> Outcome:
    found = LAW_BY_NAME[name]
    texts = complete_settings(found, {key.replace("_", " "): text for key, text in settings.items()})
    typed = typed_settings(found, texts, axis_unit=axis_unit, value_unit="dB")
    if along is None:
        return found.function(Samples(readings, settings=typed))
    axis = np.asarray(along, np.float64)
    span = Range(float(axis[0]), float(axis[-1]))
    return found.function(
        Samples(readings, {"frequency": axis}, {"frequency": axis_unit}, "frequency", span, typed)
    )


@pytest.mark.parametrize("pair_format", FORMATS)
def test_one_entry_in_any_format(pair_format: str) -> None:
    """0.5: gain -6.0206 dB, loss 6.0206 dB, VSWR 3; 0.2: return loss 13.9794 dB, VSWR 1.5 (closed forms)."""
    s = np.array([0.5, 0.2j, -0.5])
    readings = pair(s, pair_format)
    assert law("gain", readings).value == pytest.approx([-6.0206, -13.9794, -6.0206], abs=1e-4)
    assert law("loss", readings).value == pytest.approx([6.0206, 13.9794, 6.0206], abs=1e-4)
    assert law("vswr", readings).value == pytest.approx([3, 1.5, 3])
    assert law("phase", readings).value == pytest.approx([0, 90, 180])


def test_what_is_recorded_in_db_is_taken_as_recorded() -> None:
    readings = pair([0.5], "DB") | {
        "first": Readings(np.array([-0.3539]), np.array([-0.3539]), "dB", np.array([0.05]))
    }
    gain, loss = law("gain", readings), law("loss", readings)
    assert gain.value.tolist() == [-0.3539] and loss.value.tolist() == [0.3539]
    assert gain.u is not None and loss.u is not None and gain.u.tolist() == loss.u.tolist() == [0.05]


@pytest.mark.parametrize("name", ["gain", "loss"])
@pytest.mark.parametrize("pair_format", ["MA", "RI"])
def test_an_entry_of_zeros_is_refused_and_never_an_infinite_isolation(name: str, pair_format: str) -> None:
    with pytest.raises(CalculationError, match=r"(?:zero|0) at 2 of 3 places"):
        law(name, pair([0.5, 0, 0], pair_format))


def test_a_total_reflection_has_an_infinite_vswr() -> None:
    found = law("vswr", pair([1.0, 1.02, 0.5]))
    assert found.value.tolist() == [np.inf, np.inf, 3.0] and "2 places" in found.notes[0]


@given(
    arrays.arrays(np.float64, 5, elements=st.floats(1e-6, 1e3)),
    arrays.arrays(np.float64, 5, elements=st.floats(-179.9, 180)),
)
def test_the_three_formats_say_the_same(size: Any, angle: Any) -> None:
    s = size * np.exp(1j * np.deg2rad(angle))
    for pair_format in FORMATS:
        samples = Samples(pair(s, pair_format))
        np.testing.assert_allclose(entry(samples), s, rtol=1e-9)
        np.testing.assert_allclose(magnitude_db(samples), 20 * np.log10(size), rtol=1e-9, atol=1e-9)


# --- phase over frequency


@pytest.mark.parametrize("pair_format", FORMATS)
@pytest.mark.parametrize("delay_ns", [0.01, 1.0, -0.5])
def test_a_line_has_its_delay_at_every_place(pair_format: str, delay_ns: float) -> None:
    """exp(-j·2π·f·τ) has the group delay τ and lies on a straight line, also where its phase turns over."""
    frequency = np.linspace(10, 12, 81)
    s = 0.7 * np.exp(-2j * np.pi * frequency * delay_ns)
    found = law("group delay", pair(s, pair_format), frequency)
    assert found.value == pytest.approx(np.full(79, delay_ns))
    assert found.axes["frequency"].tolist() == frequency[1:-1].tolist()
    assert law("phase linearity", pair(s, pair_format), frequency).value == pytest.approx(
        np.zeros(81), abs=1e-6
    )


def test_group_delay_of_a_resonator_against_its_closed_form() -> None:
    """1/(1 + jQ(f/f0 - f0/f)): delay at resonance 2·Q/(2π·f0); central differences against numpy's gradient."""
    q, f0 = 50.0, 1e9
    frequency = np.linspace(0.98e9, 1.02e9, 401)
    s = 1 / (1 + 1j * q * (frequency / f0 - f0 / frequency))
    found = law("group delay", pair(s), frequency, "Hz")
    assert found.value[199] == pytest.approx(2 * q / (2 * np.pi * f0) * 1e9, rel=1e-4)
    expected = -np.gradient(np.unwrap(np.angle(s)), frequency)[1:-1] / (2 * np.pi) * 1e9
    np.testing.assert_allclose(found.value, expected, rtol=1e-9)
    assert found.notes == ("aperture 0.2 MHz",)


def test_group_delay_as_scikit_rf_has_it() -> None:
    skrf = pytest.importorskip("skrf")
    frequency = np.linspace(1, 2, 201)
    s = 0.9 * np.exp(-2j * np.pi * frequency * 3 - 0.3j * np.cos(5 * frequency))
    network = skrf.Network(f=frequency * 1e9, s=s[:, None, None], z0=50)
    found = law("group delay", pair(s), frequency)
    np.testing.assert_allclose(found.value, network.group_delay[1:-1, 0, 0].real * 1e9, rtol=1e-9)


def test_a_stated_aperture_averages_over_it() -> None:
    frequency = np.linspace(1, 2, 101)
    s = np.exp(-2j * np.pi * frequency - 0.2j * np.sin(2 * np.pi * frequency / 0.1))
    fine = law("group delay", pair(s), frequency)
    wide = law("group delay", pair(s), frequency, aperture="0.1 GHz")
    assert np.ptp(fine.value) > 1 and np.ptp(wide.value) < 1e-6  # an aperture of one ripple hides it
    assert wide.axes["frequency"][0] == pytest.approx(1.05) and wide.notes == ("aperture 100 MHz",)
    with pytest.raises(CalculationError, match="not within the range"):
        law("group delay", pair(s), frequency, aperture="2 GHz")


@pytest.mark.parametrize("name", ["group delay", "phase linearity"])
def test_phases_too_far_apart_are_refused(name: str) -> None:
    frequency = np.linspace(1, 2, 11)
    s = np.exp(-2j * np.pi * frequency * 4.6)  # 165.6 deg a step
    with pytest.raises(CalculationError, match="too much to know which way it turned"):
        law(name, pair(s), frequency)
    with pytest.raises(CalculationError, match="over frequency"):
        law(name, pair(np.ones(5)), np.arange(5.0), "dBm")
    with pytest.raises(CalculationError, match=r"at least 3|lie on any line|no central difference"):
        law(name, pair([1, 1]), [1.0, 2.0])


def test_deviation_from_linear_phase_against_a_fit_by_numpy() -> None:
    frequency = np.linspace(1, 2, 51)
    phase = -100 * frequency + 3 * frequency**3
    found = law("phase linearity", pair(np.exp(1j * np.deg2rad(phase))), frequency)
    np.testing.assert_allclose(
        found.value, phase - np.polyval(np.polyfit(frequency, phase, 1), frequency), atol=1e-9
    )


# --- several entries


def test_imbalance_of_two_paths_is_first_minus_other() -> None:
    readings = pair([1.0, 1j], "RI") | pair([0.5, 1.0], "MA", ("other first", "other second"))
    amplitude, phase = law("amplitude imbalance", readings), law("phase imbalance", readings)
    assert amplitude.value == pytest.approx([6.0206, 0], abs=1e-4)
    assert phase.value == pytest.approx([0, 90])
    assert law("phase imbalance", readings, nominal="90 deg").value == pytest.approx([-90, 0])
    around = pair(np.exp(1j * np.deg2rad([179.0]))) | pair(
        np.exp(1j * np.deg2rad([-179.0])), "RI", ("other first", "other second")
    )
    assert law("phase imbalance", around).value == pytest.approx([-2])
    antiphase = pair(np.exp(1j * np.deg2rad([-179.0, 178.0]))) | pair(
        [1.0, 1.0], "RI", ("other first", "other second")
    )
    assert law("phase imbalance", antiphase).value == pytest.approx([-179, 178])
    assert law("phase imbalance", antiphase, near="180 deg").value == pytest.approx([181, 178])
    assert law("phase imbalance", antiphase, near="-180 deg").value == pytest.approx([-179, -182])


def test_active_reflection_over_scan_as_scikit_rf_has_it() -> None:
    skrf = pytest.importorskip("skrf")
    draw = np.random.default_rng(3)
    s = draw.uniform(-0.2, 0.2, (2, 4, 4)) + 1j * draw.uniform(-0.2, 0.2, (2, 4, 4))
    frequency, spacing = np.array([28.0, 29.0]), 0.0052
    readings: dict[str, Readings] = {}
    for m, n in np.ndindex(4, 4):
        readings |= pair(s[:, m, n], "RI", (f"S{m + 1}{n + 1} real", f"S{m + 1}{n + 1} imaginary"))
    found = law("active reflection", readings, frequency, spacing="5.2 mm", scan="-60..60 deg step 30 deg")
    assert found.axes["scan_theta"].tolist() == [-60, -30, 0, 30, 60] * 2 and found.axis_units == {
        "scan_theta": "deg"
    }
    listed = law("active reflection", readings, frequency, spacing="5.2 mm", scan="-60, -30, 0, 30, 60 deg")
    assert listed.value.tolist() == found.value.tolist()
    for bad in ("-60..60 deg", "wide"):
        with pytest.raises(CalculationError):
            law("active reflection", readings, frequency, spacing="5.2 mm", scan=bad)
    network = skrf.Network(f=frequency * 1e9, s=s, z0=50)
    for row in range(2):
        for place, scan in enumerate((-60, -30, 0, 30, 60)):
            wavelengths = spacing * frequency[row] * 1e9 / 299792458.0
            a = np.exp(-2j * np.pi * wavelengths * np.arange(4) * np.sin(np.deg2rad(scan)))
            expected = 20 * np.log10(np.abs(network.s_active(a)[row]).max())
            assert found.value[5 * row + place] == pytest.approx(expected)
            assert f"scan {scan} deg" in found.at[5 * row + place]


def test_active_reflection_needs_every_entry() -> None:
    readings = pair([0.1, 0.1], "RI", ("S11 real", "S11 imaginary")) | pair(
        [0.1, 0.1], "RI", ("S12 real", "x")
    )
    with pytest.raises(CalculationError, match="every entry of a network"):
        law("active reflection", readings, [28.0, 29.0], spacing="5 mm", scan="-60..60 deg step 30 deg")


# --- noise


def test_noise_figure_with_a_matched_source() -> None:
    """Touchstone specification 2.1, Example 19 at 4 GHz: 0.7 dB, 0.64 at 69 deg, 19 ohm; 1.7844 dB computed."""
    common = {
        "fmin": Readings(np.array([0.7]), np.array([0.7]), "dB"),
        "magnitude": Readings(np.array([0.64]), np.array([0.64]), "1"),
        "angle": Readings(np.array([69.0]), np.array([69.0]), "deg"),
    }
    in_ohm = common | {"rn": Readings(np.array([19.0]), np.array([19.0]), "ohm")}
    divided = common | {"rn": Readings(np.array([0.38]), np.array([0.38]), "1")}
    assert law("noise figure", in_ohm).value == pytest.approx([1.784403], abs=5e-4)
    assert law("noise figure", divided).value == pytest.approx([1.784403], abs=5e-4)
    with pytest.raises(CalculationError, match="reaches 1"):
        law("noise figure", in_ohm | {"magnitude": Readings(np.array([1.0]), np.array([1.0]), "1")})


@pytest.mark.parametrize("one", SCATTERING_LAWS, ids=lambda one: one.name)
def test_every_law_says_formula_validity_and_source(one: Any) -> None:
    assert all(f"{part}: " in one.text for part in ("Formula", "Valid", "Source")) and one.source


@pytest.mark.parametrize("pair_format", FORMATS)
@pytest.mark.parametrize("name", ["gain", "loss", "vswr", "phase", "group delay", "phase linearity"])
def test_an_entry_of_zeros_was_not_measured_and_gives_nothing(name: str, pair_format: str) -> None:
    """It would be a VSWR of 1, no delay and, in dB, no loss: a limit met by numbers that nobody measured."""
    first, second = UNITS[pair_format]
    nothing = np.zeros(4)
    readings = {"first": Readings(nothing, nothing, first), "second": Readings(nothing, nothing, second)}
    with pytest.raises(CalculationError, match="both numbers of the entry are 0 at 4 of 4 places"):
        law(name, readings, along=[1, 2, 3, 4])


@pytest.mark.parametrize("name", ["amplitude imbalance", "phase imbalance"])
def test_two_paths_of_zeros_are_not_balanced(name: str) -> None:
    nothing = np.zeros(3)
    units = {"first": "dB", "second": "deg", "other first": "dB", "other second": "deg"}
    readings = {role: Readings(nothing, nothing, unit) for role, unit in units.items()}
    with pytest.raises(CalculationError, match="are 0 at 3 of 3"):
        law(name, readings)


def test_one_place_of_zeros_among_others_is_that_at_zero_hertz() -> None:
    """An ideal low-pass at 0 Hz passes all (0 dB, 0 deg) and reflects nothing."""
    level, angle = np.array([0.0, -0.1, -0.2]), np.array([0.0, -5.0, -10.0])
    readings = {"first": Readings(level, level, "dB"), "second": Readings(angle, angle, "deg")}
    assert law("loss", readings, along=[0, 1, 2]).value.tolist() == [0.0, 0.1, 0.2]
