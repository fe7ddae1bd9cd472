"""What evaluating a budget gives."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain
from specflow.budgets.figures import Figures
from specflow.budgets.outputs import Output
from specflow.budgets.required import Required
from specflow.model.base import code_key
from specflow.model.budget import Budget, BudgetPosition
from specflow.model.budget_outcome import ServedOutcome

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class OutputResult:
    """One quantity of a budget over n places of evaluation.

    ``result`` (n,) in ``unit``; ``cumulative`` (positions, n): the same up to and including each position. ``served``
    are the requirements on it. ``law`` says by which law, in words.
    """

    parameter: str
    unit: str
    law: str
    result: Floats
    cumulative: Floats
    served: tuple[ServedOutcome, ...]
    output: Output


@dataclass(frozen=True, slots=True, eq=False)
class BudgetResult:
    """A budget evaluated at nominal values, at every place of evaluation at once.

    ``required`` are the places (``required.words(i)`` says one, ``required.point`` gives its required point);
    ``positions`` the chain in order; ``figures["gain"]`` (positions, n) and so on are what the laws took;
    ``levels`` (positions + 1, n) the level at the input and behind each position in dBm, None without an input level.
    ``notes`` are sentences on what was assumed.
    """

    budget: Budget
    required: Required
    positions: tuple[BudgetPosition, ...]
    outputs: tuple[OutputResult, ...]
    figures: Figures
    levels: Floats | None
    chain: Chain
    notes: tuple[str, ...] = ()

    def of(self, parameter: str) -> OutputResult:
        """Return one quantity. KeyError for one that the budget does not give."""
        for output in self.outputs:
            if code_key(output.parameter) == code_key(parameter):
                return output
        raise KeyError(parameter)

    @property
    def served(self) -> tuple[ServedOutcome, ...]:
        """All requirements that the budget serves."""
        return tuple(one for output in self.outputs for one in output.served)

    @property
    def worst(self) -> ServedOutcome | None:
        """The requirement with the smallest margin of all; None where no margin is known."""
        known = [one for one in self.served if one.worst >= 0]
        return min(known, key=lambda one: one.smallest_margin, default=None)
