"""Grids of directions over the sphere: what each direction stands for, and whether all of the sphere is there.

A grid has constant steps (rings of constant polar angle) or constant density. Readings of one direction (the pole at
every turn, 0° and 360°) are brought together first, by their mean power. A part of the sphere is refused.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.conditions import DIRECTION_PAIRS
from specflow.conditions.directions import direction_vectors
from specflow.derive.samples import Samples
from specflow.errors import CalculationError
from specflow.statistics.sphere import grid_weights, unique_directions
from specflow.units import Kind

Floats = NDArray[np.float64]
Rows = NDArray[np.intp]

#: How far the mean direction and the second moments of an even grid may be from those of the sphere.
_EVEN = 0.05
#: How many mean spacings the farthest place on the sphere may lie from the nearest reading.
_HOLE = 1.25
#: The widest step around a ring: that of the coarsest published grid (62 points, 3GPP TS 38.521-2 table M.4.5-3, seen).
_WIDEST_TURN = 30.0
_CLOSE = 1e-3


@dataclass(frozen=True, slots=True)
class Grid:
    """Unique directions (m,): ``theta`` from the pole, ``phi``; ``power`` linear; ``row``: a row of the samples.

    ``weights`` sum to 1 over the sphere. ``notes``: what was brought together.
    """

    theta: Floats
    phi: Floats
    power: Floats
    row: Rows
    weights: Floats
    notes: tuple[str, ...] = ()

    @property
    def mean(self) -> float:
        """The mean power over the sphere."""
        return float(np.dot(self.weights, self.power))

    @property
    def peak_row(self) -> int:
        """The row of the samples at which the power is greatest."""
        return int(self.row[np.argmax(self.power)])

    @property
    def words(self) -> str:
        """Say how many directions there are, and of which step."""
        rings = np.unique(np.round(self.theta, 6))
        step = float(np.diff(rings).min()) if len(rings) > 1 else 0.0
        whole = step > 0 and len(self.theta) == unique_directions(step)
        return f"{len(self.theta)} directions" + (f", a constant-step grid of {step:g}°" if whole else "")


def whole_sphere(samples: Samples, role: str = "value") -> Grid:
    """Return the unique directions of a grid over the whole sphere with what each stands for.

    Raises CalculationError for a part of the sphere, a grid with holes, or one that is not of the kind said.
    """
    theta, phi = _angles(samples)
    theta, phi, power, row, merged = _unique(theta, phi, _power(samples, role))
    notes = (
        (f"{merged} readings of directions that were measured more than once are averaged in power",)
        if merged
        else ()
    )
    if samples.word("grid") == "constant step":
        weights = _constant_step(theta, phi, samples.word("weights"))
    else:
        weights = _constant_density(theta, phi)
    return Grid(theta, phi, power, row, weights, notes)


def _angles(samples: Samples) -> tuple[Floats, Floats]:
    """Return θ from the pole (0 to 180°) and φ (0 to 360°) of every row; θ below 0 is the direction at φ + 180°."""
    pair = next(one for one in DIRECTION_PAIRS if one.polar in samples.axes)
    polar, turn = samples.axes[pair.polar], samples.axes[pair.turn]
    theta = 90.0 - polar if pair.polar_from_equator else polar
    turn = np.where(theta < 0, turn + 180.0, turn)
    theta = np.abs(theta)
    if np.isnan(theta).any() or (np.isnan(turn) & (theta > 0) & (theta < 180)).any():
        raise CalculationError("some rows state no direction", hint="choose the rows that do with --where")
    if (theta > 180).any():
        raise CalculationError("a polar angle lies beyond 180°", hint="check which column is the polar angle")
    return theta, np.where((theta == 0) | (theta == 180), 0.0, np.mod(turn, 360.0))


def _power(samples: Samples, role: str) -> Floats:
    """Return readings as linear power, in the unit without its dB."""
    values, unit = samples.value(role), samples.unit(role)
    if unit.kind in (Kind.FIELD_LEVEL, Kind.FIELD_DENSITY):
        raise CalculationError(f"a field level in {unit} is no power", hint="convert it to EIRP first")
    if unit.is_log:
        return np.asarray(10.0 ** (values / 10.0))
    if (values < 0).any():
        raise CalculationError("a linear power is below 0", hint="look at the unit of the column")
    return values


def _unique(theta: Floats, phi: Floats, power: Floats) -> tuple[Floats, Floats, Floats, Rows, int]:
    keys = np.round(np.stack([theta, np.mod(np.round(phi, 6), 360.0)], axis=1), 6)
    found, first, which, counts = np.unique(
        keys, axis=0, return_index=True, return_inverse=True, return_counts=True
    )
    total = np.zeros(len(found))
    np.add.at(total, which.reshape(-1), power)
    merged = int(counts[counts > 1].sum())
    return found[:, 0], found[:, 1], total / counts, first.astype(np.intp), merged


def _constant_step(theta: Floats, phi: Floats, how: str) -> Floats:
    if not _rings_go_round(theta, phi):
        low, high = float(theta.min()), float(theta.max())
        raise CalculationError(
            f"the {len(theta)} directions (θ {low:g} to {high:g}°) are no constant-step grid over the whole sphere",
            hint="measure the whole sphere; say --set 'grid=constant density' for a grid of that kind",
        )
    rings, ring_of, counts = np.unique(np.round(theta, 6), return_inverse=True, return_counts=True)
    if how == "zones":
        return grid_weights(theta)
    step = float(np.diff(rings).min())
    if abs(rings[0]) > 1e-6 or abs(rings[-1] - 180) > 1e-6:
        raise CalculationError(
            f"weights {how} need rings from pole to pole; the grid runs from {rings[0]:g} to {rings[-1]:g}°",
            hint="say --set weights=zones",
        )
    ring = (
        np.sin(np.radians(rings)) * np.radians(step) / 2 if how == "sine" else clenshaw_curtis(len(rings) - 1)
    )
    return np.asarray((ring / counts)[ring_of.reshape(-1)])


def _rings_go_round(theta: Floats, phi: Floats) -> bool:
    """Whether rings of one step, pole to pole, each go all round in even steps (which may be wider than that of θ)."""
    rings, ring_of = np.unique(np.round(theta, 6), return_inverse=True)
    if len(rings) < 3:
        return False
    steps = np.diff(rings)
    step = float(steps.min())
    if steps.max() > step + _CLOSE or rings[0] > step / 2 + _CLOSE or rings[-1] < 180 - step / 2 - _CLOSE:
        return False
    for place, ring in enumerate(rings):
        if _CLOSE < ring < 180 - _CLOSE:
            around = np.sort(phi[ring_of.reshape(-1) == place])
            gaps = np.diff(around, append=around[0] + 360.0)
            if gaps.max() > min(gaps.min() + _CLOSE, _WIDEST_TURN + _CLOSE):
                return False
    return True


def clenshaw_curtis(n: int) -> Floats:
    """Return the share of the sphere of each ring θ = iπ/n, i = 0..n, by Clenshaw-Curtis quadrature in cos θ (sum 1).

    Source: C. W. Clenshaw and A. R. Curtis, Numerische Mathematik 2 (1960): w_i = (c_i/n)·(1 - Σ b_j/(4j² - 1)·
    cos(2j·i·π/n)), c = 1 at the ends and 2 inside, b = 1 for j = n/2 and 2 below (from memory; checked by polynomials).
    """
    places = np.arange(n + 1)
    total = np.ones(n + 1)
    for j in range(1, n // 2 + 1):
        b = 1.0 if 2 * j == n else 2.0
        total -= b / (4 * j * j - 1) * np.cos(2 * j * places * np.pi / n)
    weights = 2.0 * total / n
    weights[[0, -1]] /= 2
    return np.asarray(weights / 2)


def _constant_density(theta: Floats, phi: Floats) -> Floats:
    """Return equal shares, after looking that the directions lie evenly over the whole sphere."""
    vectors = direction_vectors(DIRECTION_PAIRS[0], theta, phi)
    count = len(vectors)
    spacing = float(np.degrees(np.sqrt(4 * np.pi / count)))
    drift = float(np.linalg.norm(vectors.mean(axis=0)))
    moments = vectors.T @ vectors / count - np.eye(3) / 3
    if count < 12 or drift > _EVEN or np.abs(moments).max() > _EVEN or _farthest(vectors) > _HOLE * spacing:
        raise CalculationError(
            f"the {count} directions do not lie evenly over the whole sphere",
            hint="measure the whole sphere; say --set 'grid=constant step' for rings of constant steps",
        )
    return np.full(count, 1.0 / count)


def _farthest(vectors: Floats) -> float:
    """Return how far (degrees) a place on the sphere is from its nearest direction at most, tried at even places."""
    count = min(4 * len(vectors), 20_000)
    turn = np.arange(count) * np.pi * (3 - np.sqrt(5))
    up = 1 - (2 * np.arange(count) + 1) / count
    places = np.stack([np.sqrt(1 - up**2) * np.cos(turn), np.sqrt(1 - up**2) * np.sin(turn), up], axis=1)
    nearest = np.concatenate(
        [(part @ vectors.T).max(axis=1) for part in np.array_split(places, max(1, count // 500))]
    )
    return float(np.degrees(np.arccos(np.clip(nearest.min(), -1, 1))))
