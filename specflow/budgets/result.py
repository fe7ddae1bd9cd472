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
from specflow.model.requirement import Requirement

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Served:
    """One requirement that a budget serves, held against the result at every place of evaluation.

    ``lower``, ``upper`` (n,) in ``unit``, the unit of the limit: ±inf where that side has none. ``result`` (n,) is in
    the same unit. ``margin`` (n,) in ``margin_unit`` is the distance to the limit less the ``reserve``, positive is
    good, NaN where nothing is required or the limit is not known (``why``). ``worst`` is the place with the smallest
    margin, -1 where there is none.
    """

    requirement: Requirement
    unit: str
    margin_unit: str
    lower: Floats
    upper: Floats
    result: Floats
    margin: Floats
    reserve: float
    reserve_holder: str
    worst: int
    why: str = ""

    @property
    def smallest_margin(self) -> float:
        """The margin at the worst place, NaN where there is none."""
        return float(self.margin[self.worst]) if self.worst >= 0 else float("nan")

    @property
    def closes(self) -> bool | None:
        """Whether the limit is kept everywhere with the reserve; None where it is not known at some required place."""
        if self.worst >= 0 and self.smallest_margin < 0:
            return False
        return None if self.worst < 0 or self.why else True


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
    served: tuple[Served, ...]
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
    def served(self) -> tuple[Served, ...]:
        """All requirements that the budget serves."""
        return tuple(one for output in self.outputs for one in output.served)

    @property
    def worst(self) -> Served | None:
        """The requirement with the smallest margin of all; None where no margin is known."""
        known = [one for one in self.served if one.worst >= 0]
        return min(known, key=lambda one: one.smallest_margin, default=None)
