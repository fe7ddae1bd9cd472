"""The quantity of a sum: contributions of the positions, as the law of the budget combines them."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.figures import Figures
from specflow.budgets.outputs import Output
from specflow.calculators.decibel import total
from specflow.model.budget import Law

Floats = NDArray[np.float64]
_PER_NEPER = 10.0 / math.log(10.0)


def _plain(figures: Figures) -> Floats:
    return total(figures["amount"])


def _plain_so_far(figures: Figures) -> Floats:
    return np.cumsum(figures["amount"], axis=0)


def _plain_slopes(figures: Figures) -> dict[str, Floats]:
    return {"amount": np.ones_like(figures["amount"])}


def _logs(power: float, words: str, parameter: str, unit: str) -> Output:
    """A sum of 10^(x/10) to the ``power``: 1 adds powers, 1/2 adds voltages."""
    scale = _PER_NEPER / power

    def parts(figures: Figures) -> Floats:
        return np.asarray(np.exp(figures["amount"] / scale))

    def value(figures: Figures) -> Floats:
        return np.asarray(scale * np.log(total(parts(figures))))

    def so_far(figures: Figures) -> Floats:
        return np.asarray(scale * np.log(np.cumsum(parts(figures), axis=0)))

    def shares(figures: Figures) -> Floats:
        each = parts(figures)
        return np.asarray(each / np.sum(each, axis=0))

    return Output(
        parameter,
        unit,
        words,
        ("amount",),
        value,
        so_far,
        lambda figures: {"amount": shares(figures)},
        shares,
    )


def _squares(figures: Figures) -> Floats:
    return np.asarray(np.sqrt(total(figures["amount"] ** 2)))


def _squares_so_far(figures: Figures) -> Floats:
    return np.sqrt(np.cumsum(figures["amount"] ** 2, axis=0))


def _squares_slopes(figures: Figures) -> dict[str, Floats]:
    whole = _squares(figures)
    return {
        "amount": np.divide(figures["amount"], whole, out=np.zeros_like(figures["amount"]), where=whole > 0)
    }


def _squares_shares(figures: Figures) -> Floats:
    each = figures["amount"] ** 2
    whole = total(each)
    return np.divide(each, whole, out=np.zeros_like(each), where=whole > 0)


def sum_output(law: Law, parameter: str, unit: str) -> Output:
    """Return what a sum gives: the one quantity that the budget is of."""
    match law:
        case Law.POWER_SUM:
            return _logs(1.0, "sum of powers", parameter, unit)
        case Law.VOLTAGE_SUM:
            return _logs(0.5, "sum of voltages, in phase", parameter, unit)
        case Law.ROOT_SUM_OF_SQUARES:
            return Output(
                parameter,
                unit,
                "root of the sum of squares, uncorrelated parts",
                ("amount",),
                _squares,
                _squares_so_far,
                _squares_slopes,
                _squares_shares,
            )
    return Output(parameter, unit, "plain sum", ("amount",), _plain, _plain_so_far, _plain_slopes)
