"""What was recorded: one row a quantity of an evidence table, with file, hash and how it was read."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence

from specflow.model.base import code_key
from specflow.model.derivation import Derivation
from specflow.model.evidence import EvidenceFile, EvidenceTable, ValueColumn
from specflow.model.origin import column_letters
from specflow.model.report import Align, CellTone, ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.model.snapshot import Results, Snapshot
from specflow.reports.figures import text
from specflow.reports.serving import Served, requirements_served

EVIDENCE_COLUMNS = (
    ReportColumn(key="table", title="Table", width=12),
    ReportColumn(key="file", title="File", width=32),
    ReportColumn(key="sheet", title="Sheet", width=18),
    ReportColumn(key="block", title="Block", width=14),
    ReportColumn(key="parameter", title="Parameter", width=22),
    ReportColumn(key="column", title="Column", width=8),
    ReportColumn(key="unit", title="Unit", width=10),
    ReportColumn(key="unit_from", title="Unit found in", width=22),
    ReportColumn(
        key="derived", title="Derived by", width=30, explains="derivation, law, settings, from which tables"
    ),
    ReportColumn(key="conversions", title="Conversions applied", width=30),
    ReportColumn(key="uncertainty", title="Uncertainty from", width=30),
    ReportColumn(key="cells", title="Cells", width=14),
    ReportColumn(key="mapping", title="Mapping", width=16),
    ReportColumn(key="importer", title="Importer", width=16),
    ReportColumn(key="rows", title="Rows", align=Align.RIGHT, width=8),
    ReportColumn(key="method", title="Method", width=12),
    ReportColumn(key="stage", title="Stage", width=14),
    ReportColumn(key="performer", title="Performed by", width=18),
    ReportColumn(key="performed_on", title="Performed on", width=13),
    ReportColumn(key="accepted", title="Accepted by", width=18),
    ReportColumn(key="serves", title="Serves", width=34, explains="requirements, points governed"),
    ReportColumn(key="sha256", title="SHA-256 of the file", width=66),
)
EVIDENCE_INTRO = (
    "One row a recorded quantity. Values are kept as written; the hash says which bytes the file was."
)


def evidence_table(snapshot: Snapshot, results: Results) -> ReportTable:
    """Return one row a recorded quantity."""
    files = {code_key(file.id): file for file in snapshot.all(EvidenceFile)}
    served = requirements_served(snapshot, results)
    read_by: dict[str, list[str]] = defaultdict(list)
    for derivation in snapshot.all(Derivation):
        for code in derivation.inputs:
            read_by[code_key(code)].append(derivation.id)
    rows = tuple(
        _row(
            table,
            column,
            files.get(code_key(table.file)),
            _derived_by(table, snapshot),
            _serves(table, results, served, read_by.get(code_key(table.id), ())),
        )
        for table in snapshot.tables
        for column in table.values
    )
    return ReportTable(
        key="evidence", title="Evidence", intro=EVIDENCE_INTRO, columns=EVIDENCE_COLUMNS, rows=rows
    )


def _derived_by(table: EvidenceTable, snapshot: Snapshot) -> str:
    derivation = snapshot.find(Derivation, table.derivation)
    if derivation is None:
        return ""
    return f"{derivation.id}: {derivation.words}, from {', '.join(derivation.inputs)}"


def _serves(table: EvidenceTable, results: Results, served: Served, read_by: Sequence[str]) -> ReportCell:
    governed = served.get(code_key(table.id), {})
    if governed:
        return text(", ".join(f"{requirement} ({count})" for requirement, count in governed.items()))
    if read_by:
        return text(f"read by {', '.join(read_by)}")
    return text(results.unmatched.get(table.id) or "governs no required point", CellTone.DOUBTFUL)


def _row(
    table: EvidenceTable, column: ValueColumn, file: EvidenceFile | None, derived: str, serves: ReportCell
) -> ReportRow:
    return ReportRow(
        id=table.id,
        cells=(
            ReportCell(text=table.id),
            text(file.name if file else table.file),
            text(table.sheet),
            text(table.block),
            text(column.quantity.parameter),
            text(column_letters(column.column)),
            text(column.unit),
            text(column.unit_from),
            text(derived),
            text("; ".join(column.conversions)),
            text(column.uncertainty_from),
            text(table.how_read.place),
            text(f"{table.mapping} revision {table.mapping_revision}" if table.mapping else ""),
            text(table.how_read.importer or (file.importer_version if file else "")),
            ReportCell(text=str(table.rows), number=float(table.rows)),
            text(table.method.value),
            text(table.stage.value),
            text(table.performer),
            text(table.performed_on or ""),
            text(f"{table.accepted_by} {table.accepted_at}".strip()),
            serves,
            text(file.sha256 if file else ""),
        ),
    )
