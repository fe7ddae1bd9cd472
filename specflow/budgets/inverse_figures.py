"""From the figure that a law takes back to the value that a line states."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain, ReadLine
from specflow.budgets.figures import of_elements
from specflow.budgets.forms import (
    AS_IT_IS,
    DOUBLE_SIDEBAND,
    DOUBLE_SIDEBAND_TEMPERATURE,
    LOSS,
    LOSSES,
    PHASE_NOISE,
    TEMPERATURE,
)
from specflow.budgets.image import Turn, mixers_of
from specflow.budgets.sidebands import LEAST_SINGLE_SIDEBAND_DB
from specflow.calculators.noise import noise_temperature
from specflow.model.base import code_key
from specflow.parameters import Dictionary
from specflow.units import converter, parse_unit

Floats = NDArray[np.float64]
_STEPS = 200
PORTS = ("iip3", "iip2", "ip1db")


def line_value(read: ReadLine, figure: Floats, dictionary: Dictionary) -> Floats:
    """Return the value in the line's own unit that gives a figure; the inverse of ``ReadLine.figure``."""
    inner = _inner(read, np.asarray(figure, np.float64))
    if read.convert.is_identity:
        return inner
    parameter = dictionary.get(read.line.parameter)
    back = converter(
        read.convert.target,
        read.convert.source,
        log_factor=parameter.log_factor if parameter is not None else None,
    )
    return np.asarray(back(inner), np.float64)


def _inner(read: ReadLine, figure: Floats) -> Floats:
    form = read.role.form
    if form is AS_IT_IS:
        return figure
    if form is LOSS:
        return -figure
    if form is DOUBLE_SIDEBAND:
        return figure - LEAST_SINGLE_SIDEBAND_DB
    if form is DOUBLE_SIDEBAND_TEMPERATURE:
        return np.asarray(noise_temperature(np.maximum(figure - LEAST_SINGLE_SIDEBAND_DB, 0.0)))
    if form is TEMPERATURE:
        return np.asarray(noise_temperature(np.maximum(figure, 0.0)))
    return _searched(read, figure)


def _searched(read: ReadLine, figure: Floats) -> Floats:
    """Halve until the form gives the figure: parts of an error vector, each monotonic."""
    low = np.zeros(figure.shape) if read.role.form is PHASE_NOISE else np.full(figure.shape, -300.0)
    high = np.full(figure.shape, 180.0 if read.role.form is PHASE_NOISE else 300.0)
    for _ in range(_STEPS):
        middle = (low + high) / 2.0
        above = (read.role.form.value(middle) - figure) * read.role.form.rises > 0
        low, high = np.where(above, low, middle), np.where(above, middle, high)
    return np.asarray((low + high) / 2.0)


def figure_of_line(chain: Chain, read: ReadLine, at_position: Floats, gain_db: Floats) -> Floats:
    """Return the figure of a line from the figure of its whole position.

    ``at_position`` is a noise figure, an intercept or compression point at the input of the position's N elements, or
    the contribution of the position to a sum; ``gain_db`` the gain of the position, for figures stated at its output.
    """
    if read.role.figure in PORTS:
        level = at_position - 10.0 * math.log10(chain.positions[read.row].count)
        if read.role.port == "output":
            level = level + gain_db - (1.0 if read.role.figure == "ip1db" else 0.0)
        return level
    if read.role.figure == "dc_w":
        return at_position / chain.positions[read.row].count
    if read.role.figure == "antenna_gain":
        return at_position - 10.0 * math.log10(chain.positions[read.row].count)
    if read.role.figure == "amount":
        factor, offset = of_elements(chain, read)
        return (at_position - offset) / factor
    return at_position


def domain(chain: Chain, read: ReadLine) -> tuple[float, float]:
    """Return the lowest and the highest figure that any part could have: for an unknown, ideal parts included."""
    match read.role.figure:
        case "noise_figure":
            return _least_noise(chain, read), 100.0
        case "gain":
            lossy = read.role.form is LOSS or chain.positions[read.row].passive
            return -200.0, 0.0 if lossy else 200.0
        case "source_k":
            return 0.0, 1e6
        case "image_rejection" | "rejection" | "isolation":
            return 0.0, 300.0
        case "dc_w" | "allowed_rise":
            return 0.0, 1e6
        case "efficiency" | "added_efficiency":
            return 1e-6, 100.0
        case "amount":
            unit = parse_unit(read.role.unit)
            if read.role.form is LOSS:
                is_loss = code_key(read.line.parameter) in LOSSES
                return (-300.0, 0.0) if is_loss else (-300.0, 300.0)
            if code_key(read.line.parameter) in LOSSES:
                return 0.0, 300.0
            return (-300.0, 300.0) if unit.is_log else (0.0, 1e6)
    return -300.0, 300.0


def image_factor(chain: Chain, read: ReadLine) -> float:
    """Return what the image adds to the noise factor that a line states: 1 of a mixer whose image counts, else 0.

    It is none of the mixer's own noise: a noiseless one has a single-sideband factor of 2.
    """
    if read.role.figure != "noise_figure":
        return 0.0
    mixers = mixers_of(chain)
    is_counted = mixers is not None and mixers.turns[read.row] is Turn.IMAGE
    return 1.0 if read.line.sideband == "DSB" or is_counted else 0.0


def _least_noise(chain: Chain, read: ReadLine) -> float:
    """Return the least noise figure of a position: that of its loss where it is passive, else 0 dB."""
    if image_factor(chain, read):
        return LEAST_SINGLE_SIDEBAND_DB
    if not chain.positions[read.row].passive:
        return 0.0
    from specflow.calculators.passive_loss import passive_noise_figure

    loss = -sum(
        (chain.lines[number].figure(chain.lines[number].values) for number in chain.at(read.row, "gain")),
        np.zeros(1),
    )
    kelvin = chain.temperature_k[read.row]
    return float(np.max(passive_noise_figure(loss, np.where(np.isnan(kelvin), 290.0, kelvin))))
