"""Percentiles over directions: each reading weighs as much as the solid angle it stands for."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray


def grid_weights(theta_deg: NDArray[np.float64], step_deg: float | None = None) -> NDArray[np.float64]:
    """Return the share of the sphere that each direction of a constant-step grid stands for (sum 1).

    Each ring at θ stands for the zone of half a step to either side (the poles for their caps), shared by the
    readings on it. ``step_deg`` is the step of θ; by default the smallest difference found.
    """
    theta = np.abs(np.asarray(theta_deg, np.float64))
    rings, ring_of, counts = np.unique(np.round(theta, 9), return_inverse=True, return_counts=True)
    if step_deg is None:
        if rings.size < 2:
            raise ValueError("all directions have one θ; the step of the grid is unknown")
        step_deg = float(np.diff(rings).min())
    low = np.deg2rad(np.clip(rings - step_deg / 2, 0, 180))
    high = np.deg2rad(np.clip(rings + step_deg / 2, 0, 180))
    share = (np.cos(low) - np.cos(high)) / 2 / counts
    weights = share[ring_of]
    return np.asarray(weights / weights.sum())


def covers_sphere(theta_deg: NDArray[np.float64], phi_deg: NDArray[np.float64]) -> bool:
    """Return whether directions are a constant-step grid over the whole sphere (or a finer one), repeats allowed.

    The zones of the rings (see ``grid_weights``) must leave no gap from pole to pole, and there must be as many unique
    directions as a grid of that step has. θ below 0 is read as the direction at φ + 180. False where any is unstated.
    """
    if theta_deg.size == 0 or np.isnan(theta_deg).any() or np.isnan(phi_deg).any():
        return False
    theta = np.round(np.abs(theta_deg), 6)
    rings = np.unique(theta)
    if rings.size < 2 or rings[-1] > 180:
        return False
    steps = np.diff(rings)
    step, close = float(steps.min()), 1e-3
    if steps.max() > step + close or rings[0] > step / 2 + close or rings[-1] < 180 - step / 2 - close:
        return False
    phi = np.round((phi_deg + np.where(theta_deg < 0, 180.0, 0.0)) % 360, 6) % 360
    phi = np.where((theta == 0) | (theta == 180), 0.0, phi)
    poles = int(rings[0] == 0) + int(rings[-1] == 180)
    around = round(360 / step)
    return len(np.unique(np.stack([theta, phi]), axis=1).T) >= around * (rings.size - poles) + poles


def percentile(
    values: NDArray[np.float64], weights: NDArray[np.float64], percent: float, *, complement: bool = False
) -> float:
    """Return the value at ``percent`` of the cumulative distribution (of its complement: of the CCDF).

    The smallest value whose cumulative weight reaches the share. "85 % of the CDF" leaves 15 % of the sphere at or
    above it; "85 % of the CCDF" is reached by 85 % of the sphere.
    """
    share = (100 - percent if complement else percent) / 100
    order = np.argsort(values, kind="stable")
    cumulative = np.cumsum(weights[order]) / weights.sum()
    place = int(np.searchsorted(cumulative, share - 1e-12))
    return float(values[order[min(place, values.size - 1)]])


def share_at_or_above(values: NDArray[np.float64], weights: NDArray[np.float64], level: float) -> float:
    """Return the share of the sphere on which the level is met or exceeded."""
    return float(weights[values >= level].sum() / weights.sum())


def unique_directions(step_deg: float) -> int:
    """Return the number of unique points of a constant-step grid: (360/d)·(180/d - 1) + 2 (TS 38.521-2 annex M)."""
    return round(360 / step_deg) * (round(180 / step_deg) - 1) + 2
