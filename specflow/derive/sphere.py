"""Laws over directions on the sphere: total radiated power, percentiles, directivity, peak, pointing.

A part of the sphere is refused by every law that speaks for all of it (see ``sphere_grid``).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.conditions import DIRECTION_PAIRS
from specflow.conditions.directions import angles_between, direction_vectors
from specflow.conditions.words import value_words
from specflow.derive.law import Law, Outcome, Setting, single
from specflow.derive.samples import Samples
from specflow.derive.sphere_grid import whole_sphere
from specflow.errors import CalculationError
from specflow.statistics.sphere import percentile

Floats = NDArray[np.float64]
Rows = NDArray[np.intp]


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
    mean = grid.mean
    return single(
        _level(mean, samples),
        samples.values["value"].unit,
        grid.peak_row,
        at="the whole sphere",
        notes=(*grid.notes, grid.words),
    )


def directivity(samples: Samples) -> Outcome:
    """Return the directivity: the greatest intensity over its mean over the sphere.

    Formula: D = U_max/((1/4π)·∮ U dΩ), in dBi 10·log D.
    Valid: radiation intensity or EIRP on the whole sphere, in any linear or logarithmic unit of power.
    Source: IEEE Std 145, definition of directivity (from memory); cosⁿ patterns over a half sphere give 2(n + 1).
    """
    grid = whole_sphere(samples)
    mean = grid.mean
    if mean <= 0:
        raise CalculationError("nothing is radiated: all values are 0")
    value = 10 * float(np.log10(grid.power.max() / mean))
    row = grid.peak_row
    return single(value, "dBi", row, at=_direction(samples, row), notes=(*grid.notes, grid.words))


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
        notes=(*grid.notes, grid.words),
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


def _direction(samples: Samples, row: int) -> str:
    return ", ".join(
        value_words(name, float(axis[row]), samples.units.get(name, "deg"))
        for name, axis in samples.axes.items()
    )


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
