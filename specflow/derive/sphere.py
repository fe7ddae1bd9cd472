"""Laws over directions on the sphere: total radiated power, percentiles, directivity, peak, pointing.

A grid has constant steps (rings of constant polar angle) or constant density. Readings of one direction (the pole at
every turn, 0° and 360°) are brought together first, by their mean power. A part of the sphere is refused by every law
that speaks for all of it.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.conditions import DIRECTION_PAIRS
from specflow.conditions.directions import angles_between, direction_vectors
from specflow.conditions.words import value_words
from specflow.derive.law import Law, Outcome, Setting, single
from specflow.derive.samples import Samples
from specflow.errors import CalculationError
from specflow.statistics.sphere import covers_sphere, grid_weights, percentile, unique_directions
from specflow.units import Kind

Floats = NDArray[np.float64]
Rows = NDArray[np.intp]

_EVEN = (
    0.05  # how far the mean direction and the second moments of an even grid may be from those of the sphere
)
_HOLE = 1.25  # how many mean spacings the farthest place may lie from the nearest reading


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
    if not covers_sphere(theta, phi):
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
        np.sin(np.radians(rings)) * np.radians(step) / 2
        if how == "sine"
        else _clenshaw_curtis(len(rings) - 1)
    )
    return np.asarray((ring / counts)[ring_of.reshape(-1)])


def _clenshaw_curtis(n: int) -> Floats:
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


def total_radiated_power(samples: Samples) -> Outcome:
    """Return the total radiated power of an EIRP pattern: its mean over the sphere.

    Formula: TRP = (1/4π)·∮ EIRP dΩ = Σ w·EIRP with Σ w = 1, in linear power. Weights of a constant-step grid: the solid
    angle of the zone half a step to either side of a ring (zones), sin θ·Δθ/2 (sine, which leaves out the poles), or
    Clenshaw-Curtis; shared by the readings of a ring. Of a constant-density grid: all equal.
    Valid: EIRP total of both polarisations (see power sum), the whole sphere, a grid fine enough for the beam. Sine
    weights sum to (π/2N)·cot(π/2N) < 1, N = 180°/step: 0.025 dB low at 15°. No uncertainty is derived.
    Source: 3GPP TS 38.521-2 annex M (grids, seen; quadratures from memory).
    """
    grid = whole_sphere(samples)
    mean = float(np.dot(grid.weights, grid.power))
    return single(
        _level(mean, samples),
        samples.values["value"].unit,
        _peak_row(grid),
        at="the whole sphere",
        notes=(*grid.notes, _grid_words(grid)),
    )


def directivity(samples: Samples) -> Outcome:
    """Return the directivity: the greatest intensity over its mean over the sphere.

    Formula: D = U_max/((1/4π)·∮ U dΩ), in dBi 10·log D.
    Valid: radiation intensity or EIRP on the whole sphere, in any linear or logarithmic unit of power.
    Source: IEEE Std 145, definition of directivity (from memory); cosⁿ patterns over a half sphere give 2(n + 1).
    """
    grid = whole_sphere(samples)
    mean = float(np.dot(grid.weights, grid.power))
    if mean <= 0:
        raise CalculationError("nothing is radiated: all values are 0")
    value = 10 * float(np.log10(grid.power.max() / mean))
    row = _peak_row(grid)
    return single(value, "dBi", row, at=_direction(samples, row), notes=(*grid.notes, _grid_words(grid)))


def spherical_percentile(samples: Samples) -> Outcome:
    """Return the level at a percentile of the distribution over the sphere, each direction weighing its solid angle.

    Formula: the smallest level whose cumulative weight reaches the percentage (CDF). 85 % of the CDF leaves 15 % of the
    sphere at or above the level; 85 % of the CCDF is reached by 85 % of the sphere.
    Valid: the whole sphere. The result is a reading, and its uncertainty is that reading's.
    Source: 3GPP TS 38.101-2 spherical coverage (from memory); sin θ weights, see statistics.sphere.
    """
    grid = whole_sphere(samples)
    percent = samples.number("percentile")
    if not 0 < percent <= 100:
        raise CalculationError(f"the percentile {percent:g} is not above 0 and at most 100")
    level = percentile(grid.power, grid.weights, percent, complement=samples.word("of") == "CCDF")
    row = int(grid.row[np.flatnonzero(grid.power == level)[0]])
    readings = samples.values["value"]
    u = None if readings.u is None else float(readings.u[row])
    return single(
        _level(level, samples),
        readings.unit,
        row,
        at=_direction(samples, row),
        u=u,
        u_rule="that of the governing reading",
        notes=(*grid.notes, _grid_words(grid)),
    )


def beam_peak(samples: Samples) -> Outcome:
    """Return the greatest reading of a pattern, and its direction.

    Formula: max over the directions; no interpolation between them.
    Valid: within the directions measured: a coarse grid misses the peak (0.3 dB with 10226, 0.5 dB with 7082, 0.7 dB
    with 4902 constant-step points, 3GPP TS 38.521-2 M.2.1.1, seen).
    Source: definition.
    """
    readings = samples.values["value"]
    row = int(np.argmax(readings.low))
    u = None if readings.u is None else float(readings.u[row])
    return single(
        float(readings.low[row]),
        readings.unit,
        row,
        at=_direction(samples, row),
        u=u,
        u_rule="that of the governing reading",
    )


def pointing_error(samples: Samples) -> Outcome:
    """Return the angle between the peak of a pattern and the commanded direction.

    Formula: great-circle angle between the direction of the greatest reading and (``polar``, ``turn``).
    Valid: resolved to the step of the grid; the peak is a reading, not interpolated.
    Source: definition.
    """
    pair = next(one for one in DIRECTION_PAIRS if one.polar in samples.axes)
    row = int(np.argmax(samples.value()))
    found = direction_vectors(pair, samples.axes[pair.polar][[row]], samples.axes[pair.turn][[row]])
    wanted = direction_vectors(pair, np.array([samples.number("polar")]), np.array([samples.number("turn")]))
    return single(
        float(angles_between(found, wanted)[0]), "deg", row, at=f"peak at {_direction(samples, row)}"
    )


def cross_polarisation(samples: Samples) -> Outcome:
    """Return how far the cross-polar pattern lies below the co-polar one: at its peak, or at worst within the beam.

    Formula: co - cross in dB, in the direction of the greatest co-polar reading; or the least of it over the directions
    whose co-polar reading is within ``below`` of the peak.
    Valid: both patterns in the same directions. No uncertainty is derived.
    Source: cross-polar discrimination, definition (IEEE Std 145, from memory).
    """
    co, cross = samples.value("co"), samples.value("cross")
    if not (samples.unit("co").is_log and samples.unit("co") == samples.unit("cross")):
        raise CalculationError("both patterns must be in the same unit, in dB", hint="attach them so")
    off = co - cross
    peak = int(np.argmax(co))
    row = peak
    if samples.word("where") == "in the beam":
        inside = np.flatnonzero(co >= co[peak] - samples.number("below"))
        row = int(inside[np.argmin(off[inside])])
    return single(float(off[row]), "dB", row, at=_direction(samples, row))


def _level(power: float, samples: Samples) -> float:
    return 10 * float(np.log10(power)) if samples.unit().is_log else power


def _peak_row(grid: Grid) -> int:
    return int(grid.row[np.argmax(grid.power)])


def _direction(samples: Samples, row: int) -> str:
    return ", ".join(
        value_words(name, float(axis[row]), samples.units.get(name, "deg"))
        for name, axis in samples.axes.items()
    )


def _grid_words(grid: Grid) -> str:
    rings = np.unique(np.round(grid.theta, 6))
    step = float(np.diff(rings).min()) if len(rings) > 1 else 0.0
    whole = step > 0 and len(grid.theta) == unique_directions(step)
    return f"{len(grid.theta)} directions" + (f", a constant-step grid of {step:g}°" if whole else "")


_GRID = (
    Setting("grid", "how the directions lie", "constant step", choices=("constant step", "constant density")),
    Setting("weights", "of a constant-step grid", "zones", choices=("zones", "sine", "Clenshaw-Curtis")),
)
_NEEDS = "one value column over directions on the whole sphere (theta and phi, or azimuth and elevation)"
SPHERE_LAWS: tuple[Law, ...] = (
    Law(
        "trp",
        "total radiated power of an EIRP pattern",
        total_radiated_power,
        over="directions",
        needs=_NEEDS,
        settings=_GRID,
        gives=("trp",),
        reads=("eirp",),
    ),
    Law(
        "directivity",
        "directivity of a pattern over the whole sphere",
        directivity,
        over="directions",
        needs=_NEEDS,
        settings=_GRID,
        gives=("directivity",),
        reads=("eirp", "antenna_gain"),
    ),
    Law(
        "spherical percentile",
        "level at a percentile over the sphere",
        spherical_percentile,
        over="directions",
        needs=_NEEDS,
        settings=(
            Setting("percentile", "the percentage, as 50"),
            Setting("of", "of which distribution", "CDF", choices=("CDF", "CCDF")),
            *_GRID,
        ),
        gives=("eirp_spherical_coverage", "eis_spherical_coverage"),
        reads=("eirp", "eis"),
        statistic="percentile",
    ),
    Law(
        "beam peak",
        "greatest reading over directions, and where",
        beam_peak,
        over="directions",
        needs="one value column over directions",
        keeps_parameter=True,
        statistic="peak",
    ),
    Law(
        "pointing error",
        "angle between the peak and the commanded direction",
        pointing_error,
        over="directions",
        needs="one value column over directions",
        settings=(
            Setting("polar", "commanded polar angle (or elevation), as '30 deg'", unit="deg"),
            Setting("turn", "commanded azimuthal angle, as '0 deg'", unit="deg"),
        ),
        gives=("pointing_error",),
        reads=("eirp", "antenna_gain"),
    ),
    Law(
        "cross polarisation",
        "cross-polar discrimination at the peak or within the beam",
        cross_polarisation,
        over="directions",
        needs="co-polar and cross-polar readings in the same directions",
        roles=("co", "cross"),
        settings=(
            Setting("where", "in which directions", choices=("at the peak", "in the beam")),
            Setting("below", "how far below the peak the beam ends", "3 dB", unit="dB"),
        ),
        gives=("cross_polarisation",),
    ),
)
