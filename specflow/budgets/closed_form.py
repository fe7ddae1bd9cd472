"""Which unknowns of a budget have a bound in closed form: those that ``calculators.inverse`` solves for."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.figures import makes_noise_of_loss
from specflow.budgets.image import mixers_of
from specflow.budgets.inverse_figures import PORTS
from specflow.budgets.probe import Probe, Target
from specflow.calculators import inverse
from specflow.calculators.inverse import Bound
from specflow.errors import CalculationError
from specflow.model.budget import Law

Floats = NDArray[np.float64]
_INTERCEPTS = {
    "iip3": inverse.stage_iip3,
    "iip2": inverse.stage_iip2,
}


def closed_form(probe: Probe, number: int, target: Target) -> Bound | None:
    """Return the bound (n,) on the figure of the whole position of one line, or None where none is known.

    A closed form stands for one-sided limits in the unit of the law, where the line moves nothing but its own figure.
    """
    read, bar = probe.chain.lines[number], target.bar
    if mixers_of(probe.chain) is not None and "noise_figure" in target.output.needs:
        return None  # gains and noise in front of a mixer count at its image too
    sides = [limit for limit in (bar.lower, bar.upper) if np.isfinite(limit).any()]
    if probe.is_driven or not bar.convert.is_identity or len(sides) != 1 or not np.isfinite(sides[0]).all():
        return None
    is_upper = sides[0] is bar.upper
    wanted = sides[0] - bar.reserve if is_upper else sides[0] + bar.reserve
    others = [one for one in probe.chain.at(read.row, read.role.figure) if one != number]
    if others:
        return None
    try:
        return _found(probe, number, target, wanted, is_upper)
    except CalculationError:
        return None  # a target that the formula does not take; the root is bracketed instead


def _found(probe: Probe, number: int, target: Target, wanted: Floats, is_upper: bool) -> Bound | None:
    read = probe.chain.lines[number]
    row, figure, name = read.row, read.role.figure, target.output.parameter
    figures = probe.figures({})
    law = "coherent" if probe.budget.intermodulation == "coherent" else "noncoherent"
    match name, figure:
        case "noise_figure", "noise_figure" if is_upper:
            return inverse.stage_noise_figure(wanted, figures["gain"], figures["noise_figure"], row)
        case "noise_figure", "gain" if is_upper and row not in makes_noise_of_loss(probe.chain):
            bound = inverse.stage_gain(wanted, figures["gain"], figures["noise_figure"], row)
            return bound if np.isfinite(bound.value).all() else None
        case (("iip3" | "iip2"), ("iip3" | "iip2")) if name == figure and not is_upper:
            return _INTERCEPTS[name](wanted, figures["gain"], figures[name], row, law)  # type: ignore[arg-type]
        case "ip1db", "ip1db" if not is_upper:
            return inverse.stage_ip1db(wanted, figures["gain"], figures["ip1db"], row)
        case "iip3", "gain" if not is_upper and not _stated_at_output(probe, row):
            bound = inverse.stage_gain_ceiling(wanted, figures["gain"], figures["iip3"], row, law)  # type: ignore[arg-type]
            return bound if np.isfinite(bound.value).all() else None
        case _, "amount" if is_upper:
            return _of_sum(probe, row, figures["amount"], wanted)
    return None


def _stated_at_output(probe: Probe, row: int) -> bool:
    return any(
        one.row == row and one.role.figure in PORTS and one.role.port == "output" for one in probe.chain.lines
    )


def _of_sum(probe: Probe, row: int, amounts: Floats, wanted: Floats) -> Bound | None:
    others = np.delete(amounts, row, axis=0)
    if len(others) == 0 or len([one for one in probe.chain.lines if one.row == row]) > 1:
        return None
    if probe.budget.law is Law.POWER_SUM:
        return inverse.left_of_power_sum(wanted, others)
    if probe.budget.law is Law.ROOT_SUM_OF_SQUARES:
        return inverse.left_of_root_sum_square(wanted, others)
    return None
