"""Absolute and rounding method of comparing an observed value with a limit (ASTM E29), in decimal.

Digits are data: "4" and "4.0" are different limits under the rounding method, and binary floating point rounds 2.55
to 2.5. So numbers come as text (a float's shortest spelling is the decimal that was written) and ties go to even.
"""

from __future__ import annotations

from decimal import ROUND_HALF_EVEN, Decimal

import numpy as np
from numpy.typing import NDArray


def digit_of(limit: str) -> Decimal:
    """Return the last digit shown in a limit as a step: "4" gives 1, "4.0" gives 0.1, "1.2e3" gives 100."""
    exponent = Decimal(limit).as_tuple().exponent
    if not isinstance(exponent, int):
        raise ValueError(f"{limit!r} is no finite number")
    return Decimal(1).scaleb(exponent)


def round_to(number: str, step: Decimal) -> Decimal:
    """Return the number rounded to a multiple of ``step``, ties to even (the E29 rounding)."""
    return (Decimal(number) / step).quantize(Decimal(1), ROUND_HALF_EVEN) * step


def round_values(values: NDArray[np.float64], step: Decimal) -> NDArray[np.float64]:
    """Return float64 values rounded in decimal to a multiple of ``step``; NaN and infinities stay.

    One decimal operation a distinct value: this is the slow road, taken only where a requirement asks for it.
    """
    distinct, inverse = np.unique(values, return_inverse=True)
    results = np.array(
        [float(round_to(repr(float(value)), step)) if np.isfinite(value) else value for value in distinct]
    )
    return results.astype(np.float64)[inverse].reshape(values.shape)
