"""The same records twice in one file, as in a regrouped copy of a table: noticed, said, and taken once."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from specflow.importers.measured.document import content_digest
from specflow.importers.measured.result import MeasuredTable
from specflow.model.evidence import EvidenceColumns, EvidenceTable, ValueArrays

_MOST_ROWS = 200_000

Record = tuple[object, ...]


def without_repeats(tables: Sequence[MeasuredTable]) -> list[MeasuredTable]:
    """Leave out rows all of whose records (quantity, item, conditions and value) stand in an earlier table of the file."""
    seen: dict[Record, str] = {}
    result = []
    shared = _shared_quantities(tables)
    for table in tables:
        if (
            table.document is None
            or table.columns is None
            or table.columns.conditions.size > _MOST_ROWS
            or not _quantities(table) & shared
        ):
            result.append(table)
            continue
        rows = _records(table.document, table.columns)
        again = np.array([bool(row) and all(record in seen for record in row) for row in rows], bool)
        where = table.place if not table.sheet else f"{table.sheet}!{table.place}"
        if again.any():
            first = next(seen[row[0]] for row, is_again in zip(rows, again.tolist(), strict=True) if is_again)
            table = _reduced(table, again, first)
        result.append(table)
        for row in rows:
            for record in row:
                seen.setdefault(record, where)
    return result


def _quantities(table: MeasuredTable) -> set[str]:
    return set() if table.document is None else {one.quantity.parameter for one in table.document.values}


def _shared_quantities(tables: Sequence[MeasuredTable]) -> set[str]:
    """The parameters that more than one table has."""
    counted = Counter(parameter for table in tables for parameter in _quantities(table))
    return {parameter for parameter, count in counted.items() if count > 1}


def _records(document: EvidenceTable, columns: EvidenceColumns) -> list[list[Record]]:
    """The records of each row; two of one table never count as the same."""
    conditions = columns.conditions
    said: list[list[Record]] = [[] for _ in range(conditions.size)]
    for name, numbers in sorted(conditions.numeric.items()):
        unit = conditions.units.get(name, "")
        for row, number in enumerate(numbers.tolist()):
            if number == number:
                said[row].append((name, unit, number))
    for name, words in sorted(conditions.text.items()):
        for row in range(conditions.size):
            if words.word(row):
                said[row].append((name, "", words.word(row).casefold()))
    records: list[list[Record]] = [[] for _ in range(conditions.size)]
    about = (document.block, document.method, document.stage, document.set_up, document.performer)
    for value in document.values:
        quantity = value.quantity.model_dump_json()
        arrays = columns.values[value.name]
        for row, (low, high) in enumerate(zip(arrays.low.tolist(), arrays.high.tolist(), strict=True)):
            if low == low:
                item = columns.items.word(row).casefold()
                date = columns.dates.word(row) if columns.dates is not None else document.performed_on
                records[row].append((about, quantity, value.unit, item, date, tuple(said[row]), low, high))
    return records


def _reduced(table: MeasuredTable, again: NDArray[np.bool_], where: str) -> MeasuredTable:
    """The table without these rows, which stand at ``where`` already."""
    assert table.document is not None and table.columns is not None
    count = int(again.sum())
    left = np.flatnonzero(~again)
    if not len(left):
        note = f"all {count} rows say what {where} says (quantity, item, conditions, value): they were not taken twice"
        return replace(table, document=None, columns=None, values=0, notes=(*table.notes, note))
    columns = table.columns
    taken = EvidenceColumns(
        columns.conditions.take(left),
        {
            name: ValueArrays(
                low := arrays.low[left],
                low if arrays.high is arrays.low else arrays.high[left],
                None if arrays.u is None else arrays.u[left],
            )
            for name, arrays in columns.values.items()
        },
        columns.source_rows[left],
        columns.items.take(left),
        None if columns.dates is None else columns.dates.take(left),
        {name: words.take(left) for name, words in columns.extra.items()},
    )
    document = table.document.model_copy(update={"rows": len(left)})
    document = document.model_copy(update={"digest": content_digest(document, taken)})
    note = (
        f"{count} rows say what {where} says (quantity, item, conditions, value): they were not taken twice"
    )
    values = sum(int(np.count_nonzero(~np.isnan(one.low))) for one in taken.values.values())
    return replace(
        table, document=document, columns=taken, rows=len(left), values=values, notes=(*table.notes, note)
    )
