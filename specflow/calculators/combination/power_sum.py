"""The power sum: independent signals, noise and products."""

from __future__ import annotations

from specflow.calculators.arguments import Figures, Floats
from specflow.calculators.combination.operands import Operand, operands
from specflow.calculators.decibel import power_total


def power_sum(values_db: Figures, kind: Operand) -> Floats:
    """Return the power sum of levels, densities or relative levels, in dB of their own unit.

    Formula: 10·log Σ 10^(x/10).
    Valid: independent contributions: noise, spurs of different frequency inside one band, non-coherent products.
    Source: two-carrier uplink on link-budget slides (S. K. Iqbal): 45.6 and 42.6 dBW give 47.4 dBW.

    >>> print(f"{power_sum([45.6, 42.6], Operand.LEVEL):.1f}")
    47.4
    """
    return power_total(operands("power sum", values_db, kind))
