"""From a record to the cell it stands in."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from specflow.conditions.spans import speaking
from specflow.model.base import code_key
from specflow.model.correction import Correction
from specflow.model.evidence import (
    SOURCE_COLUMN,
    EvidenceColumns,
    EvidenceFile,
    EvidenceTable,
    ValueColumn,
    as_read_column,
)
from specflow.model.origin import Origin, column_number
from specflow.model.report import ReportCell
from specflow.model.snapshot import Snapshot
from specflow.model.verdict import RecordRef
from specflow.reports.figures import interval, reading, text


class OriginFinder:
    """Finds file, sheet and cell of records; fetches the arrays of each table once."""

    def __init__(self, snapshot: Snapshot) -> None:
        self._snapshot = snapshot
        self._columns: dict[str, EvidenceColumns] = {}

    def table(self, table: str) -> EvidenceTable:
        """Return a table by its id."""
        found = self._snapshot.find(EvidenceTable, table)
        if found is None:
            raise KeyError(table)
        return found

    def column(self, record: RecordRef) -> ValueColumn:
        """Return the value column of a record."""
        return next(column for column in self.table(record.table).values if column.name == record.column)

    def columns(self, table: str) -> EvidenceColumns:
        """Return the arrays of a table."""
        key = code_key(table)
        if key not in self._columns:
            self._keep(self._snapshot.load_columns([table]))
        return self._columns[key]

    def _keep(self, loaded: Mapping[str, EvidenceColumns]) -> None:
        for code, columns in loaded.items():
            covers = self.table(code).covers
            self._columns[code_key(code)] = speaking(covers, columns) if covers else columns

    def fetch(self, tables: set[str]) -> None:
        """Fetch the arrays of many tables in one go."""
        wanted = [table for table in sorted(tables) if code_key(table) not in self._columns]
        if wanted:
            self._keep(self._snapshot.load_columns(wanted))

    def origin(self, record: RecordRef | None) -> Origin | None:
        """Return the place of a record, or None without one."""
        if record is None:
            return None
        table = self.table(record.table)
        file = self._snapshot.find(EvidenceFile, table.file)
        below = self.column(record).lines_below
        source_row = int(self.columns(record.table).source_rows[record.row]) + below
        row, column = table.cell(source_row, self._column_number(record))
        return Origin(
            file=file.name if file else table.file,
            sha256=file.sha256 if file else "",
            sheet=table.sheet,
            row=row,
            column=column,
        )

    def _column_number(self, record: RecordRef) -> int:
        """The column of a record: that of its values, or its own where several columns were stacked."""
        stacked = self.columns(record.table).extra.get(SOURCE_COLUMN)
        return self.column(record).column if stacked is None else column_number(stacked.word(record.row))

    def recorded(self, record: RecordRef | None) -> ReportCell:
        """Return the value as it stands in its cell, in the unit as recorded.

        A corrected reading is told as it was read. What was derived stands in no cell (its place is that of the raw
        reading that governs), which is said behind the value.
        """
        if record is None:
            return text("")
        before = self.as_read(record)
        if before:
            return text(f"{before}, before correction")
        arrays = self.columns(record.table).values[record.column]
        low, high = float(arrays.low[record.row]), float(arrays.high[record.row])
        found = reading(low, high, self.column(record).unit)
        return text(f"{found.text}, derived") if self.table(record.table).derivation else found

    def as_read(self, record: RecordRef) -> str:
        """Return the reading before a correction (its unit where the correction left that alone), "" where none was."""
        kept = self.columns(record.table).extra.get(as_read_column(record.column))
        words = "" if kept is None else kept.word(record.row)
        if not words or any(one.unit != "dB" for one in self._applied(record)):
            return words
        low, _, high = words.partition(" .. ")
        return interval(float(low), float(high or low), self.column(record).unit)

    def _applied(self, record: RecordRef) -> Iterator[Correction]:
        for one in self.table(record.table).applied:
            found = self._snapshot.find(Correction, one.correction)
            if one.column == record.column and found is not None:
                yield found
