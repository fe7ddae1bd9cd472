"""Directions from azimuth and elevation, or u and v, to θ and φ: against cases by hand and scipy's rotations."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.spatial.transform import Rotation

from specflow.conditions.frames import FRAMES, frame_of, theta_phi
from specflow.errors import ConditionsError

ANGLES = st.floats(-89, 89)


def one(frame: str, first: float, second: float) -> tuple[float, float]:
    theta, phi = theta_phi(frame, np.array([first]), np.array([second]))
    return float(theta[0]), float(phi[0])


@pytest.mark.parametrize("frame", ["elevation over azimuth", "azimuth over elevation"])
@pytest.mark.parametrize(
    ("azimuth", "elevation", "theta", "phi"),
    [(0, 0, 0, 0), (30, 0, 30, 0), (-30, 0, 30, 180), (0, 30, 30, 90), (0, -30, 30, -90), (90, 0, 90, 0)],
)
def test_on_the_axes_both_orders_are_the_same(
    frame: str, azimuth: float, elevation: float, theta: float, phi: float
) -> None:
    found = one(frame, azimuth, elevation)
    assert found[0] == pytest.approx(theta, abs=1e-9)
    if theta:
        assert abs(found[1]) == pytest.approx(abs(phi)) and (
            abs(phi) == 180 or found[1] == pytest.approx(phi)
        )


def test_off_the_axes_they_are_not() -> None:
    """At az = el = 45°: cos θ = cos² 45° = 1/2 in both, so θ = 60°; tan φ is √2 in one and 1/√2 in the other."""
    first = one("elevation over azimuth", 45, 45)
    second = one("azimuth over elevation", 45, 45)
    assert first == pytest.approx((60.0, np.degrees(np.arctan(np.sqrt(2)))))
    assert second == pytest.approx((60.0, np.degrees(np.arctan(1 / np.sqrt(2)))))


@given(ANGLES, ANGLES)
def test_against_rotations_of_boresight(azimuth: float, elevation: float) -> None:
    """The lower axis of a positioner turns the upper one: az about y after el about -x, or the other way round."""
    for frame, order in (("elevation over azimuth", "YX"), ("azimuth over elevation", "XY")):
        angles = [azimuth, -elevation] if order == "YX" else [-elevation, azimuth]
        expected = Rotation.from_euler(order, angles, degrees=True).apply([0, 0, 1])
        found = FRAMES[frame].vectors(np.array([azimuth]), np.array([elevation]))[0]
        assert found == pytest.approx(expected, abs=1e-12)


@given(st.floats(0, 90), st.floats(-179, 179))
def test_u_and_v_come_from_theta_and_phi(theta: float, phi: float) -> None:
    across = np.sin(np.radians(theta))
    u, v = across * np.cos(np.radians(phi)), across * np.sin(np.radians(phi))
    found = one("u/v", u, v)
    assert found[0] == pytest.approx(theta, abs=1e-5)
    if theta > 0.01:
        assert found[1] == pytest.approx(phi, abs=1e-6)


def test_cosines_outside_the_unit_circle_are_no_direction() -> None:
    with pytest.raises(ConditionsError, match=r"u = 0.9, v = 0.9 is no direction"):
        theta_phi("u/v", np.array([0.1, 0.9]), np.array([0.1, 0.9]))


def test_what_a_person_says() -> None:
    assert frame_of("Elevation over azimuth") == ("elevation over azimuth", 1.0, 1.0)
    assert frame_of("azimuth-over-elevation, azimuth reversed") == ("azimuth over elevation", -1.0, 1.0)
    assert frame_of("u/v") == ("u/v", 1.0, 1.0)
    assert frame_of("az/el") is None and frame_of("u/v, azimuth reversed") is None
