"""Required points: a conditions set expanded and compiled for matching."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.axes import Axis, NumericAxis
from specflow.conditions.directions import CutAxis
from specflow.model.columns import Columns
from specflow.model.conditions import ConditionsSet

Codes = NDArray[np.int64]

LARGEST_KEY = 1 << 40
_LARGEST_TABLE = 1 << 22


def is_range(axis: NumericAxis | CutAxis) -> bool:
    """Whether proof along this axis asks for ends and gaps."""
    return axis.extent is not None and axis.extent.largest_gap is not None


@dataclass(frozen=True, eq=False)
class Points:
    """The required points of a conditions set.

    ``axes`` and ``codes`` (axes, size) say which required value of each axis a point has. ``columns_lo`` and
    ``columns_hi`` give the same as conditions, equal except for ranges. ``step`` holds the largest allowed
    gap of the dimension that is a range. ``excluded`` counts the combinations that each exclusion took away.
    """

    conditions: ConditionsSet
    size: int
    axes: tuple[Axis, ...]
    codes: Codes
    columns_lo: Columns
    columns_hi: Columns
    step: dict[str, float]
    excluded: tuple[int, ...] = ()

    @cached_property
    def strides(self) -> tuple[int, ...]:
        """What each axis counts in the key of a point, the last axis fastest."""
        strides, stride = [], 1
        for axis in reversed(self.axes):
            strides.append(stride)
            stride *= axis.size
        return tuple(reversed(strides))

    @cached_property
    def key_count(self) -> int:
        """How many combinations of axis values there are, required or not."""
        count = 1
        for axis in self.axes:
            count *= axis.size
        return count

    @cached_property
    def keys(self) -> Codes:
        """The key of every point. Only where ``key_count`` is below LARGEST_KEY."""
        keys = np.zeros(self.size, np.int64)
        for codes, stride in zip(self.codes, self.strides, strict=True):
            keys += codes * stride
        return keys

    @cached_property
    def is_full(self) -> bool:
        """Whether every combination of axis values is a point, so that a key is the point's number."""
        return self.size == self.key_count and bool(np.all(self.keys == np.arange(self.size)))

    @cached_property
    def _table(self) -> NDArray[np.int32] | None:
        if self.key_count > max(_LARGEST_TABLE, 4 * self.size):
            return None
        table = np.full(self.key_count, -1, np.int32)
        table[self.keys] = np.arange(self.size, dtype=np.int32)
        return table

    @cached_property
    def _sorted_keys(self) -> tuple[Codes, NDArray[np.intp]]:
        order = np.argsort(self.keys, kind="stable")
        return self.keys[order], order

    def at_keys(self, keys: Codes) -> NDArray[np.int32]:
        """Return the number of the point with each key, -1 where no point is required."""
        if self.is_full:
            return keys.astype(np.int32)
        if self._table is not None:
            return self._table[keys]
        known, order = self._sorted_keys
        place = np.minimum(known.searchsorted(keys), self.size - 1)
        return np.where(known[place] == keys, order[place], -1).astype(np.int32)

    @cached_property
    def range_axis(self) -> NumericAxis | CutAxis | None:
        """The axis along which every point is a range, if there is one."""
        ranges = (axis for axis in self.axes if isinstance(axis, NumericAxis | CutAxis) and is_range(axis))
        return next(ranges, None)

    @property
    def range_dimension(self) -> str:
        """The dimension that is a range, "" where the points are single values."""
        return next(iter(self.step), "")
