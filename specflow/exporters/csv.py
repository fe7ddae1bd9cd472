"""Report → csv: the first table, cell for cell as shown, UTF-8 with a header row (RFC 4180)."""

from __future__ import annotations

import csv
import io

from specflow.model.report import Report

title = "Comma-separated values"
extension = ".csv"

# Spreadsheets run a cell that begins so as a formula; a leading apostrophe keeps it text.
FORMULA_STARTS = ("=", "@", "\t", "\r", "\n", "＝", "＠")  # the wide forms count in East Asian settings
SIGNS = ("+", "-", "＋", "－")


def render(report: Report) -> bytes:
    """Return the first table of the report."""
    table = report.tables[0]
    text = io.StringIO(newline="")
    writer = csv.writer(text, lineterminator="\r\n")
    writer.writerow([column.title for column in table.columns])
    writer.writerows(
        [guarded(cell.text, cell.number is not None) for cell in row.cells] for row in table.rows
    )
    return text.getvalue().encode()


def guarded(text: str, is_number: bool) -> str:
    """Return text that no spreadsheet takes for a formula."""
    if text.startswith(FORMULA_STARTS) or (text.startswith(SIGNS) and not is_number):
        return "'" + text
    return text
