"""Small measurement workbooks and the project they belong to. All numbers here are invented."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from typing import Any

from openpyxl import Workbook
from openpyxl.worksheet.worksheet import Worksheet

from specflow.importers.measurements import MeasuredTable, Measurements, read_measurements
from specflow.model.base import Document
from specflow.parameters import load_dictionary
from tests.builders import a_block, a_conditions_set, a_requirement, a_snapshot, an_item

Rows = Sequence[Any]

PROJECT = (a_block(), a_block("PA"), an_item(), an_item("LNA-2"), a_conditions_set(), a_requirement())
SAID = {"block": "LNA", "item": "LNA-1"}


def book(
    path: Path, rows: Rows, *, sheet: str = "data", change: Callable[[Worksheet], None] | None = None
) -> Path:
    """Write rows into one sheet; ``change`` may format, hide or merge."""
    workbook = Workbook()
    worksheet = workbook.worksheets[0]
    worksheet.title = sheet
    for row in rows:
        worksheet.append(list(row))
    if change is not None:
        change(worksheet)
    workbook.save(path)
    return path


def text(path: Path, content: str) -> Path:
    """Write a text file."""
    path.write_text(content, encoding="utf-8")
    return path


def measure(
    path: Path,
    *documents: Document,
    stated: Mapping[str, str] | None = None,
    mapping: str = "",
    **options: Any,
) -> Measurements:
    """Read a file for the project of the tests, with further documents."""
    snapshot = a_snapshot(*PROJECT, *documents)
    said = SAID if stated is None else stated
    return read_measurements(path, snapshot, load_dictionary(), stated=said, mapping=mapping, **options)


def one_table(path: Path, *documents: Document, **options: Any) -> MeasuredTable:
    """The only table of a file."""
    tables = measure(path, *documents, **options).tables
    assert len(tables) == 1, [table.place for table in tables]
    return tables[0]


def taken(table: MeasuredTable) -> MeasuredTable:
    """The table, which must have no question open."""
    assert not table.questions, table.questions
    assert table.document is not None and table.columns is not None
    return table


def low(table: MeasuredTable, name: str) -> list[float]:
    """The values of one column."""
    assert table.columns is not None
    return list(table.columns.values[name].low)


def questions(table: MeasuredTable) -> str:
    """All questions as one text, to look for words in."""
    assert table.document is None, "a table with a question gives no evidence"
    return "\n".join(f"{one.cell}: {one.what} -> {one.remedy}" for one in table.questions)


def rejected(table: MeasuredTable) -> dict[str, str]:
    """Cell → reason."""
    return {one.cell: one.reason for one in table.rejected}
