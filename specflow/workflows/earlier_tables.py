"""Which rows of earlier tables a new table would replace: same table key, and same quantity, item and conditions."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from specflow.model.base import code_key
from specflow.model.columns import TextColumn
from specflow.model.evidence import EvidenceColumns, EvidenceFile, EvidenceTable, Supersession, Withdrawal
from specflow.model.snapshot import Snapshot

RowKey = tuple[object, ...]
Rows = dict[RowKey, tuple[int, tuple[object, ...]]]


@dataclass(frozen=True, slots=True)
class Replacement:
    """Rows (positions) of an earlier table that are rows of the new one again; ``differing``: with other values."""

    earlier: str
    earlier_rows: int
    rows: tuple[int, ...]
    differing: int

    def words(self) -> str:
        """Say it: "12 rows are those of EV-3, 3 with other values"."""
        values = f"{self.differing} with other values" if self.differing else "all with the same values"
        rows = "1 row is that" if len(self.rows) == 1 else f"{len(self.rows)} rows are those"
        return f"{rows} of {self.earlier}, {values}"


def replaced_rows(
    snapshot: Snapshot,
    table: EvidenceTable,
    columns: EvidenceColumns,
    sha256: str,
    named: Sequence[str] = (),
) -> list[Replacement]:
    """Compare a new table with the earlier ones of its key, and with those read from the same cells of the same file.

    The second are tables that another mapping gave. The ``named`` ones are compared in whatever layout they are (a
    retest with a column less), where block, quantities, conditions, set-up and performer are the same. Tables replaced
    or withdrawn as a whole are left out.
    """
    gone = {code_key(one.earlier) for one in snapshot.all(Supersession) if one.rows is None}
    gone |= {code_key(one.table) for one in snapshot.all(Withdrawal) if one.rows is None}
    files = {code_key(file.id) for file in snapshot.all(EvidenceFile) if file.sha256 == sha256}
    # A derived table stands in the same file as its input; only deriving again replaces it.
    standing = [one for one in snapshot.tables if code_key(one.id) not in gone and one.derivation is None]
    again = [one for one in standing if one.table_key and one.table_key == table.table_key]
    cells = [
        one
        for one in standing
        if code_key(one.file) in files and one.sheet == table.sheet and one.table_key != table.table_key
    ]
    seen = {one.id for one in (*again, *cells)}
    wished = set(map(code_key, named))
    others = [
        one
        for one in standing
        if code_key(one.id) in wished and one.id not in seen and _told(one) == _told(table)
    ]
    wanted = [one.id for one in (*again, *cells, *others)]
    arrays = snapshot.load_columns(wanted) if wanted else {}
    sharing = {one.id for one in (*again, *others) if _may_share_rows(arrays[one.id], columns)}
    mine = _rows(table, columns) if sharing else {}
    found = []
    for one in again:
        pairs = _pairs(_rows(one, arrays[one.id]), mine) if one.id in sharing else []
        same_file = code_key(one.file) in files
        found.append(
            _replacement(snapshot, one, pairs or (_same_cells(one, columns, arrays) if same_file else []))
        )
    found += [_replacement(snapshot, one, _same_cells(one, columns, arrays)) for one in cells]
    for one in others:
        pairs = _pairs(_rows(one, arrays[one.id]), mine) if one.id in sharing else []
        found.append(_replacement(snapshot, one, pairs))
    return [one for one in found if one.rows]


def _may_share_rows(earlier: EvidenceColumns, mine: EvidenceColumns) -> bool:
    """Whether any row of two tables can be the same one; False where a condition, or the items, have nothing in common.

    A folder of a hundred files of one layout would else compare each with all before it, row by row.
    """
    if _are_apart(earlier.items, mine.items):
        return False
    for name, values in mine.conditions.numeric.items():
        other = earlier.conditions.numeric.get(name)
        if other is None or np.isnan(values).any() or np.isnan(other).any():
            continue
        if not len(values) or not len(other) or values.max() < other.min() or other.max() < values.min():
            return False
        if not np.isin(other, values).any():
            return False
    texts = earlier.conditions.text
    return not any(
        name in texts and _are_apart(texts[name], text) for name, text in mine.conditions.text.items()
    )


def _are_apart(one: TextColumn, other: TextColumn) -> bool:
    """Whether all rows of both say something, and no two the same."""
    if (one.codes < 0).any() or (other.codes < 0).any():
        return False
    return {label.casefold() for label in one.labels}.isdisjoint(label.casefold() for label in other.labels)


def _pairs(earlier: Rows, mine: Rows) -> list[tuple[int, bool]]:
    """Rows of an earlier table that are rows of the new one, and whether their values differ."""
    return [(row, values != mine[key][1]) for key, (row, values) in earlier.items() if key in mine]


def _told(table: EvidenceTable) -> tuple[object, ...]:
    """What two tables share that say the same in other layouts: block, quantities, conditions, who measured and how."""
    quantities = sorted(column.quantity.model_dump_json().casefold() for column in table.values)
    conditions = sorted((column.dimension, column.unit) for column in table.conditions)
    who = (table.set_up.casefold(), table.performer.casefold())
    return code_key(table.block), table.method, table.stage, who, quantities, conditions


def _same_cells(
    earlier: EvidenceTable, columns: EvidenceColumns, arrays: Mapping[str, EvidenceColumns]
) -> list[tuple[int, bool]]:
    """Rows of an earlier table that stand in the rows of the sheet which the new one reads, too."""
    shared = np.isin(arrays[earlier.id].source_rows, columns.source_rows)
    return [(row, True) for row in np.flatnonzero(shared).tolist()]


def _replacement(
    snapshot: Snapshot, earlier: EvidenceTable, pairs: Sequence[tuple[int, bool]]
) -> Replacement:
    """Leave out the rows that are replaced already."""
    past = {
        row for step in snapshot.all(Supersession) if step.earlier == earlier.id for row in step.rows or ()
    }
    left = [(row, differs) for row, differs in pairs if row not in past]
    rows = tuple(sorted(row for row, _ in left))
    return Replacement(earlier.id, earlier.rows, rows, sum(differs for _, differs in left))


def _rows(table: EvidenceTable, columns: EvidenceColumns) -> Rows:
    """Row identity → (position, what the row says); repeated readings under one identity are told apart by order."""
    quantities = tuple(sorted(column.quantity.model_dump_json().casefold() for column in table.values))
    items = [label.casefold() for label in columns.items.labels]
    parts: list[list[object]] = [[items[code] if code >= 0 else "" for code in columns.items.codes.tolist()]]
    for name, values in sorted(columns.conditions.numeric.items()):
        unit = columns.conditions.units.get(name, "")
        parts.append([(name, unit, value) if value == value else None for value in values.tolist()])
    for name, words in sorted(columns.conditions.text.items()):
        parts.append(
            [(name, words.labels[code].casefold()) if code >= 0 else None for code in words.codes.tolist()]
        )
    named = sorted(table.values, key=lambda column: column.quantity.model_dump_json())
    units = tuple(column.unit for column in named)
    readings = [
        np.column_stack([columns.values[column.name].low, columns.values[column.name].high]).tolist()
        for column in named
    ]
    rows: Rows = {}
    seen: dict[RowKey, int] = {}
    for row, identity in enumerate(zip(*parts, strict=True)):
        turn = seen.get(identity, 0)
        seen[identity] = turn + 1
        told: tuple[object, ...] = (
            units,
            *(tuple(None if v != v else v for v in reading[row]) for reading in readings),
        )
        rows[(quantities, *identity, turn)] = (row, told)
    return rows
