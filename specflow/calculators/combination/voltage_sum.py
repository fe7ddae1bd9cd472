"""The voltage sum: coherent products of one frequency, in phase."""

from __future__ import annotations

from specflow.calculators.arguments import Figures, Floats
from specflow.calculators.combination.operands import Operand, operands
from specflow.calculators.decibel import power_total


def voltage_sum(values_db: Figures, kind: Operand) -> Floats:
    """Return the in-phase sum of levels or relative levels, in dB of their own unit.

    Formula: 20·log Σ 10^(x/20).
    Valid: same frequency, same phase: the worst case of coherent products. Never for noise densities.
    Source: sum of voltages; two equal products rise by 6.02 dB.

    >>> print(f"{voltage_sum([-45.0, -45.0], Operand.RELATIVE):.4f}")
    -38.9794
    """
    return 2.0 * power_total(operands("voltage sum", values_db, kind) / 2.0)
