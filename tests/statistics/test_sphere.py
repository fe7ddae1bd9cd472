"""Which directions cover the sphere."""

from __future__ import annotations

import numpy as np
import pytest

from specflow.statistics.sphere import covers_sphere, unique_directions


def grid(step: float) -> tuple[np.ndarray, np.ndarray]:
    """Return θ and φ of a constant-step grid, each pole as often as there are cuts."""
    theta, phi = np.meshgrid(np.arange(0, 180 + step / 2, step), np.arange(0, 360, step), indexing="ij")
    return theta.ravel(), phi.ravel()


@pytest.mark.parametrize("step", [5.0, 15.0, 30.0, 90.0])
def test_a_constant_step_grid_covers_the_sphere(step: float) -> None:
    theta, phi = grid(step)
    assert covers_sphere(theta, phi)
    unique = np.unique(np.stack([theta, np.where((theta == 0) | (theta == 180), 0, phi)]), axis=1)
    assert unique.shape[1] == unique_directions(step)  # TS 38.521-2 annex M


def test_cuts_with_signed_theta_are_the_same_directions() -> None:
    theta, phi = np.meshgrid(np.arange(-180, 180, 30.0), np.arange(0, 180, 30.0), indexing="ij")
    assert covers_sphere(theta.ravel(), phi.ravel())


@pytest.mark.parametrize("keep", [lambda theta, phi: theta <= 90, lambda theta, phi: phi != 60])
def test_a_grid_with_a_ring_or_a_cut_missing_does_not(keep: object) -> None:
    theta, phi = grid(30.0)
    kept = keep(theta, phi)  # type: ignore[operator]
    assert not covers_sphere(theta[kept], phi[kept])


def test_an_unstated_direction_covers_nothing() -> None:
    theta, phi = grid(30.0)
    assert not covers_sphere(theta, np.full(phi.size, np.nan))
    assert not covers_sphere(np.zeros(0), np.zeros(0))
