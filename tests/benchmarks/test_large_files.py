"""Large and many-sheeted files against what only reads and stores them, measured in the same run.

Floors: python-calamine (workbooks) and polars (text) reading the same file, and one ``executemany`` of bare rows into
SQLite. Both sides take turns, the best of each counts, because the machine is never alone. Memory is the peak of a
process of its own (VmHWM and not ru_maxrss, which a child inherits from the large process that starts it).
"""

from __future__ import annotations

import random
import sqlite3
import subprocess
import sys
import time
from collections.abc import Callable, Iterable
from itertools import count
from pathlib import Path

import polars
import pytest
import xlsxwriter
from python_calamine import CalamineWorkbook

from specflow.importers.measurements import read_measurements
from specflow.parameters import load_dictionary
from specflow.store import create_project
from specflow.workflows.attach import AttachOptions, Decision, accept_attach, preview_attach
from tests.builders import a_block, a_project, a_snapshot, adding

ROWS = 1_000_000
SHEETS, SHEET_ROWS = 200, 1000
TURNS = 2
MOST_TIMES_WORKBOOK = 2.0
MOST_TIMES_TEXT = 3.0
MOST_TIMES_PREVIEW = 2.0
MOST_MEGABYTES_WORKBOOK = 300
MOST_MEGABYTES_TEXT = 350

TITLES = (
    "Item", "Mode", "f (GHz)", "T_amb (°C)", "Vdd (V)", "Duty (%)", "EIRP (dBm)", "Gain (dB)", "NF (dB)",
    "OP1dB (dBm)", "EVM (%)", "Remark",
)  # fmt: skip
TEXT_TITLES = (
    "f (GHz),T_amb (°C),Vdd (V),EIRP (dBm),Gain (dB),NF (dB),OP1dB (dBm),EVM (%),IIP3 (dBm),OIP3 (dBm)"
)

ATTACH = """
import sys
from pathlib import Path
from specflow.store import create_project
from specflow.workflows.attach import AttachOptions, Decision, accept_attach, preview_attach
from tests.builders import a_block, a_project, adding
with create_project(Path(sys.argv[3]), a_project()) as store:
    store.apply(adding(a_block()), by="benchmark")
    preview = preview_attach(store, Path(sys.argv[1]), AttachOptions({"block": "LNA", "item": "LNA-1"}))
    assert accept_attach(store, preview, Decision("benchmark")).values >= 5 * int(sys.argv[2])
"""
PEAK = """
print(next(line.split()[1] for line in open("/proc/self/status") if line.startswith("VmHWM")))
"""

linux = pytest.mark.skipif(sys.platform != "linux", reason="the peak of a process is told by /proc")


