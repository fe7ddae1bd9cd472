"""The plain definition of matching and of range proof: every record against every point, in ordinary loops."""

from __future__ import annotations

import itertools
import math
from collections.abc import Sequence

from specflow.conditions import Points
from specflow.model.columns import Columns
from specflow.model.conditions import MatchingRule


def _serves(
    required: float, actual: float, tolerance: float, rule: MatchingRule, lowest: bool, highest: bool
) -> bool:
    if math.isnan(actual):
        return False
    upward = rule is MatchingRule.AT_OR_ABOVE or (rule is MatchingRule.OUTWARD and highest)
    downward = rule is MatchingRule.AT_OR_BELOW or (rule is MatchingRule.OUTWARD and lowest)
    forgiven = (1e-9 * tolerance if tolerance else 1e-9 * abs(required)) + 1e-14 * abs(required)
    if upward and actual >= required:
        return True
    if downward and actual <= required:
        return True
    return abs(actual - required) <= tolerance + forgiven


def serving(points: Points, records: Columns) -> list[list[tuple[int, float]]]:
    """For each record the points that it may serve, with the distance (root of squares in tolerances)."""
    low = points.columns_lo
    dimensions = {one.name: one for one in points.conditions.dimensions}
    extremes = {name: (min(dimensions[name].values), max(dimensions[name].values)) for name in low.numeric}
    found: list[list[tuple[int, float]]] = []
    for record in range(records.size):
        candidates = []
        for point in range(points.size):
            total = 0.0
            for name, required_values in low.numeric.items():
                dimension = dimensions[name]
                required = float(required_values[point])
                actual = float(records.numeric[name][record]) if name in records.numeric else math.nan
                tolerance = dimension.tolerance * (
                    abs(required) / 100 if dimension.tolerance_is_percent else 1
                )
                ends = extremes[name]
                if not _serves(
                    required, actual, tolerance, dimension.rule, required == ends[0], required == ends[1]
                ):
                    break
                largest = dimension.tolerance
                if dimension.tolerance_is_percent:
                    largest *= max(abs(ends[0]), abs(ends[1])) / 100
                if largest:
                    total += ((actual - required) / largest) ** 2
                elif dimension.rule is not MatchingRule.WITHIN:
                    total += ((actual - required) / ((ends[1] - ends[0]) or 1.0)) ** 2
            else:
                for name, column in low.text.items():
                    stated = records.text[name].word(record) if name in records.text else ""
                    if stated.casefold() != column.word(point).casefold():
                        break
                else:
                    candidates.append((point, total))
        found.append(candidates)
    return found


def direction(theta: float, phi: float) -> tuple[float, float, float]:
    """Unit vector of a direction in degrees."""
    across = math.sin(math.radians(theta))
    return (
        across * math.cos(math.radians(phi)),
        across * math.sin(math.radians(phi)),
        math.cos(math.radians(theta)),
    )


def great_circle(one: Sequence[float], other: Sequence[float]) -> float:
    """Angle in degrees by the two-argument arc tangent of |u x v| and u.v."""
    x = one[1] * other[2] - one[2] * other[1]
    y = one[2] * other[0] - one[0] * other[2]
    z = one[0] * other[1] - one[1] * other[0]
    dot = sum(a * b for a, b in zip(one, other, strict=True))
    return math.degrees(math.atan2(math.sqrt(x * x + y * y + z * z), dot))


def range_is_proved(low: float, high: float, tolerance: float, step: float, values: Sequence[float]) -> bool:
    """A range is proved when both ends are reached and no gap between neighbours exceeds the step."""
    inside = sorted(value for value in values if low - tolerance <= value <= high + tolerance)
    if not inside or (abs(inside[0] - low) > tolerance and inside[0] > low):
        return False
    if abs(inside[-1] - high) > tolerance and inside[-1] < high:
        return False
    return all(second - first <= step for first, second in itertools.pairwise(inside))
