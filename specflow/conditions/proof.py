"""Is a required point proved? The one place where that is decided.

A single point is proved by one good record that serves it. A range is proved when good records reach both
ends within the setting tolerance and leave no gap between neighbours larger than its step; it is not matched
against an invented grid. One record that speaks for the whole of it (a value derived over the range, from raw
data that reach both ends and leave no such gap) proves it alone. A full turn has no ends: the gap across its
start counts like any other.
"""

from __future__ import annotations

from dataclasses import replace

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
    chosen = good[matching.record]
    point = matching.point[chosen]
    if matching.along is None or len(point) == 0:
        return proved_singly(point, points.size)
    if matching.whole is not None and matching.whole.any():
        singly = proved_singly(point[matching.whole[chosen]], points.size)
        return singly | proves(points, _in_parts(matching), good)
    proved = np.zeros(points.size, np.bool_)
    extent = range_extent(points)
    along = matching.along[chosen]
    starts = np.flatnonzero(np.diff(point, prepend=-1))
    stops = np.append(starts[1:], len(point)) - 1
    proved[point[starts]] = _ends_reached(extent, along[starts], along[stops])
    wide = np.diff(along) > (np.inf if extent.largest_gap is None else extent.largest_gap)
    wide &= point[1:] == point[:-1]
    proved[point[1:][wide]] = False
    return proved


def proved_singly(places: NDArray[np.int32] | NDArray[np.intp], size: int) -> Good:
    """Return which of ``size`` places are proved where no range is required: those at which a good record stands.

    A place is a point, or the point of one of several items.
    """
    proved = np.zeros(size, np.bool_)
    proved[places] = True
    return proved


def _in_parts(matching: Matching) -> Matching:
    """Return the pairs whose records speak for single values of a range."""
    assert matching.whole is not None and matching.along is not None
    parts = ~matching.whole
    return replace(
        matching,
        record=matching.record[parts],
        point=matching.point[parts],
        along=matching.along[parts],
        whole=None,
    )


def range_gaps(points: Points, matching: Matching, good: Good, point: int) -> tuple[tuple[float, float], ...]:
    """Return the parts of a range point that the good records leave unproved, as (from, to) along the range.

    Empty for a proved point. A missing end is the part from the end to the nearest evidence value.
    """
    if matching.along is None:
        return ()
    extent = range_extent(points)
    if extent.largest_gap is None:
        return ()
    chosen = good[matching.record] & (matching.point == point)
    if matching.whole is not None and (chosen & matching.whole).any():
        return ()
    along = matching.along[chosen]
    if len(along) == 0:
        return ((extent.low, extent.high),)
    gaps = []
    if not extent.turn and along[0] > extent.start_by:
        gaps.append((extent.low, float(along[0])))
    wide = np.flatnonzero(np.diff(along) > extent.largest_gap)
    gaps += [(float(along[place]), float(along[place + 1])) for place in wide]
    if extent.turn and along[0] + extent.turn - along[-1] > extent.largest_gap:
        gaps.append((float(along[-1]), float(along[0] + extent.turn)))
    if not extent.turn and along[-1] < extent.end_from:
        gaps.append((float(along[-1]), extent.high))
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
