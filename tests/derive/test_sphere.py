"""Laws over the sphere: analytic patterns (cosⁿθ, isotropic, linear in θ), published grid counts, refusals."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.derive.sphere_grid import clenshaw_curtis
from specflow.errors import CalculationError
from specflow.statistics.sphere import unique_directions
from tests.derive.deriving import law_on, value_of
from tests.derive.patterns import constant_density, constant_step, cosine_power

CASES = {
    case["id"]: case
    for case in json.loads(
        (Path(__file__).parents[1] / "data" / "metrology_cases.json").read_text(encoding="utf-8")
    )
}
GRIDS: list[dict[str, Any]] = [
    {"grid": "constant step", "weights": "zones"},
    {"grid": "constant step", "weights": "Clenshaw-Curtis"},
    {"grid": "constant density"},
]


def grid_of(settings: dict[str, Any]) -> tuple[Any, Any]:
    """The directions of a kind of grid, fine enough for smooth patterns."""
    return constant_density(4000) if settings["grid"] == "constant density" else constant_step(3.0)


@given(
    level=st.floats(-60, 70),
    step=st.sampled_from([5.0, 7.5, 12.0, 15.0, 30.0]),
    how=st.sampled_from(GRIDS[:2]),
)
def test_the_trp_of_an_isotropic_pattern_is_its_eirp(level: float, step: float, how: dict[str, Any]) -> None:
    theta, phi = constant_step(step)
    found = value_of("trp", values=np.full(theta.size, level), unit="dBm", directions=(theta, phi), **how)
    assert found == pytest.approx(level, abs=1e-9)


@pytest.mark.parametrize("step", [5.0, 15.0, 30.0])
def test_sine_weights_are_low_by_their_known_sum(step: float) -> None:
    """Σ (π/2N) sin(iπ/N) = (π/2N)·cot(π/2N), N = 180/step (closed form of the sum of sines)."""
    theta, phi = constant_step(step)
    n = 180 / step
    wanted = 10 * np.log10(np.pi / (2 * n) / np.tan(np.pi / (2 * n)))
    found = value_of("trp", values=np.zeros(theta.size), unit="dBm", directions=(theta, phi), weights="sine")
    assert found == pytest.approx(wanted, abs=1e-9)


@pytest.mark.parametrize("settings", GRIDS)
@pytest.mark.parametrize("n", [1, 2, 4, 8])
def test_a_cosine_pattern_has_the_directivity_of_its_closed_form(settings: dict[str, Any], n: int) -> None:
    """cosⁿθ in power over a half space: D = 2(n + 1), by integral (also Balanis, Antenna Theory, from memory)."""
    theta, phi = grid_of(settings)
    found = law_on(
        "directivity", values=cosine_power(theta, n), unit="W", directions=(theta, phi), **settings
    )
    # 0.03 dB: n = 1 has a kink at the horizon; a spiral does not hold the pole exactly
    assert found.value[0] == pytest.approx(10 * np.log10(2 * (n + 1)), abs=0.03)
    assert found.unit == "dBi"


@pytest.mark.parametrize("n", [2, 4, 8])
def test_the_trp_of_a_cosine_pattern_is_its_peak_less_its_directivity(n: int) -> None:
    theta, phi = constant_step(2.0)
    with np.errstate(divide="ignore"):
        eirp = np.maximum(40 + 10 * np.log10(cosine_power(theta, n)), -300)
    found = value_of("trp", values=eirp, unit="dBm", directions=(theta, phi))
    assert found == pytest.approx(40 - 10 * np.log10(2 * (n + 1)), abs=0.01)


def test_clenshaw_curtis_is_exact_for_polynomials_of_the_cosine() -> None:
    """Against numpy's Gauss-Legendre rule: ∫ x^k dx over -1..1 for k up to n."""
    for n in (6, 9, 12, 24):
        places = np.cos(np.pi * np.arange(n + 1) / n)
        nodes, weights = np.polynomial.legendre.leggauss(n)
        for k in range(n + 1):
            assert 2 * np.dot(clenshaw_curtis(n), places**k) == pytest.approx(
                np.dot(weights, nodes**k), abs=1e-12
            )


