"""Distortion and compression of a cascade: values, cumulative columns, shares and derivatives."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.cascade_level import gain, gain_so_far, level, level_so_far
from specflow.budgets.cascade_noise import floor, floor_slopes, floor_so_far
from specflow.budgets.figures import Figures
from specflow.calculators.adjacent_channel import channel_gap_constant
from specflow.calculators.compression import cascade_ip1db
from specflow.calculators.intercept_cascade import (
    Law,
    cascade_iip2,
    cascade_iip3,
    iip2_slopes,
    iip3_shares,
    iip3_slopes,
)

Floats = NDArray[np.float64]
Gradient = dict[str, Floats]
Quantity = Callable[[Figures], Floats]
Derivatives = Callable[[Figures], Mapping[str, Floats]]
_PER_NEPER = 10.0 / math.log(10.0)


def _sum_law(figures: Figures) -> Law:
    return "coherent" if figures.chain.budget.intermodulation == "coherent" else "noncoherent"


def iip3(figures: Figures) -> Floats:
    """Third-order intercept at the input, dBm."""
    return cascade_iip3(figures["gain"], figures["iip3"], _sum_law(figures))


def iip2(figures: Figures) -> Floats:
    """Second-order intercept at the input, dBm."""
    return cascade_iip2(figures["gain"], figures["iip2"], _sum_law(figures))


def ip1db(figures: Figures) -> Floats:
    """1 dB compression point at the input, dBm (approximation)."""
    return cascade_ip1db(figures["gain"], figures["ip1db"])


def _so_far(figure: str, power: Callable[[Figures], float]) -> Quantity:
    """Return the intercept or compression point of the chain cut off behind each position."""

    def so_far(figures: Figures) -> Floats:
        exponent = power(figures)
        parts = np.zeros_like(figures["gain"])
        np.cumsum(figures["gain"][:-1], axis=0, out=parts[1:])
        parts -= figures[figure]
        parts *= exponent / _PER_NEPER
        np.exp(parts, out=parts)
        np.cumsum(parts, axis=0, out=parts)
        with np.errstate(divide="ignore"):
            np.log(parts, out=parts)
        parts *= -_PER_NEPER / exponent
        return parts

    return so_far


def _third(figures: Figures) -> float:
    return 1.0 if _sum_law(figures) == "coherent" else 2.0


def _second(figures: Figures) -> float:
    return 0.5 if _sum_law(figures) == "coherent" else 1.0


def third_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    slopes = iip3_slopes(figures["gain"], figures["iip3"], _sum_law(figures))
    return {"iip3": slopes.to_figure, "gain": slopes.to_gain}


def second_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    slopes = iip2_slopes(figures["gain"], figures["iip2"], _sum_law(figures))
    return {"iip2": slopes.to_figure, "gain": slopes.to_gain}


def compression_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    slopes = iip3_slopes(figures["gain"], figures["ip1db"], "coherent")
    return {"ip1db": slopes.to_figure, "gain": slopes.to_gain}


def third_shares(figures: Figures) -> Floats:
    """Share of each position; they add up to 1."""
    return iip3_shares(figures["gain"], figures["iip3"], _sum_law(figures))


def second_shares(figures: Figures) -> Floats:
    """Share of each position; they add up to 1."""
    return iip2_slopes(figures["gain"], figures["iip2"], _sum_law(figures)).to_figure


def compression_shares(figures: Figures) -> Floats:
    """Share of each position; they add up to 1."""
    return iip3_shares(figures["gain"], figures["ip1db"], "coherent")


def _at_output(
    value: Quantity, so_far: Quantity, slopes: Derivatives, less: float = 0.0
) -> tuple[Quantity, Quantity, Derivatives]:
    """Refer an input intercept or compression point to the output of the chain."""

    def moved(figures: Figures) -> Floats:
        return value(figures) + gain(figures) - less

    def moved_so_far(figures: Figures) -> Floats:
        return so_far(figures) + gain_so_far(figures) - less

    def moved_slopes(figures: Figures) -> Mapping[str, Floats]:
        found = slopes(figures)
        return {**found, "gain": found["gain"] + 1.0}

    return moved, moved_so_far, moved_slopes


IIP3_SO_FAR = _so_far("iip3", _third)
IIP2_SO_FAR = _so_far("iip2", _second)
IP1DB_SO_FAR = _so_far("ip1db", lambda figures: 1.0)
OIP3 = _at_output(iip3, IIP3_SO_FAR, third_slopes)
OIP2 = _at_output(iip2, IIP2_SO_FAR, second_slopes)
OP1DB = _at_output(ip1db, IP1DB_SO_FAR, compression_slopes, 1.0)


def back_off(figures: Figures) -> Floats:
    """Output compression point less output level, dB."""
    return OP1DB[0](figures) - level(figures)


def back_off_so_far(figures: Figures) -> Floats:
    """The same behind each position."""
    return OP1DB[1](figures) - level_so_far(figures)


def back_off_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    found = OP1DB[2](figures)
    return {**found, "gain": found["gain"] - 1.0, "source_level": -np.ones_like(figures["gain"])}


def aclr(figures: Figures) -> Floats:
    """Adjacent-channel leakage ratio of a noise-like signal in dB, third order only."""
    return 2.0 * (OIP3[0](figures) - level(figures)) + _channel_gap(figures)


def aclr_so_far(figures: Figures) -> Floats:
    """The same behind each position."""
    return 2.0 * (OIP3[1](figures) - level_so_far(figures)) + _channel_gap(figures)


def aclr_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    found = OIP3[2](figures)
    return {
        "iip3": 2.0 * found["iip3"],
        "gain": 2.0 * (found["gain"] - 1.0),
        "source_level": np.full_like(figures["gain"], -2.0),
    }


def _channel_gap(figures: Figures) -> Floats:
    budget = figures.chain.budget
    assert budget.bandwidth_hz is not None and budget.channel_spacing_hz is not None  # asked for
    return channel_gap_constant(budget.bandwidth_hz, budget.channel_spacing_hz)


def sfdr(figures: Figures) -> Floats:
    """Spurious-free dynamic range 2/3 (IIP3 - noise floor), dB; no signal-to-noise ratio is taken off."""
    return 2.0 / 3.0 * (iip3(figures) - floor(figures))


def sfdr_so_far(figures: Figures) -> Floats:
    """The same with the chain cut off behind each position."""
    return 2.0 / 3.0 * (IIP3_SO_FAR(figures) - floor_so_far(figures))


def sfdr_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    third, noise = third_slopes(figures), floor_slopes(figures)
    names = {*third, *noise}
    zero = np.zeros_like(figures["gain"])
    return {name: 2.0 / 3.0 * (third.get(name, zero) - noise.get(name, zero)) for name in names}
