"""Gain and level along a cascade: values, cumulative columns and derivatives."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.figures import Figures
from specflow.calculators.decibel import total
from specflow.calculators.noise_cascade import cascade_gain

Floats = NDArray[np.float64]
Gradient = dict[str, Floats]


def gain(figures: Figures) -> Floats:
    """Total gain in dB."""
    return cascade_gain(figures["gain"])


def gain_so_far(figures: Figures) -> Floats:
    """Gain in dB up to and including each position."""
    return np.cumsum(figures["gain"], axis=0)


def gain_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    return {"gain": np.ones_like(figures["gain"])}


def level(figures: Figures) -> Floats:
    """Level at the output in dBm."""
    assert figures.start is not None
    return figures.start + gain(figures)


def level_so_far(figures: Figures) -> Floats:
    """Level behind each position in dBm."""
    assert figures.start is not None
    return figures.start + gain_so_far(figures)


def level_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    return {"gain": np.ones_like(figures["gain"]), "source_level": np.ones_like(figures["gain"])}


def eirp(figures: Figures) -> Floats:
    """Level at the output with the antenna gain, dBm."""
    return level(figures) + total(figures["antenna_gain"])


def eirp_so_far(figures: Figures) -> Floats:
    """Level behind each position with the antenna gain met so far."""
    return level_so_far(figures) + np.cumsum(figures["antenna_gain"], axis=0)


def eirp_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    return {**level_slopes(figures), "antenna_gain": np.ones_like(figures["gain"])}
