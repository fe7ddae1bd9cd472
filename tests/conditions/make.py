"""Small conditions sets and columns for the tests of this package."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from specflow.conditions import make_conditions_set, parse_dimension
from specflow.model.columns import Columns, TextColumn
from specflow.model.conditions import ConditionsSet

UNITS = {
    "frequency": "GHz",
    "temperature_ambient": "°C",
    "temperature_baseplate": "°C",
    "supply_voltage": "V",
    "theta": "deg",
    "phi": "deg",
    "azimuth": "deg",
    "elevation": "deg",
    "input_level": "dBm",
    "power_level": "dBm",
}


def a_set(*dimensions: str, combination: str = "", exclusions: str = "", name: str = "CS-1") -> ConditionsSet:
    """A conditions set from dimensions as people type them."""
    corners = combination == "corners"
    read = [parse_dimension(text, corners=corners) for text in dimensions]
    return make_conditions_set(name, read, combination=combination, exclusions=exclusions)


def rows(units: dict[str, str] | None = None, **columns: Sequence[float | str | None]) -> Columns:
    """Columns from plain lists: words make a text column, None is unstated."""
    numeric: dict[str, np.ndarray] = {}
    text: dict[str, TextColumn] = {}
    size = 0
    for name, values in columns.items():
        size = len(values)
        if any(isinstance(value, str) for value in values):
            text[name] = TextColumn.of([None if value is None else str(value) for value in values])
        else:
            numeric[name] = np.array([np.nan if value is None else value for value in values], np.float64)
    known = {name: UNITS.get(name, "") for name in numeric}
    return Columns(size, numeric, text, {**known, **(units or {})})


def everything(columns: Columns) -> np.ndarray:
    """The mask that calls every record good."""
    return np.ones(columns.size, np.bool_)
