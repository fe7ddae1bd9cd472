"""The text of an allotment as a limit: one number a side, or a table over the conditions that it depends on."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from itertools import combinations

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.allotment import Allotment
from specflow.budgets.required import Required
from specflow.errors import DocumentError
from specflow.model.columns import Columns

Floats = NDArray[np.float64]
Rows = NDArray[np.intp]
MOST_CASES = 60
"""A requirement of more lines than that is read by nobody (our choice, no source)."""
_MOST_NAMES = 3


def limit_text_of(one: Allotment, required: Required) -> str:
    """Return an allotment as the text of a limit, in the terms of the conditions that the budget is evaluated over.

    Sides that depend on conditions become a table by the fewest dimensions that tell them apart, or, over a range that
    is sampled, straight lines between the samples. DocumentError where no table of ``MOST_CASES`` lines says it.
    """
    if one.at is None:
        return _sides(one.low, one.high, one.unit)
    if len(np.unique(required.point)) < required.size:
        return _lines(one, required)
    names = _names(one, required.columns)
    if names is None:
        raise DocumentError(
            f"the limit of {one.block} {one.parameter} is another at nearly every one of {required.size} conditions",
            hint="share without --by-conditions: one number for all conditions",
        )
    return _table(one, required.columns, names, np.arange(required.size))


def _sides(low: float, high: float, unit: str) -> str:
    bottom, top = f"{low:.10g} {unit}", f"{high:.10g} {unit}"
    if math.isinf(low):
        return f"<= {top}"
    return f">= {bottom}" if math.isinf(high) else f"{bottom}..{top}"


def _names(one: Allotment, columns: Columns) -> tuple[str, ...] | None:
    """Return the fewest dimensions that tell the sides apart, None where three of few lines do not."""
    codes = {name: _codes(columns, name) for name in columns.names}
    varying = [name for name, one in codes.items() if not np.isnan(one).any() and len(np.unique(one)) > 1]
    for count in range(1, min(len(varying), _MOST_NAMES) + 1):
        for names in combinations(varying, count):
            groups = list(_groups(columns, names, np.arange(columns.size)))
            if len(groups) <= MOST_CASES and all(_is_one(one, rows) for rows in groups):
                return names
    return None


def _is_one(one: Allotment, rows: Rows) -> bool:
    assert one.at is not None  # asked only of sides that depend on conditions
    return all(bool((side[rows] == side[rows[0]]).all()) for side in one.at)


def _codes(columns: Columns, name: str) -> Floats:
    if name in columns.numeric:
        return columns.numeric[name]
    return columns.text[name].codes.astype(np.float64)


def _groups(columns: Columns, names: Sequence[str], rows: Rows) -> Iterator[Rows]:
    """Yield the rows that have equal values of some dimensions."""
    if not names:
        yield rows
        return
    codes = _codes(columns, names[0])[rows]
    for value in np.unique(codes):
        yield from _groups(columns, names[1:], rows[codes == value])


def _table(one: Allotment, columns: Columns, names: Sequence[str], rows: Rows) -> str:
    """Return ``by NAME[unit] (VALUE: LIMIT; ...)``, a table within a table for each further dimension."""
    assert one.at is not None
    if not names:
        return _sides(float(one.at[0][rows[0]]), float(one.at[1][rows[0]]), one.unit)
    name = names[0]
    unit = columns.units.get(name, "") if name in columns.numeric else ""
    cases = []
    for group in _groups(columns, names[:1], rows):
        row = int(group[0])
        word = (
            f"{columns.numeric[name][row]:.12g}"
            if name in columns.numeric
            else _quoted(columns.text[name].word(row))
        )
        cases.append(f"{word}: {_table(one, columns, names[1:], group)}")
    return f"by {name}{f'[{unit}]' if unit else ''} ({'; '.join(cases)})"


def _quoted(word: str) -> str:
    return f'"{word}"' if "'" in word else f"'{word}'"


def _lines(one: Allotment, required: Required) -> str:
    """Return straight lines along the one range that the sides follow."""
    assert one.at is not None
    columns = required.columns
    for name, values in columns.numeric.items():
        places, first = np.unique(values, return_index=True)
        rows = [np.flatnonzero(values == place) for place in places]
        if 1 < len(places) <= MOST_CASES and all(_is_one(one, group) for group in rows):
            unit = columns.units.get(name, "")
            axis = f"{name}[{unit}]" if unit else name
            return " and ".join(
                f"mask({axis}, {word} {one.unit}, linear: {_breakpoints(places, side[first])})"
                for word, side in zip(("min", "max"), one.at, strict=True)
                if np.isfinite(side).all()
            )
    raise DocumentError(
        f"the limit of {one.block} {one.parameter} depends on conditions in a way that no one range tells",
        hint="share without --by-conditions, or list the values of the conditions set instead of a range",
    )


def _breakpoints(places: Floats, side: Floats) -> str:
    return "; ".join(f"{place:.12g}: {value:.10g}" for place, value in zip(places, side, strict=True))
