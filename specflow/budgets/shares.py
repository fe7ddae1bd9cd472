"""Shares: which position makes how much of a result, in the terms in which contributions add up."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.result import BudgetResult
from specflow.model.budget import BudgetPosition

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class OutputShares:
    """``shares`` (positions, n) of one quantity, as parts of 1; ``of`` says what is shared.

    Shares of the excess noise F - 1 add up to 1; those of a system temperature leave the rest to what feeds the chain.
    """

    parameter: str
    of: str
    positions: tuple[BudgetPosition, ...]
    shares: Floats


_SHARED = {
    "noise_figure": "excess noise F - 1",
    "noise_temperature": "noise temperature of the chain",
    "system_noise_temperature": "system noise temperature",
    "g_over_t": "system noise temperature",
    "noise_floor": "system noise temperature",
    "noise_density": "system noise temperature",
    "sensitivity": "system noise temperature",
    "refsens": "system noise temperature",
    "iip3": "third-order distortion",
    "oip3": "third-order distortion",
    "aclr": "third-order distortion",
    "iip2": "second-order distortion",
    "oip2": "second-order distortion",
    "ip1db": "compression",
    "op1db": "compression",
    "dc_power": "DC power",
}


def shares_of(result: BudgetResult) -> tuple[OutputShares, ...]:
    """Return the shares of every quantity that has any; a sum of gains has none."""
    found = []
    for one in result.outputs:
        if one.output.shares is not None:
            shares = np.broadcast_to(one.output.shares(result.figures), one.cumulative.shape)
            what = _SHARED.get(one.parameter, one.law)
            found.append(OutputShares(one.parameter, what, result.positions, shares))
    return tuple(found)
