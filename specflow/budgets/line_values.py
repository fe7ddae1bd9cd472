"""What a line comes to at the block's own conditions, in its own unit. Nothing is extrapolated or clamped."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.interpolation import interpolated, refuse_outside
from specflow.budgets.own_conditions import numbers
from specflow.budgets.traces import trace_values
from specflow.conditions.recorded import recorded_words
from specflow.errors import ConditionsError
from specflow.model.budget_line import (
    BudgetLine,
    ConditionTable,
    Constant,
    Drift,
    TouchstoneTrace,
    Trace,
    WordTable,
)
from specflow.model.columns import Columns
from specflow.model.snapshot import Snapshot

Floats = NDArray[np.float64]
_CLOSE = 1e-9  # relative: a place that was converted is still the same place


def line_values(line: BudgetLine, own: Columns, snapshot: Snapshot, where: str) -> Floats:
    """Return the values of a line at each of the block's conditions, float64 (n,) or (1,) where all are the same.

    ConditionsError where the line does not cover a condition, with the range it has and the range that is needed.
    """
    match line.value:
        case Constant(value=value):
            values = np.array([value])
        case ConditionTable() as table:
            values = _table_values(table, own, where, line)
        case WordTable() as words:
            values = _word_values(words, own, where, line)
        case TouchstoneTrace() as trace:
            place = numbers(own, trace.dimension, "Hz", where, f"{trace.file} {trace.entry}")
            at = np.array(trace.frequency_hz)
            refuse_outside(place, at[0], at[-1], trace.dimension, "Hz", where, f"{trace.file} {trace.entry}")
            values = np.interp(place, at, np.array(trace.values_db))
        case Trace() as trace:
            values = trace_values(trace, line, own, snapshot, where)
    for drift in line.drifts:
        values = values + _drift_values(drift, own, where, line)
    return values


def _table_values(table: ConditionTable, own: Columns, where: str, line: BudgetLine) -> Floats:
    what = f"the table of {line.parameter}"
    place = numbers(own, table.dimension, table.dimension_unit, where, what)
    at, values = np.array(table.at), np.array(table.values)
    refuse_outside(place, at[0], at[-1], table.dimension, table.dimension_unit, where, what)
    if table.between == "step":
        index = np.searchsorted(at, place + _CLOSE * np.abs(place), side="right") - 1
        return np.asarray(values[np.clip(index, 0, len(at) - 1)])
    return interpolated(place, at, values, table.drawn_in)


def _word_values(table: WordTable, own: Columns, where: str, line: BudgetLine) -> Floats:
    """Return the values for the words that the block's conditions have. ConditionsError for one without a value."""
    what = f"the table of {line.parameter}"
    column = recorded_words(own, table.dimension)
    if column is None:
        stated = ", ".join(own.names) or "nothing"
        raise ConditionsError(
            f"{what} depends on {table.dimension}, which the block's conditions do not state (they state {stated})",
            where=where,
            hint=f"add {table.dimension} to the conditions set",
        )
    known = {word.casefold(): value for word, value in zip(table.words, table.values, strict=True)}
    asked = [column.word(row) for row in range(own.size)]
    lacking = next((word for word in asked if word.casefold() not in known), None)
    if lacking is not None:
        raise ConditionsError(
            f"{what} has {table.dimension} {', '.join(table.words)}, needed is {lacking or 'where none is stated'}",
            where=where,
            hint="give it a value for each; nothing is taken from another state",
        )
    return np.array([known[word.casefold()] for word in asked])


def _drift_values(drift: Drift, own: Columns, where: str, line: BudgetLine) -> Floats:
    what = f"the drift of {line.parameter}"
    place = numbers(own, drift.dimension, drift.dimension_unit, where, what)
    low = -np.inf if drift.low is None else drift.low
    high = np.inf if drift.high is None else drift.high
    refuse_outside(place, low, high, drift.dimension, drift.dimension_unit, where, what)
    return np.asarray(drift.slope * (place - drift.reference))
