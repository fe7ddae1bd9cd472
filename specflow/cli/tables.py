"""Report tables on the terminal: the same cells as everywhere, set in columns."""

from __future__ import annotations

import sys
from typing import Any

from specflow.cli.console import PIPED_WIDTH
from specflow.model.report import Align, CellTone, Report, ReportTable

STYLES = {
    CellTone.PLAIN: "",
    CellTone.GOOD: "green",
    CellTone.DOUBTFUL: "yellow",
    CellTone.BAD: "bold red",
    CellTone.QUIET: "dim",
}


def put_table(table: ReportTable) -> None:
    """Print one table to stdout; on a pipe no cell is cut or folded and there are no colours."""
    from rich.console import Console
    from rich.padding import Padding
    from rich.table import Table
    from rich.text import Text

    is_terminal = sys.stdout.isatty()
    console = Console(width=None if is_terminal else PIPED_WIDTH, highlight=False)
    grid = Table(box=None, pad_edge=False, header_style="bold", padding=(0, 2, 0, 0))
    for column in table.columns:
        grid.add_column(
            column.title, justify="right" if column.align is Align.RIGHT else "left", overflow="fold"
        )
    for row in table.rows:
        cells = [Text(cell.text, style=STYLES[cell.tone]) for cell in row.cells]
        if cells and row.depth:
            cells[0] = Text("  " * row.depth) + cells[0]
        grid.add_row(*cells)
    if table.title:
        console.print(Text(table.title, style="bold underline"))
    if table.intro:
        console.print(Padding(Text(table.intro), (0, 0, 1, 0), expand=False))
    console.print(grid)


def put_report(report: Report) -> None:
    """Print all tables of a report, then its facts and cautions."""
    for table in report.tables:
        put_table(table)
        print()
    for name, value in report.facts:
        print(f"{name}: {value}")
    for caution in report.cautions:
        print(f"! {caution}")


def report_as_json(report: Report) -> dict[str, Any]:
    """Return a report as an object: its facts by name, and each table under its key."""
    facts = dict(report.facts)
    tables = {table.key: table_as_json(table) for table in report.tables}
    return {"title": report.title, "subtitle": report.subtitle, "facts": facts, **tables}


def table_as_json(table: ReportTable) -> list[dict[str, Any]]:
    """Return the rows as objects: the text shown, and beside it (``_number``, ``_origin``) what is behind it."""
    rows: list[dict[str, Any]] = []
    for row in table.rows:
        fields: dict[str, Any] = {"depth": row.depth} if row.depth else {}
        for column, cell in zip(table.columns, row.cells, strict=True):
            fields[column.key] = cell.text
            if cell.number is not None:
                fields[f"{column.key}_number"] = cell.number
            if cell.origin is not None:
                fields[f"{column.key}_origin"] = cell.origin.model_dump(exclude_defaults=True)
        rows.append(fields)
    return rows
