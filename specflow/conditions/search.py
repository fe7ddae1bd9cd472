"""Finding the nearest required point for records that are within the tolerance of several.

Every coordinate is cut into bins a little wider than twice the farthest reach, so whatever a record may serve
lies in at most two neighbouring bins of each. Points are sorted by a key mixed from their bins; each record
looks up the keys of its own bins. Keys may collide: a candidate counts only after its exact distance was
taken.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import product
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

if TYPE_CHECKING:
    from specflow.conditions.axes import Axis, Codes, Floats, Rows

_MIXERS = np.array(
    [0x9E3779B97F4A7C15, 0xC2B2AE3D27D4EB4F, 0x165667B19E3779F9, 0x27D4EB2F165667C5], np.uint64
).astype(np.int64)
_MOST_BINNED = len(_MIXERS)
_CHUNK = 1 << 22


def nearest_values(axis: Axis, seen: Floats) -> tuple[Codes, NDArray[np.bool_]]:
    """Return for each record the nearest value of one axis that it serves (-1 for none), and whether others
    do too.
    """
    return nearest_points((axis,), np.arange(axis.size, dtype=np.int64)[None, :], (seen,))


def nearest_points(
    axes: Sequence[Axis], codes: Codes, seen: Sequence[Floats]
) -> tuple[Codes, NDArray[np.bool_]]:
    """Return for each record the nearest point that it serves (-1 for none), and whether it could serve
    others.

    ``codes`` (axes, points) say what the points require. Distances are the root of summed squares over the
    axes, each in units of its tolerance; of equally near points the first is taken.
    """
    records = len(seen[0])
    best = np.full(records, np.inf)
    point = np.full(records, -1, np.int64)
    count = np.zeros(records, np.int64)
    for rows, candidates in _candidates(axes, codes, seen):
        distance = np.zeros(len(rows))
        for axis, code, actual in zip(axes, codes, seen, strict=True):
            distance += axis.closeness(actual[rows], code[candidates]) ** 2
        served = np.isfinite(distance)
        rows, candidates, distance = rows[served], candidates[served], distance[served]
        count += np.bincount(rows, minlength=records)
        order = np.lexsort((candidates, distance, rows))
        rows, candidates, distance = rows[order], candidates[order], distance[order]
        first = np.flatnonzero(np.diff(rows, prepend=-1))
        rows, candidates, distance = rows[first], candidates[first], distance[first]
        nearer = (distance < best[rows]) | ((distance == best[rows]) & (candidates < point[rows]))
        best[rows[nearer]], point[rows[nearer]] = distance[nearer], candidates[nearer]
    return point, count > 1


def _candidates(axes: Sequence[Axis], codes: Codes, seen: Sequence[Floats]) -> Iterator[tuple[Rows, Rows]]:
    """Return pairs of record and point that share bins, in parts of bounded size."""
    binned = _binned(axes, codes, seen)
    stated = np.flatnonzero(_stated(seen))
    if not binned:
        yield from _parts(stated, np.zeros(len(stated), np.intp), np.full(len(stated), codes.shape[1]), None)
        return
    required = sum(_mixed(place, mixer) for (place, _), mixer in zip(binned, _MIXERS, strict=False))
    order = np.argsort(required, kind="stable")
    keys = np.asarray(required)[order]
    lows = [np.floor(actual[stated] - 0.5).astype(np.int64) for _, actual in binned]
    for steps in product((0, 1), repeat=len(binned)):
        wanted = np.zeros(len(stated), np.int64)
        for low, step, mixer in zip(lows, steps, _MIXERS, strict=False):
            wanted += (low + step) * mixer
        first = keys.searchsorted(wanted, "left")
        yield from _parts(stated, first, keys.searchsorted(wanted, "right") - first, order)


def _stated(seen: Sequence[Floats]) -> NDArray[np.bool_]:
    stated = np.ones(len(seen[0]), bool)
    for actual in seen:
        stated &= np.isfinite(actual if actual.ndim == 1 else actual[:, :3].sum(axis=1))
    return stated


def _mixed(place: Floats, mixer: np.int64) -> Codes:
    return np.floor(place).astype(np.int64) * mixer


def _binned(axes: Sequence[Axis], codes: Codes, seen: Sequence[Floats]) -> list[tuple[Floats, Floats]]:
    """Return (required, actual) coordinates in bin widths, those that tell points apart best, at most four."""
    found: list[tuple[int, Floats, Floats]] = []
    for axis, code, actual in zip(axes, codes, seen, strict=True):
        coordinates = zip(axis.required_coordinates(code), axis.coordinates(actual), strict=True)
        for required, recorded in coordinates:
            width = max(2.0001 * axis.reach, 1e-7 * float(np.max(np.abs(required), initial=1e-300)), 1e-12)
            spread = len(np.unique(np.floor(required / width)))
            found.append((spread, required / width, recorded / width))
    found.sort(key=lambda one: -one[0])
    return [(required, recorded) for spread, required, recorded in found[:_MOST_BINNED] if spread > 1]


def _parts(rows: Rows, first: Rows, counts: Rows, order: Rows | None) -> Iterator[tuple[Rows, Rows]]:
    """Spell out runs of sorted places as pairs, no more than about _CHUNK at a time."""
    some = np.flatnonzero(counts)
    rows, first, counts = rows[some], first[some], counts[some]
    ends = np.cumsum(counts)
    begin = 0
    while begin < len(rows):
        done = int(ends[begin - 1]) if begin else 0
        stop = max(begin + 1, int(ends.searchsorted(done + _CHUNK, "right")))
        run = counts[begin:stop]
        places = np.arange(int(run.sum())) + np.repeat(first[begin:stop] - np.cumsum(run) + run, run)
        yield np.repeat(rows[begin:stop], run), places if order is None else order[places]
        begin = stop
