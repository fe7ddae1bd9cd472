"""What became of many files as report tables: one row a file, then what was passed over."""

from __future__ import annotations

from collections.abc import Sequence

from specflow.model.report import Align, CellTone, ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.workflows.attach_folder import FileOutcome, FolderRun, Outcome
from specflow.workflows.found_files import shown_path

_TONES = {Outcome.ACCEPTED: CellTone.GOOD, Outcome.UNCHANGED: CellTone.QUIET, Outcome.REJECTED: CellTone.BAD}


def run_tables(run: FolderRun, *, dry_run: bool = False) -> list[ReportTable]:
    """Return the files with their outcome, and the files of the folders that were not read."""
    tables = [
        ReportTable(
            key="files",
            title="Files, as they would be attached" if dry_run else "Files",
            columns=(
                ReportColumn(key="file", title="File", width=28),
                ReportColumn(key="outcome", title="Outcome", width=10),
                ReportColumn(key="tables", title="Tables", width=10),
                ReportColumn(key="values", title="Values", align=Align.RIGHT, width=8),
                ReportColumn(key="says", title="Says", width=40),
            ),
            rows=tuple(_row(one) for one in run.files),
        )
    ]
    if run.passed_over:
        tables.append(
            ReportTable(
                key="passed_over",
                title="Passed over",
                columns=(
                    ReportColumn(key="file", title="File", width=28),
                    ReportColumn(key="reason", title="Reason", width=48),
                ),
                rows=tuple(
                    ReportRow(
                        id=one.path.name,
                        cells=(ReportCell(text=shown_path(one.path)), ReportCell(text=one.reason)),
                    )
                    for one in run.passed_over
                ),
            )
        )
    return tables


def _row(one: FileOutcome) -> ReportRow:
    says = f"{one.where}: {one.words}" if one.where else one.words
    says = "; ".join(
        filter(None, [says, f"supersedes {', '.join(one.superseded)}" if one.superseded else ""])
    )
    return ReportRow(
        id=one.path.name,
        cells=(
            ReportCell(text=shown_path(one.path)),
            ReportCell(text=str(one.outcome), tone=_TONES[one.outcome]),
            ReportCell(text=_range(one.tables)),
            ReportCell(text=str(one.values or "")),
            ReportCell(text=says),
        ),
    )


def _range(codes: Sequence[str]) -> str:
    return ", ".join(codes) if len(codes) <= 2 else f"{codes[0]} … {codes[-1]}"
