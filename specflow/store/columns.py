"""Arrays of evidence as rows: little-endian bytes with a digest each, words as codes and a list of labels."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterable, Iterator
from functools import lru_cache
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from specflow.errors import DocumentError, StoreError
from specflow.model.columns import Columns, TextColumn
from specflow.model.evidence import EvidenceColumns, EvidenceTable, ValueArrays

FLOAT = "<f8"
INTEGER = "<i4"
_DTYPES = {name: np.dtype(name) for name in (FLOAT, INTEGER)}


class PackedColumn(NamedTuple):
    """One column of one evidence table as it is stored; ``data`` are ``rows`` entries of ``dtype``.

    What is to be written is the memory of the array itself, where that is as it is stored: columns may be of millions.
    """

    role: str
    name: str
    unit: str
    dtype: str
    labels: str | None
    rows: int
    sha256: str
    data: bytes | memoryview


def pack(table: EvidenceTable, columns: EvidenceColumns) -> list[PackedColumn]:
    """Return the columns of one table in stored form.

    Raises DocumentError when they are not the columns that the table document tells of, or differ in length.
    """
    _check_names(table, columns)
    packed = list(_packed(columns))
    for column in packed:
        if column.rows != table.rows:
            raise DocumentError(
                f"the column {column.name or column.role!r} has {column.rows} rows, the table says {table.rows}",
                where=f"evidence table {table.id}",
            )
    return packed


def unpack(code: str, packed: Iterable[PackedColumn]) -> EvidenceColumns:
    """Return the arrays of one table (read-only). Raises StoreError when bytes and digest disagree."""
    numeric: dict[str, NDArray[np.float64]] = {}
    units: dict[str, str] = {}
    text: dict[str, dict[str, TextColumn]] = {"condition": {}, "item": {}, "date": {}, "extra": {}}
    parts: dict[str, dict[str, NDArray[np.float64]]] = {"low": {}, "high": {}, "u": {}}
    source_rows = np.empty(0, np.int32)
    for column in packed:
        entries = _entries(code, column)
        if column.labels is not None:
            text[column.role][column.name] = TextColumn(entries, _labels(column.labels))
        elif column.role == "source_row":
            source_rows = entries
        elif column.role == "condition":
            numeric[column.name] = entries
            units[column.name] = column.unit
        else:
            parts[column.role][column.name] = entries
    values = {
        name: ValueArrays(low, parts["high"].get(name, low), parts["u"].get(name))
        for name, low in parts["low"].items()
    }
    return EvidenceColumns(
        conditions=Columns(len(source_rows), numeric, text["condition"], units),
        values=values,
        source_rows=source_rows,
        items=text["item"][""],
        dates=text["date"].get(""),
        extra=text["extra"],
    )


def _check_names(table: EvidenceTable, columns: EvidenceColumns) -> None:
    told = {value.name for value in table.values}
    given = set(columns.values)
    if told != given:
        odd = ", ".join(sorted(told ^ given))
        raise DocumentError(
            f"its document and its arrays do not name the same value columns: {odd}",
            where=f"evidence table {table.id}",
        )


def _packed(columns: EvidenceColumns) -> Iterator[PackedColumn]:
    yield _integers("source_row", "", columns.source_rows)
    yield _words("item", "", columns.items)
    if columns.dates is not None:
        yield _words("date", "", columns.dates)
    for name, numbers in columns.conditions.numeric.items():
        yield _floats("condition", name, numbers, columns.conditions.units.get(name, ""))
    for name, words in columns.conditions.text.items():
        yield _words("condition", name, words)
    for name, arrays in columns.values.items():
        low = _floats("low", name, arrays.low)
        yield low
        if (
            arrays.high is not arrays.low
            and (high := _floats("high", name, arrays.high)).sha256 != low.sha256
        ):
            yield high
        if arrays.u is not None:
            yield _floats("u", name, arrays.u)
    for name, words in columns.extra.items():
        yield _words("extra", name, words)


def _floats(role: str, name: str, numbers: NDArray[Any], unit: str = "") -> PackedColumn:
    entries = np.asarray(numbers, FLOAT)
    if (np.signbit(entries) & (entries == 0)).any():
        entries = entries + 0.0  # no −0 is stored
    return _column(role, name, entries, FLOAT, unit=unit)


def _integers(role: str, name: str, numbers: NDArray[Any], labels: str | None = None) -> PackedColumn:
    return _column(role, name, np.asarray(numbers, INTEGER), INTEGER, labels)


def _words(role: str, name: str, words: TextColumn) -> PackedColumn:
    labels = json.dumps([label.replace("\0", "") for label in words.labels])
    return _integers(role, name, words.codes, labels)


def _column(
    role: str, name: str, entries: NDArray[Any], dtype: str, labels: str | None = None, unit: str = ""
) -> PackedColumn:
    data = np.ascontiguousarray(entries, dtype).data.toreadonly().cast("B") if len(entries) else b""
    return PackedColumn(role, name, unit, dtype, labels, len(entries), hashlib.sha256(data).hexdigest(), data)


def _entries(code: str, column: PackedColumn) -> NDArray[Any]:
    if hashlib.sha256(column.data).hexdigest() != column.sha256:
        raise StoreError(
            f"the stored column {column.name or column.role!r} is damaged: its bytes do not match their digest",
            where=f"evidence table {code}",
            hint="go back to a backup, or withdraw the table and attach its file again",
        )
    entries: NDArray[Any] = np.frombuffer(column.data, _DTYPES.get(column.dtype, column.dtype))
    return entries


@lru_cache(maxsize=1024)
def _labels(text: str) -> tuple[str, ...]:
    """Return the words of a column; tables of one kind have the same."""
    return tuple(json.loads(text))
