"""Read stored tables again from a file, as they were read the first time, and say which cells read differently."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import cast

from specflow.errors import SpecflowError
from specflow.exchange import read_text
from specflow.importers.measurements import MeasuredTable, Measurements, read_measurements
from specflow.importers.readers.touchstone import is_touchstone
from specflow.model.base import Document, code_key
from specflow.model.evidence import EvidenceColumns, EvidenceTable, TableMapping
from specflow.model.snapshot import Snapshot
from specflow.store import ProjectStore
from specflow.workflows.cell_difference import CellDifference, differing_cells
from specflow.workflows.evaluate_project import project_dictionary

#: What was said when a table was read, which decides how its file is read again.
Manner = tuple[int, tuple[tuple[str, str], ...], bool]


@dataclass(frozen=True, slots=True)
class TableCheck:
    """One stored table beside what its file gives now: ``count`` cells differ (the first are listed), or why none can.

    ``added`` counts values that the file has now and the table has not.
    """

    table: str
    differences: Sequence[CellDifference] = ()
    count: int = 0
    added: int = 0
    problem: str = ""

    @property
    def is_same(self) -> bool:
        """Whether every stored cell reads as it is stored."""
        return not self.count and not self.problem


class Rereader:
    """Reads the files of a project again, each table by the mappings as they were when it was stored."""

    def __init__(self, store: ProjectStore, snapshot: Snapshot) -> None:
        self._snapshot = snapshot
        self._dictionary = project_dictionary(snapshot)
        self._stored_at = {
            code_key(entry.change.id): entry.revision
            for entry in store.history("evidence_table")
            if entry.change.action == "add"
        }
        self._mappings = [
            (entry.revision, entry.change.id, entry.change.after) for entry in store.history("mapping")
        ]

    def check(self, tables: Sequence[EvidenceTable], path: Path) -> list[TableCheck]:
        """Return one check a table. What keeps the file from being read is said in each."""
        by_manner: dict[Manner, list[EvidenceTable]] = defaultdict(list)
        for table in tables:
            how = table.how_read
            revision = self._stored_at.get(code_key(table.id), self._snapshot.revision)
            by_manner[revision, how.stated, how.include_hidden_rows].append(table)
        arrays = self._snapshot.load_columns([table.id for table in tables]) if tables else {}
        return [
            check
            for manner, group in by_manner.items()
            for check in self._check_group(manner, group, path, arrays)
        ]

    def _check_group(
        self,
        manner: Manner,
        tables: Sequence[EvidenceTable],
        path: Path,
        arrays: Mapping[str, EvidenceColumns],
    ) -> Iterator[TableCheck]:
        try:
            found = self._read(manner, tables, path)
        except SpecflowError as error:
            place = f" ({error.where})" if error.where and error.where != path.name else ""
            yield from (TableCheck(table.id, problem=f"{error.message}{place}") for table in tables)
            return
        left = list(found.tables)
        for table in tables:
            match = _match(table, arrays[table.id], left)
            if match is None or match.document is None or match.columns is None:
                yield TableCheck(table.id, problem=_why_absent(table, match, found))
                continue
            left.remove(match)
            cells = differing_cells(table, arrays[table.id], match.document, match.columns)
            yield TableCheck(table.id, cells.listed, cells.count, cells.added)

    def _read(self, manner: Manner, tables: Sequence[EvidenceTable], path: Path) -> Measurements:
        revision, stated, include_hidden_rows = manner
        said = dict(stated)
        if is_touchstone(path.name):
            said["derive"] = "none"  # what requirements ask for now is no matter of how the file was read
        documents = {**self._snapshot.documents, "mapping": self._mappings_at(revision)}
        return read_measurements(
            path,
            replace(self._snapshot, documents=documents),
            self._dictionary,
            stated=said,
            sheets=[] if any(not table.sheet for table in tables) else _sheets(tables),
            include_hidden_rows=include_hidden_rows,
        )

    def _mappings_at(self, revision: int) -> Mapping[str, Document]:
        """The mappings as they were at a revision of the project."""
        known: dict[str, Document] = {}
        for made, code, after in self._mappings:
            if made > revision:
                break
            if after is None:
                known.pop(code_key(code), None)
            else:
                known[code_key(code)] = cast(TableMapping, read_text("mapping", after))
        return known


def _sheets(tables: Iterable[EvidenceTable]) -> list[str]:
    return list(dict.fromkeys(table.sheet for table in tables))


def _match(
    table: EvidenceTable, columns: EvidenceColumns, found: Sequence[MeasuredTable]
) -> MeasuredTable | None:
    """The table of a file that a stored one was read from: by sheet and layout, then by place and shared rows."""
    there = [one for one in found if one.sheet == table.sheet]
    alike = [one for one in there if one.layout_key == table.how_read.layout] or there
    rows = set(columns.source_rows.tolist())

    def nearness(one: MeasuredTable) -> tuple[bool, bool, int]:
        shared = len(rows.intersection(one.columns.source_rows.tolist())) if one.columns is not None else 0
        return one.place.partition(":")[0] == table.how_read.place.partition(":")[0], shared > 0, shared

    return max(alike, key=nearness, default=None)


def _why_absent(table: EvidenceTable, match: MeasuredTable | None, found: Measurements) -> str:
    if match is None:
        where = f"sheet {table.sheet}" if table.sheet else "the file"
        there = f": {'; '.join(found.skipped)}" if found.skipped else ""
        return f"{where} has no such table any more{there}"
    if match.questions:
        first = match.questions[0]
        return f"it cannot be read as before; {first.cell or match.place}: {first.what}"
    return f"no row of it is left ({match.place})"
