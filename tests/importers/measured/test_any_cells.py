"""Whatever stands in the cells: nothing crashes, and every value that comes in is the one that stands in its cell."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from openpyxl import load_workbook

from specflow.errors import SpecflowError
from specflow.importers.measurements import MeasuredTable
from specflow.importers.readers import column_number
from specflow.model.evidence import SOURCE_COLUMN
from tests.importers.measured.make import book, measure, text

HEADERS = (
    "Item", "f (GHz)", "Gain (dB)", "NF", "EVM (%)", "T (°C)", "T_amb (°C)", "U (dB), k=2", "Limit (dB)", "Pass/Fail",
    "Pout (dBm)", "Gain @ 28 GHz (dB)", "Gain @ 30 GHz (dB)", "SN 7", "SN 8", "28 GHz", "30 GHz", "Parameter", "Value",
    "Unit", "f (GHz) \\ Baseplate (°C)", "GHz", "#", "Date", "Remark", "", "_", "S21", "Mode", "dB", "±", "k=2",
    "(", "@ x",
)  # fmt: skip
WORDS = (
    "Mean",
    "N/A",
    "<-90",
    "> 60",
    "LNA-1",
    "2026-03-02",
    "DUT: LNA-1",
    "Ambient: 23 °C",
    "1,5",
    "OL",
    "=",
    ":",
    "—",
)
CELLS = st.one_of(
    st.none(),
    st.sampled_from(WORDS),
    st.floats(-100, 100).map(lambda number: round(number, 3)),
    st.integers(-5, 40),
    st.text(st.characters(codec="utf-8", exclude_categories=["Cc", "Cs"]), max_size=6),
    st.booleans(),
)
ROWS = st.lists(
    st.one_of(st.lists(CELLS, max_size=6), st.lists(st.sampled_from(HEADERS), min_size=2, max_size=6)),
    min_size=1,
    max_size=12,
)


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return tmp_path_factory.mktemp("any")


def tables(path: Path) -> list[MeasuredTable]:
    try:
        return [table for table in measure(path).tables if table.document is not None]
    except SpecflowError:
        return []


def check(table: MeasuredTable, cell_at: Any) -> None:
    assert table.document is not None and table.columns is not None
    for value in table.document.values:
        arrays = table.columns.values[value.name]
        for row in np.flatnonzero(np.isfinite(arrays.low) & (arrays.low == arrays.high)).tolist():
            column = value.column
            if SOURCE_COLUMN in table.columns.extra:
                column = column_number(table.columns.extra[SOURCE_COLUMN].word(row))
            cell = cell_at(*table.document.cell(int(table.columns.source_rows[row]), column))
            number = float(str(cell).strip().replace("−", "-").replace(",", "."))
            assert float(arrays.low[row]) == number, (value.name, row, cell)


@settings(deadline=None)
@given(ROWS)
def test_workbooks(folder: Path, rows: list[list[Any]]) -> None:
    rows = [
        [cell if not isinstance(cell, str) or not cell.startswith("=") else "x" for cell in row]
        for row in rows
    ]
    path = book(folder / "a.xlsx", [["Gain (dB)", "f (GHz)"], [20, 27.5], *rows])
    sheet = load_workbook(path).worksheets[0]
    for table in tables(path):
        check(table, lambda row, column: sheet.cell(row, column).value)


@settings(deadline=None)
@given(ROWS)
def test_text_files(folder: Path, rows: list[list[Any]]) -> None:
    cells: list[list[Any]] = [["Gain (dB)", "f (GHz)"], [20, 27.5], *rows]
    lines = [
        ";".join("" if cell is None else str(cell).replace(";", " ").replace('"', " ") for cell in row)
        for row in cells
    ]
    path = text(folder / "a.csv", "\n".join(lines) + "\n")
    for table in tables(path):
        check(table, lambda row, column: lines[row - 1].split(";")[column - 1])
