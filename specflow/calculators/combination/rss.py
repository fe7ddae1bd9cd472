"""Root sum of squares: independent small tolerances and uncorrelated errors."""

from __future__ import annotations

import math

import numpy as np

from specflow.calculators.arguments import Figures, Floats
from specflow.calculators.combination.operands import Operand, operands
from specflow.calculators.decibel import total


def root_sum_square(values: Figures, kind: Operand) -> Floats:
    """Return the root sum of squares of tolerances or errors, in their own unit.

    Formula: √Σ t².
    Valid: independent, and the result roughly linear in them. The RSS of limits is neither a 3-sigma nor a guaranteed
    number unless the meaning of the limits is stated. Never of levels.
    Source: Bird Technologies 5015 series manual: 5 % and 3.67 % give 6.20 %.

    >>> print(f"{root_sum_square([5.0, 3.67], Operand.ERROR):.2f}")
    6.20
    """
    t = operands("RSS", values, kind)
    return np.sqrt(total(t * t))


def uniform_standard_deviation(values: Figures) -> Floats:
    """Return the standard deviation of the sum of tolerances that are limits of uniform distributions.

    Formula: √(Σ t²/3).
    Valid: independent, uniform within ± t.
    Source: variance of the uniform distribution (JCGM 100:2008, 4.3.7); computed.

    >>> print(f"{uniform_standard_deviation([0.5, 0.3, 0.8, 0.2]):.4f}")
    0.5831
    """
    return root_sum_square(values, Operand.TOLERANCE) / math.sqrt(3.0)
