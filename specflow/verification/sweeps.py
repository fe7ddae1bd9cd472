"""Masks over an axis that the conditions set does not name: the evidence must sweep all of the mask, or proves nothing.

Such an axis is a range to be proved, but nobody stated its step. House rule (common practice, no source): within each
piece of the mask that asks for something the readings come to a tenth of the piece from either end and leave no gap
larger than a tenth of it, of its logarithm where it spans a decade or more. A piece that runs on without end needs one
reading. Who means another step names the axis in the conditions set, as a range; there ``conditions.proof`` decides.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.points import Points
from specflow.limits import LimitContext, evaluate_limit
from specflow.limits.conversion import convert_to
from specflow.limits.expression_value import number_in
from specflow.limits.inputs import Inputs
from specflow.limits.tree import walk_limit
from specflow.model.columns import Columns
from specflow.model.expression import Name
from specflow.model.limit import Limit, Mask, Segment
from specflow.units import Quantity
from specflow.verification.limit_inputs import is_plain, limit_columns, named_by_points

Floats = NDArray[np.float64]
Flags = NDArray[np.bool_]
Rows = NDArray[np.intp]

#: A piece of a mask is cut into so many steps; no gap between readings is larger than one.
STEPS = 10
_DECADE = 10.0


@dataclass(frozen=True, slots=True)
class Sweep:
    """What is to be swept along one axis at each required point (n,).

    ``edges`` (n, e) in ``unit``, ascending, NaN where they are unknown; ``required`` (n, e-1): the limit asks for
    something between two edges.
    """

    axis: str
    unit: str
    edges: Floats
    required: Flags

    def covered(self, point: int, values: Floats) -> bool:
        """Whether readings at these values along the axis sweep all that is required at a point."""
        edges = self.edges[point]
        if np.isnan(edges).any():
            return False
        seen = np.sort(values)
        return all(
            _swept(float(edges[place]), float(edges[place + 1]), seen)
            for place in np.flatnonzero(self.required[point]).tolist()
        )


def swept_axes(limit: Limit, points: Points, declared: Mapping[str, Quantity]) -> tuple[str, ...]:
    """Return the axes of masks that the conditions set leaves to the evidence."""
    if is_plain(limit):
        return ()
    axes = dict.fromkeys(node.axis for node in walk_limit(limit.tree) if isinstance(node, Mask))
    return tuple(axis for axis in axes if not named_by_points(axis, limit, points, declared))


def sweep_of(axis: str, limit: Limit, points: Points, declared: Mapping[str, Quantity]) -> Sweep:
    """Return what is to be swept along an axis at each required point."""
    masks = [node for node in walk_limit(limit.tree) if isinstance(node, Mask) and node.axis == axis]
    unit = masks[0].axis_unit
    every = np.arange(points.size)
    columns = limit_columns(limit, points, None, every, every, declared)
    inputs = Inputs(columns, declared)
    ends = [
        np.broadcast_to(convert_to(end, mask.axis_unit, unit), points.size)
        for mask in masks
        for segment in mask.segments
        for end in _ends(segment, mask, inputs)
    ]
    ends += [
        np.broadcast_to(convert_to(number_in(end, mask.axis_unit, inputs), mask.axis_unit, unit), points.size)
        for mask in masks
        for interval in mask.exclusions
        for end in (interval.low, interval.high)
        if end is not None
    ]
    edges = np.sort(np.stack(ends, axis=1), axis=1)
    required = [
        _asked(limit, axis, unit, _between(edges[:, place], edges[:, place + 1]), columns, declared)
        & (edges[:, place + 1] > edges[:, place])
        for place in range(edges.shape[1] - 1)
    ]
    return Sweep(axis, unit, edges, np.stack(required, axis=1))


def along(sweep: Sweep, columns: Columns) -> Floats:
    """Return where readings lie along the axis, in the unit of the sweep; NaN where it is not stated."""
    values = number_in(Name(name=sweep.axis, unit=sweep.unit), sweep.unit, Inputs(columns))
    return np.broadcast_to(values, columns.size)


def _ends(segment: Segment, mask: Mask, inputs: Inputs) -> tuple[Floats, Floats]:
    start = number_in(segment.start, mask.axis_unit, inputs)
    stop = np.full(1, np.inf) if segment.stop is None else number_in(segment.stop, mask.axis_unit, inputs)
    return start, stop


def _between(low: Floats, high: Floats) -> Floats:
    return np.where(np.isinf(high), low + np.maximum(1.0, np.abs(low)), low / 2 + high / 2)


def _asked(
    limit: Limit, axis: str, unit: str, at: Floats, columns: Columns, declared: Mapping[str, Quantity]
) -> Flags:
    """Return at which points the limit asks for something at a place of the axis; where that is unknown it may."""
    placed = replace(columns, numeric={**columns.numeric, axis: at}, units={**columns.units, axis: unit})
    bounds = evaluate_limit(limit, LimitContext(placed, declared, len(at)))
    return np.broadcast_to(bounds.applies | bounds.unknown, at.shape)


def _swept(low: float, high: float, seen: Floats) -> bool:
    """Whether sorted values reach both ends of a piece and leave no gap larger than a step."""
    inside = seen[(seen >= low) & (seen <= high)]
    if not len(inside):
        return False
    if np.isinf(high):
        return True
    if low > 0 and high / low >= _DECADE:
        low, high, inside = float(np.log10(low)), float(np.log10(high)), np.log10(inside)
    step = (high - low) / STEPS * (1 + 1e-9)
    return bool(np.diff(inside, prepend=low, append=high).max() <= step)
