"""``specflow init``: what it makes, and that it never overwrites."""

from __future__ import annotations

from pathlib import Path

import openpyxl
import pytest

from specflow.errors import ExitCode
from specflow.importers.sheets import SHEETS
from specflow.store import open_project
from tests.cli.conftest import Command


def test_it_makes_an_empty_project_and_a_template_of_all_sheets(command: Command, tmp_path: Path) -> None:
    outcome = command("init", "harbour", "--by", "systems lead")
    assert outcome.code == ExitCode.CLEAN
    assert outcome.out.splitlines() == ["harbour.specflow", "harbour-requirements.xlsx"]
    assert "specflow load harbour-requirements.xlsx" in outcome.err
    with open_project(tmp_path / "harbour.specflow") as store:
        assert store.load().project.name == "harbour"
        assert store.load().requirements == []
        assert [entry.by for entry in store.history()] == ["systems lead"]
    book = openpyxl.load_workbook(tmp_path / "harbour-requirements.xlsx")
    assert set(book.sheetnames) >= {sheet.layout.title for sheet in SHEETS}


def test_its_template_loads_as_it_is_and_changes_nothing(command: Command) -> None:
    command("init", "harbour")
    outcome = command("load", "harbour-requirements.xlsx", "--yes")
    assert outcome.code == ExitCode.CLEAN
    assert "nothing changes" in outcome.err
    assert "rows marked as examples are not loaded" in outcome.out


def test_without_template_only_the_project_is_made(command: Command, tmp_path: Path) -> None:
    assert command("init", "harbour", "--no-template").code == ExitCode.CLEAN
    assert [path.name for path in tmp_path.iterdir()] == ["harbour.specflow"]


def test_a_folder_is_made_where_it_is_missing(command: Command, tmp_path: Path) -> None:
    assert command("init", "harbour", "--folder", "new/place").code == ExitCode.CLEAN
    assert (tmp_path / "new" / "place" / "harbour.specflow").is_file()


@pytest.mark.parametrize("there", ["harbour.specflow", "harbour-requirements.xlsx"])
def test_nothing_is_made_where_one_of_the_files_is_there(
    command: Command, tmp_path: Path, there: str
) -> None:
    (tmp_path / there).write_bytes(b"mine")
    outcome = command("init", "harbour")
    assert outcome.code == ExitCode.BAD_INPUT
    assert there in outcome.err
    assert "--folder" in outcome.err
    assert [(path.name, path.read_bytes()) for path in tmp_path.iterdir()] == [(there, b"mine")]


@pytest.mark.parametrize("name", ["../elsewhere", "", ".hidden", "a/b", "-x", "x" * 200])
def test_a_name_that_is_no_file_name_is_refused(command: Command, tmp_path: Path, name: str) -> None:
    outcome = command("init", "--", name)
    assert outcome.code == ExitCode.BAD_INPUT
    assert "cannot be the name of a project" in outcome.err
    assert list(tmp_path.iterdir()) == []


def test_the_suffix_in_the_name_is_not_doubled(command: Command, tmp_path: Path) -> None:
    command("init", "harbour.specflow", "--no-template")
    assert [path.name for path in tmp_path.iterdir()] == ["harbour.specflow"]


def test_a_folder_that_is_a_file_is_refused(command: Command, tmp_path: Path) -> None:
    (tmp_path / "place").write_text("a file")
    outcome = command("init", "harbour", "--folder", "place")
    assert outcome.code == ExitCode.BAD_INPUT
    assert "the folder cannot be made" in outcome.err
