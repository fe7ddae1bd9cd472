"""Conditions in words: points, sets, and what keeps a record from serving a point."""

from __future__ import annotations

import math
from collections.abc import Sequence
from functools import lru_cache

from specflow.conditions.dimensions import known_dimension
from specflow.conditions.points import Points
from specflow.model.columns import Columns
from specflow.model.conditions import Combination, ConditionsSet, Dimension, Exclusion, MatchingRule, Need
from specflow.units import format_unit, format_value, parse_unit, tolerance_unit


@lru_cache(maxsize=4096)  # many points of many sets share few values
def value_words(name: str, value: float, unit: str) -> str:
    """Say one value of a dimension: "29.5 GHz", "+85 °C ambient", "θ 30°", "supply 5 V"."""
    return _phrased(name, quantity_words(name, value, unit))


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
        if low == high:
            parts.append(value_words(name, low, unit))
        elif not math.isnan(low):
            parts.append(range_words(name, low, high, unit))
    parts += [word_words(name, column.word(row)) for name, column in columns.text.items() if column.word(row)]
    return ", ".join(parts)


def range_words(name: str, low: float, high: float, unit: str) -> str:
    """Say a range: "27.5 to 30 GHz", "-40 to +85 °C ambient"."""
    first = quantity_words(name, low, "") if _unit_sign(unit) else quantity_words(name, low, unit)
    return _phrased(name, f"{_signed(name, low, unit, first)} to {quantity_words(name, high, unit)}")


def ends_words(name: str, low: Columns, high: Columns, row: int) -> str:
    """Say what one row asks of a dimension, one value or a range."""
    first, last = float(low.numeric[name][row]), float(high.numeric[name][row])
    unit = low.units.get(name, "")
    return value_words(name, first, unit) if first == last else range_words(name, first, last, unit)


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
        what = _values_words(dimension, dimension.values)
    return what + _setting_words(dimension) + excused


def _values_words(dimension: Dimension, values: Sequence[float]) -> str:
    name, unit = dimension.name, dimension.unit
    *others, last = values
    first = [_signed(name, value, unit, quantity_words(name, value, "")) for value in others]
    return _phrased(name, ", ".join([*first, quantity_words(name, last, unit)]))


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


def _combination_words(conditions: ConditionsSet) -> str:
    if conditions.combination is Combination.LISTED and conditions.listed:
        return f"{conditions.combination.value} of {' and '.join(conditions.listed)}, with all others"
    if conditions.combination is Combination.CORNERS:
        between = [words for one in conditions.dimensions if (words := _between_corners(one))]
        skipped = f"; no point at {' nor at '.join(between)}" if between else ""
        return f"corners: lowest and highest of each{skipped}"
    return conditions.combination.value


def _between_corners(dimension: Dimension) -> str:
    """Say the listed values that corners pass over, "" where there is none."""
    inner = [value for value in dimension.values if min(dimension.values) < value < max(dimension.values)]
    if dimension.need is not Need.REQUIRED or not inner:
        return ""
    return _values_words(dimension, inner)


def _setting_words(dimension: Dimension) -> str:
    parts = []
    if dimension.span is not None and dimension.span.step is not None:
        parts.append(f"gaps up to {difference_words(dimension.span.step, dimension.unit)}")
    if dimension.rule is not MatchingRule.WITHIN:
        parts.append(dimension.rule.value)
    if dimension.tolerance_is_percent:
        parts.append(f"± {format_value(dimension.tolerance)} %")
    elif dimension.tolerance:
        parts.append(f"± {difference_words(dimension.tolerance, dimension.unit)}")
    elif dimension.rule is MatchingRule.WITHIN and dimension.span is None:
        parts.append("exact")
    return f" ({', '.join(parts)})" if parts else ""


def difference_words(value: float, unit: str) -> str:
    """Say a difference of values in ``unit``: "2 K" for °C, "3 dB" for dBm, "5°" for deg."""
    if not unit:
        return format_value(value)
    sign = format_unit(tolerance_unit(parse_unit(unit)))
    return f"{format_value(value)}{'°' if sign == 'deg' else ' ' + sign}"


def quantity_words(name: str, value: float, unit: str, *, signed: bool = True) -> str:
    """Say a value with its unit, a temperature in °C with its sign."""
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
