"""What is on a test sheet, as a table: for each block how many values in how many set-ups, for which requirements."""

from __future__ import annotations

from specflow.model.bench_sheet import BenchSheet, BenchWorkbook
from specflow.model.report import Align, ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.reports.figures import text


def bench_summary(workbook: BenchWorkbook) -> ReportTable:
    """Return one row a sheet."""
    return ReportTable(
        key="testsheet",
        title="Test sheet",
        columns=(
            ReportColumn(key="sheet", title="Sheet", width=14),
            ReportColumn(key="values", title="Values", align=Align.RIGHT, width=8),
            ReportColumn(key="set_ups", title="Set-ups", align=Align.RIGHT, width=8),
            ReportColumn(key="items", title="Items", width=18),
            ReportColumn(key="requirements", title="Requirements", width=40),
        ),
        rows=tuple(_row(sheet) for sheet in workbook.sheets),
    )


def _row(sheet: BenchSheet) -> ReportRow:
    points = [point for _, point in sheet.rows]
    items = dict.fromkeys(point.item or "any" for point in points)
    requirements = dict.fromkeys(code for point in points for code in point.requirements)
    return ReportRow(
        id=sheet.name,
        cells=(
            text(sheet.name),
            ReportCell(text=str(len(points)), number=float(len(points))),
            ReportCell(text=str(sheet.set_ups), number=float(sheet.set_ups)),
            text(", ".join(items)),
            text(", ".join(requirements)),
        ),
    )
