"""A budget read: every line at its block's own conditions, ready for the laws."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.forms import Role
from specflow.budgets.required import Required
from specflow.model.base import code_key
from specflow.model.budget import Budget, BudgetLine, BudgetPosition
from specflow.model.columns import Columns
from specflow.units import Converter

Floats = NDArray[np.float64]
LineKey = tuple[int, str]
"""A line of a budget: the order of its position, and the key of its parameter."""


def line_key(line: BudgetLine) -> LineKey:
    """Return what a line is looked up by."""
    return line.position, code_key(line.parameter)


@dataclass(frozen=True, slots=True, eq=False)
class ReadLine:
    """A line with its values, float64 (n,) or (1,), in the line's own unit.

    ``row`` is its position, counted from 0; ``convert`` takes the own unit to the unit of its ``role``. ``least`` and
    ``most`` are the values beyond which no block can be (0 dB, 0 K), in the own unit, ±inf where there is no such.
    """

    line: BudgetLine
    row: int
    role: Role
    convert: Converter
    values: Floats
    least: float = -math.inf
    most: float = math.inf

    def figure(self, values: Floats) -> Floats:
        """Return the figure that the law takes for values in the line's own unit."""
        return self.role.form.value(values if self.convert.is_identity else self.convert(values))

    def figure_slope(self, values: Floats) -> Floats:
        """Return the derivative of the figure to the line's value, per unit of the line's tolerance."""
        inner = values if self.convert.is_identity else self.convert(values)
        slope = self.role.form.slope(inner)
        source, target = self.convert.source, self.convert.target
        if source.is_log == target.is_log and source.scale == target.scale:
            return slope
        step = 1e-6 * np.maximum(np.abs(values), 1e-3)
        return slope * (self.convert(values + step) - self.convert(values - step)) / (2.0 * step)


@dataclass(frozen=True, slots=True, eq=False)
class Chain:
    """The positions of a budget in order, with their lines read over n places of evaluation.

    ``temperature_k`` (positions, n) is the physical temperature of each position, NaN where nothing states it (290 K is
    taken there); ``own`` are the conditions each block meets; ``input_level`` (n,) in dBm or None.
    """

    budget: Budget
    required: Required
    positions: tuple[BudgetPosition, ...]
    lines: tuple[ReadLine, ...]
    temperature_k: Floats
    own: tuple[Columns, ...]
    input_level: Floats | None
    notes: tuple[str, ...] = ()

    @property
    def size(self) -> int:
        """How many places of evaluation there are."""
        return self.required.size

    def at(self, row: int, figure: str) -> list[int]:
        """Return the numbers of the lines of one position that give a figure."""
        return [
            number for number, one in enumerate(self.lines) if one.row == row and one.role.figure == figure
        ]

    def place(self, row: int) -> str:
        """What messages call a position."""
        position = self.positions[row]
        return f"budget {self.budget.id}, position {position.order} ({position.block})"

    def nominal(self) -> list[Floats]:
        """Return the value of every line, in its own unit."""
        return [one.values for one in self.lines]


Overrides = Mapping[LineKey, Floats | float]


def overridden(line: BudgetLine, values: Overrides | None) -> Floats | None:
    """Return the values that replace a line's own, in its unit; NaN keeps the line's own value there."""
    if not values or line_key(line) not in values:
        return None
    return np.atleast_1d(np.asarray(values[line_key(line)], np.float64))


def shown(names: Sequence[str]) -> str:
    """List names for a sentence."""
    return ", ".join(names) or "none"
