"""Lines that are read from recorded evidence: one column of one table, at the block's own conditions."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.interpolation import interpolated, refuse_outside
from specflow.budgets.own_conditions import numbers
from specflow.conditions.recorded import recorded_words
from specflow.errors import ConditionsError, DocumentError, UnitError
from specflow.model.base import code_key
from specflow.model.budget_line import BudgetLine, Trace
from specflow.model.columns import Columns
from specflow.model.evidence import EvidenceColumns, EvidenceTable, ValueColumn
from specflow.model.snapshot import Snapshot
from specflow.units import converter, format_value, parse_unit

Floats = NDArray[np.float64]
Rows = NDArray[np.intp]
_CLOSE = 1e-9


def trace_values(trace: Trace, line: BudgetLine, own: Columns, snapshot: Snapshot, where: str) -> Floats:
    """Return the recorded values at each of the block's conditions, in the line's unit, float64 (n,).

    The dimension the trace runs along is read between rows; all others that the table states must be the block's own,
    but for one that a drift of the line accounts for. Raises DocumentError, ConditionsError or UnitError.
    """
    table, column = _recorded(trace, line, snapshot, where)
    arrays = snapshot.load_columns([table.id])[table.id]
    rows = _rows(trace, table, column, arrays, where)
    values = _in_line_unit(arrays.values[column.name].low[rows], column, line, where)
    stated = arrays.conditions.take(rows)
    along = _along(trace, table, stated, where)
    rest = _matching(stated, own, line, along, table, where)
    what = f"the trace {table.id} ({column.name})"
    unit = stated.units.get(along, "")
    place = numbers(own, along, unit, where, what)
    result = np.empty(own.size)
    for chosen, matching in rest:
        at, order = np.unique(stated.numeric[along][matching], return_index=True)
        if len(at) != len(matching):
            raise ConditionsError(
                f"{what} has several rows at one {along}",
                where=where,
                hint="name the item, or attach them apart",
            )
        refuse_outside(place[chosen], at[0], at[-1], along, unit, where, what)
        result[chosen] = interpolated(place[chosen], at, values[matching][order], trace.drawn_in)
    return result


def _recorded(
    trace: Trace, line: BudgetLine, snapshot: Snapshot, where: str
) -> tuple[EvidenceTable, ValueColumn]:
    table = snapshot.find(EvidenceTable, trace.table)
    if table is None:
        raise DocumentError(
            f"the evidence table {trace.table} is not in the project",
            where=where,
            hint="attach it, or correct its id",
        )
    if code_key(table.block) != code_key(line.block):
        raise DocumentError(
            f"the trace {table.id} is of {table.block}, the line is of {line.block}",
            where=where,
            hint="name a table of the same block",
        )
    column = next((one for one in table.values if code_key(one.name) == code_key(trace.column)), None)
    if column is None:
        raise DocumentError(
            f"the table {table.id} has no column {trace.column}",
            where=where,
            hint=f"it has {', '.join(one.name for one in table.values)}",
        )
    if code_key(column.quantity.parameter) != code_key(line.parameter):
        raise DocumentError(
            f"the column {column.name} of {table.id} holds {column.quantity.parameter}, the line {line.parameter}",
            where=where,
            hint="name the column that holds what the line is of",
        )
    return table, column


def _rows(
    trace: Trace, table: EvidenceTable, column: ValueColumn, arrays: EvidenceColumns, where: str
) -> Rows:
    """Return the rows of one item that hold a value."""
    items = arrays.items
    names = {items.word(row) for row in range(len(items.codes))}
    if trace.item:
        kept = np.array([code_key(label) == code_key(trace.item) for label in items.labels], np.bool_)
        ours = np.append(kept, False)[items.codes]
    elif len(names) > 1:
        raise ConditionsError(
            f"the table {table.id} has several items: {', '.join(sorted(names))}",
            where=where,
            hint="name the item of the trace",
        )
    else:
        ours = np.ones(len(items.codes), np.bool_)
    value = arrays.values[column.name]
    ours &= ~np.isnan(value.low)
    rows = np.flatnonzero(ours)
    if not len(rows) or not np.array_equal(value.low[rows], value.high[rows]):
        raise ConditionsError(
            f"the column {column.name} of {table.id} has {'bounds' if len(rows) else 'no values'}"
            + (f" for {trace.item}" if trace.item else ""),
            where=where,
            hint="a trace needs plain values; write what holds as a table",
        )
    return rows


def _in_line_unit(values: Floats, column: ValueColumn, line: BudgetLine, where: str) -> Floats:
    if column.unit == line.unit:
        return values
    try:
        return converter(parse_unit(column.unit or "1"), parse_unit(line.unit or "1"))(values)
    except UnitError as error:
        raise UnitError(
            f"the column {column.name} is in {column.unit or 'no unit'}, the line in {line.unit}: {error.message}",
            where=where,
            hint=error.hint or "write the line in a unit of the same kind",
        ) from None


def _along(trace: Trace, table: EvidenceTable, stated: Columns, where: str) -> str:
    varying = [name for name, values in stated.numeric.items() if len(np.unique(values)) > 1]
    if trace.along in stated.numeric:
        return trace.along
    if trace.along or len(varying) != 1:
        named = ", ".join(varying or stated.numeric) or "no numeric condition"
        raise ConditionsError(
            f"it is not clear along which condition the trace {table.id} runs ({named})",
            where=where,
            hint="say along which: trace TABLE COLUMN along frequency",
        )
    return varying[0]


def _matching(
    stated: Columns, own: Columns, line: BudgetLine, along: str, table: EvidenceTable, where: str
) -> list[tuple[Rows, Rows]]:
    """Return the places of evaluation with equal other conditions, each with the table's rows that have the same."""
    groups: list[tuple[Rows, Rows]] = [(np.arange(own.size), np.arange(stated.size))]
    for name in stated.names:
        if name == along:
            continue
        wanted, recorded = _both(name, stated, own, line, table, where)
        split: list[tuple[Rows, Rows]] = []
        for chosen, rows in groups:
            for value in np.unique(wanted[chosen]):
                same = rows[np.abs(recorded[rows] - value) <= _CLOSE * max(1.0, abs(float(value)))]
                if not len(same):
                    raise _not_recorded(name, float(value), stated, recorded[rows], table, where)
                split.append((chosen[wanted[chosen] == value], same))
        groups = split
    return groups


