"""A required point as rows of a test sheet: the conditions of each row, and the bounds of a limit there in words."""

from __future__ import annotations

import math
from collections.abc import Container, Sequence
from itertools import product

import numpy as np

from specflow.conditions import Points, find_dimension, known_dimension, map_columns
from specflow.limits.tree import tree_names
from specflow.model.bench_sheet import BenchCondition
from specflow.model.columns import Columns, TextColumn
from specflow.model.conditions import ConditionMap
from specflow.model.limit import Limit
from specflow.units import format_value

MOST_OF_A_RANGE = (
    101  # rows; a range with more values is measured as a trace and attached as a file of its own
)


def conditions_at(points: Points | None, place: int) -> list[tuple[BenchCondition, ...]] | str:
    """The conditions of the rows that a point needs: one, or one a step of a range; a sentence where they are too many.

    A range is proved when both its ends are reached and no gap exceeds its step, so its rows are the ends and what lies
    between, a step apart.
    """
    if points is None:
        return [()]
    parts: list[list[BenchCondition]] = []
    for name, values in points.columns_lo.numeric.items():
        low, high = float(values[place]), float(points.columns_hi.numeric[name][place])
        unit = points.columns_lo.units.get(name, "")
        if math.isnan(low):
            continue
        if low == high:
            parts.append([BenchCondition(dimension=name, unit=unit, value=low)])
        elif name in points.step:
            steps = _steps(low, high, points.step[name])
            if len(steps) > MOST_OF_A_RANGE:
                span = f"{format_value(low)} to {format_value(high)} {unit}".strip()
                return f"{name.replace('_', ' ')} {span} has {len(steps)} values, too many to be filled in"
            parts.append([BenchCondition(dimension=name, unit=unit, value=value) for value in steps])
        else:
            parts.append([BenchCondition(dimension=name, unit=unit, low=low, high=high)])
    for name, words in points.columns_lo.text.items():
        if words.word(place):
            parts.append([BenchCondition(dimension=name, word=words.word(place))])
    return [tuple(one) for one in product(*parts)]


def inputs_to_note(
    limit: Limit, conditions: Sequence[BenchCondition], declared: Container[str]
) -> list[BenchCondition]:
    """Return what a limit depends on and its conditions do not say: the bench writes down what it was.

    A limit that holds above a power level cannot be judged for a value that does not state its level.
    """
    known = {one.dimension for one in conditions}
    noted: dict[str, BenchCondition] = {}
    for name in sorted(tree_names(limit.tree)):
        dimension = None if name in declared or name in known else find_dimension(name)
        if dimension is not None and dimension.name not in known:
            noted[dimension.name] = BenchCondition(dimension=dimension.name, unit=dimension.unit)
    return list(noted.values())


def recorded_columns(conditions: Sequence[BenchCondition]) -> Columns:
    """The conditions of one row as they would be recorded."""
    return Columns(
        1,
        {one.dimension: np.array([one.value]) for one in conditions if one.value is not None},
        {one.dimension: TextColumn.of([one.word]) for one in conditions if one.word},
        {one.dimension: one.unit for one in conditions if one.value is not None},
    )


def at_block_words(condition_map: ConditionMap | None, conditions: Sequence[BenchCondition]) -> str:
    """Say what the conditions of a row come to at the block itself; "" where no map says it.

    A row is stated in the terms of its requirement. Who sets the block up alone needs its own: 2 GHz of the system may
    be 140 MHz of an intermediate frequency.
    """
    if condition_map is None:
        return ""
    own = map_columns(condition_map, recorded_columns(conditions))
    said = []
    for entry in condition_map.entries:
        if (found := own.numeric.get(entry.target)) is not None and np.isfinite(found[0]):
            known = known_dimension(entry.target)
            name = known.title if known else entry.target.replace("_", " ")
            said.append(
                f"{name} {format_value(float(f'{found[0]:.9g}'))} {own.units.get(entry.target, '')}".strip()
            )
    return "; ".join(said)


def _steps(low: float, high: float, step: float) -> list[float]:
    """Both ends, and between them values a step apart (the last gap may be smaller)."""
    count = max(math.ceil((high - low) / step - 1e-9), 1)
    return [*(float(f"{low + number * step:.12g}") for number in range(count)), high]


def bounds_words(low: float, high: float, strict: tuple[bool, bool], unit: str) -> str:
    """Say the bounds at one point; six digits, which is more than a bench can tell apart."""
    low, high = (float(f"{bound:.6g}") for bound in (low, high))
    sign = "" if unit in ("", "1") else f" {unit}"
    if math.isfinite(low) and math.isfinite(high):
        between = f"{format_value(low)} to {format_value(high)}{sign}"
        return between if not any(strict) else f"between {between}"
    if math.isfinite(low):
        return f"{'more than' if strict[0] else 'at least'} {format_value(low)}{sign}"
    return f"{'less than' if strict[1] else 'at most'} {format_value(high)}{sign}"
