"""Laws that find where along a range something happens: bandwidth, centre, crossing; and the value at one place."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.words import range_words, value_words
from specflow.derive.law import Law, Outcome, Setting, single
from specflow.derive.samples import Samples, figure
from specflow.errors import CalculationError

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Edges:
    """Where a trace falls below a level on either side of its peak, interpolated; ``peak`` is the row of the peak."""

    low: float
    high: float
    peak: int
    again: bool = False


def edges_about_peak(along: Floats, values: Floats, level: float) -> Edges:
    """Return where ``values`` cross ``level`` on either side of their greatest reading, linearly interpolated.

    ``again``: beyond an edge the level is met once more. Raises CalculationError where the trace does not come down to
    the level on a side, or lies below it everywhere.
    """
    peak = int(np.argmax(values))
    if values[peak] < level:
        raise CalculationError(
            f"no reading reaches {figure(level)}; the greatest is {figure(float(values[peak]))}"
        )
    above = values >= level
    left = np.flatnonzero(~above[:peak])
    right = np.flatnonzero(~above[peak:]) + peak
    if not len(left) or not len(right):
        side = "lower" if not len(left) else "upper"
        end = values[0] if side == "lower" else values[-1]
        raise CalculationError(
            f"the {side} edge lies beyond the range: the trace ends at {figure(end)}, "
            f"the edge is at {figure(level)}",
            hint="measure farther out; an edge is never extrapolated",
        )
    inner, outer = int(left[-1]), int(right[0])
    low = _between(along, values, inner, inner + 1, level)
    high = _between(along, values, outer - 1, outer, level)
    return Edges(low, high, peak, bool(above[:inner].any() or above[outer:].any()))


def _between(along: Floats, values: Floats, first: int, second: int, level: float) -> float:
    share = (level - values[first]) / (values[second] - values[first])
    return float(along[first] + share * (along[second] - along[first]))


def bandwidth(samples: Samples) -> Outcome:
    """Return the width between the two edges at which the trace is x dB below its reference.

    Formula: from the greatest reading outwards, the first crossing of (reference - below) on each side, interpolated
    linearly between neighbouring readings; the difference of the two. The reference is the greatest reading, or a
    stated value. For a loss (``peak`` lowest) the trace is turned over first.
    Valid: both edges inside the range; the greatest reading is a reading, not interpolated.
    Source: definition of the bandwidth at a level; common practice, no source for the interpolation.
    """
    edges = _edges(samples)
    return single(
        edges.high - edges.low,
        samples.axis_unit,
        edges.peak,
        at=_edge_words(samples, edges),
        notes=_more(edges),
    )


def centre(samples: Samples) -> Outcome:
    """Return the middle between the two edges of ``bandwidth``.

    Formula: (upper + lower)/2.
    Valid: as for bandwidth.
    Source: definition (arithmetic centre).
    """
    edges = _edges(samples)
    return single(
        (edges.high + edges.low) / 2,
        samples.axis_unit,
        edges.peak,
        at=_edge_words(samples, edges),
        notes=_more(edges),
    )


def _edges(samples: Samples) -> Edges:
    values = samples.value() if samples.word("peak") == "highest" else -samples.value()
    below = samples.number("below")
    if below <= 0:
        raise CalculationError(f"below is {below:g}; it is a positive distance from the reference")
    said = samples.word("reference")
    if said == "peak":
        reference = float(values.max())
    else:
        reference = _reference(said, samples)
        reference = reference if samples.word("peak") == "highest" else -reference
    return edges_about_peak(samples.along, values, reference - below)


def _reference(said: str, samples: Samples) -> float:
    from specflow.derive.said import number_in

    return number_in("reference", said, samples.values["value"].unit)


def _edge_words(samples: Samples, edges: Edges) -> str:
    ends = (
        value_words(samples.axis, float(f"{end:.9g}"), samples.axis_unit) for end in (edges.low, edges.high)
    )
    return "edges at {} and {}, interpolated".format(*ends)


def _more(edges: Edges) -> tuple[str, ...]:
    return ("beyond an edge the level is met again; the width is that about the peak",) if edges.again else ()


def crossing(samples: Samples) -> Outcome:
    """Return the axis value at which a level is met, rising or falling, the first time or the last.

    Formula: linear interpolation between the two neighbouring readings that enclose the level.
    Valid: the level is met inside the range.
    Source: linear interpolation.
    """
    along, values, level = samples.along, samples.value(), samples.number("level")
    off = values - level
    rising, falling = (off[:-1] < 0) & (off[1:] >= 0), (off[:-1] > 0) & (off[1:] <= 0)
    direction = samples.word("direction")
    found = rising if direction == "rising" else falling if direction == "falling" else rising | falling
    places = np.flatnonzero(found)
    if not len(places):
        there = f"{figure(float(values.min()))} to {figure(float(values.max()))}"
        raise CalculationError(
            f"the level {figure(level)} is not met {'' if direction == 'either' else direction}".rstrip()
            + f" in {range_words(samples.axis, float(along[0]), float(along[-1]), samples.axis_unit)}; "
            f"the readings run from {there} {samples.values['value'].unit}",
            hint="a crossing is never extrapolated; measure farther, or ask for another level",
        )
    place = int(places[0] if samples.word("which") == "first" else places[-1])
    where = _between(along, values, place, place + 1, level)
    nearer = place if abs(off[place]) <= abs(off[place + 1]) else place + 1
    notes = (
        (f"the level is met {len(places)} times; the {samples.word('which')} is taken",)
        if len(places) > 1
        else ()
    )
    between = range_words(samples.axis, float(along[place]), float(along[place + 1]), samples.axis_unit)
    return single(
        where, samples.axis_unit, nearer, at=f"between {between.replace(' to ', ' and ')}", notes=notes
    )


def interpolated(samples: Samples) -> Outcome:
    """Return the value at one place of the axis, on the straight line between its neighbours.

    Formula: x1 + (x2 - x1)·(a - a1)/(a2 - a1), along the axis or (``scale`` log) its logarithm; u likewise, as if the
    errors of the neighbours were common (the larger case).
    Valid: between two readings; never outside them.
    Source: linear interpolation.
    """
    along, place = samples.along, samples.number("at")
    if not along[0] <= place <= along[-1]:
        there = range_words(samples.axis, float(along[0]), float(along[-1]), samples.axis_unit)
        raise CalculationError(
            f"{value_words(samples.axis, place, samples.axis_unit)} lies outside the readings, {there}",
            hint="a value is never extrapolated",
        )
    if samples.word("scale") == "log":
        if along[0] <= 0:
            raise CalculationError("a logarithmic axis needs values above 0")
        along, place = np.log10(along), float(np.log10(place))
    readings = samples.values["value"]
    value = float(np.interp(place, along, readings.low))
    u = None if readings.u is None else float(np.interp(place, along, readings.u))
    nearest = int(np.argmin(np.abs(along - place)))
    where = value_words(samples.axis, samples.number("at"), samples.axis_unit)
    exact = bool(along[nearest] == place)
    rule = "that of the reading" if exact else "that of the neighbours, interpolated"
    at = where if exact else f"{where}, interpolated"
    found = single(value, readings.unit, nearest, at=at, u=u, u_rule=rule)
    return replace(found, axes={samples.axis: np.array([samples.number("at")])})


_BANDWIDTH = (
    Setting("below", "how far below the reference the edges are, as '3 dB'", unit="difference"),
    Setting("reference", "peak, or a value with its unit", "peak", is_text=True),
    Setting("peak", "whether the best of the trace is its highest or its lowest value", "highest",
            choices=("highest", "lowest")),
)  # fmt: skip
EDGE_LAWS: tuple[Law, ...] = (
    Law(
        "bandwidth",
        "the width between the edges x dB below the peak",
        bandwidth,
        settings=_BANDWIDTH,
        gives=("bandwidth_3db",),
        reads=("gain", "transmission_magnitude"),
    ),
    Law(
        "centre",
        "the middle between the edges x dB below the peak",
        centre,
        settings=_BANDWIDTH,
        gives=("center_frequency",),
        reads=("gain", "transmission_magnitude"),
    ),
    Law(
        "crossing",
        "where along the range a level is met",
        crossing,
        settings=(
            Setting("level", "the level that is met", unit="value"),
            Setting("direction", "how the trace passes it", choices=("rising", "falling", "either")),
            Setting("which", "the first or the last time", "first", choices=("first", "last")),
        ),
    ),
    Law(
        "interpolated",
        "the value at one place of the range",
        interpolated,
        settings=(
            Setting("at", "the place", unit="axis"),
            Setting("scale", "the axis that is linear", "linear", choices=("linear", "log")),
        ),
        brackets=True,
        keeps_parameter=True,
    ),
)
