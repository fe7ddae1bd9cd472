"""Is a required point proved? The one place where that is decided.

A single point is proved by one good record that serves it. A range is proved when good records reach both
ends within the setting tolerance and leave no gap between neighbours larger than its step; it is not matched
against an invented grid. A record may speak for a part of it, or the whole: a value derived over that part from raw
data that leave no such gap, or the floor of a scan above which every peak is listed. The listed peaks themselves prove
no part of a range: between two of them anything may have stood that was not listed. A full turn has no ends: the gap
across its start counts like any other.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.axes import Extent, Floats
from specflow.conditions.match import Matching
from specflow.conditions.points import Points

Good = NDArray[np.bool_]


def proves(points: Points, matching: Matching, good: Good) -> Good:
    """Return for every point (size,) whether the records marked ``good`` (records,) prove it.

    Call it once for each item with that item's records marked; the matching is shared.
    """
    chosen = _speaking(matching, good)
    point = matching.point[chosen]
    if matching.along is None or len(point) == 0:
        return proved_singly(point, points.size)
    proved = np.zeros(points.size, np.bool_)
    extent = range_extent(points)
    along = matching.along[chosen]
    starts = np.flatnonzero(np.diff(point, prepend=-1))
    stops = np.append(starts[1:], len(point)) - 1
    until = along if matching.until is None else _reached(matching.until[chosen], starts)
    proved[point[starts]] = _ends_reached(extent, along[starts], until[stops])
    wide = along[1:] - until[:-1] > (np.inf if extent.largest_gap is None else extent.largest_gap)
    wide &= point[1:] == point[:-1]
    proved[point[1:][wide]] = False
    return proved


def _speaking(matching: Matching, good: Good) -> Good:
    """Return the pairs of good records that speak for a value of the range, or a part of it."""
    chosen = good[matching.record]
    return chosen if matching.silent is None else chosen & ~matching.silent


def _reached(until: Floats, starts: NDArray[np.intp]) -> Floats:
    """Return how far the records up to each pair reach, point by point."""
    return np.concatenate([np.maximum.accumulate(part) for part in np.split(until, starts[1:])])


def proved_singly(places: NDArray[np.int32] | NDArray[np.intp], size: int) -> Good:
    """Return which of ``size`` places are proved where no range is required: those at which a good record stands.

    A place is a point, or the point of one of several items.
    """
    proved = np.zeros(size, np.bool_)
    proved[places] = True
    return proved


def range_gaps(points: Points, matching: Matching, good: Good, point: int) -> tuple[tuple[float, float], ...]:
    """Return the parts of a range point that the good records leave unproved, as (from, to) along the range.

    Empty for a proved point. A missing end is the part from the end to the nearest evidence value.
    """
    if matching.along is None:
        return ()
    extent = range_extent(points)
    if extent.largest_gap is None:
        return ()
    chosen = _speaking(matching, good) & (matching.point == point)
    along = matching.along[chosen]
    if len(along) == 0:
        return ((extent.low, extent.high),)
    until = along if matching.until is None else np.maximum.accumulate(matching.until[chosen])
    gaps = []
    if not extent.turn and along[0] > extent.start_by:
        gaps.append((extent.low, float(along[0])))
    wide = np.flatnonzero(along[1:] - until[:-1] > extent.largest_gap)
    gaps += [(float(until[place]), float(along[place + 1])) for place in wide]
    if extent.turn and along[0] + extent.turn - along[-1] > extent.largest_gap:
        gaps.append((float(along[-1]), float(along[0] + extent.turn)))
    if not extent.turn and until[-1] < extent.end_from:
        gaps.append((float(until[-1]), extent.high))
    return tuple(gaps)


def range_extent(points: Points) -> Extent:
    """Return the ends and the largest gap of the range of these points; ValueError where they are single
    values.
    """
    axis = points.range_axis
    if axis is None or axis.extent is None:
        raise ValueError(f"{points.conditions.id} has no range")
    return axis.extent


def _ends_reached(extent: Extent, first: Floats, last: Floats) -> Good:
    if extent.turn:
        gap = np.inf if extent.largest_gap is None else extent.largest_gap
        return np.asarray(first + extent.turn - last <= gap)
    return np.asarray((first <= extent.start_by) & (last >= extent.end_from))
