"""``specflow load``: the preview in meaning, what is stored when, and what ends it with which code."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from specflow.cli import load as load_command
from specflow.errors import ExitCode
from specflow.model.requirement import Requirement
from specflow.store import open_project
from tests.builders import project_workbook
from tests.cli.conftest import Command

BLOCKS = [{"ID": "UT", "Name": "Terminal"}]


def requirements(limit: str = ">= 45 dBm", **more: Any) -> list[dict[str, Any]]:
    return [{"ID": "R-1", "Block": "UT", "Parameter": "eirp", "Limit": limit, "Method": "test"} | more]


@pytest.fixture
def workbook(command: Command, tmp_path: Path) -> Path:
    """Return a workbook of one block and one requirement, beside an empty project."""
    command("init", "harbour", "--no-template")
    return project_workbook(tmp_path / "reqs.xlsx", blocks=BLOCKS, requirements=requirements())


def stored(tmp_path: Path) -> list[tuple[str, str]]:
    """Return id and limit as typed of the requirements that are stored."""
    with open_project(tmp_path / "harbour.specflow") as store:
        return [(one.id, one.limit.text) for one in store.load().all(Requirement)]


def test_it_says_back_how_a_limit_was_read_and_stores_it(
    command: Command, workbook: Path, tmp_path: Path
) -> None:
    outcome = command("load", workbook, "--yes")
    assert outcome.code == ExitCode.CLEAN
    assert "at least 45 dBm" in outcome.out
    assert "added: 1 block, 1 requirement, 1 activity; 0 unchanged; 0 rejected" in outcome.err
    assert "the project is at revision 2" in outcome.err
    assert stored(tmp_path) == [("R-1", ">= 45 dBm")]


def test_loading_the_same_again_changes_nothing(command: Command, workbook: Path) -> None:
    command("load", workbook, "--yes")
    outcome = command("load", workbook)
    assert outcome.code == ExitCode.CLEAN
    assert "nothing changes; 3 unchanged; 0 rejected" in outcome.err


def test_a_row_that_is_gone_is_removed_on_request(command: Command, workbook: Path, tmp_path: Path) -> None:
    both = [*requirements(), *requirements(ID="R-2")]
    command("load", project_workbook(workbook, blocks=BLOCKS, requirements=both), "--yes")
    project_workbook(workbook, blocks=BLOCKS, requirements=requirements())
    kept = command("load", workbook, "--yes")
    assert "load --remove-gone" in kept.out and [name for name, _ in stored(tmp_path)] == ["R-1", "R-2"]
    outcome = command("load", workbook, "--remove-gone", "--yes")
    assert outcome.code == ExitCode.CLEAN
    assert "is removed: with it activity R-2/A1; its id is never used again" in " ".join(outcome.out.split())
    assert "removed: 1 activity, 1 requirement" in outcome.err
    assert [name for name, _ in stored(tmp_path)] == ["R-1"]
    assert command("load", workbook, "--remove-gone", "--published").code == ExitCode.BAD_INPUT


def test_an_edited_limit_is_shown_in_meaning_before_it_is_stored(
    command: Command, workbook: Path, tmp_path: Path
) -> None:
    command("load", workbook, "--yes")
    project_workbook(workbook, blocks=BLOCKS, requirements=requirements(">= 45.5 dBm"))
    outcome = command("load", workbook, "--dry-run")
    assert outcome.code == ExitCode.CLEAN
    assert "tightened by 0.5 dB" in outcome.out
    assert "changed: 1 requirement, 1 activity; 1 unchanged" in outcome.err
    assert "now planned for requirement revision 2" in " ".join(outcome.out.split())
    assert stored(tmp_path) == [("R-1", ">= 45 dBm")]
    assert command("load", workbook, "--yes").code == ExitCode.CLEAN
    assert stored(tmp_path) == [("R-1", ">= 45.5 dBm")]


def test_without_a_terminal_it_asks_for_a_decision_on_the_command_line(
    command: Command, workbook: Path, tmp_path: Path
) -> None:
    outcome = command("load", workbook)
    assert outcome.code == ExitCode.BAD_INPUT
    assert "--yes" in outcome.err
    assert "--dry-run" in outcome.err
    assert stored(tmp_path) == []


@pytest.mark.parametrize(("answer", "count"), [(True, 1), (False, 0)])
def test_the_answer_decides(
    command: Command,
    workbook: Path,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    answer: bool,
    count: int,
) -> None:
    asked: list[str] = []
    monkeypatch.setattr(load_command, "ask", lambda question: asked.append(question) or answer)
    outcome = command("load", workbook)
    assert outcome.code == ExitCode.CLEAN
    assert asked == ["Store these 3 changes?"]
    assert len(stored(tmp_path)) == count
    assert ("nothing was stored" in outcome.err) is not answer


@pytest.fixture
def faulty(workbook: Path) -> Path:
    """Return the workbook with a second requirement, whose limit is in a unit of another kind."""
    rows = [*requirements(), *requirements(">= 45 GHz", ID="R-2")]
    return project_workbook(workbook, blocks=BLOCKS, requirements=rows)


def test_with_something_rejected_nothing_is_stored(command: Command, faulty: Path, tmp_path: Path) -> None:
    outcome = command("load", faulty, "--yes")
    assert outcome.code == ExitCode.BAD_INPUT
    assert "1 row or cell was rejected; nothing was stored" in outcome.err
    told = outcome.err.partition("do:")[2].partition("; --take-rest stores what could be read")[0].strip()
    assert told and told in " ".join(outcome.out.split())  # the remedy of the finding itself
    assert "Requirements" in outcome.out
    assert "D3" in outcome.out
    assert stored(tmp_path) == []


def test_the_rest_is_taken_when_the_person_says_so(command: Command, faulty: Path, tmp_path: Path) -> None:
    assert command("load", faulty, "--yes", "--take-rest").code == ExitCode.CLEAN
    assert stored(tmp_path) == [("R-1", ">= 45 dBm")]


def test_a_dry_run_with_something_rejected_ends_as_the_real_one_would(command: Command, faulty: Path) -> None:
    assert command("load", faulty, "--dry-run").code == ExitCode.BAD_INPUT
    assert command("load", faulty, "--dry-run", "--take-rest").code == ExitCode.CLEAN


def test_json_holds_changes_echoes_and_findings_also_when_something_is_rejected(
    command: Command, faulty: Path
) -> None:
    outcome = command("load", faulty, "--yes", "--json")
    assert outcome.code == ExitCode.BAD_INPUT
    told = json.loads(outcome.out)
    assert told["stored"] is False
    assert [finding["rule"] for finding in told["findings"]] == ["workbook-unit-kind"]
    outcome = command("load", faulty, "--yes", "--take-rest", "--json")
    told = json.loads(outcome.out)
    assert (told["stored"], told["project_revision"]) == (True, 2)
    requirement = next(change for change in told["changes"] if change["noun"] == "requirement")
    assert requirement["read_as"] == "EIRP: at least 45 dBm"


def test_who_accepts_is_recorded(command: Command, workbook: Path, tmp_path: Path) -> None:
    command("load", workbook, "--yes", "--by", "review chair")
    with open_project(tmp_path / "harbour.specflow") as store:
        last = store.history("requirement", "R-1")[-1]
    assert (last.by, last.reason) == ("review chair", "loaded from reqs.xlsx")


@pytest.mark.parametrize("content", [None, b"", b"PK\x03\x04 truncated", b"no workbook at all"])
def test_a_file_that_is_no_workbook_gives_one_message(
    command: Command, tmp_path: Path, content: bytes | None
) -> None:
    command("init", "harbour", "--no-template")
    path = tmp_path / "bad.xlsx"
    if content is not None:
        path.write_bytes(content)
    outcome = command("load", path, "--yes")
    assert outcome.code == ExitCode.BAD_INPUT
    assert outcome.err.startswith("specflow: ")
    assert "Traceback" not in outcome.err
    assert "bad.xlsx" in outcome.err
    assert stored(tmp_path) == []


def test_without_a_project_it_says_how_to_make_one(command: Command, tmp_path: Path) -> None:
    path = project_workbook(tmp_path / "reqs.xlsx", blocks=BLOCKS)
    outcome = command("load", path)
    assert outcome.code == ExitCode.BAD_INPUT
    assert "specflow init" in outcome.err


def test_a_table_of_published_limits_loads_as_requirements_of_a_block(
    command: Command, workbook: Path, tmp_path: Path
) -> None:
    command("load", workbook, "--yes")
    table = tmp_path / "limits.csv"
    table.write_text(
        "id,parameter,bound,value,unit,conditions\n"
        "S-1,noise figure,max,3.2,dB,band=n257;note=as measured\nS-2,channel raster,,60,kHz,\n",
        encoding="utf-8",
    )
    outcome = command("load", table, "--published", "--block", "UT", "--prefix", "STD-", "--yes")
    assert outcome.code == ExitCode.CLEAN, outcome.err
    assert "2 rows: 1 taken as requirements" in " ".join(outcome.out.split())
    assert ("STD-S-1", "<= 3.2 dB") in stored(tmp_path)
    assert "nothing changes" in command("load", table, "--published", "--prefix", "STD-").err


def test_options_of_published_tables_are_refused_for_workbooks(command: Command, workbook: Path) -> None:
    outcome = command("load", workbook, "--block", "UT")
    assert outcome.code == ExitCode.BAD_INPUT
    assert "belong to --published" in outcome.err
