"""A calculator as an entry of the catalogue: one function, with its line, its figures and its source."""

from __future__ import annotations

import inspect
import re
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

_UNITS = {
    "db_per_k": "dB/K",
    "dbm_hz": "dBm/Hz",
    "dbc_hz": "dBc/Hz",
    "wavelengths": "wavelengths",
    "percent": "%",
    "dbm": "dBm",
    "dbw": "dBW",
    "dbi": "dBi",
    "dbc": "dBc",
    "db": "dB",
    "hz": "Hz",
    "deg": "°",
    "ohm": "Ω",
    "k": "K",
    "w": "W",
    "m": "m",
    "s": "s",
    "v": "V",
}
"""The unit that the end of a figure's name states; the longer ending is found first. A name without one is a number."""


@dataclass(frozen=True, slots=True)
class Figure:
    """One input or output: its name and its unit ("" for a ratio, a count, a choice or complex numbers)."""

    name: str
    unit: str

    @classmethod
    def named(cls, name: str) -> Figure:
        """Return the figure whose name ends in its unit: ``gain_db`` is in dB."""
        endings = (ending for ending in _UNITS if name.endswith(f"_{ending}"))
        return cls(name, _UNITS.get(next(endings, ""), ""))


@dataclass(frozen=True, slots=True)
class Calculator:
    """One entry: the function and what its docstring and its signature say about it."""

    name: str
    function: Callable[..., Any]
    summary: str
    inputs: tuple[Figure, ...]
    outputs: tuple[Figure, ...]
    source: str

    @classmethod
    def of(cls, function: Callable[..., Any], *outputs: str) -> Calculator:
        """Return the entry of a function; its summary and source are those of its docstring."""
        text = inspect.getdoc(function) or ""
        source = re.search(r"^Source: (.*?)(?=\n\n|\Z)", text, re.DOTALL | re.MULTILINE)
        return cls(
            name=function.__name__,
            function=function,
            summary=text.partition("\n\n")[0].replace("\n", " "),
            inputs=tuple(Figure.named(name) for name in inspect.signature(function).parameters),
            outputs=tuple(Figure.named(name) for name in outputs),
            source=source.group(1).replace("\n", " ") if source else "",
        )
