"""Laws of a pattern cut: beamwidth, side-lobe level; and a pattern over the angle off the commanded direction.

The angle is the range (``--over "theta -90..90 deg"``); the other angle groups the rows.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from specflow.conditions import DIRECTION_PAIRS
from specflow.conditions.directions import angles_between, direction_vectors
from specflow.conditions.words import value_words
from specflow.derive.edges import edges_about_peak
from specflow.derive.law import Law, Outcome, Setting, single
from specflow.derive.samples import Samples, figure
from specflow.errors import CalculationError

Floats = NDArray[np.float64]
Rows = NDArray[np.intp]

#: The condition that the angle off the commanded direction is recorded as.
OFF_AXIS = "off_axis_angle"


def beamwidth(samples: Samples) -> Outcome:
    """Return the width of the beam x dB below its peak.

    Formula: from the greatest reading outwards, the first crossing of (peak - below) on each side, on straight lines in
    dB between neighbouring readings.
    Valid: a cut in dB through the peak, fine against the beam; the peak is a reading. A cosⁿ power pattern has
    2·acos(2^(-1/n)) at half power.
    Source: IEEE Std 145, half-power beamwidth (from memory).
    """
    along, values, rows = _cut(samples)
    below = samples.number("below")
    if below <= 0:
        raise CalculationError(f"below is {below:g}; it is a positive distance from the peak")
    edges = edges_about_peak(along, values, float(values.max()) - below)
    ends = [
        value_words(samples.axis, float(f"{end:.7g}"), samples.axis_unit) for end in (edges.low, edges.high)
    ]
    notes = ("another lobe comes within the level; the width is that about the peak",) if edges.again else ()
    at = f"{ends[0]} to {ends[1]}, interpolated"
    row = int(rows[edges.peak])
    return single(edges.high - edges.low, samples.axis_unit, row, at=at, notes=notes)


def _cut(samples: Samples) -> tuple[Floats, Floats, Rows]:
    """Return angle, level in dB and row along a cut; one that goes all round is turned so that its peak is amid it."""
    along, values, rows = samples.along, _in_db(samples), np.arange(samples.size)
    if samples.axis_unit != "deg" or len(along) < 8:
        return along, values, rows
    step = float(np.diff(along).max())
    if along[-1] - along[0] < 360.0 - 1.001 * step:
        return along, values, rows
    once = along < along[0] + 360.0 - 1e-6 * max(step, 1.0)  # the last reading may be the first again
    along, values, rows = along[once], values[once], rows[once]
    centre = float(along[int(np.argmax(values))])
    turned = np.mod(along - centre + 180.0, 360.0) - 180.0 + centre
    order = np.argsort(turned, kind="stable")
    return turned[order], values[order], rows[order]


@dataclass(frozen=True, slots=True)
class MainLobe:
    """The rows of the peak and of the first nulls on either side."""

    peak: int
    left: int
    right: int


def main_lobe(values: Floats, depth: float) -> MainLobe:
    """Return the main lobe: from its peak outwards to the first local minimum at least ``depth`` below the peak.

    A side without such a null has its end at the edge of the cut. Raises CalculationError where neither side has one.
    """
    peak = int(np.argmax(values))
    left, right = _null(values[: peak + 1][::-1], depth), _null(values[peak:], depth)
    if left is None and right is None:
        raise CalculationError(
            f"no null at least {figure(depth)} dB below the peak lies on either side of it",
            hint="measure farther out, or state another null depth",
        )
    return MainLobe(
        peak, 0 if left is None else peak - left, len(values) - 1 if right is None else peak + right
    )


def _null(outwards: Floats, depth: float) -> int | None:
    """Return the place of the first local minimum going outwards from the peak that is deep enough."""
    for place in range(1, len(outwards) - 1):
        deep = outwards[place] <= outwards[0] - depth
        if deep and outwards[place] <= outwards[place - 1] and outwards[place] < outwards[place + 1]:
            return place
    return None


def side_lobe_level(samples: Samples) -> Outcome:
    """Return the greatest side lobe relative to the peak of the main lobe.

    Formula: max outside the main lobe less the peak, in dB (below 0). The main lobe ends on either side at the first
    local minimum that is at least ``null depth`` below the peak; a shoulder that fills that null counts as main lobe.
    Valid: a cut in dB through the peak. With ``sign`` suppression the same is given as a positive number. A side
    without a null within the cut holds no side lobe, and that is told. No uncertainty is derived.
    Source: IEEE Std 145, side lobe (from memory); uniform line: -13.26 dB.
    """
    _, values, rows = _cut(samples)
    lobe = main_lobe(values, samples.number("null depth"))
    outside = np.concatenate([np.arange(lobe.left), np.arange(lobe.right + 1, len(values))])
    place = int(outside[np.argmax(values[outside])])
    level = float(values[place] - values[lobe.peak])
    missing = [
        side for side, end in (("lower", lobe.left == 0), ("upper", lobe.right == len(values) - 1)) if end
    ]
    notes = tuple(
        f"on the {side} side no null lies within the cut, so no side lobe is known there" for side in missing
    )
    if samples.word("sign") == "suppression":
        level = -level
    return single(level, "dB", int(rows[place]), notes=notes)


def _in_db(samples: Samples) -> Floats:
    if samples.unit().is_log:
        return samples.value()
    values = samples.value()
    if (values <= 0).any():
        raise CalculationError("a linear power of 0 or less has no dB", hint="look at the unit of the column")
    return np.asarray(10 * np.log10(values))


def off_axis(samples: Samples) -> Outcome:
    """Return every reading again, at its angle off the commanded direction: what an off-axis mask is stated over.

    Formula: great-circle angle between the direction of the reading and (``polar``, ``turn``); the value stays.
    Valid: the commanded direction, not the peak found: a beam that points wrong is judged where it should point. With
    ``as`` theta the angle takes the place of the direction, for a mask over θ from the beam. Attach the raw pattern as
    EIRP density, and give off-axis EIRP density: raw readings of the latter state no angle and leave a mask undecided.
    Source: off-axis angle of an earth station, ITU-R S.524 and national masks (from memory).
    """
    pair = next(one for one in DIRECTION_PAIRS if one.polar in samples.axes)
    there = direction_vectors(pair, samples.axes[pair.polar], samples.axes[pair.turn])
    wanted = direction_vectors(pair, np.array([samples.number("polar")]), np.array([samples.number("turn")]))
    angles = angles_between(there, wanted)
    readings = samples.values["value"]
    found = Outcome(
        readings.low,
        readings.unit,
        np.arange(samples.size),
        readings.high,
        u=readings.u,
        u_rule="that of the reading",
    )
    name = samples.word("as")
    kept = {} if name == pair.polar else samples.axes
    return replace(found, axes={**kept, name: np.round(angles, 9)}, axis_units={name: "deg"})


_ANGLE = "one value column over an angle (theta, azimuth ...); the other angle groups the rows"
_PATTERNS = ("antenna_gain", "directivity", "eirp", "eirp_density")
_ANGLES = ("theta", "azimuth", "elevation")
CUT_LAWS: tuple[Law, ...] = (
    Law(
        "beamwidth",
        "width of the beam x dB below its peak",
        beamwidth,
        needs=_ANGLE,
        settings=(Setting("below", "how far below the peak", "3 dB", unit="dB"),),
        gives=("beamwidth",),
        reads=_PATTERNS,
        along=_ANGLES,
    ),
    Law(
        "side lobe level",
        "greatest side lobe relative to the peak",
        side_lobe_level,
        needs=_ANGLE,
        settings=(
            Setting("null depth", "how deep a null ends the main lobe", "10 dB", unit="dB"),
            Setting(
                "sign", "as a level below 0, or as suppression", "level", choices=("level", "suppression")
            ),
        ),
        gives=("side_lobe_level", "side_lobe_suppression"),
        reads=_PATTERNS,
        along=_ANGLES,
    ),
    Law(
        "off axis",
        "a pattern over the angle off the commanded direction",
        off_axis,
        over="directions",
        needs="one value column over directions",
        settings=(
            Setting("polar", "commanded polar angle (or elevation), as '30 deg'", unit="deg"),
            Setting("turn", "commanded azimuthal angle, as '0 deg'", unit="deg"),
            Setting("as", "the condition that the angle is recorded as", OFF_AXIS, is_text=True),
        ),
        gives=("off_axis_eirp_density",),
        reads=("eirp_density",),
        keeps_parameter=True,
        takes_bounds=True,
    ),
)
