"""What a required point without proof still lacks: how far the nearest record is, or which gap of a range is open."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from specflow.conditions import Points, explain_mismatch, match, missing_words
from specflow.model.base import code_key
from specflow.model.columns import Columns
from specflow.model.evidence import EvidenceColumns, EvidenceTable
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.model.verdict import PointResults, RequirementStatus
from specflow.parameters.relations import parameters_telling
from specflow.reports.origins import OriginFinder

MOST_EXPLAINED = 60  # sentences for one requirement; each looks at all its records
MOST_ROWS = 50_000


class Lacking:
    """Explains the open points of one requirement, from the tables that could serve it."""

    def __init__(
        self,
        requirement: Requirement,
        status: RequirementStatus,
        points: Points | None,
        snapshot: Snapshot,
        finder: OriginFinder,
    ) -> None:
        self._requirement = requirement
        self._status = status
        self._points = points
        self._snapshot = snapshot
        self._finder = finder
        self._left = MOST_EXPLAINED
        self._held: dict[str, list[tuple[EvidenceTable, Columns]]] = {}

    def words(self, place: int, found: PointResults | None) -> str:
        """Return what the point lacks, "" where that cannot be told."""
        if self._points is None or self._left <= 0:
            return ""
        self._left -= 1
        if found is not None and found.table[place] >= 0:
            return self._gap(self._points, place, found)
        item = found.item if found is not None else ""
        said = []
        for table, records in self._records(item):
            words = explain_mismatch(self._points, place, records)
            if words:
                said.append((words.count(";"), f"nearest in {table.id}: {words}"))
        if not said:
            return self._near_miss or (f"no record of item {item}" if item else "no record of this quantity")
        return min(said, key=lambda pair: pair[0])[1]

    def _records(self, item: str) -> list[tuple[EvidenceTable, Columns]]:
        """Return the conditions of the values of an item (of any with ""), table by table; looked up once."""
        key = code_key(item)
        if key not in self._held:
            held = []
            for table, names in self._tables.items():
                columns = self._finder.columns(table)
                values = [columns.values[name] for name in names]
                filled = np.any([np.isfinite(one.low) | np.isfinite(one.high) for one in values], axis=0)
                rows = np.flatnonzero(filled & self._of_item(columns, item))
                if len(rows):
                    held.append((self._finder.table(table), columns.conditions.take(rows)))
            self._held[key] = held
        return self._held[key]

    def _of_item(self, columns: EvidenceColumns, item: str) -> NDArray[np.bool_]:
        if not item:
            return np.ones(len(columns.source_rows), bool)
        same = np.array([self._is_item(label, item) for label in columns.items.labels] + [False])
        return same[columns.items.codes]

    def _gap(self, points: Points, place: int, found: PointResults) -> str:
        """Say which part of a range is open; only where one table is all the evidence there is."""
        if not points.step or len(set(found.tables)) != 1:
            return ""
        table = self._finder.table(found.tables[0])
        columns = self._finder.columns(table.id)
        values = columns.values[table.values[int(found.column[place])].name]
        good = np.isfinite(values.low) | np.isfinite(values.high)
        good &= self._of_item(columns, found.item)
        return missing_words(points, place, match(points, columns.conditions), columns.conditions, good)

    def _is_item(self, recorded: str, item: str) -> bool:
        known = self._snapshot.items_by_name.get(code_key(recorded))
        return code_key(known.id if known else recorded) == code_key(item)

    @cached_property
    def _near_miss(self) -> str:
        """What was recorded of the quantity and may not be compared: its statistic, plane or unit is another."""
        for one in self._status.mismatches:
            if one.kind not in ("conditions", "requirement"):
                return f"{one.column} of {one.table} may not be compared: {one.what}"
        return ""

    @cached_property
    def _tables(self) -> Mapping[str, Sequence[str]]:
        """The value columns with the quantity, by table; those left out that may not be compared."""
        refused = {
            (code_key(one.table), one.column) for one in self._status.mismatches if one.kind != "conditions"
        }
        told_by = parameters_telling(self._requirement.quantity.parameter)
        found: dict[str, list[str]] = {}
        for table in self._snapshot.tables_of_block.get(code_key(self._requirement.block), ()):
            names = [
                column.name
                for column in table.values
                if code_key(column.quantity.parameter) in told_by
                and (code_key(table.id), column.name) not in refused
            ]
            if names and table.rows <= MOST_ROWS:
                found[table.id] = names
        self._finder.fetch(set(found))
        return found
