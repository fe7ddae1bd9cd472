"""Noise of a cascade: values, cumulative columns, shares and derivatives."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.cascade_level import gain, gain_so_far
from specflow.budgets.figures import Figures
from specflow.budgets.image import Mixers, mixers_of, source_weight_slopes, source_weights
from specflow.calculators.decibel import BOLTZMANN, T0, total
from specflow.calculators.noise import noise_temperature
from specflow.calculators.noise_cascade import (
    cascade_noise_figure,
    cumulative_noise_figure,
    excess_noise_shares,
    noise_figure_slopes,
)

Floats = NDArray[np.float64]
Gradient = dict[str, Floats]
_PER_NEPER = 10.0 / math.log(10.0)
_MILLIWATT = 1e3


def noise_figure(figures: Figures) -> Floats:
    """Noise figure in dB, Friis."""
    return cascade_noise_figure(figures["gain"], figures["noise_figure"])


def noise_figure_so_far(figures: Figures) -> Floats:
    """Noise figure of the chain cut off behind each position."""
    return cumulative_noise_figure(figures["gain"], figures["noise_figure"])


def noise_shares(figures: Figures) -> Floats:
    """Share of each position in F - 1."""
    return excess_noise_shares(figures["gain"], figures["noise_figure"])


def noise_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    slopes = noise_figure_slopes(figures["gain"], figures["noise_figure"])
    return {"noise_figure": slopes.to_figure, "gain": slopes.to_gain}


def _kelvin(nf: Floats) -> Floats:
    return np.asarray(T0 * np.expm1(nf / _PER_NEPER))


def temperature(figures: Figures) -> Floats:
    """Equivalent input noise temperature of the chain in K."""
    return noise_temperature(noise_figure(figures))


def temperature_so_far(figures: Figures) -> Floats:
    """Equivalent input noise temperature behind each position."""
    return _kelvin(noise_figure_so_far(figures))


def temperature_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    factor = (T0 + temperature(figures)) / _PER_NEPER
    return {name: slope * factor for name, slope in noise_slopes(figures).items()}


def source(figures: Figures) -> Floats | float:
    """Noise temperature in K of what feeds the chain: antenna line, the budget's own, else 290 K."""
    if "source_k" in figures.arrays and any(one.role.figure == "source_k" for one in figures.chain.lines):
        return total(figures["source_k"])
    stated = figures.chain.budget.noise_source
    return T0 if stated is None else stated


def _image_mixers(figures: Figures) -> Mixers | None:
    return mixers_of(figures.chain) if "image_rejection" in figures.arrays else None


def source_at_images(figures: Figures) -> Floats | float:
    """What the source's noise at images adds to 290 K counted there, in K so far: (T_source - 290 K) times its weight.

    Noise figures count the image of the source at 290 K; what feeds the chain need not be at that.
    """
    mixers = _image_mixers(figures)
    if mixers is None:
        return 0.0
    return (source(figures) - T0) * source_weights(figures.stages, mixers)


def _at_images(figures: Figures) -> Floats | float:
    so_far = source_at_images(figures)
    return so_far if isinstance(so_far, float) else np.asarray(so_far[-1])


def system(figures: Figures) -> Floats:
    """System noise temperature in K at the input of the chain, the source's noise at images included."""
    return source(figures) + temperature(figures) + _at_images(figures)


def system_so_far(figures: Figures) -> Floats:
    """System noise temperature with the chain cut off behind each position."""
    return source(figures) + temperature_so_far(figures) + source_at_images(figures)


def system_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    found = {**temperature_slopes(figures), "source_k": np.ones_like(figures["gain"])}
    mixers = _image_mixers(figures)
    if mixers is not None:
        found["source_k"] = found["source_k"] + source_weights(figures.stages, mixers)[-1]
        found["image_rejection"] = (source(figures) - T0) * source_weight_slopes(figures.stages, mixers)
    return found


def merit(figures: Figures) -> Floats:
    """G/T in dB/K at the input of the chain."""
    return total(figures["antenna_gain"]) - _PER_NEPER * np.log(system(figures))


def merit_so_far(figures: Figures) -> Floats:
    """G/T with the chain cut off behind each position, from the whole antenna gain."""
    return total(figures["antenna_gain"]) - _PER_NEPER * np.log(system_so_far(figures))


def merit_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    factor = -_PER_NEPER / system(figures)
    parts = {name: slope * factor for name, slope in system_slopes(figures).items()}
    return {**parts, "antenna_gain": np.ones_like(figures["gain"])}


def system_shares(figures: Figures) -> Floats:
    """Share of each position in the system temperature; what feeds the chain has the rest, at its images too."""
    shares = noise_shares(figures) * (temperature(figures) / system(figures))
    mixers = _image_mixers(figures)
    if mixers is None:
        return shares
    weights = source_weights(figures.stages, mixers)
    steps = np.diff(weights, axis=0, prepend=np.zeros_like(weights[:1]))
    return shares - T0 * steps / system(figures)


def floor(figures: Figures) -> Floats:
    """Noise in the bandwidth referred to the input, dBm."""
    return np.asarray(_PER_NEPER * np.log(system(figures) * (BOLTZMANN * _MILLIWATT * _bandwidth(figures))))


def floor_so_far(figures: Figures) -> Floats:
    """The same with the chain cut off behind each position."""
    return _PER_NEPER * np.log(system_so_far(figures) * (BOLTZMANN * _MILLIWATT * _bandwidth(figures)))


def _bandwidth(figures: Figures) -> float:
    found = figures.chain.budget.bandwidth_hz
    assert found is not None
    return found


def floor_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    factor = _PER_NEPER / system(figures)
    return {name: slope * factor for name, slope in system_slopes(figures).items()}


def density(figures: Figures) -> Floats:
    """Noise density at the output, dBm/Hz."""
    return gain(figures) + _PER_NEPER * np.log(system(figures) * (BOLTZMANN * _MILLIWATT))


def density_so_far(figures: Figures) -> Floats:
    """Noise density behind each position, dBm/Hz."""
    return gain_so_far(figures) + _PER_NEPER * np.log(system_so_far(figures) * (BOLTZMANN * _MILLIWATT))


def density_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    slopes = floor_slopes(figures)
    return {**slopes, "gain": slopes["gain"] + 1.0}


def sensitivity(figures: Figures) -> Floats:
    """Least level at the input in dBm: noise floor and the signal-to-noise ratio that is needed."""
    return floor(figures) + total(figures["snr"])


def sensitivity_so_far(figures: Figures) -> Floats:
    """The same with the chain cut off behind each position."""
    return floor_so_far(figures) + total(figures["snr"])


def sensitivity_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    return {**floor_slopes(figures), "snr": np.ones_like(figures["gain"])}
