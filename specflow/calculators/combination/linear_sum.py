"""The linear sum: gains in dB along a chain, and linear quantities."""

from __future__ import annotations

from specflow.calculators.arguments import Figures, Floats
from specflow.calculators.combination.operands import Operand, operands
from specflow.calculators.decibel import total


def linear_sum(values: Figures, kind: Operand) -> Floats:
    """Return the sum of gains in dB, or of linear quantities, in their own unit.

    Formula: Σ x.
    Valid: gains and plain quantities; the sum of two levels in dBm means nothing and is refused.
    Source: definition; computed.

    >>> print(linear_sum([18.0, -2.5, 8.0], Operand.GAIN))
    23.5
    """
    return total(operands("linear sum", values, kind))
