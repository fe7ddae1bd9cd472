"""Conditions in words: points, sets, and what keeps a record from serving a point."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.dimensions import find_dimension, is_unlocated_temperature, known_dimension
from specflow.conditions.match import Matching
from specflow.conditions.points import Points
from specflow.conditions.proof import range_gaps
from specflow.conditions.recorded import recorded_numbers, recording_note
from specflow.model.columns import Columns
from specflow.model.conditions import Combination, ConditionsSet, Dimension, Exclusion, MatchingRule, Need
from specflow.units import format_unit, format_value, parse_unit, tolerance_unit


def value_words(name: str, value: float, unit: str) -> str:
    """Say one value of a dimension: "29.5 GHz", "+85 °C ambient", "θ 30°", "supply 5 V"."""
    return _phrased(name, _quantity(name, value, unit))


def word_words(name: str, word: str) -> str:
    """Say one word of a dimension: "H polarisation", "band n257"."""
    return _phrased(name, word)


def point_words(points: Points, point: int) -> str:
    """Say one required point: "29.5 GHz, +85 °C ambient, θ 30°"; a range says its ends."""
    return conditions_words(points.columns_lo, point, points.columns_hi) or "any conditions"


def conditions_words(columns: Columns, row: int, columns_hi: Columns | None = None) -> str:
    """Say the conditions that one row states, "" where it states none."""
    parts = []
    for name, values in columns.numeric.items():
        low = float(values[row])
        high = low if columns_hi is None else float(columns_hi.numeric[name][row])
        unit = columns.units.get(name, "")
        if low != high:
            parts.append(range_words(name, low, high, unit))
        elif low == low:
            parts.append(value_words(name, low, unit))
    parts += [word_words(name, column.word(row)) for name, column in columns.text.items() if column.word(row)]
    return ", ".join(parts)


def range_words(name: str, low: float, high: float, unit: str) -> str:
    """Say a range: "27.5 to 30 GHz", "-40 to +85 °C ambient"."""
    first = _quantity(name, low, "") if _unit_sign(unit) else _quantity(name, low, unit)
    return _phrased(name, f"{_signed(name, low, unit, first)} to {_quantity(name, high, unit)}")


def dimension_words(dimension: Dimension) -> str:
    """Say what a dimension asks: "27.5, 28.75, 30 GHz (± 0.01 GHz)", "humidity not required"."""
    name = dimension.name
    known = known_dimension(name)
    title = known.title if known else name.replace("_", " ")
    if dimension.need is Need.ANY:
        return f"any {title}"
    if dimension.need is Need.NOT_REQUIRED:
        return f"{title} not required"
    excused = "".join(f", {what} not required" for what in dimension.excused)
    if dimension.words:
        return _phrased(name, ", ".join(dimension.words)) + excused
    if dimension.span is not None:
        what = range_words(name, dimension.span.low, dimension.span.high, dimension.unit)
    else:
        *others, last = dimension.values
        first = [_signed(name, value, dimension.unit, _quantity(name, value, "")) for value in others]
        what = _phrased(name, ", ".join([*first, _quantity(name, last, dimension.unit)]))
    return what + _setting_words(dimension) + excused


def set_words(conditions: ConditionsSet) -> str:
    """Say a conditions set in one sentence, without counting its points."""
    if not conditions.dimensions:
        return "any conditions"
    spoken = "; ".join(dimension_words(dimension) for dimension in conditions.dimensions)
    several = sum(one.need is Need.REQUIRED for one in conditions.dimensions) > 1
    combined = f" ({_combination_words(conditions)})" if several else ""
    excluded = "".join(f"; except {exclusion_words(one)}" for one in conditions.exclusions)
    return f"{spoken}{combined}{excluded}"


def exclusion_words(exclusion: Exclusion) -> str:
    """Say an exclusion as it was typed, or by its clauses."""
    if exclusion.text:
        return exclusion.text
    parts = []
    for clause in exclusion.clauses:
        listed = [*clause.words, *(format_value(value) for value in clause.values)]
        low = (
            "" if clause.low is None else f"{'>' if clause.low_is_open else '>='} {format_value(clause.low)}"
        )
        high = (
            ""
            if clause.high is None
            else f"{'<' if clause.high_is_open else '<='} {format_value(clause.high)}"
        )
        bounds = " and ".join(bound for bound in (low, high) if bound)
        parts.append(f"{clause.dimension} {bounds or '= ' + ' or '.join(listed)}")
    return " and ".join(parts)


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
        step = _quantity(name, points.step[name], unit, signed=False)
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


def _off(points: Points, place: int, point: int, records: Columns) -> NDArray[np.float64]:
    """Return how far each record is from serving one axis of a point: 0 where it does, inf where it cannot be
    told.
    """
    axis = points.axes[place]
    seen = axis.read(records)
    if seen is None:
        return np.full(records.size, np.inf)
    code = np.full(records.size, points.codes[place][point])
    served = np.isfinite(axis.closeness(seen, code))
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
    parts = []
    for name in points.axes[place].names:
        parts.append(_mismatch_of(points, name, point, records, row))
    told = [part for part in parts if part]
    return "; ".join(told) or "the direction is off"


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
    asked = value_words(name, low, unit) if low == high else range_words(name, low, high, unit)
    actual = recorded_numbers(records, name, unit)
    if actual is None or actual[row] != actual[row]:
        note = recording_note(records, name, unit) if actual is None else ""
        return note or _unstated_words(name, asked, records)
    value = float(actual[row])
    if low <= value <= high:
        return ""
    away = low - value if value < low else value - high
    allowed = _allowed_words(points, name)
    relation = "is not within" if low != high else "is not"
    return (
        f"{value_words(name, value, unit)} {relation} {asked} (off by {_difference(away, unit)}, {allowed})"
    )


def _allowed_words(points: Points, name: str) -> str:
    dimension = points.conditions.dimension(name)
    if dimension is None or dimension.tolerance == 0:
        return "no setting tolerance stated"
    if dimension.tolerance_is_percent:
        return f"{format_value(dimension.tolerance)} % allowed"
    return f"{_difference(dimension.tolerance, dimension.unit)} allowed"


def _unstated_words(name: str, asked: str, records: Columns) -> str:
    located = [other for other in records.names if other.startswith("temperature_") and other != name]
    if name.startswith("temperature_") and located:
        return f"{asked} is asked, the record states {located[0]}: unlike places need a condition map"
    if name.startswith("temperature_") and any(is_unlocated_temperature(other) for other in records.names):
        return f"{asked} is asked, the record does not say whose temperature it states"
    known = find_dimension(name)
    return (
        f"{asked} is asked, the record does not state the {known.title if known else name.replace('_', ' ')}"
    )


def _combination_words(conditions: ConditionsSet) -> str:
    if conditions.combination is Combination.LISTED and conditions.listed:
        return f"{conditions.combination.value} of {' and '.join(conditions.listed)}, with all others"
    return conditions.combination.value


def _setting_words(dimension: Dimension) -> str:
    parts = []
    if dimension.span is not None and dimension.span.step is not None:
        parts.append(f"gaps up to {_difference(dimension.span.step, dimension.unit)}")
    if dimension.rule is not MatchingRule.WITHIN:
        parts.append(dimension.rule.value)
    if dimension.tolerance_is_percent:
        parts.append(f"± {format_value(dimension.tolerance)} %")
    elif dimension.tolerance:
        parts.append(f"± {_difference(dimension.tolerance, dimension.unit)}")
    elif dimension.rule is MatchingRule.WITHIN and dimension.span is None:
        parts.append("exact")
    return f" ({', '.join(parts)})" if parts else ""


def _difference(value: float, unit: str) -> str:
    if not unit:
        return format_value(value)
    sign = format_unit(tolerance_unit(parse_unit(unit)))
    return f"{format_value(value)}{'°' if sign == 'deg' else ' ' + sign}"


def _quantity(name: str, value: float, unit: str, *, signed: bool = True) -> str:
    number = format_value(value)
    if signed:
        number = _signed(name, value, unit, number)
    return f"{number}{_unit_sign(unit)}"


def _signed(name: str, value: float, unit: str, number: str) -> str:
    """Write the plus of a temperature in °C, as people do."""
    celsius = name.startswith("temperature_") and unit == "°C"
    return f"+{number}" if celsius and value > 0 and not number.startswith("+") else number


def _unit_sign(unit: str) -> str:
    return "°" if unit == "deg" else f" {unit}" if unit and unit != "1" else ""


def _phrased(name: str, what: str) -> str:
    known = known_dimension(name)
    if known is None:
        return f"{name.replace('_', ' ')} {what}"
    return known.phrase.format(what) if known.phrase else what