@pytest.mark.parametrize("case", ["PC-003", "PC-004", "PC-005"])
def test_the_directions_of_published_grids_are_counted(case: str) -> None:
    """3GPP TS 38.521-2 annex M: 4902 points at 3.6°, 1106 at 7.5°, 62 at 30° (see the cases)."""
    step, count = CASES[case]["inputs"]["step_deg"], CASES[case]["expected"]["N"]
    theta, phi = constant_step(step)
    found = law_on("trp", values=np.zeros(theta.size), unit="dBm", directions=(theta, phi))
    assert unique_directions(step) == count
    assert f"{count} directions, a constant-step grid of {step:g}°" in found.notes
    assert theta.size > count  # the poles and 360° were measured more than once


def test_the_percentile_of_a_pattern_linear_in_theta_is_that_of_its_solid_angle() -> None:
    """PC-006: EIRP = 40 - 0.1·θ: 85 % of the CDF 35.4427 dBm, 50 % 31.0 dBm; the grid resolves 0.1 dB per degree."""
    theta, phi = constant_step(0.5, turn_twice=False)
    keep = np.isin(phi, np.arange(0, 360, 0.5))
    values = 40 - 0.1 * theta[keep]
    for percent, wanted in zip((85, 50), CASES["PC-006"]["expected"]["EIRP"], strict=True):
        found = value_of(
            "spherical percentile",
            values=values,
            unit="dBm",
            directions=(theta[keep], phi[keep]),
            percentile=str(percent),
        )
        assert found == pytest.approx(wanted, abs=0.05)


@given(st.integers(1, 100), st.integers(1, 100))
def test_spherical_percentiles_rise(first: int, second: int) -> None:
    theta, phi = constant_step(15.0)
    values = 10 * np.cos(np.radians(theta)) + np.sin(np.radians(phi))
    low, high = (
        value_of(
            "spherical percentile",
            values=values,
            unit="dBm",
            directions=(theta, phi),
            percentile=str(percent),
        )
        for percent in sorted((first, second))
    )
    assert low <= high


def test_the_complement_is_the_other_end() -> None:
    theta, phi = constant_step(7.5)
    fields: dict[str, Any] = {"values": 40 - 0.1 * theta, "unit": "dBm", "directions": (theta, phi)}
    low = value_of("spherical percentile", percentile="85", of="CCDF", **fields)
    high = value_of("spherical percentile", percentile="85", of="CDF", **fields)
    assert low < 31 < high


def test_directions_measured_twice_count_once() -> None:
    theta, phi = constant_step(15.0)
    single = constant_step(15.0, turn_twice=False)
    values = [
        10 * np.cos(np.radians(t)) + np.sin(np.radians(t)) * np.sin(np.radians(p))
        for t, p in (constant_step(15.0), single)
    ]
    twice = value_of("trp", values=values[0], unit="dBm", directions=(theta, phi))
    once = value_of("trp", values=values[1], unit="dBm", directions=single)
    assert twice == pytest.approx(once, abs=1e-9)


def test_azimuth_cuts_through_the_pole_are_the_same_sphere() -> None:
    """θ from -180 to 180° with φ from 0 to 180° is the same grid: θ below 0 is the direction at φ + 180°."""
    theta, phi = constant_step(15.0)
    cut, turn = (axis.ravel() for axis in np.meshgrid(np.arange(-180, 181, 15.0), np.arange(0, 180, 15.0)))
    lobes = [
        5 * np.cos(np.radians(t)) + 3 * np.sin(np.radians(t)) * np.cos(np.radians(p))
        for t, p in ((theta, phi), (cut, turn))
    ]
    first = value_of("trp", values=lobes[0], unit="dBm", directions=(theta, phi))
    second = value_of("trp", values=lobes[1], unit="dBm", directions=(cut, turn))
    assert first == pytest.approx(second, abs=1e-9)


@pytest.mark.parametrize("law", ["trp", "directivity"])
def test_a_part_of_the_sphere_is_refused(law: str) -> None:
    theta, phi = constant_step(15.0)
    upper = theta <= 90
    with pytest.raises(CalculationError, match="no constant-step grid over the whole sphere"):
        value_of(law, values=np.zeros(upper.sum()), unit="dBm", directions=(theta[upper], phi[upper]))
    theta, phi = constant_density(500)
    upper = theta <= 120
    with pytest.raises(CalculationError, match="do not lie evenly over the whole sphere"):
        value_of(
            law,
            values=np.zeros(upper.sum()),
            unit="dBm",
            directions=(theta[upper], phi[upper]),
            grid="constant density",
        )


