"""Attaching against its floors: bare rows of python-calamine into SQLite, and the same small file in a small project.

Floors are measured in the same run, best of several turns, because the machine is never alone.
"""

from __future__ import annotations

import random
import sqlite3
import subprocess
import sys
import time
from collections.abc import Callable
from itertools import count
from pathlib import Path

import numpy as np
import pytest
import xlsxwriter
from python_calamine import CalamineWorkbook

from specflow.exchange import payload_text
from specflow.model.change import Change
from specflow.model.columns import Columns, TextColumn
from specflow.model.evidence import EvidenceColumns, ValueArrays
from specflow.store import ProjectStore, create_project
from specflow.workflows.attach import AttachOptions, Decision, accept_attach, preview_attach
from tests.builders import a_block, a_project, adding, an_evidence_file, an_evidence_table, an_item

ROWS = 100_000
VALUES = ("P (dBm)", "G (dB)", "NF (dB)")
MOST_TIMES_FLOOR = 1.5
MOST_MEGABYTES = 250
MOST_TIMES_SMALL = 1.5

# VmHWM and not ru_maxrss, which a child inherits from the large process that starts it.
PEAK = """
import sys
from specflow.importers.measurements import read_measurements
from specflow.parameters import load_dictionary
from tests.builders import a_block, a_snapshot
read = read_measurements(sys.argv[1], a_snapshot(a_block()), load_dictionary(), stated={"block": "LNA"})
assert read.tables[0].values == int(sys.argv[2])
print(next(line.split()[1] for line in open("/proc/self/status") if line.startswith("VmHWM")))
"""


@pytest.fixture(scope="module")
def workbook(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """100,000 rows of 10 columns: item, mode, four conditions (one in a percent format), three values, a remark."""
    path = tmp_path_factory.mktemp("attach") / "sweep.xlsx"
    draw = random.Random(17)
    header = [
        "Item",
        "Mode",
        "f (GHz)",
        "T_amb (°C)",
        "Vdd (V)",
        "Duty (%)",
        "EIRP (dBm)",
        "Gain (dB)",
        "NF (dB)",
        "Remark",
    ]
    with xlsxwriter.Workbook(str(path), {"constant_memory": True}) as book:
        sheet = book.add_worksheet("sweep")
        percent = book.add_format({"num_format": "0.0%"})
        sheet.write_row(0, 0, header)
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


def rows_into_sqlite(workbook: Path, database: Path) -> None:
    """The floor: bare rows, one ``executemany`` of one row a value."""
    with CalamineWorkbook.from_path(workbook) as book:
        rows = book.get_sheet_by_name("sweep").to_python()
    connection = sqlite3.connect(database)
    connection.execute("CREATE TABLE value (item, mode, f, t, v, duty, quantity, value)")
    values = ((*row[:6], place, row[place]) for row in rows[1:] for place in (6, 7, 8))
    connection.executemany("INSERT INTO value VALUES (?, ?, ?, ?, ?, ?, ?, ?)", values)
    connection.commit()
    connection.close()


def test_a_large_workbook_stays_near_bare_rows_into_sqlite(workbook: Path, tmp_path: Path) -> None:
    numbers = count()
    floor = best_of(3, lambda: rows_into_sqlite(workbook, tmp_path / f"floor{next(numbers)}.db"))
    times = []
    for turn in range(3):
        with create_project(tmp_path / f"p{turn}.specflow", a_project()) as store:
            store.apply(adding(a_block()), by="benchmark")
            start = time.perf_counter()
            preview = preview_attach(store, workbook, AttachOptions({"block": "LNA"}))
            attached = accept_attach(store, preview, Decision("benchmark"))
            times.append(time.perf_counter() - start)
        assert attached.values == 3 * ROWS
        duty = preview.measurements.tables[0].columns
        assert duty is not None and duty.conditions.numeric["duty_cycle"].max() == 75  # 0.75 shown as 75 %
    print(f"\nfloor {floor:.3f} s, attach {min(times):.3f} s: ratio {min(times) / floor:.2f}")
    assert min(times) < MOST_TIMES_FLOOR * floor


@pytest.mark.skipif(sys.platform != "linux", reason="the peak of a process is told by /proc")
def test_peak_memory_is_bounded(workbook: Path) -> None:
    command = [sys.executable, "-c", PEAK, str(workbook), str(3 * ROWS)]
    peak = int(subprocess.run(command, capture_output=True, text=True, check=True).stdout) / 1024
    print(f"\npeak {peak:.0f} MB of the whole process")
    assert peak < MOST_MEGABYTES


def filled(path: Path, values: int) -> ProjectStore:
    """A project with ``values`` stored values in tables of 10,000."""
    store = create_project(path, a_project())
    store.apply(adding(a_block(), an_item(), an_evidence_file()), by="benchmark")
    rows = 10_000
    frequency = np.linspace(27.5, 30, rows)
    for number in range(values // rows):
        table = an_evidence_table(f"EV-{number + 1}", rows=rows)
        name = table.values[0].name
        columns = EvidenceColumns(
            Columns(rows, {"frequency": frequency}, {}, {"frequency": "GHz"}),
            {name: ValueArrays(frequency + number, frequency + number)},
            np.arange(2, rows + 2, dtype=np.int32),
            TextColumn(np.zeros(rows, np.int32), ("LNA-1",)),
        )
        change = Change(noun="evidence_table", id=table.id, action="add", after=payload_text(table))
        store.apply([change], columns={table.id: columns}, by="benchmark")
    return store


def small_file(folder: Path, number: int) -> Path:
    path = folder / f"small{number}.csv"
    lines = "".join(f"LNA-1,{27.5 + row / 100},{20 + number + row / 10}\n" for row in range(50))
    path.write_text("Item,f (GHz),Gain (dB)\n" + lines, encoding="utf-8")
    return path


def test_one_small_file_costs_the_same_in_a_project_of_any_size(tmp_path: Path) -> None:
    numbers = count(1)

    def attach_one(store: ProjectStore) -> None:
        path = small_file(tmp_path, next(numbers))
        accept_attach(store, preview_attach(store, path), Decision("benchmark", beside=True))

    times = {}
    for values in (10_000, 1_000_000):
        with filled(tmp_path / f"p{values}.specflow", values) as store:
            attach_one(store)  # imports
            times[values] = best_of(5, lambda store=store: attach_one(store))  # type: ignore[misc]
    ratio = times[1_000_000] / times[10_000]
    print(
        f"\nat 10,000 values {times[10_000]:.4f} s, at 1,000,000 {times[1_000_000]:.4f} s: ratio {ratio:.2f}"
    )
    assert ratio < MOST_TIMES_SMALL
