"""Analytic patterns on grids: what is known of them in closed form."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]


def constant_step(step: float, *, turn_twice: bool = True) -> tuple[Floats, Floats]:
    """A grid of rings as ranges deliver it: the pole at every φ, and 360° beside 0° (``turn_twice``)."""
    theta = np.arange(0, 180 + step / 2, step)
    phi = np.arange(0, 360 + step / 2 if turn_twice else 360, step)
    first, second = np.meshgrid(theta, phi, indexing="ij")
    return first.ravel(), second.ravel()


def constant_density(count: int) -> tuple[Floats, Floats]:
    """Directions spread evenly over the sphere on a golden-angle spiral (a spherical Fibonacci lattice)."""
    place = np.arange(count)
    up = 1 - (2 * place + 1) / count
    return np.degrees(np.arccos(up)), np.mod(np.degrees(place * np.pi * (3 - np.sqrt(5))), 360)


def cosine_power(theta: Floats, n: float) -> Floats:
    """Linear power cosⁿθ in the upper half space, nothing below."""
    return np.where(theta <= 90 + 1e-9, np.clip(np.cos(np.radians(theta)), 0, None) ** n, 0.0)
