"""Reading a large workbook against the floor: python-calamine turning the same file into rows, nothing else.

The floor is measured in the same run, both as the best of several turns, because the machine is never alone. Memory is
the peak of a process of its own that reads the file once, above what the imports take.
"""

from __future__ import annotations

import random
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

import pytest
import xlsxwriter
from python_calamine import CalamineWorkbook

from specflow.importers.readers import OddKind, open_grids

ROWS = 100_000
MOST_TIMES_FLOOR = 1.4  # around 1.25 on two quiet cores; the whole import has 1.5 of a larger floor
MOST_MEGABYTES = 250

# VmHWM and not ru_maxrss, which a child inherits from the large process that starts it.
PEAK = """
import sys
from specflow.importers.readers import open_grids
grids = open_grids(sys.argv[1])
assert len(grids[0].rows) == int(sys.argv[2])
print(next(line.split()[1] for line in open("/proc/self/status") if line.startswith("VmHWM")))
"""


@pytest.fixture(scope="module")
def workbook(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """100,000 rows of 10 columns: item, mode, four conditions (one in a percent format), three values, a remark."""
    path = tmp_path_factory.mktemp("floor") / "floor.xlsx"
    draw = random.Random(17)
    with xlsxwriter.Workbook(str(path), {"constant_memory": True}) as book:
        sheet = book.add_worksheet("sweep")
        percent = book.add_format({"num_format": "0.0%"})
        titles = [
            "Item",
            "Mode",
            "f (GHz)",
            "T (°C)",
            "V (V)",
            "Duty",
            "P (dBm)",
            "G (dB)",
            "NF (dB)",
            "Remark",
        ]
        sheet.write_row(0, 0, titles)
        for row in range(1, ROWS + 1):
            where = [
                f"T{row % 7:03d}",
                "low" if row % 2 else "high",
                27.5 + row % 100 / 40,
                (-40, 25, 85)[row % 3],
                5,
            ]
            sheet.write_row(row, 0, where)
            sheet.write_number(row, 5, row % 4 / 4, percent)
            sheet.write_row(row, 6, [draw.gauss(45, 1), draw.gauss(20, 1), draw.gauss(1.2, 0.1), "ok"])
    return path


def best_of(turns: int, work: Callable[[], object]) -> float:
    times = []
    for _ in range(turns):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return min(times)


def bare_rows(path: Path) -> object:
    with CalamineWorkbook.from_path(path) as book:
        return [book.get_sheet_by_name(name).to_python() for name in book.sheet_names]


def test_reading_with_the_scan_for_odd_cells_stays_near_bare_rows(workbook: Path) -> None:
    floor = best_of(5, lambda: bare_rows(workbook))
    ours = best_of(5, lambda: open_grids(workbook))
    grid = open_grids(workbook)[0]
    columns = best_of(3, lambda: [grid.column_floats(column, 2, ROWS + 2) for column in range(3, 10)])
    print(
        f"\nbare rows {floor:.3f} s, grids {ours:.3f} s: ratio {ours / floor:.2f}; 7 columns {columns:.3f} s"
    )
    assert [(run.column, run.first, run.last, run.cell.kind) for run in grid.odd] == [
        (6, 2, ROWS + 1, OddKind.PERCENT)
    ]
    assert ours < MOST_TIMES_FLOOR * floor
    assert columns < floor / 2


@pytest.mark.skipif(
    sys.platform != "linux", reason="the peak of a process is counted in kilobytes on Linux only"
)
def test_peak_memory_is_bounded(workbook: Path) -> None:
    command = [sys.executable, "-c", PEAK, str(workbook), str(ROWS + 1)]
    peak = int(subprocess.run(command, capture_output=True, text=True, check=True).stdout) / 1024
    print(f"\npeak {peak:.0f} MB of the whole process")
    assert peak < MOST_MEGABYTES
