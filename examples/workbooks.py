"""Writes the example's workbooks: the same cells give the same bytes each run."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from datetime import date, datetime
from pathlib import Path
from typing import Any

from xlsxwriter import Workbook

CREATED = datetime(2026, 5, 4)  # a fixed date, or the bytes would differ from run to run


@dataclass(frozen=True)
class Formula:
    """A formula with its value: one that was never calculated would be refused, and rightly."""

    text: str
    value: float


@dataclass(frozen=True)
class Percent:
    """A ratio in a cell that a spreadsheet program shows as a percentage: 0.031 reads 3.1 %."""

    ratio: float


@dataclass(frozen=True)
class Sheet:
    """A worksheet as rows of cells. ``hidden`` are row numbers counted from 1; ``widths`` are by column number."""

    name: str
    rows: Sequence[Sequence[Any]]
    hidden: frozenset[int] = frozenset()
    widths: Mapping[int, int] = field(default_factory=dict)
    bold: frozenset[int] = frozenset({1})


def table(headers: Sequence[str], records: Sequence[Mapping[str, Any]]) -> list[list[Any]]:
    """Return a header row and one row a record; a header that a record lacks leaves its cell empty."""
    return [list(headers), *([record.get(header) for header in headers] for record in records)]


def write_book(path: Path, title: str, sheets: Sequence[Sheet]) -> None:
    """Write a workbook."""
    path.parent.mkdir(parents=True, exist_ok=True)
    book = Workbook(path, {"strings_to_formulas": False, "strings_to_urls": False})
    book.set_properties({"title": f"{title} (invented)", "created": CREATED})
    formats = {
        "bold": book.add_format({"bold": True, "text_wrap": True, "valign": "top"}),
        "percent": book.add_format({"num_format": "0.0%"}),
        "date": book.add_format({"num_format": "yyyy-mm-dd"}),
        "plain": None,
    }
    for sheet in sheets:
        _write_sheet(book.add_worksheet(sheet.name), sheet, formats)
    book.close()


def _write_sheet(target: Any, sheet: Sheet, formats: Mapping[str, Any]) -> None:
    for row, cells in enumerate(sheet.rows):
        for column, value in enumerate(cells):
            _write_cell(target, row, column, value, formats, row + 1 in sheet.bold)
    for number in sheet.hidden:
        target.set_row(number - 1, None, None, {"hidden": True})
    for column, width in sheet.widths.items():
        target.set_column(column, column, width)


def _write_cell(
    target: Any, row: int, column: int, value: Any, formats: Mapping[str, Any], bold: bool
) -> None:
    match value:
        case None | "":
            return
        case Percent(ratio=ratio):
            target.write_number(row, column, ratio, formats["percent"])
        case Formula(text=text, value=result):
            target.write_formula(row, column, text, formats["plain"], value=result)
        case date():
            target.write_datetime(row, column, datetime(value.year, value.month, value.day), formats["date"])
        case str():
            target.write_string(row, column, value, formats["bold" if bold else "plain"])
        case _:
            target.write_number(row, column, value, formats["plain"])
