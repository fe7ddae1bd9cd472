"""What a figure of a position adds to a sum that a limit bounds: excess noise, distortion, power, squared error.

In these terms every law adds up, so that a target can be shared. ``before`` is the linear gain in front.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.outputs import Output
from specflow.calculators.decibel import decibels, ratio
from specflow.calculators.intercept_cascade import SECOND_ORDER, THIRD_ORDER, exponent
from specflow.calculators.intercept_cascade import Law as PhaseLaw
from specflow.model.budget import Budget, Law

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Contribution:
    """``figure`` names what is shared; ``of`` gives the contribution of a figure, ``figure_for`` the way back.

    ``at_most``: less of the figure is better (noise), else more is (intercepts).
    """

    figure: str
    of: Callable[[Floats, Floats], Floats]
    figure_for: Callable[[Floats, Floats], Floats]
    at_most: bool


def contribution(output: Output, budget: Budget) -> Contribution | None:
    """Return how the positions contribute to a quantity; None where figures add plainly (gains, losses, amounts)."""
    if "dc_w" in output.wants:
        return _DC
    needs = set(output.needs)
    if "iip3" in needs:
        return _port("iip3", exponent(THIRD_ORDER, _law(budget)))
    if "iip2" in needs:
        return _port("iip2", exponent(SECOND_ORDER, _law(budget)))
    if "ip1db" in needs:
        return _port("ip1db", 1.0)
    if "noise_figure" in needs:
        return _NOISE
    return _SUMS.get(budget.law) if "amount" in needs else None


def _law(budget: Budget) -> PhaseLaw:
    return "coherent" if budget.intermodulation == "coherent" else "noncoherent"


def _port(figure: str, power: float) -> Contribution:
    """Σ (G_before/IP_i)^p."""

    def of(level: Floats, before: Floats) -> Floats:
        return np.asarray((before * ratio(-level)) ** power)

    def figure_for(part: Floats, before: Floats) -> Floats:
        return np.asarray(decibels(before) - decibels(part) / power)

    return Contribution(figure, of, figure_for, at_most=False)


_NOISE = Contribution(
    "noise_figure",
    lambda nf, before: np.asarray((ratio(nf) - 1.0) / before),
    lambda part, before: np.asarray(decibels(1.0 + part * before)),
    at_most=True,
)
_DC = Contribution("dc_w", lambda watts, _: watts, lambda part, _: part, at_most=True)
_SUMS = {
    Law.POWER_SUM: Contribution(
        "amount", lambda level, _: np.asarray(ratio(level)), lambda part, _: np.asarray(decibels(part)), True
    ),
    Law.VOLTAGE_SUM: Contribution(
        "amount",
        lambda level, _: np.asarray(ratio(level / 2.0)),
        lambda part, _: np.asarray(2.0 * decibels(part)),
        True,
    ),
    Law.ROOT_SUM_OF_SQUARES: Contribution(
        "amount", lambda error, _: np.asarray(error * error), lambda part, _: np.sqrt(part), True
    ),
}
