"""What a law is handed: the rows of one group as float64 arrays, with units and settings."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from specflow.errors import CalculationError
from specflow.model.parameter import Parameter
from specflow.units import Unit, format_value, parse_unit, tolerance_unit

Floats = NDArray[np.float64]
Rows = NDArray[np.intp]


def figure(value: float) -> str:
    """Say a number with at most six digits."""
    return format_value(float(f"{value:.6g}"))


@dataclass(frozen=True, slots=True)
class Readings:
    """Values of one role (n,): intervals [low, high], the same array where all are points; ``u`` or None."""

    low: Floats
    high: Floats
    unit: str
    u: Floats | None = None

    def take(self, rows: Rows) -> Readings:
        """Return the rows asked for."""
        low = self.low[rows]
        high = low if self.high is self.low else self.high[rows]
        return Readings(low, high, self.unit, None if self.u is None else self.u[rows])


@dataclass(frozen=True, slots=True)
class Range:
    """The range that a law runs over, in the unit of its axis; ``step`` is the largest gap allowed, if stated."""

    low: float
    high: float
    step: float | None = None
    tolerance: float = 0.0


@dataclass(frozen=True)
class Samples:
    """One group of rows (n,).

    ``values``: readings by role; no NaN. ``axes``: conditions the law runs over, by dimension, with ``units``; ``axis``
    names the one of a range, along which rows ascend. ``settings``: numbers (in the unit the law names) and words, by
    name. ``gives``: the parameter of the result.
    """

    values: Mapping[str, Readings]
    axes: Mapping[str, Floats] = field(default_factory=dict)
    units: Mapping[str, str] = field(default_factory=dict)
    axis: str = ""
    range: Range | None = None
    settings: Mapping[str, float | str] = field(default_factory=dict)
    gives: Parameter | None = None

    @property
    def size(self) -> int:
        """How many rows there are."""
        return len(next(iter(self.values.values())).low)

    @property
    def along(self) -> Floats:
        """The axis values of a law over a range (n,), ascending."""
        return self.axes[self.axis]

    @property
    def axis_unit(self) -> str:
        """The unit of the axis."""
        return self.units.get(self.axis, "")

    def value(self, role: str = "value") -> Floats:
        """Return the readings of a role as numbers."""
        return self.values[role].low

    def unit(self, role: str = "value") -> Unit:
        """Return the unit of a role."""
        return parse_unit(self.values[role].unit or "1")

    def difference_unit(self, role: str = "value") -> str:
        """Return the unit of a difference of two readings: dB of dBm."""
        return str(tolerance_unit(self.unit(role)))

    def number(self, name: str) -> float:
        """Return a setting that is a number."""
        found = self.settings[name]
        if isinstance(found, str):
            raise CalculationError(f"{name} is not a number: {found}", where=name)
        return found

    def word(self, name: str) -> str:
        """Return a setting that is a word."""
        return str(self.settings[name])
