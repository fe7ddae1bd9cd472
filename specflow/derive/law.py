"""A law as an entry of the catalogue: what it needs, what may be set, the function, and what the function gives."""

from __future__ import annotations

import inspect
import re
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from specflow.derive.samples import Samples

Floats = NDArray[np.float64]
Rows = NDArray[np.intp]

#: What a law runs over: a stated range of one condition; directions on the sphere; nothing (each row by itself).
Over = Literal["range", "directions", "each"]


@dataclass(frozen=True, slots=True)
class Setting:
    """What may be said to a law. ``default`` None: it must be said. ``unit`` "": a plain number or a word.

    ``choices`` are the words allowed; a setting without them is a number, with its unit where ``unit`` names one
    ("axis" and "value" mean the unit of the axis and of the values; "difference" that of a difference of values).
    ``is_text``: any words (a limit, a file of records).
    """

    name: str
    what: str
    default: str | None = None
    unit: str = ""
    choices: tuple[str, ...] = ()
    is_text: bool = False


@dataclass(frozen=True, slots=True)
class Outcome:
    """What a law makes of one group of rows: m results, one unless the law gives a trace.

    ``value`` (m,) and, where results are intervals, ``high`` (m,) in ``unit``. ``rows`` (m,): the row of the samples
    that governs each result; ``at``: where that is, in words, where the axis value of the row does not say it.
    ``u`` (m,) in the tolerance unit, with ``u_rule`` ("that of the governing reading"); None where the law knows no
    rule. ``axes``: conditions that each result of a trace keeps, ``axis_units`` of
    those that no reading has. ``notes`` are sentences for the person.
    """

    value: Floats
    unit: str
    rows: Rows
    high: Floats | None = None
    at: tuple[str, ...] = ()
    u: Floats | None = None
    u_rule: str = ""
    axes: Mapping[str, Floats] = field(default_factory=dict)
    notes: tuple[str, ...] = ()
    axis_units: Mapping[str, str] = field(default_factory=dict)


def single(
    value: float,
    unit: str,
    row: int,
    *,
    at: str = "",
    u: float | None = None,
    u_rule: str = "",
    notes: tuple[str, ...] = (),
) -> Outcome:
    """Return the outcome of a law that gives one number."""
    spread = None if u is None else np.array([u], np.float64)
    places = np.array([row], np.intp)
    return Outcome(
        np.array([value], np.float64), unit, places, None, (at,) if at else (), spread, u_rule, {}, notes
    )


@dataclass(frozen=True, slots=True)
class Law:
    """One entry. ``roles`` are the value columns it reads.

    ``needs`` says in a sentence what must be stored. ``gives``: parameters it usually gives, of readings
    of the parameters ``reads``, over one of the conditions ``along`` (for proposals).
    ``takes_bounds``: readings that are intervals ("< -90") may enter. ``takes_repeats``: several readings at one
    axis value may. ``statistic``: what the result is called where it is of the same parameter as the readings ("" where
    it is a reading like the others; "{of}" takes a setting). ``brackets``: the law interpolates, so the reading beyond
    each end of the range enters, too, and the ends need only be bracketed. ``in_parts``: results over parts of a range
    speak for the whole together. ``whole_table``: every value column of one table is read, each as the role of its own
    name. ``keeps_parameter``: without ``--gives`` the result is of the readings' parameter.
    """

    name: str
    title: str
    function: Callable[[Samples], Outcome]
    over: Over = "range"
    needs: str = "one value column over a range of one condition"
    roles: tuple[str, ...] = ("value",)
    settings: tuple[Setting, ...] = ()
    gives: tuple[str, ...] = ()
    reads: tuple[str, ...] = ()
    along: tuple[str, ...] = ("frequency",)
    takes_bounds: bool = False
    takes_repeats: bool = False
    brackets: bool = False
    keeps_parameter: bool = False
    in_parts: bool = False
    whole_table: bool = False
    statistic: str = ""
    version: int = 1

    @property
    def text(self) -> str:
        """What the function says of itself: formula, validity, source."""
        return inspect.getdoc(self.function) or ""

    @property
    def source(self) -> str:
        """Where the formula is from, as its docstring says."""
        found = re.search(r"^Source: (.*?)(?=\n\n|\Z)", self.text, re.DOTALL | re.MULTILINE)
        return found.group(1).replace("\n", " ") if found else ""

    def setting(self, name: str) -> Setting | None:
        """Return a setting by its name, or None."""
        return next((one for one in self.settings if one.name == name), None)
