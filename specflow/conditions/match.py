"""Which record serves which required point.

A record serves at most one point: the nearest of those within whose tolerance it lies. One that lies within
the tolerance of several is *ambiguous* and is reported. A condition that a record does not state never
matches.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.axes import Axis, Floats, NumericAxis, TextAxis
from specflow.conditions.points import LARGEST_KEY, Points
from specflow.conditions.recorded import recorded_words, recording_note, spans_in
from specflow.conditions.search import nearest_points
from specflow.model.columns import Columns, Spans

Rows = NDArray[np.int32]
_NONE = np.zeros(0, np.int32)
_SHORT = np.iinfo(np.int16).max


@dataclass(frozen=True, slots=True)
class Matching:
    """Pairs ``record[i]`` serves ``point[i]``, sorted by point (then along the range, then by record).

    ``along`` is the actual value along the range, None where the points are single values. ``ambiguous`` are
    the records within the tolerance of several points. ``notes`` say which units were converted or could not
    be. ``until``: where what a record speaks for ends along the range (a value derived over a part of it, the floor of
    a scan); None where each speaks for its own value. ``silent``: pairs that prove no part of a range (a listed peak).
    """

    record: Rows
    point: Rows
    along: Floats | None
    ambiguous: Rows
    notes: tuple[str, ...] = ()
    until: Floats | None = None
    silent: NDArray[np.bool_] | None = None


def match(points: Points, records: Columns) -> Matching:
    """Match records with required points; all items at once (``proves`` tells them apart by a mask)."""
    notes = _notes(points, records)
    seen = _read(points.axes, records)
    if seen is None:
        empty = None if points.range_axis is None else np.zeros(0)
        return Matching(_NONE, _NONE, empty, _NONE, notes)
    if points.key_count < LARGEST_KEY:
        record, point, ambiguous = _by_key(points, seen, records.size)
    else:
        everyone = np.ones(records.size, np.bool_)
        nobody = np.zeros(0, np.intp), np.zeros(0, np.int32)
        record, point, ambiguous = _search_crowded(points, seen, *nobody, everyone)
    found = _sorted(points, seen, record, point, ambiguous.astype(np.int32), notes)
    return _with_extents(points, records, found) if records.spans else found


def unstated_conditions(points: Points, records: Columns) -> dict[str, Rows]:
    """Return for each required dimension the records that do not state it (in a comparable unit); none is
    left out.
    """
    unstated: dict[str, Rows] = {}
    for axis in points.axes:
        for name in axis.names:
            rows = _unstated(axis, name, records)
            if len(rows):
                unstated[name] = rows
    return unstated


def _read(axes: tuple[Axis, ...], records: Columns) -> list[Floats] | None:
    seen = []
    for axis in axes:
        actual = axis.read(records)
        if records.spans:
            actual = _with_spans(axis, records, actual)
        if actual is None:
            return None
        seen.append(actual)
    return seen


def _with_spans(axis: Axis, records: Columns, actual: Floats | None) -> Floats | None:
    """Place the records that speak for a part of a required range at the lower end of that part."""
    spans = _spans_within(axis, records)
    if spans is None or np.isnan(spans.low).all():
        return actual
    alone = np.full(records.size, np.nan) if actual is None else actual
    return np.where(np.isnan(spans.low), alone, spans.low)


def _spans_within(axis: Axis, records: Columns) -> Spans | None:
    """Return the part of a range that each record speaks for, with no gap above its step (NaN: none)."""
    if not isinstance(axis, NumericAxis) or axis.extent is None or axis.extent.turn:
        return None
    extent, spans = axis.extent, spans_in(records.spans.get(axis.name), axis.unit, records.size)
    gap = np.inf if extent.largest_gap is None else extent.largest_gap
    speaks = (spans.low <= max(extent.high, extent.end_from)) & (
        spans.high >= min(extent.low, extent.start_by)
    )
    speaks &= spans.gap <= gap
    if spans.undivided is not None:
        covers = (spans.low <= extent.start_by) & (spans.high >= extent.end_from)
        speaks &= covers | ~spans.undivided
    low = np.where(speaks, np.clip(spans.low, extent.low, extent.high), np.nan)
    high = np.where(speaks, np.clip(spans.high, extent.low, extent.high), np.nan)
    return Spans(low, high, spans.gap, axis.unit)


def speaks_for(axis: Axis, records: Columns) -> NDArray[np.bool_]:
    """Return which records speak for an axis that is a range, or a part of it."""
    spans = _spans_within(axis, records) if records.spans else None
    return np.zeros(records.size, np.bool_) if spans is None else ~np.isnan(spans.low)


def _with_extents(points: Points, records: Columns, found: Matching) -> Matching:
    """Add how far along the range each record speaks, and which prove no part of it."""
    axis = points.range_axis
    spans = _spans_within(axis, records) if isinstance(axis, NumericAxis) else None
    if not isinstance(axis, NumericAxis) or spans is None or found.along is None:
        return found
    high = spans.high[found.record]
    silent = records.spans[axis.name].silent if axis.name in records.spans else None
    return replace(
        found,
        until=np.where(np.isnan(high), found.along, np.maximum(high, found.along)),
        silent=None if silent is None else silent[found.record],
    )


def _by_key(
    points: Points, seen: list[Floats], size: int
) -> tuple[NDArray[np.intp], NDArray[np.int32], NDArray[np.intp]]:
    keys, crowded = _keys(points, seen, size)
    record = (keys >= 0).nonzero()[0]
    point = points.at_keys(keys.take(record))
    if not points.is_full:
        served = point >= 0
        record, point = record[served], point[served]
    if crowded is None:
        return record, point, np.zeros(0, np.intp)
    if points.is_full:
        return record, point, record[crowded[record]]
    return _search_crowded(points, seen, record, point, crowded)


def _keys(
    points: Points, seen: list[Floats], size: int
) -> tuple[NDArray[np.int64], NDArray[np.bool_] | None]:
    """Return the key of the combination that each record serves (negative for none), and the crowded records."""
    keys: NDArray[np.int64] | None = None
    crowded: NDArray[np.bool_] | None = None
    for axis, actual, stride in zip(points.axes, seen, points.strides, strict=True):
        weights, several = axis.weigh(actual, stride)
        keys = weights if keys is None else keys + weights
        if several is not None and several.any():
            crowded = several if crowded is None else crowded | several
    return np.zeros(size, np.int64) if keys is None else keys, crowded


def _search_crowded(
    points: Points,
    seen: list[Floats],
    record: NDArray[np.intp],
    point: NDArray[np.int32],
    crowded: NDArray[np.bool_],
) -> tuple[NDArray[np.intp], NDArray[np.int32], NDArray[np.intp]]:
    """Settle the crowded records against the points that exist: the nearest combination may not be one of
    them.
    """
    plain = ~crowded[record]
    rows = np.flatnonzero(crowded)
    nearest, several = nearest_points(points.axes, points.codes, [actual[rows] for actual in seen])
    served = nearest >= 0
    record = np.concatenate([record[plain], rows[served]])
    point = np.concatenate([point[plain], nearest[served].astype(np.int32)])
    return record, point, rows[served & several]


def _sorted(
    points: Points,
    seen: list[Floats],
    record: NDArray[np.intp],
    point: NDArray[np.int32],
    ambiguous: Rows,
    notes: tuple[str, ...],
) -> Matching:
    axis = points.range_axis
    if axis is None:
        # numpy sorts numbers of 16 bits by their digits, which takes a third of the time
        short = point.astype(np.int16) if points.size <= _SHORT else point
        order = short.argsort(kind="stable")
        return Matching(record.take(order).astype(np.int32), point.take(order), None, ambiguous, notes)
    place = points.axes.index(axis)
    along = axis.along(seen[place][record], points.codes[place][point])
    order = np.lexsort((along, point))
    return Matching(record[order].astype(np.int32), point[order], along[order], ambiguous, notes)


def _notes(points: Points, records: Columns) -> tuple[str, ...]:
    units = points.columns_lo.units
    recorded = records.units
    different = [name for name, unit in units.items() if recorded.get(name, "") != unit]
    if not different:
        return ()
    notes = (recording_note(records, name, unit) for name, unit in units.items())
    return tuple(note for note in notes if note)


def _unstated(axis: Axis, name: str, records: Columns) -> Rows:
    if isinstance(axis, TextAxis):
        words = recorded_words(records, name)
        if words is not None:
            return np.flatnonzero(words.codes < 0).astype(np.int32)
    actual = axis.read(records)
    if actual is None:
        return np.arange(records.size, dtype=np.int32)
    if isinstance(axis, NumericAxis | TextAxis):
        return np.flatnonzero(np.isnan(actual)).astype(np.int32)
    stated = records.numeric.get(name)
    if stated is None:
        return np.flatnonzero(np.isnan(actual[:, 0])).astype(np.int32)
    return np.flatnonzero(np.isnan(stated) & np.isnan(actual[:, 0])).astype(np.int32)
