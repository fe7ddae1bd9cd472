"""Spurious responses and products of mixers; frequencies in any one unit."""

from __future__ import annotations

import itertools

import numpy as np

from specflow.calculators.arguments import Figures, Floats, above, count
from specflow.calculators.frequency_plan import Band


def mixer_responses(lo: Figures, intermediate: Figures) -> tuple[Floats, Floats, Floats, Floats]:
    """Return the inputs LO + IF, LO - IF (wanted and image, or the other way round) and the half-IF LO ± IF/2.

    Formula: f = (n·LO ± IF)/m; the half-IF response has m = n = 2.
    Valid: one conversion.
    Source: computed: LO 2100, IF 341.75 MHz.

    >>> print(*(f"{f:.3f}" for f in mixer_responses(2100.0, 341.75)))
    2441.750 1758.250 1929.125 2270.875
    """
    centre, away = above(lo, 0.0, "lo"), above(intermediate, 0.0, "intermediate")
    return centre + away, np.abs(centre - away), np.abs(centre - away / 2.0), centre + away / 2.0


def spurious_inputs(lo: float, intermediate: float, highest_order: int) -> dict[tuple[int, int], Band]:
    """Return for input harmonic m and LO harmonic n up to ``highest_order`` the two inputs that reach the IF.

    Formula: f = (n·LO ± IF)/m, taken positive.
    Valid: harmonic order in the mixer; levels need its spur table.
    Source: computed: m = n = 2 is the half-IF.

    >>> print(spurious_inputs(2100.0, 341.75, 2)[2, 2])
    (1929.125, 2270.875)
    """
    centre, away = float(above(lo, 0.0, "lo")), float(above(intermediate, 0.0, "intermediate"))
    count(highest_order, "highest_order")
    orders = range(1, highest_order + 1)
    return {(m, n): (abs(n * centre - away) / m, (n * centre + away) / m) for m in orders for n in orders}


def crossing_spurs(
    lo: float, intermediate: float, output: float, highest_lo: int, highest_if: int
) -> tuple[tuple[int, int], ...]:
    """Return (m, n) of up-converter products that fall on the wanted output, besides the wanted one.

    Formula: |m·LO + n·IF| = RF, m from 0, |n| up to the highest order; a product and its negative are one.
    Valid: frequencies equal within 1e-9 of the output.
    Source: exhaustive search: LO 2000, IF 400, RF 2400.

    >>> print(crossing_spurs(2000.0, 400.0, 2400.0, 3, 6))
    ((0, 6), (2, -4))
    """
    wanted = float(above(output, 0.0, "output"))
    above(lo, 0.0, "lo")
    above(intermediate, 0.0, "intermediate")
    count(highest_lo, "highest_lo", 0)
    count(highest_if, "highest_if", 0)
    found = []
    for m, n in itertools.product(range(highest_lo + 1), range(-highest_if, highest_if + 1)):
        meets = abs(abs(m * lo + n * intermediate) - wanted) <= 1e-9 * wanted
        if meets and (m, abs(n)) != (1, 1) and (m > 0 or n > 0):
            found.append((m, n))
    return tuple(found)
