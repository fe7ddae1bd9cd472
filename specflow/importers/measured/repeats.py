"""The same records twice in one file, as in a regrouped copy of a table: noticed, said, and taken once."""

from __future__ import annotations

import hashlib
from collections.abc import Sequence
from dataclasses import replace
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from specflow.importers.measured.document import content_digest
from specflow.importers.measured.result import MeasuredTable
from specflow.model.evidence import EvidenceColumns, EvidenceTable, ValueArrays

Record = tuple[object, ...]
Marks = NDArray[np.uint64]


def without_repeats(tables: Sequence[MeasuredTable]) -> list[MeasuredTable]:
    """Leave out values that stand in an earlier table of the file with the same quantity, item and conditions."""
    seen: dict[Record, str] = {}
    result = []
    for table, rows in zip(tables, _candidates(tables), strict=True):
        if table.document is None or table.columns is None or not len(rows):
            result.append(table)
            continue
        records = _records(table.document, table.columns, rows)
        where = table.place if not table.sheet else f"{table.sheet}!{table.place}"
        again = [(name, place, seen[one]) for name, place, one in records if one in seen]
        result.append(_reduced(table, again) if again else table)
        for _, _, record in records:
            seen.setdefault(record, where)
    return result


def _candidates(tables: Sequence[MeasuredTable]) -> list[NDArray[np.intp]]:
    """The rows of each table that another table seems to say, too: found by marks, so that few are compared in full."""
    if sum(table.document is not None for table in tables) < 2:
        return [np.zeros(0, np.intp) for _ in tables]
    marks = [_marks(table) for table in tables]
    each = [np.unique(own) for own in marks]
    found, counts = np.unique(np.concatenate([*each, np.zeros(0, np.uint64)]), return_counts=True)
    shared = found[counts > 1]
    if not len(shared):
        return [np.zeros(0, np.intp) for _ in tables]
    return [
        np.flatnonzero(np.isin(own, shared).any(axis=1)) if own.size else np.zeros(0, np.intp)
        for own in marks
    ]


def _marks(table: MeasuredTable) -> Marks:
    """One number for each record (row, value column) that depends on all that the record says."""
    if table.document is None or table.columns is None or not table.document.values:
        return np.zeros((0, 0), np.uint64)
    columns = table.columns
    row = np.zeros(columns.conditions.size, np.uint64)
    for name, numbers in sorted(columns.conditions.numeric.items()):
        unit = columns.conditions.units.get(name, "")
        row += np.where(np.isnan(numbers), np.uint64(0), _mixed(_bits(numbers), f"{name} {unit}"))
    for name, words in sorted({**columns.conditions.text, "": columns.items}.items()):
        of_label = np.array([_of_text(label.casefold()) for label in words.labels] + [0], np.uint64)
        row += np.where(words.codes < 0, np.uint64(0), _mixed(of_label[words.codes], name))
    marks = []
    for value in table.document.values:
        arrays = columns.values[value.name]
        own = (
            row
            + _mixed(_bits(arrays.low), value.quantity.model_dump_json() + value.unit)
            + _mixed(_bits(arrays.high), "high")
        )
        lonely = _of_text(f"{table.place} {table.sheet}") + np.arange(len(own), dtype=np.uint64)
        marks.append(np.where(np.isnan(arrays.low), lonely, own))
    return np.column_stack(marks)


def _bits(numbers: NDArray[np.float64]) -> Marks:
    return (numbers + 0.0).view(np.uint64)  # -0 is 0


def _mixed(bits: Marks, name: str) -> Marks:
    """Numbers spread over all 64 bits, another way for each name."""
    mixed = (bits ^ _of_text(name)) * np.uint64(0x9E3779B97F4A7C15)
    mixed ^= mixed >> np.uint64(29)
    return np.asarray(mixed * np.uint64(0xBF58476D1CE4E5B9))


@lru_cache(maxsize=4096)
def _of_text(text: str) -> np.uint64:
    return np.uint64(int(hashlib.sha256(text.encode()).hexdigest()[:16], 16))


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
    what = f"{len(again)} values say what {again[0][2]} says (quantity, item, conditions, value)"
    note = f"{what}: they were not taken twice"
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
