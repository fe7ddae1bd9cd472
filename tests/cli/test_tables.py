"""Tables on a pipe: whole, aligned, and as a terminal library that nobody here wrote sets them."""

from __future__ import annotations

import io
import time

from rich.console import Console
from rich.table import Table
from rich.text import Text

from specflow.cli.tables import plain_lines
from specflow.model.report import Align, ReportCell, ReportColumn, ReportRow, ReportTable

CELLS = ("short", "≥ 45 dBm, θ −30°", "two\nlines", "", "電力 W", "e\u0301", "x" * 300)


def a_table(rows: int = 7, columns: int = 4) -> ReportTable:
    """Return a table of awkward cells, columns by turns left and right."""
    return ReportTable(
        key="t",
        title="Title",
        intro="What it is.",
        columns=tuple(
            ReportColumn(key=str(place), title=f"Column {place}", align=list(Align)[place % 2])
            for place in range(columns)
        ),
        rows=tuple(
            ReportRow(
                id=str(row),
                depth=row % 3,
                cells=tuple(
                    ReportCell(text=CELLS[(row + place) % len(CELLS)] or "–") for place in range(columns)
                ),
            )
            for row in range(rows)
        ),
    )


def test_lines_are_those_of_rich_on_a_very_wide_terminal() -> None:
    table = a_table()
    grid = Table(box=None, pad_edge=False, padding=(0, 2, 0, 0))
    for column in table.columns:
        grid.add_column(column.title, justify="right" if column.align is Align.RIGHT else "left")
    for row in table.rows:
        indent = "  " * row.depth
        first = "\n".join(indent + line for line in row.cells[0].text.split("\n"))
        grid.add_row(Text(first), *(Text(cell.text) for cell in row.cells[1:]))
    wide = io.StringIO()
    Console(file=wide, width=10_000).print(grid)
    expected = [line.rstrip() for line in wide.getvalue().splitlines()]
    assert plain_lines(table) == ["Title", "What it is.", "", *expected]


def test_a_long_table_is_set_at_once() -> None:
    table = a_table(rows=2_000, columns=8)
    start = time.perf_counter()
    lines = plain_lines(table)
    assert time.perf_counter() - start < 2.0
    assert len(lines) > 2_000
