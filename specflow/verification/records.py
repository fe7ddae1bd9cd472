"""Records: all readings of one quantity of one block, from all its tables, brought to the unit of the limit."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from specflow.errors import UnitError
from specflow.model.base import code_key
from specflow.model.columns import Columns
from specflow.model.evidence import EvidenceTable, ValueArrays, ValueColumn
from specflow.model.verdict import Mismatch, RecordRef
from specflow.verification.comparable import Fit
from specflow.verification.standing import WITHDRAWN, Replacement, RowStanding

T = TypeVar("T", bound=np.generic)
Floats = NDArray[np.float64]
Rows = NDArray[np.int32]


@dataclass(frozen=True, slots=True)
class SourceColumn:
    """One value column of one evidence table; ``place`` is its position among the value columns."""

    table: EvidenceTable
    column: ValueColumn
    place: int

    def is_of(self, parameter: str) -> bool:
        """Whether values of this very parameter were recorded."""
        return code_key(self.column.quantity.parameter) == code_key(parameter)


@dataclass(frozen=True, slots=True)
class Held:
    """What was loaded of one source: its arrays, the item of each row (codes into ``items``) and its standing."""

    source: SourceColumn
    fit: Fit
    arrays: ValueArrays
    conditions: Columns
    item_codes: NDArray[np.intp]
    items: tuple[str, ...]
    standing: RowStanding


@dataclass(frozen=True, slots=True)
class Records:
    """Readings [low, high] (m,) of one quantity in the unit of the limit.

    ``u`` (m,) is NaN where no uncertainty is known, None where none is known at all. ``item`` are codes into ``items``
    ("" where none is named), ``source`` codes into ``sources``, ``row`` positions in the table. ``standing`` are codes
    (see ``standing``). ``usable`` is None when all rows have a value and were not withdrawn. ``exact`` (m,) or a single
    flag says which values are compared as written. ``replacements``: which readings (m,) were replaced by name, and the
    keys of the tables that may show it.
    """

    low: Floats
    high: Floats
    u: Floats | None
    conditions: Columns
    item: NDArray[np.intp]
    items: tuple[str, ...]
    source: Rows
    sources: tuple[SourceColumn, ...]
    row: Rows
    standing: NDArray[np.int8]
    all_accepted: bool
    usable: NDArray[np.bool_] | None
    exact: NDArray[np.bool_] | bool
    notes: tuple[str, ...] = ()
    reasons: tuple[str, ...] = ()
    mismatches: tuple[Mismatch, ...] = ()
    replacements: tuple[Replacement, ...] = ()

    @property
    def size(self) -> int:
        """How many readings there are, usable or not."""
        return len(self.low)

    def reference(self, record: int) -> RecordRef:
        """Return which value of which table a record is."""
        source = self.sources[int(self.source[record])]
        return RecordRef(source.table.id, source.column.name, int(self.row[record]))


def no_records(mismatches: Sequence[Mismatch] = ()) -> Records:
    """Return records of nothing."""
    none, rows = np.zeros(0), np.zeros(0, np.int32)
    return Records(
        low=none,
        high=none,
        u=None,
        conditions=Columns(0),
        item=np.zeros(0, np.intp),
        items=("",),
        source=rows,
        sources=(),
        row=rows,
        standing=np.zeros(0, np.int8),
        all_accepted=True,
        usable=None,
        exact=True,
        mismatches=tuple(mismatches),
    )


def gather(parts: Sequence[Held], conditions: Columns, mismatches: Sequence[Mismatch]) -> Records:
    """Return the records of all sources; ``conditions`` are theirs, stacked in the same order.

    A source with a value that has no meaning in the unit of the limit (log of a negative) becomes a mismatch; so does
    one of which some values come to nothing, with their number.
    """
    held: list[tuple[Held, ValueArrays]] = []
    refused = list(mismatches)
    for part in parts:
        try:
            values = part.fit.apply(part.arrays)
            held.append((part, values))
            refused.extend(_lost(part, values))
        except UnitError as error:
            refused.append(_refused(part.source, error))
            empty = np.full(len(part.arrays.low), np.nan)
            held.append((part, ValueArrays(empty, empty)))
    if not held:
        return no_records(refused)
    return _stacked(held, conditions, refused)


def _refused(source: SourceColumn, error: UnitError) -> Mismatch:
    remedy = error.hint or "correct the unit in the mapping of the table"
    return Mismatch(source.table.id, source.column.name, source.table.rows, error.message, remedy, "value")


def _lost(part: Held, values: ValueArrays) -> Sequence[Mismatch]:
    """Report the values that a conversion made nothing of; a reading never disappears unsaid."""
    if values is part.arrays:
        return ()
    missing, was_missing = np.isnan(values.low), np.isnan(part.arrays.low)
    if values.high is not values.low:
        missing, was_missing = missing | np.isnan(values.high), was_missing | np.isnan(part.arrays.high)
    count = int(np.count_nonzero(missing & ~was_missing))
    if not count:
        return ()
    table, column = part.source.table, part.source.column
    what = f"{count} of {table.rows} values have no meaning in the unit of the limit ({part.fit.words})"
    return (Mismatch(table.id, column.name, count, what, "look at these values in the sheet", "value"),)


def _stacked(
    held: Sequence[tuple[Held, ValueArrays]], conditions: Columns, mismatches: Sequence[Mismatch]
) -> Records:
    if len(held) == 1:
        return _of_one(*held[0], conditions, mismatches)
    parts = [part for part, _ in held]
    arrays = [values for _, values in held]
    low = _joined([one.low for one in arrays])
    high = low if all(one.high is one.low for one in arrays) else _joined([one.high for one in arrays])
    item, items = _items(parts)
    standing = _joined([part.standing.codes for part in parts])
    accepted = all(part.standing.all_accepted for part in parts)
    return Records(
        low,
        high,
        _uncertainties(arrays),
        conditions,
        item,
        items,
        _numbered([len(one.low) for one in arrays]),
        tuple(part.source for part in parts),
        _positions([len(one.low) for one in arrays]),
        standing,
        accepted,
        _usable(low, standing, accepted),
        _exact(parts, arrays),
        tuple(dict.fromkeys(note for part in parts for note in part.fit.notes)),
        tuple(dict.fromkeys(reason for part in parts for reason in part.standing.reasons)),
        tuple(mismatches),
        _replacements(parts),
    )


def _of_one(part: Held, values: ValueArrays, conditions: Columns, mismatches: Sequence[Mismatch]) -> Records:
    """Return the records of one source, as those of most quantities are: nothing to stack."""
    low, standing = values.low, part.standing
    return Records(
        low,
        values.high,
        values.u,
        conditions,
        part.item_codes,
        part.items,
        _zeros(len(low)),
        (part.source,),
        _counted(len(low)),
        standing.codes,
        standing.all_accepted,
        _usable(low, standing.codes, standing.all_accepted),
        part.fit.exact,
        tuple(dict.fromkeys(part.fit.notes)) if part.fit.notes else (),
        tuple(dict.fromkeys(standing.reasons)) if standing.reasons else (),
        tuple(mismatches),
        standing.replaced,
    )


def _replacements(parts: Sequence[Held]) -> tuple[Replacement, ...]:
    """Return what was replaced by name, in rows of the whole instead of rows of a table."""
    if not any(part.standing.replaced for part in parts):
        return ()
    found, start, size = [], 0, sum(len(part.standing.codes) for part in parts)
    for part in parts:
        stop = start + len(part.standing.codes)
        for rows, tables in part.standing.replaced:
            whole = np.zeros(size, bool)
            whole[start:stop] = rows
            found.append((whole, tables))
        start = stop
    return tuple(found)


def _joined(parts: Sequence[NDArray[T]]) -> NDArray[T]:
    return np.concatenate(parts)


def _uncertainties(arrays: Sequence[ValueArrays]) -> Floats | None:
    if all(one.u is None for one in arrays):
        return None
    return _joined([np.full(len(one.low), np.nan) if one.u is None else one.u for one in arrays])


def _usable(low: Floats, standing: NDArray[np.int8], accepted: bool) -> NDArray[np.bool_] | None:
    usable = low == low
    if not accepted:
        usable &= standing < WITHDRAWN
    return None if usable.all() else usable


def _exact(parts: Sequence[Held], arrays: Sequence[ValueArrays]) -> NDArray[np.bool_] | bool:
    if len({part.fit.exact for part in parts}) == 1:
        return parts[0].fit.exact
    return np.concatenate(
        [np.full(len(one.low), part.fit.exact) for part, one in zip(parts, arrays, strict=True)]
    )


def _items(parts: Sequence[Held]) -> tuple[NDArray[np.intp], tuple[str, ...]]:
    names: dict[str, tuple[int, str]] = {}
    codes = []
    for part in parts:
        places = [names.setdefault(code_key(name), (len(names), name))[0] for name in part.items]
        codes.append(np.array(places, np.intp)[part.item_codes])
    return np.concatenate(codes), tuple(name for _, name in names.values())


def _numbered(sizes: Sequence[int]) -> Rows:
    return np.repeat(np.arange(len(sizes), dtype=np.int32), sizes)


def _positions(sizes: Sequence[int]) -> Rows:
    return _joined([_counted(size) for size in sizes])


@lru_cache(maxsize=64)
def _zeros(size: int) -> Rows:
    """Return zeros, read-only: most quantities come from one column of one table, and tables have like sizes."""
    return _shared(np.zeros(size, np.int32))


@lru_cache(maxsize=64)
def _counted(size: int) -> Rows:
    return _shared(np.arange(size, dtype=np.int32))


def _shared(array: Rows) -> Rows:
    array.setflags(write=False)
    return array
