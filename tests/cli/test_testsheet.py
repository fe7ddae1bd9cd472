"""``specflow testsheet``: what is written and said, and that it comes back."""

from __future__ import annotations

import json
import shutil
from pathlib import Path

import openpyxl
import pytest

from specflow.errors import ExitCode
from tests.cli.conftest import Command
from tests.cli.refusing import content, refused

AS_OF = ("--as-of", "2026-06-01")


@pytest.fixture
def project(made_once: Path, tmp_path: Path) -> Path:
    """Return the harbour project beside which the commands run."""
    return Path(shutil.copy(made_once / "harbour.specflow", tmp_path))


def test_it_writes_a_workbook_and_says_what_is_on_it(command: Command, project: Path, tmp_path: Path) -> None:
    before = content(project)
    done = command("testsheet", "bench.xlsx", *AS_OF)
    assert done.code == ExitCode.CLEAN and done.out.splitlines()[-1] == "bench.xlsx"
    assert (
        "left out: PA-4: its limit is to be determined" in done.err
        and "specflow attach bench.xlsx" in done.err
    )
    workbook = openpyxl.load_workbook(tmp_path / "bench.xlsx")
    assert workbook.sheetnames[0] == "How to fill in" and "PA" in workbook.sheetnames
    assert max(map(len, done.out.splitlines())) <= 80
    assert content(project) == before
    refused(command("testsheet", "bench.xlsx", *AS_OF), "exists already", place="bench.xlsx")


def test_json_has_every_row(command: Command, project: Path, tmp_path: Path) -> None:
    told = json.loads(command("testsheet", "bench.xlsx", "--block", "PA", "--json", *AS_OF).out)
    assert told["points"] == sum(len(sheet["rows"]) for sheet in told["sheets"]) > 0
    assert told["sheets"][0]["rows"][0]["requirements"] and (tmp_path / "bench.xlsx").is_file()


def test_what_is_refused(command: Command, project: Path, tmp_path: Path) -> None:
    refused(command("testsheet", "bench.ods", *AS_OF), "a test sheet is a workbook", place="bench.ods")
    refused(command("testsheet", "b.xlsx", "-r", "PA-9", *AS_OF), "no requirement 'PA-9'")
    refused(command("testsheet", "b.xlsx", "--gate", "CDR", *AS_OF), "for the gate 'CDR'")
    done = command("testsheet", "b.xlsx", "--stage", "development", *AS_OF)
    assert (
        done.code == ExitCode.CLEAN
        and "no point is missing" in done.err
        and not (tmp_path / "b.xlsx").exists()
    )


def test_it_comes_back_in_a_folder(command: Command, project: Path, tmp_path: Path) -> None:
    (tmp_path / "back").mkdir()
    command("testsheet", "back/bench.xlsx", "-b", "PA", *AS_OF)
    done = command("attach", "back", "--yes")
    assert done.code == ExitCode.CLEAN and "a test sheet that is not filled in" in done.out
    first = json.loads(command("testsheet", "x.xlsx", "-b", "PA", "--json", *AS_OF).out)["points"]
    path = tmp_path / "back" / "bench.xlsx"
    workbook = openpyxl.load_workbook(path)
    sheet = workbook["PA"]
    header = next(row for row in range(1, 20) if sheet.cell(row, 1).value == "No.")
    titles = {str(cell.value): place for place, cell in enumerate(sheet[header], 1)}
    for row in range(header + 1, sheet.max_row + 1):
        if sheet.cell(row, titles["Quantity"]).value == "Supply current":
            sheet.cell(row, titles["Value"]).value = 1.0
            sheet.cell(row, titles["Item"]).value = sheet.cell(row, titles["Item"]).value or "PA-A"
    workbook.save(path)
    assert command("attach", "back", "--yes").code == ExitCode.CLEAN
    second = json.loads(command("testsheet", "y.xlsx", "-b", "PA", "--json", *AS_OF).out)["points"]
    assert second == first - 1
