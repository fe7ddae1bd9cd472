"""The same records twice in one file, as in a regrouped copy of a table: noticed, said, and taken once."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Mapping, Sequence
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from specflow.importers.measured.document import content_digest
from specflow.importers.measured.result import MeasuredTable
from specflow.model.evidence import EvidenceColumns, EvidenceTable, ValueArrays

_MOST_ROWS = 200_000

Record = tuple[object, ...]


def without_repeats(tables: Sequence[MeasuredTable]) -> list[MeasuredTable]:
    """Leave out rows all of whose records (quantity, item, conditions, value) stand in an earlier table of the file."""
    if sum(table.columns is not None for table in tables) < 2:
        return list(tables)  # sorting the millions of values of a lone table would find nothing
    seen: dict[Record, str] = {}
    result = []
    doubles = _shared_values(tables)
    for table in tables:
        rows = _candidates(table, doubles)
        if table.document is None or table.columns is None or not len(rows):
            result.append(table)
            continue
        records = _records(table.document, table.columns, rows)
        where = table.place if not table.sheet else f"{table.sheet}!{table.place}"
        again = [(name, place, seen[one]) for name, place, one in records if one in seen]
        if again:
            table = _reduced(table, again)
        result.append(table)
        for _, _, record in records:
            seen.setdefault(record, where)
    return result


def _shared_values(tables: Sequence[MeasuredTable]) -> dict[tuple[str, str], NDArray[np.float64]]:
    """The values that more than one table has, of each parameter and unit: only these can be said twice."""
    found: dict[tuple[str, str], list[NDArray[np.float64]]] = defaultdict(list)
    for table in tables:
        own: dict[tuple[str, str], list[NDArray[np.float64]]] = defaultdict(list)
        for value in (
            table.document.values if table.document is not None and table.columns is not None else ()
        ):
            assert table.columns is not None  # a table with a document has its arrays
            own[value.quantity.parameter, value.unit].append(table.columns.values[value.name].low)
        for key, arrays in own.items():
            found[key].append(np.unique(np.concatenate(arrays)))
    shared = {}
    for key, arrays in found.items():
        values, counts = np.unique(np.concatenate(arrays), return_counts=True)
        shared[key] = values[counts > 1] if len(arrays) > 1 else values[:0]
    return shared


def _candidates(
    table: MeasuredTable, doubles: Mapping[tuple[str, str], NDArray[np.float64]]
) -> NDArray[np.intp]:
    """The rows that may be said in another table, too."""
    if table.document is None or table.columns is None:
        return np.zeros(0, np.intp)
    may = np.zeros(table.columns.conditions.size, bool)
    for value in table.document.values:
        low = table.columns.values[value.name].low
        may |= np.isin(low, doubles[value.quantity.parameter, value.unit])
    return np.flatnonzero(may)[:_MOST_ROWS]


def _records(
    document: EvidenceTable, columns: EvidenceColumns, rows: NDArray[np.intp]
) -> list[tuple[str, int, Record]]:
    """The records of these rows: (name of the value column, row, what the record says)."""
    conditions = columns.conditions.take(rows)
    said: list[list[Record]] = [[] for _ in rows]
    for name, numbers in sorted(conditions.numeric.items()):
        unit = conditions.units.get(name, "")
        for place, number in enumerate(numbers.tolist()):
            if number == number:
                said[place].append((name, unit, number))
    for name, words in sorted(conditions.text.items()):
        for place in range(len(rows)):
            if words.word(place):
                said[place].append((name, "", words.word(place).casefold()))
    items = columns.items.take(rows)
    dates = None if columns.dates is None else columns.dates.take(rows)
    about = (document.block, document.method, document.stage, document.set_up, document.performer)
    records: list[tuple[str, int, Record]] = []
    for value in document.values:
        quantity = value.quantity.model_dump_json()
        low, high = (array[rows].tolist() for array in _ends(columns.values[value.name]))
        for place, row in enumerate(rows.tolist()):
            if low[place] == low[place]:
                date = dates.word(place) if dates is not None else document.performed_on
                one = (about, quantity, value.unit, items.word(place).casefold(), date)
                records.append((value.name, row, (*one, tuple(said[place]), low[place], high[place])))
    return records


def _ends(arrays: ValueArrays) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    return arrays.low, arrays.high


def _reduced(table: MeasuredTable, again: Sequence[tuple[str, int, str]]) -> MeasuredTable:
    """The table without these records (column, row, where they stand already); a row without any is left out."""
    assert table.document is not None and table.columns is not None
    columns = table.columns
    values = {}
    for name, arrays in columns.values.items():
        marked = np.zeros(len(arrays.low), bool)
        marked[[row for one, row, _ in again if one == name]] = True
        low = np.where(marked, np.nan, arrays.low)
        high = low if arrays.high is arrays.low else np.where(marked, np.nan, arrays.high)
        values[name] = ValueArrays(low, high, arrays.u)
    emptied = np.zeros(columns.conditions.size, bool)
    emptied[[row for _, row, _ in again]] = True
    emptied &= np.all([np.isnan(one.low) for one in values.values()], axis=0)
    left = np.flatnonzero(~emptied)
    note = f"{len(again)} values say what {again[0][2]} says (quantity, item, conditions, value): they were not taken twice"
    if not len(left):
        return replace(table, document=None, columns=None, values=0, notes=(*table.notes, note))
    taken = _taken(replace(columns, values=values), left)
    document = table.document.model_copy(update={"rows": len(left)})
    document = document.model_copy(update={"digest": content_digest(document, taken)})
    count = sum(int(np.count_nonzero(~np.isnan(one.low))) for one in taken.values.values())
    return replace(
        table, document=document, columns=taken, rows=len(left), values=count, notes=(*table.notes, note)
    )


def _taken(columns: EvidenceColumns, rows: NDArray[np.intp]) -> EvidenceColumns:
    """These rows of all columns."""
    values = {}
    for name, arrays in columns.values.items():
        low = arrays.low[rows]
        high = low if arrays.high is arrays.low else arrays.high[rows]
        values[name] = ValueArrays(low, high, None if arrays.u is None else arrays.u[rows])
    return replace(
        columns,
        conditions=columns.conditions.take(rows),
        values=values,
        source_rows=columns.source_rows[rows],
        items=columns.items.take(rows),
        dates=None if columns.dates is None else columns.dates.take(rows),
        extra={name: words.take(rows) for name, words in columns.extra.items()},
    )
