"""Building the axes of a conditions set from its dimensions."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.axes import Axis, Extent, Floats, NumericAxis, TextAxis, slack
from specflow.conditions.dictionary import DirectionPair
from specflow.conditions.dimensions import direction_pair, is_periodic, word_key
from specflow.conditions.directions import ANGLE_UNIT, CutAxis, DirectionAxis, direction_vectors
from specflow.conditions.recorded import conversion
from specflow.errors import ConditionsError
from specflow.model.columns import Columns
from specflow.model.conditions import Combination, ConditionsSet, Dimension, MatchingRule, Span

Codes = NDArray[np.int64]
FULL_TURN = 360.0


def single_axis(conditions: ConditionsSet, group: Sequence[Dimension]) -> Axis:
    """Return the axis of a dimension that varies by itself, or of a direction (polar and turn)."""
    corners = conditions.combination is Combination.CORNERS
    if len(group) == 2:
        return _direction_axis(conditions, group[0], group[1], corners)
    dimension = group[0]
    if dimension.words:
        return TextAxis(dimension.name, _distinct_words(dimension))
    if dimension.span is not None and not (corners and dimension.rule is not MatchingRule.ANYWHERE):
        return _span_axis(conditions, dimension, dimension.span)
    return _value_axis(conditions, dimension, _single_values(dimension, corners))


def listed_axes(conditions: ConditionsSet, group: Sequence[Dimension]) -> tuple[tuple[Axis, ...], Codes]:
    """Return the axes of dimensions listed row by row, and their codes (axes, rows), equal rows merged."""
    rows = max(len(one.values) or len(one.words) for one in group)
    present = {one.name: one for one in group}
    axes: list[Axis] = []
    codes: list[Codes] = []
    for dimension in group:
        pair = direction_pair(dimension.name)
        if pair is not None and pair.polar in present and pair.turn in present:
            if dimension.name == pair.polar:
                axis, code = _listed_directions(
                    conditions, pair, present[pair.polar], present[pair.turn], rows
                )
                axes.append(axis)
                codes.append(code)
            continue
        axis, code = _listed_values(conditions, dimension, rows)
        axes.append(axis)
        codes.append(code)
    table = np.stack(codes)
    _, first = np.unique(table, axis=1, return_index=True)
    return tuple(axes), table[:, np.sort(first)]


def axis_columns(axes: Sequence[Axis], codes: Codes) -> tuple[Columns, Columns]:
    """Return the required conditions of points as columns: low ends and high ends, one object where there is
    no range.
    """
    lows, highs = [], []
    for axis, code in zip(axes, codes, strict=True):
        low, high = axis.ends(code)
        lows.append(low)
        highs.append(high)
    low = _joined(lows, codes.shape[1])
    same = all(one is other for one, other in zip(lows, highs, strict=True))
    return low, low if same else _joined(highs, codes.shape[1])


def _joined(parts: Sequence[Columns], size: int) -> Columns:
    numeric = {name: values for part in parts for name, values in part.numeric.items()}
    text = {name: column for part in parts for name, column in part.text.items()}
    units = {name: unit for part in parts for name, unit in part.units.items()}
    return Columns(size, numeric, text, units)


def _distinct_words(dimension: Dimension) -> tuple[str, ...]:
    return tuple({word_key(dimension.name, word): word for word in reversed(dimension.words)}.values())[::-1]


def _single_values(dimension: Dimension, corners: bool) -> Floats:
    values = dimension.values if dimension.span is None else (dimension.span.low, dimension.span.high)
    return np.array([min(values), max(values)] if corners else values, np.float64)


def _tolerances(dimension: Dimension, values: Floats) -> Floats:
    if dimension.tolerance_is_percent:
        return np.abs(values) * dimension.tolerance / 100
    return np.full(len(values), dimension.tolerance)


def _value_axis(conditions: ConditionsSet, dimension: Dimension, typed: Floats) -> NumericAxis:
    period = _period(conditions, dimension)
    wrapped = np.mod(typed, period) if period else typed
    values, first = np.unique(wrapped, return_index=True)
    tolerances = _tolerances(dimension, values)
    forgiven = slack(values, tolerances)
    low, high = values - tolerances - forgiven, values + tolerances + forgiven
    scale = float(np.max(tolerances)) or float(np.max(forgiven)) or 1.0
    rule = dimension.rule
    if rule is not MatchingRule.WITHIN:
        if period:
            raise ConditionsError(
                f"{dimension.name} goes round: nothing lies beyond", where=str(conditions.id)
            )
        spread = float(values[-1] - values[0]) or 1.0
        scale = float(np.max(tolerances)) or spread
    if rule in (MatchingRule.AT_OR_ABOVE, MatchingRule.OUTWARD):
        high[-1 if rule is MatchingRule.OUTWARD else slice(None)] = np.inf
    if rule in (MatchingRule.AT_OR_BELOW, MatchingRule.OUTWARD):
        low[0 if rule is MatchingRule.OUTWARD else slice(None)] = -np.inf
    return NumericAxis(dimension.name, dimension.unit, values, typed[first], low, high, scale, period)


def _span_axis(conditions: ConditionsSet, dimension: Dimension, span: Span) -> NumericAxis:
    period = _period(conditions, dimension)
    extent = _extent(conditions, dimension, span, period)
    ends = np.array([span.low, span.high])
    reach = dimension.tolerance + slack(ends, np.full(2, dimension.tolerance))
    low, high = ends[:1] - reach[:1], ends[1:] + reach[1:]
    if dimension.rule in (MatchingRule.AT_OR_ABOVE, MatchingRule.OUTWARD):
        high = np.array([np.inf])
    if dimension.rule in (MatchingRule.AT_OR_BELOW, MatchingRule.OUTWARD):
        low = np.array([-np.inf])
    middle = np.array([(span.low + span.high) / 2])
    return NumericAxis(
        dimension.name, dimension.unit, middle, middle, low, high, span.high - span.low, period, extent
    )


def _period(conditions: ConditionsSet, dimension: Dimension) -> float:
    """Return a full turn in the unit of the dimension, 0 for one that does not go round."""
    if not is_periodic(dimension.name):
        return 0.0
    step = conversion(ANGLE_UNIT, dimension.unit)
    if isinstance(step, str):
        raise ConditionsError(f"{dimension.name} is an angle: {step}", where=str(conditions.id))
    return float(step(FULL_TURN))


def _extent(conditions: ConditionsSet, dimension: Dimension, span: Span, period: float) -> Extent:
    ends = np.array([span.low, span.high])
    forgiven = dimension.tolerance + slack(ends, np.full(2, dimension.tolerance))
    rounding = 1e-14 * float(np.max(np.abs(ends)))
    gap = None if span.step is None else span.step * (1 + 1e-9) + rounding
    width = span.high - span.low
    if period and (
        width > period * (1 + 1e-12) or dimension.rule not in (MatchingRule.WITHIN, MatchingRule.ANYWHERE)
    ):
        raise ConditionsError(
            f"{dimension.name} goes round: its range is at most one turn, with nothing beyond",
            where=str(conditions.id),
        )
    turn = period if period and width > period * (1 - 1e-12) else 0.0
    return Extent(
        span.low, span.high, float(span.low + forgiven[0]), float(span.high - forgiven[1]), gap, turn
    )


def _in_degrees(conditions: ConditionsSet, dimension: Dimension) -> Dimension:
    """Return the half of a direction in degrees, after checking that it says what a direction can."""
    where = str(conditions.id)
    if dimension.rule is not MatchingRule.WITHIN or dimension.tolerance_is_percent or dimension.words:
        raise ConditionsError(
            f"{dimension.name} is half of a direction, which is matched within an angle",
            where=where,
            hint="state a tolerance in degrees and no other rule, or say 'any' for the other angle",
        )
    if dimension.unit == ANGLE_UNIT:
        return dimension
    step = conversion(dimension.unit, ANGLE_UNIT)
    if isinstance(step, str):
        raise ConditionsError(f"{dimension.name} is an angle: {step}", where=where)
    degrees = step  # a name of its own, so that the closure below keeps the narrowed type

    def turned(value: float) -> float:
        return float(degrees(value))

    span = dimension.span
    if span is not None:
        gap = None if span.step is None else turned(span.step)
        span = Span(low=turned(span.low), high=turned(span.high), step=gap)
    changes = {
        "unit": ANGLE_UNIT,
        "values": tuple(map(turned, dimension.values)),
        "span": span,
        "tolerance": turned(dimension.tolerance),
    }
    return dimension.model_copy(update=changes)


def _direction_tolerance(conditions: ConditionsSet, polar: Dimension, turn: Dimension) -> float:
    stated = {one.tolerance for one in (polar, turn) if one.tolerance > 0}
    if len(stated) > 1:
        raise ConditionsError(
            f"{polar.name} and {turn.name} are compared as one direction, but their tolerances differ",
            where=str(conditions.id),
            hint=f"give the tolerance once, at {polar.name}: it is an angle on the sphere",
        )
    return max(stated, default=0.0)


def _direction_axis(conditions: ConditionsSet, polar: Dimension, turn: Dimension, corners: bool) -> Axis:
    polar, turn = _in_degrees(conditions, polar), _in_degrees(conditions, turn)
    tolerance = _direction_tolerance(conditions, polar, turn)
    pair = direction_pair(polar.name)
    assert pair is not None, "grouped as a direction"
    if (polar.span or turn.span) and not corners:
        return _cut_axis(conditions, pair, polar, turn, tolerance)
    first, second = (_single_values(one, corners) for one in (polar, turn))
    every = np.meshgrid(first, second, indexing="ij")
    axis, _ = _directions(pair, every[0].ravel(), every[1].ravel(), tolerance)
    return axis


def _directions(
    pair: DirectionPair, polar: Floats, turn: Floats, tolerance: float
) -> tuple[DirectionAxis, Codes]:
    """Return the distinct directions of a list, in order, and the code of each entry: boresight has one,
    whatever φ.
    """
    keys = np.round(direction_vectors(pair, polar, turn), 9) + 0.0
    _, first, inverse = np.unique(keys, axis=0, return_index=True, return_inverse=True)
    order = np.argsort(first)
    rank = np.empty(len(order), np.int64)
    rank[order] = np.arange(len(order))
    kept = first[order]
    return DirectionAxis(pair, polar[kept], turn[kept], tolerance), rank[inverse.ravel()]


def _cut_axis(
    conditions: ConditionsSet, pair: DirectionPair, polar: Dimension, turn: Dimension, tolerance: float
) -> CutAxis:
    around = turn.span is not None
    ranged, fixed = (turn, polar) if around else (polar, turn)
    span = ranged.span
    if span is None or fixed.span is not None:
        raise ConditionsError(
            f"{polar.name} and {turn.name} are both ranges, and a range is proved along one angle only",
            where=str(conditions.id),
            hint=f"list the cuts: the required values of {turn.name}",
        )
    if around and any(
        abs(np.sin(np.radians(90 * pair.polar_from_equator - at))) < 1e-9 for at in fixed.values
    ):
        raise ConditionsError(
            f"at the pole of {pair.polar} the angle {pair.turn} is free: a range of it asks nothing there",
            where=str(conditions.id),
        )
    extent = _extent(conditions, ranged.model_copy(update={"tolerance": tolerance}), span, FULL_TURN)
    at = np.array(list(dict.fromkeys(fixed.values)), np.float64)
    return CutAxis(pair, at, tolerance, extent, around)


def _listed_directions(
    conditions: ConditionsSet, pair: DirectionPair, polar: Dimension, turn: Dimension, rows: int
) -> tuple[Axis, Codes]:
    polar, turn = _in_degrees(conditions, polar), _in_degrees(conditions, turn)
    tolerance = _direction_tolerance(conditions, polar, turn)
    values = [np.broadcast_to(np.array(one.values, np.float64), rows) for one in (polar, turn)]
    return _directions(pair, values[0], values[1], tolerance)


def _listed_values(conditions: ConditionsSet, dimension: Dimension, rows: int) -> tuple[Axis, Codes]:
    if dimension.words:
        words = TextAxis(dimension.name, _distinct_words(dimension))
        place = {word_key(dimension.name, word): code for code, word in enumerate(words.words)}
        codes = np.array([place[word_key(dimension.name, word)] for word in dimension.words], np.int64)
        return words, np.broadcast_to(codes, rows)
    typed = np.array(dimension.values, np.float64)
    axis = _value_axis(conditions, dimension, typed)
    codes = axis.values.searchsorted(np.mod(typed, axis.period) if axis.period else typed)
    return axis, np.broadcast_to(codes.astype(np.int64), rows)
