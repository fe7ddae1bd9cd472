"""The worst case: every tolerance at its limit at once."""

from __future__ import annotations

from specflow.calculators.arguments import Figures, Floats
from specflow.calculators.combination.operands import Operand, operands
from specflow.calculators.decibel import total


def worst_case_sum(values: Figures, kind: Operand) -> Floats:
    """Return the worst-case sum of tolerances or errors, in their own unit.

    Formula: Σ |t|.
    Valid: guaranteed limits, result linear in each; where it is curved, evaluate the corners instead.
    Source: definition; computed.

    >>> print(f"{worst_case_sum([0.5, 0.3, 0.8, 0.2], Operand.TOLERANCE):.1f}")
    1.8
    """
    return total(operands("worst case", values, kind))
