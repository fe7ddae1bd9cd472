"""Laws over a stated range of one condition that give one number: worst, mean, percentile, ripple, slope."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.derive.law import Law, Outcome, Setting, single
from specflow.derive.samples import Samples
from specflow.errors import CalculationError
from specflow.model.parameter import Better

Floats = NDArray[np.float64]
OF_THE_READING = "that of the governing reading"


def worst(samples: Samples) -> Outcome:
    """Return the reading that is worst by the better direction of the parameter.

    Formula: the least where higher is better, the greatest where lower is, the farthest from zero where nearer to zero
    is. A reading that is a bound enters with its worse end; the result is the bound then.
    Valid: where the parameter has a better direction, or ``side`` names one. The uncertainty is that of the governing
    reading: that several readings competed biases the worst outwards (see the coverage of evidence), never inwards.
    Source: definition.
    """
    readings, side = samples.values["value"], _side(samples)
    if side == "lowest":
        row = int(np.argmin(readings.low))
    elif side == "highest":
        row = int(np.argmax(readings.high))
    else:
        row = int(np.argmax(np.maximum(np.abs(readings.low), np.abs(readings.high))))
    u = None if readings.u is None else float(readings.u[row])
    one = single(float(readings.low[row]), readings.unit, row, u=u, u_rule=OF_THE_READING)
    return Outcome(one.value, one.unit, one.rows, readings.high[[row]], one.at, one.u, one.u_rule)


def _side(samples: Samples) -> str:
    said = samples.word("side")
    if said != "as the parameter":
        return said
    better = samples.gives.better if samples.gives else Better.NEITHER
    if better is Better.NEITHER:
        raise CalculationError(
            "neither direction of the parameter is the better one, so none is the worst",
            hint="say --set side=lowest, side=highest or 'side=farthest from zero'",
        )
    return {Better.HIGHER: "lowest", Better.LOWER: "highest"}.get(better, "farthest from zero")


RANGE_LAWS: tuple[Law, ...] = (
    Law(
        "worst",
        "the worst reading over a range",
        worst,
        settings=(
            Setting(
                "side",
                "which reading is the worst",
                "as the parameter",
                choices=("as the parameter", "lowest", "highest", "farthest from zero"),
            ),
        ),
        takes_bounds=True,
        takes_repeats=True,
    ),
)
