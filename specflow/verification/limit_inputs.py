"""The inputs of a limit at each reading: as the required point has them, else as recorded."""

from __future__ import annotations

from collections import Counter
from collections.abc import Container, Iterable, Sequence

import numpy as np
from numpy.typing import NDArray

from specflow.conditions import find_dimension
from specflow.conditions.points import Points
from specflow.limits.tree import tree_names
from specflow.model.columns import Columns, TextColumn
from specflow.model.expression import Negative, Number
from specflow.model.limit import Between, Bound, Limit

Rows = NDArray[np.intp]


def is_plain(limit: Limit) -> bool:
    """Whether the limit is one or two plain numbers, which need no input."""
    match limit.tree:
        case Bound(value=Number(unit="")) | Bound(value=Negative(operand=Number(unit=""))):
            return True
        case Between(lower=Number(unit=""), upper=Number(unit="")):
            return True
    return False


def limit_columns(
    limit: Limit,
    points: Points,
    records: Columns | None,
    record: Rows,
    point: Rows,
    declared: Container[str] = (),
) -> Columns:
    """Return the inputs of the limit for each pair: as the point requires, else as recorded.

    A limit may spell a dimension in its own way (f, bw, f_offset); names in ``declared`` mean those values.
    """
    if is_plain(limit):
        return Columns(len(record))
    return columns_of(tree_names(limit.tree), points, records, record, point, declared)


def columns_of(
    names: Iterable[str],
    points: Points,
    records: Columns | None,
    record: Rows,
    point: Rows,
    declared: Container[str] = (),
) -> Columns:
    """Return the conditions of these names for each pair: as the point requires, else as recorded."""
    numeric: dict[str, NDArray[np.float64]] = {}
    text: dict[str, TextColumn] = {}
    units: dict[str, str] = {}
    stated = [columns for columns in (points.columns_lo, records) if columns is not None]
    for name, held in _held_as(names, stated, declared).items():
        columns, rows = (points.columns_lo, point) if _fixed(points, held) else (records, record)
        if columns is None:
            continue
        if held in columns.numeric:
            numeric[name] = columns.numeric[held][rows]
            units[name] = columns.units.get(held, "")
        elif held in columns.text:
            text[name] = columns.text[held].take(rows.astype(np.intp))
    return Columns(len(record), numeric, text, units)


def named_by_points(name: str, limit: Limit, points: Points, declared: Container[str] = ()) -> bool:
    """Whether the conditions set requires values or a range of what a limit calls by that name."""
    held = _held_as(tree_names(limit.tree), [points.columns_lo], declared).get(name, name)
    return any(held in axis.names for axis in points.axes)


def _held_as(names: Iterable[str], stated: Sequence[Columns], declared: Container[str]) -> dict[str, str]:
    """Return, for each name of a limit, the column it is held in: its own, else that of the dimension it spells.

    Two names that spell one dimension (3GPP's f_offset and delta_f) differ in a way that no record says; neither is
    read as it.
    """
    held = {}
    for name in names:
        known = None if name in declared else find_dimension(name)
        own = any(name in columns.numeric or name in columns.text for columns in stated)
        held[name] = name if own or known is None else known.name
    counts = Counter(held.values())
    return {name: column if counts[column] == 1 else name for name, column in held.items()}


def _fixed(points: Points, name: str) -> bool:
    """Whether each point requires one value of that dimension."""
    low, high = points.columns_lo, points.columns_hi
    if name in low.text:
        return True
    return name in low.numeric and (low is high or np.array_equal(low.numeric[name], high.numeric[name]))
