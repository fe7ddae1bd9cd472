"""Which reading serves which place of evaluation of a budget: both meet one required point."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.conditions import Points, match
from specflow.model.columns import Columns

Floats = NDArray[np.float64]
Rows = NDArray[np.intp]


def everywhere(places: int, rows: int) -> tuple[Rows, Rows]:
    """Return every pair of place and row."""
    return np.repeat(np.arange(places), rows), np.tile(np.arange(rows), places)


def paired(
    points: Points,
    place: NDArray[np.int32],
    point: NDArray[np.int32] | Rows,
    records: Columns,
    columns: Columns,
) -> tuple[Rows, Rows]:
    """Join places and rows that serve the same required point; along a range, each place with its nearest rows."""
    found = match(points, records)
    if found.along is None:
        order = np.argsort(point, kind="stable")
        ordered = np.asarray(point)[order]
        first = np.searchsorted(ordered, found.point, side="left")
        count = np.searchsorted(ordered, found.point, side="right") - first
        rows = np.repeat(found.record, count)
        start = np.repeat(first - np.cumsum(count) + count, count)
        return np.asarray(place)[order[start + np.arange(len(rows))]].astype(np.intp), rows.astype(np.intp)
    return _along(points, place, np.asarray(point), found.record, found.point, found.along, columns)


def _along(
    points: Points,
    place: NDArray[np.int32],
    point: NDArray[np.int32],
    record: NDArray[np.int32],
    served: NDArray[np.int32],
    along: Floats,
    columns: Columns,
) -> tuple[Rows, Rows]:
    """Give each place of a range the rows that are nearest to it along the range, within the step that is required."""
    name = points.range_dimension
    step = points.step.get(name, np.inf)
    at = columns.numeric[name]
    places: list[int] = []
    rows: list[int] = []
    for one, here in zip(place.tolist(), point.tolist(), strict=True):
        mine = np.flatnonzero(served == here)
        if not len(mine):
            continue
        gap = np.abs(along[mine] - at[one])
        least = float(gap.min())
        if least <= step:
            near = record[mine[gap <= least + 1e-9 * max(1.0, abs(float(at[one])))]]
            places += [one] * len(near)
            rows += near.tolist()
    return np.array(places, np.intp), np.array(rows, np.intp)
