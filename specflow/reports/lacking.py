"""What a required point without proof still lacks: how far the nearest record is, or which gap of a range is open."""

from __future__ import annotations

from functools import cached_property

import numpy as np

from specflow.conditions import Points, explain_mismatch, match, missing_words
from specflow.model.base import code_key
from specflow.model.evidence import EvidenceTable
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.model.verdict import PointResults, RequirementStatus
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

    def words(self, place: int, found: PointResults | None) -> str:
        """Return what the point lacks, "" where that cannot be told."""
        if self._points is None or self._left <= 0:
            return ""
        self._left -= 1
        if found is not None and found.table[place] >= 0:
            return self._gap(self._points, place, found)
        if not self._tables:
            return "no record of this quantity"
        said = [
            (words.count(";"), f"nearest in {table.id}: {words}")
            for table in self._tables
            if (words := explain_mismatch(self._points, place, self._finder.columns(table.id).conditions))
        ]
        return min(said, key=lambda pair: pair[0])[1] if said else ""

    def _gap(self, points: Points, place: int, found: PointResults) -> str:
        """Say which part of a range is open; only where one table is all the evidence there is."""
        if not points.step or len(set(found.tables)) != 1:
            return ""
        table = self._finder.table(found.tables[0])
        columns = self._finder.columns(table.id)
        values = columns.values[table.values[int(found.column[place])].name]
        good = np.isfinite(values.low) | np.isfinite(values.high)
        good &= np.array([self._is_item(columns.items.word(row), found.item) for row in range(len(good))])
        return missing_words(points, place, match(points, columns.conditions), columns.conditions, good)

    def _is_item(self, recorded: str, item: str) -> bool:
        known = self._snapshot.items_by_name.get(code_key(recorded))
        return not item or code_key(known.id if known else recorded) == code_key(item)

    @cached_property
    def _tables(self) -> list[EvidenceTable]:
        """The tables with the quantity, those left out whose quantity may not be compared."""
        refused = {
            (code_key(one.table), one.column) for one in self._status.mismatches if one.kind != "conditions"
        }
        key = code_key(self._requirement.quantity.parameter)
        found = [
            table
            for table in self._snapshot.tables_of_block.get(code_key(self._requirement.block), ())
            if table.rows <= MOST_ROWS
            and any(
                code_key(column.quantity.parameter) == key
                and (code_key(table.id), column.name) not in refused
                for column in table.values
            )
        ]
        self._finder.fetch({table.id for table in found})
        return found
