"""What records state of one dimension, in the unit that a conditions set speaks.

A unit difference is converted (the converter is resolved once and kept) and said; a value without its unit,
or in a unit of another kind, is as good as unstated, and the reason can be asked for.
"""

from __future__ import annotations

from dataclasses import replace
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from specflow.errors import UnitError
from specflow.model.columns import Columns, Spans, TextColumn
from specflow.units import Converter, converter, parse_unit

_PLAIN = {"", "1"}  # both say: a plain number


@lru_cache(maxsize=4096)
def conversion(source: str, target: str, difference: bool = False) -> Converter | str:
    """Return the converter between two units, or the sentence that says why there is none."""
    if bool(source) != bool(target):
        recorded, required = (f"in {unit}" if unit else "without a unit" for unit in (source, target))
        return f"recorded {recorded}, required {required}"
    try:
        return converter(parse_unit(source), parse_unit(target), difference=difference)
    except UnitError as error:
        return f"recorded in {source}, required in {target}: {error.message}"


def recorded_numbers(records: Columns, name: str, unit: str) -> NDArray[np.float64] | None:
    """Return the numbers stated for a dimension, in ``unit``; None where no record states comparable numbers."""
    actual = records.numeric.get(name)
    if actual is None:
        return _numbers_typed_as_words(records, name) if not unit else None
    recorded = records.units.get(name, "")
    if recorded == unit or {recorded, unit} <= _PLAIN:
        return actual
    step = conversion(recorded, unit)
    return None if isinstance(step, str) else np.asarray(step(actual), np.float64)


def spans_in(spans: Spans | None, unit: str, size: int) -> Spans:
    """Return ranges in ``unit``; rows without one, or in a unit of another kind, speak for nothing (NaN)."""
    nothing = np.full(size, np.nan)
    if spans is None:
        return Spans(nothing, nothing, nothing, unit)
    if spans.unit == unit or {spans.unit, unit} <= _PLAIN:
        return spans
    step, difference = conversion(spans.unit, unit), conversion(spans.unit, unit, difference=True)
    if isinstance(step, str) or isinstance(difference, str):
        return Spans(nothing, nothing, nothing, unit, spans.silent, spans.undivided)
    low, high, gap = step(spans.low), step(spans.high), difference(spans.gap)
    return replace(spans, low=np.asarray(low), high=np.asarray(high), gap=np.asarray(gap), unit=unit)


def recorded_words(records: Columns, name: str) -> TextColumn | None:
    """Return the words stated for a dimension; plain numbers (``band`` 257) are read as their digits."""
    column = records.text.get(name)
    if column is not None or name not in records.numeric:
        return column
    if records.units.get(name, "") not in _PLAIN:
        return None
    values = records.numeric[name]
    return TextColumn.of([None if value != value else format(value, ".15g") for value in values.tolist()])


def recording_note(records: Columns, name: str, unit: str) -> str:
    """Say what was done to the recorded numbers of a dimension, or why they cannot be used; "" if nothing
    was.
    """
    if name not in records.numeric:
        return ""
    recorded = records.units.get(name, "")
    if recorded == unit or {recorded, unit} <= _PLAIN:
        return ""
    step = conversion(recorded, unit)
    return f"{name}: {step if isinstance(step, str) else f'{recorded} read as {unit} ({step.words})'}"


def _numbers_typed_as_words(records: Columns, name: str) -> NDArray[np.float64] | None:
    column = records.text.get(name)
    if column is None:
        return None
    numbers = [_number(label) for label in column.labels]
    return np.array([*numbers, np.nan])[column.codes]


def _number(label: str) -> float:
    try:
        value = float(label)
    except ValueError:
        return np.nan
    return value if np.isfinite(value) else np.nan
