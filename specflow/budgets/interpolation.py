"""Between the entries of a table, and never beyond them."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.errors import ConditionsError
from specflow.units import format_value

Floats = NDArray[np.float64]
CLOSE = 1e-9  # relative: a place that was converted is still the same place


def interpolated(place: Floats, at: Floats, values: Floats, drawn_in: str) -> Floats:
    """Return straight lines between entries, drawn in dB (as the numbers stand) or in linear power."""
    if drawn_in == "dB":
        return np.asarray(np.interp(place, at, values))
    return np.asarray(10.0 * np.log10(np.interp(place, at, 10.0 ** (values / 10.0))))


def refuse_outside(
    place: Floats, low: float, high: float, name: str, unit: str, where: str, what: str
) -> None:
    """Raise ConditionsError where a condition lies outside what is known: nothing is extrapolated or clamped."""
    least, most = float(place.min()), float(place.max())
    slack = CLOSE * max(abs(least), abs(most))
    if least >= low - slack and most <= high + slack:
        return
    raise ConditionsError(
        f"{what} reaches from {format_value(low)} to {format_value(high)} {unit} of {name}, needed is "
        f"{format_value(least)} to {format_value(most)} {unit}",
        where=where,
        hint="extend it with values that are known there; nothing is extrapolated or clamped",
    )