def _both(
    name: str, stated: Columns, own: Columns, line: BudgetLine, table: EvidenceTable, where: str
) -> tuple[Floats, Floats]:
    """Return one dimension as the block has it and as the table has it, comparable numbers."""
    what = f"the trace {table.id}"
    if name in stated.numeric:
        recorded = stated.numeric[name]
        drift = next((one for one in line.drifts if one.dimension == name), None)
        if drift is not None and np.all(recorded == drift.reference):
            return np.full(own.size, drift.reference), recorded
        if name not in own.names and len(np.unique(recorded)) == 1:
            return np.full(own.size, recorded[0]), recorded  # recorded, but nobody asks for it
        return numbers(own, name, stated.units.get(name, ""), where, what), recorded
    column = stated.text[name]
    wanted = recorded_words(own, name)
    if wanted is None:
        if len({column.word(row) for row in range(stated.size)}) == 1:
            return np.zeros(own.size), np.zeros(stated.size)
        raise ConditionsError(
            f"{what} depends on {name}, which the block's conditions do not state",
            where=where,
            hint=f"add {name} to the conditions set",
        )
    number = {word.casefold(): float(index) for index, word in enumerate(column.labels)}
    codes = np.array([number.get(label.casefold(), -2.0) for label in wanted.labels] + [-3.0])
    return codes[wanted.codes], column.codes.astype(np.float64)


def _not_recorded(
    name: str, value: float, stated: Columns, recorded: Floats, table: EvidenceTable, where: str
) -> ConditionsError:
    unit = stated.units.get(name, "")
    if name in stated.numeric:
        has = ", ".join(format_value(float(one)) for one in np.unique(recorded))
        what = f"{format_value(value)} {unit}".strip()
    else:
        labels = stated.text[name].labels
        has, what = ", ".join(labels), "the word required"
    return ConditionsError(
        f"the trace {table.id} has {name} {has} {unit}".rstrip() + f", needed is {what}",
        where=where,
        hint=f"give the line a drift by {name} from what was recorded, or attach the rows that lack",
    )
