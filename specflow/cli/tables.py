"""Report tables on the terminal: the same cells as everywhere, set in columns."""

from __future__ import annotations

import sys
from functools import lru_cache
from typing import Any
from unicodedata import combining, east_asian_width

from specflow.cli.console import put
from specflow.cli.streams import fitting
from specflow.model.report import Align, CellTone, Report, ReportTable

NARROWEST = 9  # a terminal with fewer places a column breaks every word; there each row is a block of lines
STYLES = {
    CellTone.PLAIN: "",
    CellTone.GOOD: "green",
    CellTone.DOUBTFUL: "yellow",
    CellTone.BAD: "bold red",
    CellTone.QUIET: "dim",
}


def put_table(table: ReportTable) -> None:
    """Print one table to stdout; on a pipe no cell is cut or folded and there are no colours."""
    if sys.stdout.isatty():
        _put_on_terminal(table)
    else:
        put("\n".join(plain_lines(table)))


def plain_lines(table: ReportTable) -> list[str]:
    """Return the lines of a table without colours, each cell as wide as its column asks; a row is never folded."""
    grid = [[fitting(column.title).split("\n") for column in table.columns]]
    for row in table.rows:
        cells = [fitting(cell.text).split("\n") for cell in row.cells]
        if cells and row.depth:
            cells[0] = ["  " * row.depth + line for line in cells[0]]
        grid.append(cells)
    widths = [
        max(_width(line) for cells in grid for line in cells[place]) for place in range(len(table.columns))
    ]
    lines = [fitting(table.title)] if table.title else []
    lines += [fitting(table.intro), ""] if table.intro else []
    for cells in grid:
        for height in range(max(map(len, cells), default=1)):
            parts = [
                _set(cell[height] if height < len(cell) else "", width, column.align)
                for cell, width, column in zip(cells, widths, table.columns, strict=True)
            ]
            lines.append("  ".join(parts).rstrip())
    return lines


def _set(text: str, width: int, align: Align) -> str:
    blanks = " " * (width - _width(text))
    return blanks + text if align is Align.RIGHT else text + blanks


@lru_cache(maxsize=4096)  # the same words (a point, a state) stand in many rows
def _width(text: str) -> int:
    """Return how many places a text takes: marks set on a letter take none, ideographs two (Unicode annex 11)."""
    if text.isascii():
        return len(text)
    wide = sum(east_asian_width(one) in "WF" for one in text)
    return len(text) + wide - sum(map(bool, map(combining, text)))


def _put_on_terminal(table: ReportTable) -> None:
    from rich.console import Console
    from rich.padding import Padding
    from rich.table import Table
    from rich.text import Text

    console = Console(highlight=False)
    if console.width < NARROWEST * len(table.columns):
        put("\n".join(stacked_lines(table, console.width)))
        return
    grid = Table(box=None, pad_edge=False, header_style="bold", padding=(0, 2, 0, 0))
    for column in table.columns:
        grid.add_column(
            Text(fitting(column.title)),
            justify="right" if column.align is Align.RIGHT else "left",
            overflow="fold",
        )
    for row in table.rows:
        cells = [Text(fitting(cell.text), style=STYLES[cell.tone]) for cell in row.cells]
        if cells and row.depth:
            cells[0] = Text("  " * row.depth) + cells[0]
        grid.add_row(*cells)
    with console.capture() as captured:
        if table.title:
            console.print(Text(fitting(table.title), style="bold underline"))
        if table.intro:
            console.print(Padding(Text(fitting(table.intro)), (0, 0, 1, 0), expand=False))
        console.print(grid)
    put(captured.get(), end="")


def stacked_lines(table: ReportTable, width: int) -> list[str]:
    """Return each row of a table as a block of lines, column by column, none wider than ``width``; blanks are left out.

    Without colours: what they tell is in the words.
    """
    from textwrap import wrap

    wide = max(width, 20)
    lines = wrap(fitting(table.title), wide) + wrap(fitting(table.intro), wide)
    for row in table.rows:
        lines.append("")
        for place, (column, cell) in enumerate(zip(table.columns, row.cells, strict=True)):
            title, text = " ".join(fitting(column.title).split()), " ".join(fitting(cell.text).split())
            if text:
                before = f"  {title}: " if place else "  " * row.depth
                lines += wrap(before + text, wide, subsequent_indent="    ")
    return lines


def put_report(report: Report) -> None:
    """Print all tables of a report, then its facts and cautions."""
    for table in report.tables:
        put_table(table)
        put()
    for name, value in report.facts:
        put(fitting(f"{name}: {value}"))
    for caution in report.cautions:
        put(fitting(f"! {caution}"))


def report_as_json(report: Report) -> dict[str, Any]:
    """Return a report as an object: its facts by name (a list where a name comes again), each table under its key."""
    found: dict[str, list[str]] = {}
    for name, text in report.facts:
        found.setdefault(name, []).append(text)
    facts = {name: texts[0] if len(texts) == 1 else texts for name, texts in found.items()}
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
