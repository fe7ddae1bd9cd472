"""Which stored cells a table reads differently: value, uncertainty, condition, item or date, cell by cell."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.model.base import code_key
from specflow.model.columns import TextColumn
from specflow.model.evidence import SOURCE_COLUMN, EvidenceColumns, EvidenceTable
from specflow.model.origin import column_letters, column_number
from specflow.model.parameter import QuantityIdentity

MOST_LISTED = 1000
_COLUMNS = 1 << 15  # more than the widest sheet has

Keys = NDArray[np.int64]
Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class CellDifference:
    """One cell: what stands there (the header, or what is said of the row), what is stored and what the file says."""

    cell: str
    what: str
    was: str
    now: str


@dataclass(frozen=True, slots=True)
class CellDifferences:
    """How many stored cells read differently, the first of them, and how many values are new in the file."""

    listed: Sequence[CellDifference]
    count: int
    added: int


@dataclass(frozen=True, slots=True)
class _Numbers:
    """Numbers by cell: ``keys`` int64 (row and column), ``low`` and ``high`` float64, NaN where the cell is empty.

    ``name`` is the column's own within its table; ``standard``: they are standard uncertainties of its values.
    """

    name: str
    what: str
    unit: str
    keys: Keys
    low: Floats
    high: Floats
    standard: bool = False
    is_condition: bool = False


def differing_cells(
    before: EvidenceTable, stored: EvidenceColumns, after: EvidenceTable, read: EvidenceColumns
) -> CellDifferences:
    """Compare a stored table with the same table read again."""
    listed: list[CellDifference] = []
    count = added = 0
    again = {(one.name, one.standard): one for one in _numbers(after, read)}
    for one in _numbers(before, stored):
        other = again.get((one.name, one.standard))
        found = _unequal(one, other)
        count += len(found)
        listed += [_told(before, one, other, key) for key in found[: MOST_LISTED - len(listed)].tolist()]
        if other is not None and not one.standard and not one.is_condition:
            here = other.keys[~np.isnan(other.low)]
            added += int(np.count_nonzero(~np.isin(here, one.keys[~np.isnan(one.low)])))
    said = (*_words(before, stored, read), *_stated(before, stored, read), *_meanings(before, after))
    for difference in said:
        count += 1
        if len(listed) < MOST_LISTED:
            listed.append(difference)
    return CellDifferences(tuple(listed), count, added)


def _numbers(table: EvidenceTable, columns: EvidenceColumns) -> Iterator[_Numbers]:
    rows = columns.source_rows.astype(np.int64) * _COLUMNS
    stacked = columns.extra.get(SOURCE_COLUMN)
    for column in table.values:
        values = columns.values[column.name]
        keys = rows + column.lines_below * _COLUMNS
        keys = keys + (column.column if stacked is None else _column_numbers(stacked))
        name = column.header or column.name
        yield _Numbers(column.name, name, column.unit, keys, values.low, values.high)
        if values.u is not None:
            what = f"standard uncertainty of {name}"
            yield _Numbers(column.name, what, "", keys, values.u, values.u, standard=True)
    for condition in table.conditions:
        if condition.column is None or condition.dimension not in columns.conditions.numeric:
            continue
        numbers = columns.conditions.numeric[condition.dimension]
        unit = columns.conditions.units.get(condition.dimension, "")
        keys, name = rows + condition.column, f"condition {condition.dimension}"
        what = condition.header or condition.dimension
        yield _Numbers(name, what, unit, keys, numbers, numbers, is_condition=True)


def _column_numbers(letters: TextColumn) -> Keys:
    numbers = np.array([column_number(label) for label in letters.labels] + [0], np.int64)
    return np.asarray(numbers[letters.codes], np.int64)


def _unequal(one: _Numbers, other: _Numbers | None) -> Keys:
    """The keys of stored cells that are not read as they are stored; an empty one that is filled now is new."""
    here = ~np.isnan(one.low)
    if other is None or not len(other.keys):
        return one.keys[here]
    order = np.argsort(other.keys, kind="stable")
    place = np.searchsorted(other.keys[order], one.keys)
    place = order[np.minimum(place, len(order) - 1)]
    known = other.keys[place] == one.keys
    same = known & (other.low[place] == one.low) & (other.high[place] == one.high) & (other.unit == one.unit)
    differing: Keys = one.keys[here & ~same]
    return differing


def _told(table: EvidenceTable, one: _Numbers, other: _Numbers | None, key: int) -> CellDifference:
    row, column = table.cell(*divmod(key, _COLUMNS))
    now = "no such column" if other is None else _text(other, key)
    return CellDifference(f"{column_letters(column)}{row}", one.what, _text(one, key), now)


def _text(numbers: _Numbers, key: int) -> str:
    places = np.flatnonzero(numbers.keys == key)
    if not len(places):
        return "not read"
    low, high = float(numbers.low[places[0]]), float(numbers.high[places[0]])
    if np.isnan(low):
        return "empty"
    text = f"{low:.15g}" if low == high else f"{low:.15g} to {high:.15g}"
    return f"{text} {numbers.unit}".strip()


def _words(before: EvidenceTable, stored: EvidenceColumns, read: EvidenceColumns) -> Iterator[CellDifference]:
    """Items, dates and conditions in words, row by row."""
    yield from _differing_words("item", "", stored, read, stored.items, read.items)
    if stored.dates is not None:
        yield from _differing_words("date", "", stored, read, stored.dates, read.dates)
    for condition in before.conditions:
        text = stored.conditions.text.get(condition.dimension)
        if text is not None and condition.column is not None:
            letters, name = column_letters(condition.column), condition.header or condition.dimension
            other = read.conditions.text.get(condition.dimension)
            yield from _differing_words(name, letters, stored, read, text, other)


def _differing_words(
    what: str,
    letters: str,
    stored: EvidenceColumns,
    read: EvidenceColumns,
    one: TextColumn,
    other: TextColumn | None,
) -> Iterator[CellDifference]:
    now: dict[int, str] = {}
    if other is not None:
        for row, code in zip(read.source_rows.tolist(), other.codes.tolist(), strict=True):
            now.setdefault(row, other.labels[code] if code >= 0 else "")
    told: set[int] = set()
    for row, code in zip(stored.source_rows.tolist(), one.codes.tolist(), strict=True):
        was = one.labels[code] if code >= 0 else ""
        if row in now and now[row] != was and row not in told:
            told.add(row)
            cell = f"{letters}{row}" if letters else f"row {row}"
            yield CellDifference(cell, what, was or "nothing", now[row] or "nothing")


def _meanings(before: EvidenceTable, after: EvidenceTable) -> Iterator[CellDifference]:
    """What is said of the table as a whole, or of a column: block, quantities, stated conditions."""
    if code_key(before.block) != code_key(after.block):
        yield CellDifference("", "block", before.block, after.block)
    quantities = {column.header or column.name: column.quantity for column in after.values}
    for column in before.values:
        name = column.header or column.name
        now = quantities.get(name)
        if now is not None and now != column.quantity:
            letters = column_letters(column.column)
            yield CellDifference(f"column {letters}", name, _quantity(column.quantity), _quantity(now))


def _stated(
    before: EvidenceTable, stored: EvidenceColumns, read: EvidenceColumns
) -> Iterator[CellDifference]:
    """Conditions that were stated once for the whole table."""
    for condition in before.conditions:
        if condition.column is None and stored.conditions.size:
            was = _first_value(stored, condition.dimension)
            now = _first_value(read, condition.dimension) if read.conditions.size else ""
            if was != now:
                cell = condition.stated_by.removeprefix("stated in ")
                what = condition.dimension.replace("_", " ")
                is_cell = cell != condition.stated_by
                yield CellDifference(cell if is_cell else "", what, was, now or "not stated")


def _first_value(columns: EvidenceColumns, dimension: str) -> str:
    """The value of the first row, as words; "" where the dimension is not stated."""
    numbers = columns.conditions.numeric.get(dimension)
    if numbers is not None:
        return f"{float(numbers[0]):.15g} {columns.conditions.units.get(dimension, '')}".strip()
    words = columns.conditions.text.get(dimension)
    return words.word(0) if words is not None else ""


def _quantity(quantity: QuantityIdentity) -> str:
    parts = [quantity.parameter, quantity.plane, quantity.statistic, quantity.polarisation]
    parts += [f"per {quantity.bandwidth_hz:g} Hz"] if quantity.bandwidth_hz else []
    return ", ".join(filter(None, parts))
