"""From a record to the cell it stands in."""

from __future__ import annotations

from specflow.model.base import code_key
from specflow.model.evidence import EvidenceColumns, EvidenceFile, EvidenceTable, ValueColumn
from specflow.model.origin import Origin
from specflow.model.snapshot import Snapshot
from specflow.model.verdict import RecordRef


class OriginFinder:
    """Finds file, sheet and cell of records; fetches the arrays of each table once."""

    def __init__(self, snapshot: Snapshot) -> None:
        self._snapshot = snapshot
        self._columns: dict[str, EvidenceColumns] = {}

    def table(self, record: RecordRef) -> EvidenceTable:
        """Return the table of a record."""
        found = self._snapshot.find(EvidenceTable, record.table)
        if found is None:
            raise KeyError(record.table)
        return found

    def column(self, record: RecordRef) -> ValueColumn:
        """Return the value column of a record."""
        return next(column for column in self.table(record).values if column.name == record.column)

    def columns(self, table: str) -> EvidenceColumns:
        """Return the arrays of a table."""
        key = code_key(table)
        if key not in self._columns:
            self._columns[key] = next(iter(self._snapshot.load_columns([table]).values()))
        return self._columns[key]

    def fetch(self, tables: set[str]) -> None:
        """Fetch the arrays of many tables in one go."""
        wanted = [table for table in sorted(tables) if code_key(table) not in self._columns]
        if wanted:
            for table, columns in self._snapshot.load_columns(wanted).items():
                self._columns[code_key(table)] = columns

    def origin(self, record: RecordRef | None) -> Origin | None:
        """Return the place of a record, or None without one."""
        if record is None:
            return None
        table = self.table(record)
        file = self._snapshot.find(EvidenceFile, table.file)
        return Origin(
            file=file.name if file else table.file,
            sha256=file.sha256 if file else "",
            sheet=table.sheet,
            row=int(self.columns(record.table).source_rows[record.row]),
            column=self.column(record).column,
        )

    def item(self, record: RecordRef) -> str:
        """Return the item as the record states it."""
        return self.columns(record.table).items.word(record.row)
