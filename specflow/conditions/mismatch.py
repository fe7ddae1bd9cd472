"""What keeps records from serving or proving a point, in words."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.axes import Floats
from specflow.conditions.dimensions import is_unlocated_temperature, known_dimension
from specflow.conditions.directions import ANGLE_UNIT, CutAxis, DirectionAxis, angles_between
from specflow.conditions.match import Matching, speaks_for
from specflow.conditions.points import Points
from specflow.conditions.proof import range_gaps
from specflow.conditions.recorded import recorded_numbers, recording_note
from specflow.conditions.words import (
    difference_words,
    ends_words,
    quantity_words,
    range_words,
    value_words,
    word_words,
)
from specflow.model.columns import Columns
from specflow.units import format_value


def explain_mismatch(points: Points, point: int, records: Columns) -> str:
    """Say why no record serves a point: the nearest record and which dimensions are off, by how much.

    "" where some record is within the tolerance of the point.
    """
    if records.size == 0:
        return "there is no record"
    off = [_off(points, place, point, records) for place in range(len(points.axes))]
    if not off:
        return ""
    missed = np.stack([np.nan_to_num(one, nan=np.inf) for one in off])
    wrong = missed > 0
    how_many = wrong.sum(axis=0)
    finite = np.where(np.isfinite(missed), missed, 1e6)
    nearest = int(np.lexsort((finite.sum(axis=0), how_many))[0])
    if how_many[nearest] == 0:
        return ""
    sentences = [
        _mismatch(points, place, point, records, nearest)
        for place in range(len(points.axes))
        if wrong[place, nearest]
    ]
    return "; ".join(sentences)


def missing_words(
    points: Points, point: int, matching: Matching, records: Columns, good: NDArray[np.bool_]
) -> str:
    """Say what a point still lacks, given which records are good: gaps of a range, else the nearest record's
    fault.
    """
    gaps = range_gaps(points, matching, good, point)
    if gaps and bool(good[matching.record][matching.point == point].any()):
        name = points.range_dimension
        unit = points.columns_lo.units.get(name, "")
        step = quantity_words(name, points.step[name], unit, signed=False)
        spoken = ", ".join(range_words(name, low, high, unit) for low, high in gaps)
        return f"no evidence from {spoken} (largest gap allowed: {step})"
    serving = good & _serves(matching, point, records.size)
    if serving.any() and not gaps:
        return ""
    rows = np.flatnonzero(good)
    return explain_mismatch(points, point, records.take(rows)) if len(rows) else "no record counts"


def _serves(matching: Matching, point: int, size: int) -> NDArray[np.bool_]:
    serves = np.zeros(size, np.bool_)
    serves[matching.record[matching.point == point]] = True
    return serves


def _off(points: Points, place: int, point: int, records: Columns) -> Floats:
    """Return how far each record is from serving one axis of a point: 0 where it does, inf where it cannot be
    told.
    """
    axis = points.axes[place]
    seen = axis.read(records)
    if seen is None:
        return np.where(speaks_for(axis, records), 0.0, np.inf)
    code = np.full(records.size, points.codes[place][point])
    served = np.isfinite(axis.closeness(seen, code)) | speaks_for(axis, records)
    distance = np.ones(records.size)
    for name in axis.names:
        required = points.columns_lo.numeric.get(name)
        actual = None if required is None else recorded_numbers(records, name, points.columns_lo.units[name])
        if required is not None and actual is not None:
            low, high = float(required[point]), float(points.columns_hi.numeric[name][point])
            outside = np.maximum(np.maximum(low - actual, actual - high), 0)
            distance = distance + outside / (np.ptp(required) or abs(low) or 1.0)
    return np.where(served, 0.0, distance)


def _mismatch(points: Points, place: int, point: int, records: Columns, row: int) -> str:
    axis = points.axes[place]
    if isinstance(axis, DirectionAxis | CutAxis):
        seen = axis.read(records)
        if seen is not None and bool(np.isfinite(seen[row, 0])):
            return _direction_mismatch(points, axis, point, records, row, seen)
    parts = [_mismatch_of(points, name, point, records, row) for name in axis.names]
    return "; ".join(part for part in parts if part)


def _direction_mismatch(
    points: Points, axis: DirectionAxis | CutAxis, point: int, records: Columns, row: int, seen: Floats
) -> str:
    stated = {name: recorded_numbers(records, name, ANGLE_UNIT) for name in axis.names}
    actual = ", ".join(
        value_words(name, float(values[row]), ANGLE_UNIT)
        for name, values in stated.items()
        if values is not None and not math.isnan(values[row])
    )
    parts = (ends_words(name, points.columns_lo, points.columns_hi, point) for name in axis.names)
    asked, allowed = ", ".join(parts), f"{format_value(axis.tolerance)}° allowed"
    if isinstance(axis, CutAxis):
        return f"{actual} is not on the cut {asked} ({allowed})"
    code = int(points.codes[points.axes.index(axis)][point])
    away = float(angles_between(seen[row], axis.vectors[code]))
    return f"{actual} is {format_value(away, decimals=1)}° away from {asked} ({allowed})"


def _mismatch_of(points: Points, name: str, point: int, records: Columns, row: int) -> str:
    if name in points.columns_lo.text:
        asked = word_words(name, points.columns_lo.text[name].word(point))
        column = records.text.get(name)
        stated = column.word(row) if column is not None else ""
        return (
            f"{word_words(name, stated)} is not {asked}" if stated else _unstated_words(name, asked, records)
        )
    unit = points.columns_lo.units[name]
    low, high = float(points.columns_lo.numeric[name][point]), float(points.columns_hi.numeric[name][point])
    asked = ends_words(name, points.columns_lo, points.columns_hi, point)
    actual = recorded_numbers(records, name, unit)
    spoken = _spoken_words(points, name, asked, records, row)
    if spoken is not None:
        return spoken
    if actual is None or actual[row] != actual[row]:
        note = recording_note(records, name, unit) if actual is None else ""
        return note or _unstated_words(name, asked, records)
    value = float(actual[row])
    if low <= value <= high:
        return ""
    away = low - value if value < low else value - high
    allowed = _allowed_words(points, name)
    relation = "is not within" if low != high else "is not"
    return f"{value_words(name, value, unit)} {relation} {asked} (off by {difference_words(away, unit)}, {allowed})"


def _spoken_words(points: Points, name: str, asked: str, records: Columns, row: int) -> str | None:
    """Say over which range a record was derived where that is not what is asked, "" where it is, None for others."""
    spans = records.spans.get(name)
    if spans is None or np.isnan(spans.low[row]):
        return None
    axis = next(axis for axis in points.axes if name in axis.names)
    if speaks_for(axis, records)[row]:
        return ""
    over = range_words(name, float(spans.low[row]), float(spans.high[row]), spans.unit)
    gap = difference_words(float(spans.gap[row]), spans.unit)
    return f"derived over {over} with gaps up to {gap}, {asked} is asked"


def _allowed_words(points: Points, name: str) -> str:
    dimension = points.conditions.dimension(name)
    if dimension is None or dimension.tolerance == 0:
        return "no setting tolerance stated"
    if dimension.tolerance_is_percent:
        return f"{format_value(dimension.tolerance)} % allowed"
    return f"{difference_words(dimension.tolerance, dimension.unit)} allowed"


def _unstated_words(name: str, asked: str, records: Columns) -> str:
    located = [other for other in records.names if other.startswith("temperature_") and other != name]
    if name.startswith("temperature_") and located:
        return f"{asked} is asked, the record states {located[0]}: unlike places need a condition map"
    if name.startswith("temperature_") and any(is_unlocated_temperature(other) for other in records.names):
        return f"{asked} is asked, the record does not say whose temperature it states"
    known = known_dimension(name)
    return (
        f"{asked} is asked, the record does not state the {known.title if known else name.replace('_', ' ')}"
    )
