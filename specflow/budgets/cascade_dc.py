"""DC power and efficiency of a cascade: values, cumulative columns, shares and derivatives.

A position draws what its line dc_power states for each of its elements, or what its output level needs at the
efficiency it states: P_out/η (drain), (P_out - P_in)/η (power added). Source: as ``calculators.dc_power``.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.cascade_level import level, level_so_far
from specflow.budgets.figures import Figures
from specflow.calculators.decibel import NEPER, ratio, total

Floats = NDArray[np.float64]
Gradient = dict[str, Floats]
_WATT = 1e-3


def _rows(figures: Figures, figure: str) -> list[int]:
    return sorted({read.row for read in figures.chain.lines if read.role.figure == figure})


def _output_w(figures: Figures) -> Floats:
    """Return the level behind each position in W."""
    return ratio(level_so_far(figures)) * _WATT


def _input_w(figures: Figures) -> Floats:
    """Return the level in front of each position in W."""
    return ratio(level_so_far(figures) - figures["gain"]) * _WATT


def dc_parts(figures: Figures) -> Floats:
    """Return the DC power in W of each position (positions, ...)."""
    parts = figures["dc_w"].copy()
    for row in _rows(figures, "efficiency"):
        parts[row] = _output_w(figures)[row] * 100.0 / figures["efficiency"][row]
    for row in _rows(figures, "added_efficiency"):
        added = _output_w(figures)[row] - _input_w(figures)[row]
        parts[row] = added * 100.0 / figures["added_efficiency"][row]
    return parts


def dc_power(figures: Figures) -> Floats:
    """DC power of all positions, W."""
    return total(dc_parts(figures))


def dc_power_so_far(figures: Figures) -> Floats:
    """The same up to and including each position."""
    return np.cumsum(dc_parts(figures), axis=0)


def dc_shares(figures: Figures) -> Floats:
    """Share of each position in the DC power."""
    parts = dc_parts(figures)
    whole = total(parts)
    return np.divide(parts, whole, out=np.zeros_like(parts), where=whole > 0)


def dc_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    parts = dc_parts(figures)
    found = {
        name: np.zeros_like(parts) for name in ("gain", "source_level", "efficiency", "added_efficiency")
    }
    found["dc_w"] = np.ones_like(parts)
    for row in _rows(figures, "efficiency"):
        found["efficiency"][row] = -parts[row] / figures["efficiency"][row]
        _through_level(found, parts[row], row + 1)
    for row in _rows(figures, "added_efficiency"):
        found["added_efficiency"][row] = -parts[row] / figures["added_efficiency"][row]
        scale = 100.0 / figures["added_efficiency"][row]
        _through_level(found, _output_w(figures)[row] * scale, row + 1)
        _through_level(found, -_input_w(figures)[row] * scale, row)
    return found


def _through_level(found: Gradient, watts: Floats, rows: int) -> None:
    """A power in proportion to a level moves with the source and the gains of the first ``rows`` positions."""
    found["gain"][:rows] += watts * NEPER
    found["source_level"] += watts * NEPER


def efficiency(figures: Figures) -> Floats:
    """Output power over all DC power, %."""
    return 100.0 * ratio(level(figures)) * _WATT / dc_power(figures)


def efficiency_so_far(figures: Figures) -> Floats:
    """The same with the chain cut off behind each position; infinite in front of all DC power."""
    with np.errstate(divide="ignore"):
        return 100.0 * _output_w(figures) / dc_power_so_far(figures)


def efficiency_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    value, whole = efficiency(figures), dc_power(figures)
    found = {name: -slope * value / whole for name, slope in dc_slopes(figures).items()}
    for name in ("gain", "source_level"):
        found[name] = found[name] + value * NEPER
    return found


def _start_w(figures: Figures) -> Floats:
    return ratio(level(figures) - total(figures["gain"])) * _WATT


def added_efficiency(figures: Figures) -> Floats:
    """Output power less input power over all DC power, %."""
    return 100.0 * (ratio(level(figures)) * _WATT - _start_w(figures)) / dc_power(figures)


def added_efficiency_so_far(figures: Figures) -> Floats:
    """The same with the chain cut off behind each position."""
    with np.errstate(divide="ignore", invalid="ignore"):
        return 100.0 * (_output_w(figures) - _start_w(figures)) / dc_power_so_far(figures)


def added_efficiency_slopes(figures: Figures) -> Gradient:
    """Derivatives to each figure of each position."""
    value, whole = added_efficiency(figures), dc_power(figures)
    output, start = ratio(level(figures)) * _WATT, _start_w(figures)
    found = {name: -slope * value / whole for name, slope in dc_slopes(figures).items()}
    found["gain"] = found["gain"] + 100.0 * output / whole * NEPER
    found["source_level"] = found["source_level"] + 100.0 * (output - start) / whole * NEPER
    return found
