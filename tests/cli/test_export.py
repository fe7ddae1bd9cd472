"""``specflow export``: which file, which tables, and nothing lost."""

from __future__ import annotations

import csv
import io
import json
import subprocess
import sys
from pathlib import Path

import pytest
from openpyxl import load_workbook

from specflow.errors import ExitCode
from specflow.workflows import export as workflow
from tests import harbour
from tests.cli.conftest import Command

AS_OF = ("--as-of", "2026-06-01")


@pytest.fixture(autouse=True)
def project(tmp_path: Path) -> Path:
    """Make the harbour project, the only one of the folder."""
    harbour.make_store(tmp_path / "harbour.specflow").close()
    return tmp_path / "harbour.specflow"


def test_the_workbook_is_named_after_the_project(command: Command, tmp_path: Path) -> None:
    done = command("export", *AS_OF)
    assert (done.code, done.out.strip()) == (ExitCode.CLEAN, "Harbour-terminal-compliance.xlsx")
    book = load_workbook(tmp_path / "Harbour-terminal-compliance.xlsx")
    assert book.sheetnames == [
        "Summary",
        "Compliance matrix",
        "Required points",
        "Evidence",
        "Findings",
        "About this report",
    ]
    assert book["Findings"].max_row > 5, "the rules ran"


@pytest.mark.parametrize("ending", ["xlsx", "html", "csv", "json"])
def test_the_name_of_the_file_tells_the_format_and_the_bytes_are_the_same_twice(
    command: Command, tmp_path: Path, ending: str
) -> None:
    for name in ("a", "b"):
        assert command("export", "-o", f"{name}.{ending}", *AS_OF).code == ExitCode.CLEAN
    first = (tmp_path / f"a.{ending}").read_bytes()
    assert first == (tmp_path / f"b.{ending}").read_bytes()
    assert first.startswith(
        {"xlsx": b"PK", "html": b"<!doctype", "csv": b"Requirement,", "json": b"{"}[ending]
    )


def test_stdout_gets_the_bytes_and_nothing_else(tmp_path: Path) -> None:
    done = subprocess.run(
        [sys.executable, "-m", "specflow", "export", "-o", "-", "-f", "csv", "--table", "points", *AS_OF],
        capture_output=True,
        check=True,
        timeout=60,
        cwd=tmp_path,
    )
    rows = list(csv.reader(io.StringIO(done.stdout.decode(), newline="")))
    assert rows[0][0] == "Requirement" and len(rows) == 61


def test_tables_can_be_chosen(command: Command, tmp_path: Path) -> None:
    done = command("export", "-o", "x.json", "--table", "findings", "--table", "about", "--json", *AS_OF)
    assert list(json.loads(done.out)["tables"]) == ["Findings", "About this report"]
    payload = json.loads((tmp_path / "x.json").read_text("utf-8"))
    assert [table["key"] for table in payload["tables"]] == ["findings", "about"]


def test_a_file_that_exists_is_not_overwritten_unless_asked(command: Command, tmp_path: Path) -> None:
    target = tmp_path / "mine.xlsx"
    target.write_bytes(b"precious")
    done = command("export", "-o", "mine.xlsx")
    assert done.code == ExitCode.BAD_INPUT and "--overwrite" in done.err
    assert target.read_bytes() == b"precious"
    assert command("export", "-o", "mine.xlsx", "--overwrite").code == ExitCode.CLEAN
    assert target.read_bytes().startswith(b"PK")


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (("-f", "pdf"), "there is no format 'pdf'"),
        (("--table", "matrx"), "there is no table 'matrx'"),
        (("-o", "nowhere/x.xlsx"), "cannot be written"),
    ],
)
def test_what_cannot_be_done_is_told_and_leaves_nothing(
    command: Command, tmp_path: Path, words: tuple[str, ...], message: str
) -> None:
    done = command("export", *words)
    assert done.code == ExitCode.BAD_INPUT and message in done.err
    assert [path.name for path in tmp_path.iterdir()] == ["harbour.specflow"]


def test_a_page_with_too_many_points_says_where_they_are(
    command: Command, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(workflow, "MOST_POINTS_ON_A_PAGE", 20)
    command("export", "-o", "x.html", *AS_OF)
    page = (tmp_path / "x.html").read_text("utf-8")
    assert "52 required points are too many for a page" in page and "Required points (0)" in page
    command("export", "-o", "x.xlsx", *AS_OF)
    assert load_workbook(tmp_path / "x.xlsx")["Required points"].max_row == 64, "the workbook has them all"