def test_a_grid_with_a_small_hole_is_refused() -> None:
    theta, phi = constant_density(500)
    kept = ~((np.abs(theta - 90) < 12) & (np.abs(phi - 180) < 12))
    with pytest.raises(CalculationError, match="do not lie evenly"):
        value_of(
            "trp",
            values=np.zeros(kept.sum()),
            unit="dBm",
            directions=(theta[kept], phi[kept]),
            grid="constant density",
        )


def test_a_constant_step_grid_is_no_constant_density_grid() -> None:
    theta, phi = constant_step(15.0, turn_twice=False)
    with pytest.raises(CalculationError, match="do not lie evenly"):
        value_of(
            "trp", values=np.zeros(theta.size), unit="dBm", directions=(theta, phi), grid="constant density"
        )


def test_peak_and_pointing() -> None:
    theta, phi = constant_step(5.0, turn_twice=False)
    away = np.hypot(theta - 30, np.minimum(np.abs(phi - 90), 360 - np.abs(phi - 90)))
    values = 20 - away / 10
    peak = law_on("beam peak", values=values, unit="dBi", directions=(theta, phi))
    assert (peak.value[0], peak.at) == (20, ("θ 30°, φ 90°",))
    off = law_on(
        "pointing error", values=values, unit="dBi", directions=(theta, phi), polar="28 deg", turn="90 deg"
    )
    assert off.value[0] == pytest.approx(2)


def test_cross_polarisation_at_the_peak_and_in_the_beam() -> None:
    theta = np.array([0.0, 5, 10, 20])
    co, cross = [20.0, 18, 16, 5], [-10.0, -5, 10, 4]
    fields: dict[str, Any] = {
        "values": {"co": co, "cross": cross},
        "unit": "dBi",
        "directions": (theta, np.zeros(4)),
    }
    assert value_of("cross polarisation", where="at the peak", **fields) == 30
    assert value_of("cross polarisation", where="in the beam", **fields) == 23
    assert value_of("cross polarisation", where="in the beam", below="5 dB", **fields) == 6


def test_the_angle_off_the_commanded_direction_is_that_on_the_sphere() -> None:
    """Spherical law of cosines: cos a = cos θ1 cos θ2 + sin θ1 sin θ2 cos Δφ."""
    theta, phi = constant_step(20.0, turn_twice=False)
    found = law_on(
        "off axis",
        values=np.arange(theta.size),
        unit="dBm",
        directions=(theta, phi),
        polar="40 deg",
        turn="60 deg",
    )
    first, second = np.radians(theta), np.radians(40)
    cosine = np.cos(first) * np.cos(second) + np.sin(first) * np.sin(second) * np.cos(np.radians(phi - 60))
    assert found.axes["off_axis_angle"] == pytest.approx(
        np.degrees(np.arccos(np.clip(cosine, -1, 1))), abs=1e-5
    )
    assert (found.value == np.arange(theta.size)).all()


def test_steps_around_may_be_wider_than_those_from_the_pole() -> None:
    theta, phi = (axis.ravel() for axis in np.meshgrid(np.arange(0, 181, 5.0), np.arange(0, 360, 15.0)))
    found = value_of("directivity", values=cosine_power(theta, 4), unit="W", directions=(theta, phi))
    assert found == pytest.approx(10 * np.log10(10), abs=0.03)
    with pytest.raises(CalculationError, match="no constant-step grid"):  # one ring has a direction more
        more = np.append(theta, 90.0), np.append(phi, 50.0)
        value_of("trp", values=np.zeros(theta.size + 1), unit="dBm", directions=more)
    kept = ~((theta == 90) & (phi == 45))  # one direction of one ring is missing
    with pytest.raises(CalculationError, match="no constant-step grid"):
        value_of("trp", values=np.zeros(kept.sum()), unit="dBm", directions=(theta[kept], phi[kept]))
