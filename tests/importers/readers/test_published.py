"""Files that others published (tests/data/README.md), against an independent reading by openpyxl or by hand.

The second half runs on all plain tables beside the checkout, where that folder exists.
"""

from __future__ import annotations

from datetime import date, datetime, time, timedelta
from pathlib import Path

import numpy as np
import openpyxl
import pytest

from specflow.importers.readers import Grid, OddKind, open_grids, sheet
from tests.importers.readers.mutating import check_text
from tests.published import BESIDE, DATA, WHY_SKIPPED

NOTICE = (DATA / "README.md").read_text(encoding="utf-8")
TEXTS = sorted(
    path
    for folder in (DATA, BESIDE)
    if folder.is_dir()
    for path in folder.iterdir()
    if path.suffix.lower() in (".csv", ".dat") and path.name != "standards_limits.csv"
)
WORKBOOKS = sorted(DATA.glob("*.xlsx")) + (sorted(BESIDE.glob("*.xlsx")) if BESIDE.is_dir() else [])


def floats(grid: Grid, column: int, start: int) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
    numbers, bad = grid.column_floats(column, start, grid.last_row + 1)
    assert bad == []
    return numbers


@pytest.mark.parametrize("path", WORKBOOKS, ids=lambda path: path.name)
def test_every_cell_is_that_which_openpyxl_reads(path: Path) -> None:
    grids = {grid.name: grid for grid in open_grids(path)}
    workbook = openpyxl.load_workbook(path, data_only=True)
    worksheets = workbook.worksheets
    assert list(grids) == [worksheet.title for worksheet in worksheets]
    compared = 0
    for worksheet in worksheets:
        grid = grids[worksheet.title]
        for row in worksheet.iter_rows():
            for cell in row:
                expected = "" if cell.value is None or cell.data_type == "e" else cell.value
                found = grid.value(cell.row, cell.column)
                assert found == expected or isinstance(found, date | datetime | time | timedelta), (
                    cell.coordinate
                )
                odd = grid.odd.at(cell.row, cell.column)
                percent = isinstance(cell.value, float | int) and "%" in cell.number_format.split('"')[0]
                assert (odd is not None and odd.kind is OddKind.PERCENT) == percent, cell.coordinate
                assert (odd is not None and odd.kind is OddKind.ERROR) == (cell.data_type == "e"), (
                    cell.coordinate
                )
                compared += found != ""
        assert sorted(map(str, grid.merged)) == sorted(map(str, worksheet.merged_cells.ranges))
    assert compared >= 40


@pytest.mark.parametrize(
    "name", ["rx_noise_temp_chain.xlsx", "digitiser_gain.csv", "spillover_vs_zenith_a.dat"]
)
def test_fingerprint_is_the_one_in_the_notice(name: str) -> None:
    assert f"`{open_grids(DATA / name).fingerprint.sha256}`" in NOTICE


def test_merged_three_row_header() -> None:
    grid = open_grids(DATA / "radio_dc_power_modes.xlsx")[0]
    merged = ["B7:D7", "F7:H7", "J6:L6", "N6:O6", "N7:O7", "Q6:R6", "Q7:R7"]
    assert sorted(str(area) for area in grid.merged) == merged
    assert grid.value(7, 14) == "7.2V ---> 3.3V"
    assert grid.value(11, 20) == pytest.approx(1259.6706, abs=5e-5)
    odd = grid.odd.at(8, 2)
    assert odd is not None
    assert (odd.kind, odd.unit) == (OddKind.UNIT_FORMAT, "V")


def test_formula_cells_that_hold_empty_text() -> None:
    grid = sheet(open_grids(DATA / "rx_noise_temp_chain.xlsx"), "General")
    assert grid.value(24, 11) == pytest.approx(164.5018, abs=5e-5)
    assert grid.value(21, 7) == ""
    assert grid.odd.at(21, 7) is None


def test_header_in_a_comment_line() -> None:
    grid = open_grids(DATA / "digitiser_gain.csv")[0]
    assert grid.comment_rows == set(range(1, 7))
    assert grid.row(6) == ["Frequency [Hz]", "Channel power [dBX]", "Gain [dB]"]
    frequency, gain = floats(grid, 1, 7), floats(grid, 3, 7)
    assert (len(gain), gain.max(), gain.min()) == (2048, 23.24638600, -21.19583835)
    assert frequency[gain.argmax()] == pytest.approx(413154860.77, abs=0.01)


def test_names_row_longer_than_the_table() -> None:
    grid = open_grids(DATA / "spillover_vs_zenith_a.dat")[0]
    assert grid.row(2)[:3] == ["ZA [deg]", "H @ _ MHz", "V @ _ MHz"]
    assert (len(grid.row(3)), grid.last_row) == (33, 21)
    table = np.array([floats(grid, column, 4) for column in range(2, 34)])
    assert (table.shape, table.max(), table.min()) == ((32, 18), 2.8339, 0.9197)


@pytest.mark.parametrize("path", TEXTS, ids=lambda path: path.name)
def test_every_number_of_a_text_table_stands_so_in_its_line(path: Path) -> None:
    assert check_text(path.read_bytes(), list(open_grids(path))) >= 28


beside = pytest.mark.skipif(not BESIDE.is_dir(), reason=WHY_SKIPPED)


@beside
def test_hot_and_cold_power_beside() -> None:
    grid = open_grids(BESIDE / "hot_cold_if_power.dat")[0]
    frequency, hot, cold = (floats(grid, column, 2) for column in (1, 2, 3))
    assert (len(hot), frequency[-1]) == (500, 19.96)
    assert (hot - cold)[(frequency >= 4) & (frequency <= 8)].mean() == pytest.approx(4.4972, abs=5e-5)


@beside
def test_thermistor_table_beside() -> None:
    grid = open_grids(BESIDE / "thermistor_mount_vs_temp.csv")[0]
    temperature, resistance = floats(grid, 1, 2), floats(grid, 2, 2)
    assert (len(temperature), temperature[0], resistance[-1]) == (14, 16.18989327, 200.06257)


@beside
def test_instrument_file_with_nul_bytes_beside() -> None:
    grid = open_grids(BESIDE / "sa_zero_hz_nul.CSV")[0]
    assert grid.notes == ("1427 NUL characters were left out",)
    assert len(floats(grid, 1, 14)) == 461
    assert floats(grid, 2, 14).max() == 3.54


@beside
def test_matrix_of_numbers_beside() -> None:
    grid = open_grids(BESIDE / "horn_intensity_grid.csv")[0]
    table = np.array([floats(grid, column, 1) for column in range(1, 362)])
    assert table.shape == (361, 181)
    assert table.min() == pytest.approx(6.65771, abs=5e-6)
