"""Putting the condition columns of several tables under one another."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.recorded import spans_in
from specflow.errors import UnitError
from specflow.model.columns import UNSTATED, Columns, Spans, TextColumn
from specflow.units import convert, parse_unit


def stack(parts: Sequence[Columns]) -> Columns:
    """Return one set of columns with the rows of all parts; numbers are brought to the first unit met.

    A dimension that one part does not state is unstated in its rows; so are numbers in a unit of another kind.
    """
    if len(parts) == 1:
        return parts[0]
    text_names = dict.fromkeys(name for part in parts for name in part.text)
    numeric_names = dict.fromkeys(name for part in parts for name in part.numeric if name not in text_names)
    units = _first_units(parts)
    return Columns(
        sum(part.size for part in parts),
        {
            name: np.concatenate([_numbers(part, name, units.get(name, "")) for part in parts])
            for name in numeric_names
        },
        {name: stack_words([_words(part, name) for part in parts]) for name in text_names},
        {name: unit for name, unit in units.items() if name in numeric_names},
        _stacked_spans(parts),
    )


def _stacked_spans(parts: Sequence[Columns]) -> dict[str, Spans]:
    """Return the ranges that rows speak for; those of a part that speaks in another unit are converted."""
    first = {name: spans.unit for part in reversed(parts) for name, spans in part.spans.items()}
    return {name: _spans_in(parts, name, unit) for name, unit in first.items()}


def _spans_in(parts: Sequence[Columns], name: str, unit: str) -> Spans:
    found = [spans_in(part.spans.get(name), unit, part.size) for part in parts]
    low, high, gap = (np.concatenate([getattr(one, end) for one in found]) for end in ("low", "high", "gap"))
    sizes = [len(one.low) for one in found]
    silent = _flags([one.silent for one in found], sizes)
    return Spans(low, high, gap, unit, silent, _flags([one.undivided for one in found], sizes))


def _flags(parts: Sequence[NDArray[np.bool_] | None], sizes: Sequence[int]) -> NDArray[np.bool_] | None:
    if all(part is None for part in parts):
        return None
    filled = (np.zeros(size, bool) if part is None else part for part, size in zip(parts, sizes, strict=True))
    return np.concatenate(list(filled))


def stack_words(columns: Sequence[TextColumn]) -> TextColumn:
    """Return one column with the rows of all, over one list of labels."""
    labels: dict[str, int] = {}
    parts = []
    for column in columns:
        places = [labels.setdefault(label, len(labels)) for label in column.labels]
        parts.append(np.array([*places, UNSTATED], np.int32)[column.codes])
    return TextColumn(np.concatenate(parts), tuple(labels))


def _first_units(parts: Sequence[Columns]) -> dict[str, str]:
    units: dict[str, str] = {}
    for part in parts:
        for name in part.numeric:
            units.setdefault(name, part.units.get(name, ""))
    return units


def _numbers(part: Columns, name: str, unit: str) -> NDArray[np.float64]:
    values = part.numeric.get(name)
    if values is None:
        return np.full(part.size, np.nan)
    own = part.units.get(name, "")
    if own == unit:
        return values
    try:
        return convert(values, parse_unit(own or "1"), parse_unit(unit or "1"))
    except UnitError:
        return np.full(part.size, np.nan)


def _words(part: Columns, name: str) -> TextColumn:
    column = part.text.get(name)
    if column is not None:
        return column
    values = part.numeric.get(name)
    if values is None:
        return TextColumn(np.full(part.size, UNSTATED, np.int32), ())
    return TextColumn.of([None if value != value else format(value, ".15g") for value in values.tolist()])
