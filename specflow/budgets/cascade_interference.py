"""Interference in the channel of a receive cascade: the rise of the noise, and the blocker that may stand at the input.

All powers are referred to the input of the chain, in its noise bandwidth B, and add as powers:

- reciprocal mixing of a blocker at each position with phase noise: P - R + L + 10·log B
- third-order products of two tones of one level: each stage makes 3·(P - R) - 2·(IIP3 - G_before), added as the
  budget says (in phase, or as powers)
- a transmitter's noise: density - isolation + 10·log B

R is what the positions in front of a stage reject of the interferer: a rejection acts on what leaves its position.
Source: ``calculators.blocking`` and ``calculators.intermodulation``; phase noise flat over B, noise-like interference.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.cascade_noise import floor, floor_slopes, floor_so_far
from specflow.budgets.figures import Figures
from specflow.calculators.decibel import NEPER, decibels, ratio, total

Floats = NDArray[np.float64]
Gradient = dict[str, Floats]
_PER_NEPER = 10.0 / math.log(10.0)


def _rows(figures: Figures, figure: str) -> list[int]:
    return sorted({read.row for read in figures.chain.lines if read.role.figure == figure})


def _in_front(array: Floats) -> Floats:
    """Return the sums of what stands in front of each position."""
    sums = np.zeros_like(array)
    np.cumsum(array[:-1], axis=0, out=sums[1:])
    return sums


def _width_db(figures: Figures) -> float:
    width = figures.chain.budget.bandwidth_hz
    assert width is not None  # asked for
    return 10.0 * math.log10(width)


def _mixed(figures: Figures) -> Floats:
    """Return what each position's phase noise makes of a blocker of 0 dBm, mW at the input."""
    parts = np.zeros_like(figures["gain"])
    rejected = _in_front(figures["rejection"])
    for row in _rows(figures, "phase_noise"):
        parts[row] = ratio(figures["phase_noise"][row] - rejected[row] + _width_db(figures))
    return parts


def _reciprocal(figures: Figures) -> Floats:
    """Return reciprocal mixing at each position, mW at the input."""
    mixed = _mixed(figures)
    if not _rows(figures, "blocker"):
        return np.zeros_like(mixed)
    return mixed * ratio(total(figures["blocker"]))


def _products_db(figures: Figures) -> Floats:
    """Return the third-order product of each position, dBm at the input; -inf without tones."""
    if not _rows(figures, "tones"):
        return np.full_like(figures["gain"], -np.inf)
    level = total(figures["tones"]) - _in_front(figures["rejection"])
    return 3.0 * level - 2.0 * (figures["iip3"] - _in_front(figures["gain"]))


def _is_coherent(figures: Figures) -> bool:
    return figures.chain.budget.intermodulation == "coherent"


def _products_so_far(figures: Figures) -> Floats:
    """Return the third-order products of the chain up to each position, mW at the input."""
    products = _products_db(figures)
    if _is_coherent(figures):
        return np.asarray(np.cumsum(np.exp(products * NEPER / 2.0), axis=0) ** 2)
    return np.cumsum(np.exp(products * NEPER), axis=0)


def _leaked(figures: Figures) -> Floats | float:
    """Return a transmitter's noise in the channel, mW at the input."""
    if not _rows(figures, "leaked_noise"):
        return 0.0
    density = total(figures["leaked_noise"]) - total(figures["isolation"])
    return ratio(density + _width_db(figures))


def _interference_so_far(figures: Figures) -> Floats:
    mixed = np.cumsum(_reciprocal(figures), axis=0)
    return np.asarray(mixed + _products_so_far(figures) + _leaked(figures))


def desense(figures: Figures) -> Floats:
    """Rise of the noise by interference, dB."""
    return np.asarray(_PER_NEPER * np.log1p(_interference_so_far(figures)[-1] * ratio(-floor(figures))))


def desense_so_far(figures: Figures) -> Floats:
    """The same with the chain cut off behind each position."""
    return _PER_NEPER * np.log1p(_interference_so_far(figures) * ratio(-floor_so_far(figures)))


def _power_slopes(figures: Figures) -> Gradient:
    """Return the derivatives of the interference in mW to the figures that make it."""
    zero = np.zeros_like(figures["gain"])
    found = {name: zero.copy() for name in
             ("gain", "rejection", "iip3", "phase_noise", "blocker", "tones", "leaked_noise", "isolation")}  # fmt: skip
    mixed = _reciprocal(figures)
    found["phase_noise"] += mixed
    found["blocker"] += total(mixed)
    found["rejection"] -= _behind(mixed)
    products = _products_db(figures)
    amplitudes = np.exp(products * (NEPER / 2.0 if _is_coherent(figures) else NEPER))
    parts = amplitudes * total(amplitudes) if _is_coherent(figures) else amplitudes
    found["iip3"] -= 2.0 * parts
    found["gain"] += 2.0 * _behind(parts)
    found["rejection"] -= 3.0 * _behind(parts)
    found["tones"] += 3.0 * total(parts)
    found["leaked_noise"] += _leaked(figures)
    found["isolation"] -= _leaked(figures)
    return {name: slope * NEPER for name, slope in found.items()}


def _behind(array: Floats) -> Floats:
    """Return the sums of what stands behind each position."""
    return total(array) - np.cumsum(array, axis=0)


def desense_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    noise = ratio(floor(figures))
    relative = _interference_so_far(figures)[-1] / noise
    found = {
        name: _PER_NEPER * slope / noise / (1.0 + relative) for name, slope in _power_slopes(figures).items()
    }
    for name, slope in floor_slopes(figures).items():
        found[name] = found.get(name, 0.0) - slope * relative / (1.0 + relative)
    return found


def _allowed(figures: Figures, noise_dbm: Floats) -> Floats:
    """Return how much interference the rise that is allowed leaves beside a transmitter's noise, mW."""
    return np.asarray(ratio(noise_dbm) * np.expm1(total(figures["allowed_rise"]) * NEPER) - _leaked(figures))


def _blocker(allowed: Floats, mixed: Floats) -> Floats:
    """Return the level of a blocker whose reciprocal mixing is as much as allowed, dBm; -inf where none is."""
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.where(allowed > 0, decibels(np.maximum(allowed, 0.0) / mixed), -np.inf)


def blocking(figures: Figures) -> Floats:
    """Level of one blocker at the input with which the noise rises as much as allowed, dBm."""
    return _blocker(_allowed(figures, floor(figures)), total(_mixed(figures)))


def blocking_so_far(figures: Figures) -> Floats:
    """The same with the chain cut off behind each position; infinite in front of all phase noise."""
    return _blocker(_allowed(figures, floor_so_far(figures)), np.cumsum(_mixed(figures), axis=0))


def blocking_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    mixed = _mixed(figures)
    parts = mixed / total(mixed)
    noise_dbm = floor(figures)
    allowed = _allowed(figures, noise_dbm)
    rise = total(figures["allowed_rise"])
    to_floor = ratio(noise_dbm) * np.expm1(rise * NEPER) / allowed
    leaked = _leaked(figures) / allowed
    zero = np.zeros_like(mixed)
    found: Gradient = {name: slope * to_floor for name, slope in floor_slopes(figures).items()}
    found["phase_noise"] = -parts
    found["rejection"] = _behind(parts)
    found["allowed_rise"] = zero + ratio(noise_dbm) * ratio(rise) / allowed
    found["leaked_noise"] = zero - leaked
    found["isolation"] = zero + leaked
    return found
