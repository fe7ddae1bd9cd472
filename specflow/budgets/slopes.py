"""Slopes: how much a result moves with each line, by the derivative of the law."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.figures import line_slopes
from specflow.budgets.result import BudgetResult
from specflow.model.base import code_key
from specflow.model.budget import BudgetLine

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class OutputSlopes:
    """Derivatives of one quantity: ``slopes`` (lines, n) per unit of each line's tolerance, dB per dB where both are in
    dB. A loss that makes noise, and an intercept stated at an output, move with the gain of their position.
    """

    parameter: str
    unit: str
    lines: tuple[BudgetLine, ...]
    slopes: Floats

    def of(self, position: int, parameter: str) -> Floats:
        """Return the slope (n,) to one line. KeyError for a line that is not there."""
        for number, line in enumerate(self.lines):
            if line.position == position and code_key(line.parameter) == code_key(parameter):
                return np.asarray(self.slopes[number])
        raise KeyError((position, parameter))


def slopes_of(result: BudgetResult) -> tuple[OutputSlopes, ...]:
    """Return the slopes of every quantity of an evaluated budget, at every place of evaluation."""
    chain = result.chain
    values = chain.nominal()
    lines = tuple(read.line for read in chain.lines)
    return tuple(
        OutputSlopes(
            one.parameter,
            one.unit,
            lines,
            line_slopes(chain, values, result.figures, one.output.gradient(result.figures)),
        )
        for one in result.outputs
    )
