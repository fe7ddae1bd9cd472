"""A verification of files as report tables: the files with their states, then the cells that read differently."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from specflow.model.report import Align, CellTone, ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.workflows.verify_files import FileCheck, FileState, Verification

MOST_SHOWN = 40  # cells of one table that a person looks through; --json has a thousand
_TONES = {
    FileState.UNCHANGED: CellTone.GOOD,
    FileState.KEPT: CellTone.GOOD,
    FileState.REPLACED: CellTone.QUIET,
    FileState.MOVED: CellTone.DOUBTFUL,
}


def verification_tables(verification: Verification) -> list[ReportTable]:
    """Return the files, and where any cell reads differently, the cells."""
    tables = [_files(verification.checks)]
    rows = [row for check in verification.checks for row in _cells(check)]
    if rows:
        tables.append(
            ReportTable(
                key="cells",
                title="Stored cells that read differently",
                columns=(
                    ReportColumn(key="table", title="Table", width=8),
                    ReportColumn(key="cell", title="Cell", width=10),
                    ReportColumn(key="what", title="What", width=24),
                    ReportColumn(key="was", title="Was (stored)", width=16),
                    ReportColumn(key="now", title="Is (file)", width=16),
                ),
                rows=tuple(rows),
            )
        )
    return tables


def _files(checks: Sequence[FileCheck]) -> ReportTable:
    return ReportTable(
        key="files",
        title="Files that evidence was read from",
        columns=(
            ReportColumn(key="id", title="Id", width=6),
            ReportColumn(key="file", title="File", width=28),
            ReportColumn(key="state", title="State", width=12),
            ReportColumn(key="cells", title="Cells", align=Align.RIGHT, width=6),
            ReportColumn(key="found", title="Found at", width=30),
        ),
        rows=tuple(_file(check) for check in checks),
    )


def _file(check: FileCheck) -> ReportRow:
    tone = _TONES.get(check.state, CellTone.BAD)
    texts = (check.file.id, check.file.name, str(check.state), str(check.cells or ""), check.found)
    return ReportRow(
        id=check.file.id,
        cells=tuple(
            ReportCell(text=text, tone=tone if place == 2 else CellTone.PLAIN)
            for place, text in enumerate(texts)
        ),
    )


def _cells(check: FileCheck) -> Iterator[ReportRow]:
    for table in check.tables:
        if table.problem:
            yield _row(table.table, "", table.problem, "", "")
        for one in table.differences[:MOST_SHOWN]:
            yield _row(table.table, one.cell, one.what, one.was, one.now)
        if table.count > min(MOST_SHOWN, len(table.differences)):
            yield _row(table.table, "", f"and {table.count - MOST_SHOWN} more cells (--json)", "", "")
        if table.added:
            yield _row(table.table, "", f"{table.added} values are new in the file", "", "")


def _row(table: str, *texts: str) -> ReportRow:
    return ReportRow(id=table, cells=tuple(ReportCell(text=text) for text in (table, *texts)))
