"""The inputs of a limit at each reading: as the required point has them, else as recorded."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

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
    limit: Limit, points: Points, records: Columns | None, record: Rows, point: Rows
) -> Columns:
    """Return the inputs of the limit for each pair: as the point requires, else as recorded."""
    if is_plain(limit):
        return Columns(len(record))
    numeric: dict[str, NDArray[np.float64]] = {}
    text: dict[str, TextColumn] = {}
    units: dict[str, str] = {}
    for name in tree_names(limit.tree):
        columns, rows = (points.columns_lo, point) if _fixed(points, name) else (records, record)
        if columns is None:
            continue
        if name in columns.numeric:
            numeric[name] = columns.numeric[name][rows]
            units[name] = columns.units.get(name, "")
        elif name in columns.text:
            text[name] = columns.text[name].take(rows.astype(np.intp))
    return Columns(len(record), numeric, text, units)


def _fixed(points: Points, name: str) -> bool:
    """Whether each point requires one value of that dimension."""
    low, high = points.columns_lo, points.columns_hi
    if name in low.text:
        return True
    return name in low.numeric and (low is high or np.array_equal(low.numeric[name], high.numeric[name]))