@pytest.fixture(scope="module")
def workbook(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """1,000,000 rows of 12 columns: three of words, four conditions (one in a percent format), five values."""
    path = tmp_path_factory.mktemp("large") / "sweep.xlsx"
    draw = random.Random(5)
    with xlsxwriter.Workbook(str(path), {"constant_memory": True}) as book:
        sheet, percent = book.add_worksheet("sweep"), book.add_format({"num_format": "0.0%"})
        sheet.write_row(0, 0, TITLES)
        for row in range(1, ROWS + 1):
            words = [f"T{row % 7:03d}", "low" if row % 2 else "high"]
            sheet.write_row(row, 0, [*words, 27.5 + row % 100 / 40, (-40, 25, 85)[row % 3], 5])
            sheet.write_number(row, 5, row % 4 / 4, percent)
            values = [draw.gauss(45, 1), draw.gauss(20, 1), draw.gauss(1.2, 0.1), round(draw.gauss(30, 1), 3)]
            sheet.write_row(row, 6, [*values, round(draw.gauss(2, 0.1), 3), "ok"])
    return path


@pytest.fixture(scope="module")
def text(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """10,000,000 values: a million rows of three conditions and seven values, three of them with all their digits."""
    path = tmp_path_factory.mktemp("large") / "sweep.csv"
    draw = random.Random(6)
    with path.open("w", encoding="utf-8") as file:
        file.write(f"{TEXT_TITLES}\n")
        for row in range(ROWS):
            conditions = f"{27.5 + row % 100 / 40},{(-40, 25, 85)[row % 3]},5.0"
            digits = ",".join(repr(draw.gauss(45, 1)) for _ in range(3))
            file.write(f"{conditions},{digits},{','.join(f'{draw.gauss(45, 1):.3f}' for _ in range(4))}\n")
    return path


@pytest.fixture(scope="module")
def many_sheets(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """200 sheets, each with two facts above a table of 1000 rows and eight columns."""
    path = tmp_path_factory.mktemp("large") / "sheets.xlsx"
    draw = random.Random(7)
    with xlsxwriter.Workbook(str(path), {"constant_memory": True}) as book:
        for number in range(SHEETS):
            sheet = book.add_worksheet(f"run {number}")
            sheet.write_row(0, 0, ["DUT", "T001"])
            sheet.write_row(1, 0, ["Temperature ambient (°C)", 25 + number / 10])
            sheet.write_row(3, 0, [*TITLES[2:3], *TITLES[4:5], *TITLES[6:11], "Remark"])
            for row in range(4, 4 + SHEET_ROWS):
                values = [draw.gauss(20, 1) for _ in range(5)]
                sheet.write_row(row, 0, [27.5 + row / 400, 5, *values, "ok"])
    return path


def in_turns(*works: Callable[[], object]) -> list[float]:
    """The best time of each."""
    best = [float("inf")] * len(works)
    for _ in range(TURNS):
        for place, work in enumerate(works):
            start = time.perf_counter()
            work()
            best[place] = min(best[place], time.perf_counter() - start)
    return best


def insert(database: Path, rows: Iterable[tuple[object, ...] | list[object]], width: int) -> None:
    connection = sqlite3.connect(database)
    connection.execute(f"CREATE TABLE value ({', '.join(f'c{place}' for place in range(width))})")
    connection.executemany(f"INSERT INTO value VALUES ({', '.join('?' * width)})", rows)
    connection.commit()
    connection.close()


def attached(file: Path, project: Path) -> None:
    with create_project(project, a_project()) as store:
        store.apply(adding(a_block()), by="benchmark")
        preview = preview_attach(store, file, AttachOptions({"block": "LNA", "item": "LNA-1"}))
        assert accept_attach(store, preview, Decision("benchmark")).values >= 5 * ROWS


def peak_attaching(file: Path, project: Path) -> float:
    """The peak memory, in MB, of a process that attaches the file to a new project, from its start to its end."""
    command = [sys.executable, "-c", ATTACH + PEAK, str(file), str(ROWS), str(project)]
    return int(subprocess.run(command, capture_output=True, text=True, check=True).stdout) / 1024


def test_a_million_rows_of_a_workbook(workbook: Path, tmp_path: Path) -> None:
    numbers = count()

    def bare() -> None:
        with CalamineWorkbook.from_path(workbook) as book:
            rows = book.get_sheet_by_name("sweep").to_python()
        insert(tmp_path / f"floor{next(numbers)}.db", rows[1:], len(TITLES))

    ours, floor = in_turns(lambda: attached(workbook, tmp_path / f"p{next(numbers)}.specflow"), bare)
    print(f"\nworkbook: floor {floor:.2f} s, attach {ours:.2f} s: ratio {ours / floor:.2f}")
    assert ours < MOST_TIMES_WORKBOOK * floor


def test_ten_million_values_of_a_text_file(text: Path, tmp_path: Path) -> None:
    numbers = count()

    def bare() -> None:
        frame = polars.read_csv(text)
        insert(tmp_path / f"floor{next(numbers)}.db", frame.iter_rows(), frame.width)

    ours, floor = in_turns(lambda: attached(text, tmp_path / f"p{next(numbers)}.specflow"), bare)
    print(f"\ntext: floor {floor:.2f} s, attach {ours:.2f} s: ratio {ours / floor:.2f}")
    assert ours < MOST_TIMES_TEXT * floor


def test_the_preview_of_two_hundred_sheets(many_sheets: Path) -> None:
    snapshot, dictionary = a_snapshot(a_block()), load_dictionary()

    def bare() -> None:
        with CalamineWorkbook.from_path(many_sheets) as book:
            assert len([book.get_sheet_by_name(name).to_python() for name in book.sheet_names]) == SHEETS

    def preview() -> None:
        read = read_measurements(many_sheets, snapshot, dictionary, stated={"block": "LNA"})
        assert sum(table.values for table in read.tables) == 5 * SHEETS * SHEET_ROWS

    ours, floor = in_turns(preview, bare)
    print(f"\n200 sheets: floor {floor:.2f} s, preview {ours:.2f} s: ratio {ours / floor:.2f}")
    assert ours < MOST_TIMES_PREVIEW * floor


@linux
def test_peak_memory_of_a_large_workbook(workbook: Path, tmp_path: Path) -> None:
    whole = peak_attaching(workbook, tmp_path / "p.specflow")
    print(f"\nworkbook: peak {whole:.0f} MB")
    assert whole < MOST_MEGABYTES_WORKBOOK


@linux
def test_peak_memory_of_a_large_text_file(text: Path, tmp_path: Path) -> None:
    whole = peak_attaching(text, tmp_path / "p.specflow")
    print(f"\ntext: peak {whole:.0f} MB")
    assert whole < MOST_MEGABYTES_TEXT
