"""``specflow attach``: the preview, what is stored when, and what ends it with which code."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from specflow.cli import attach as attach_command
from specflow.cli import attach_folder as folder_command
from specflow.errors import ExitCode
from specflow.model.correction import Correction, CorrectionPoint
from specflow.store import create_project, open_project
from tests.builders import a_project, adding
from tests.cli.conftest import Command
from tests.importers.measured.make import PROJECT, book

HEADER = ["Item", "f (GHz)", "Gain (dB)"]
ROWS = [HEADER, ["LNA-1", 27.5, 20.1], ["LNA-1", 30, "N/A"]]


@pytest.fixture
def project(tmp_path: Path) -> Path:
    """Return a project beside which the commands run."""
    path = tmp_path / "terminal.specflow"
    with create_project(path, a_project()) as store:
        store.apply(adding(*PROJECT), by="A. B.")
    return path


def tables(project: Path) -> list[str]:
    with open_project(project) as store:
        return [table.id for table in store.load().tables]


def test_it_shows_how_columns_are_understood_and_stores(
    command: Command, project: Path, tmp_path: Path
) -> None:
    done = command("attach", book(tmp_path / "gain.xlsx", ROWS), "--yes", "--by", "A. B.")
    assert done.code == ExitCode.CLEAN
    assert "gain, in dB" in done.out and "unit from the header C1" in done.out and "N/A" in done.out
    assert "1 new table, 1 values" in done.err and "stored as EV-1" in done.err
    assert tables(project) == ["EV-1"]


def test_a_dry_run_stores_nothing_and_says_what_would_keep_it_out(
    command: Command, project: Path, tmp_path: Path
) -> None:
    assert command("attach", book(tmp_path / "gain.xlsx", ROWS), "--dry-run").code == ExitCode.CLEAN
    unclear = book(tmp_path / "b.xlsx", [["Item", "f", "Gain (dB)"], ["LNA-1", 27.5, 20]])
    done = command("attach", unclear, "--dry-run")
    assert done.code == ExitCode.BAD_INPUT and "without a unit" in done.out and "do:" in done.err
    rejected = book(tmp_path / "c.xlsx", [*ROWS, ["LNA-1", 31, "abc"]])
    done = command("attach", rejected, "--dry-run")
    assert done.code == ExitCode.BAD_INPUT and "--take-rest" in done.err
    assert command("attach", rejected, "--dry-run", "--take-rest").code == ExitCode.CLEAN
    assert tables(project) == []


def test_nothing_is_stored_without_a_yes(
    command: Command, project: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = book(tmp_path / "gain.xlsx", ROWS)
    done = command("attach", path)
    assert done.code == ExitCode.BAD_INPUT and "--yes" in done.err  # there is no terminal to ask on
    monkeypatch.setattr(attach_command, "ask", lambda question: False)
    assert command("attach", path).code == ExitCode.CLEAN and tables(project) == []
    monkeypatch.setattr(attach_command, "ask", lambda question: True)
    assert command("attach", path).code == ExitCode.CLEAN and tables(project) == ["EV-1"]


def test_rejected_cells_are_listed_and_the_rest_is_taken_when_said(
    command: Command, project: Path, tmp_path: Path
) -> None:
    path = book(tmp_path / "gain.xlsx", [*ROWS, ["LNA-1", 31, "abc"]])
    done = command("attach", path, "--yes")
    assert done.code == ExitCode.BAD_INPUT and "C4" in done.out and "--take-rest" in done.err
    assert tables(project) == []
    assert command("attach", path, "--yes", "--take-rest").code == ExitCode.CLEAN


def test_several_files_are_transactions_of_their_own(command: Command, project: Path, tmp_path: Path) -> None:
    good = book(tmp_path / "gain.xlsx", ROWS)
    bad = book(tmp_path / "bad.xlsx", [["Item", "f", "Gain (dB)"], ["LNA-1", 27.5, 20]])
    done = command("attach", bad, good, tmp_path / "none.xlsx", good, "--yes")
    assert done.code == ExitCode.BAD_INPUT
    assert "2 of 4 files attached or unchanged" in done.err and "unchanged, nothing to add" in done.err
    assert tables(project) == ["EV-1"]


def test_what_is_said_on_the_command_line(command: Command, project: Path, tmp_path: Path) -> None:
    path = book(tmp_path / "gain.xlsx", [["f (GHz)", "T (°C)", "G"], [27.5, 23, 20]])
    done = command(
        "attach", path, "--yes", "--state", "item=LNA-2", "--state", "block=LNA", "--state", "temperature=case",
        "--state", "column C=gain in dB", "--state", "supply_voltage=5 V",
    )  # fmt: skip
    assert done.code == ExitCode.CLEAN
    with open_project(project) as store:
        snapshot = store.load()
        columns = snapshot.load_columns(["EV-1"])["EV-1"]
    assert set(columns.conditions.numeric) == {"frequency", "temperature_case", "supply_voltage"}
    assert columns.items.word(0) == "LNA-2"
    assert command("attach", path, "--state", "block").code == ExitCode.BAD_INPUT


def test_a_mapping_is_proposed_edited_and_used(command: Command, project: Path, tmp_path: Path) -> None:
    path = book(tmp_path / "gain.xlsx", [["Item", "f", "Gain (dB)"], ["LNA-1", 27.5, 20]])
    mapping = tmp_path / "m.toml"
    done = command("attach", path, "--propose-mapping", mapping)
    assert done.code == ExitCode.CLEAN and done.out.strip() == str(mapping) and tables(project) == []
    text = mapping.read_text(encoding="utf-8")
    assert "# B1: TO SETTLE. column B: frequency without a unit" in text
    mapping.write_text(text.replace('header = "f"\n', 'header = "f"\nunit = "GHz"\n'), encoding="utf-8")
    assert (
        command("attach", path, "--propose-mapping", mapping).code == ExitCode.BAD_INPUT
    )  # it is not overwritten
    done = command("attach", path, "--mapping", mapping, "--yes")
    assert done.code == ExitCode.CLEAN and "kept as MAP-1" in done.err
    later = book(tmp_path / "later.xlsx", [["Item", "f", "Gain (dB)"], ["LNA-2", 27.5, 20]])
    assert "MAP-1 revision 1, recognised by its layout" in command("attach", later, "--yes").out


def test_superseding(command: Command, project: Path, tmp_path: Path) -> None:
    command("attach", book(tmp_path / "gain.xlsx", ROWS), "--yes")
    path = book(tmp_path / "retest.xlsx", [HEADER, ["LNA-1", 27.5, 21]])
    done = command("attach", path, "--yes")
    assert done.code == ExitCode.BAD_INPUT and "1 row is that of EV-1, 1 with other values" in done.err
    assert "--supersedes EV-1 replaces them, --beside lets both stand" in done.err
    assert command("attach", path, "--yes", "--supersedes", "EV-1").code == ExitCode.CLEAN
    assert tables(project) == ["EV-1", "EV-2"]


def test_json_has_all_that_the_tables_show(command: Command, project: Path, tmp_path: Path) -> None:
    path = book(tmp_path / "gain.xlsx", [*ROWS, ["LNA-1", 31, "abc"]])
    done = command("attach", path, "--json", "--yes", "--take-rest")
    data: dict[str, Any] = json.loads(done.out)
    assert data["stored"] == ["EV-1"] and data["values"] == 1 and not data["unchanged"]
    [table] = data["tables"]
    assert table["rejected"][0]["cell"] == "C4" and table["blank"] == {"not applicable: N/A": 1}
    assert [column["role"] for column in table["columns"]][-3:] == ["item", "condition", "value"]
    assert json.loads(command("attach", path, "--json", "--dry-run").out)["unchanged"]
    failed = json.loads(command("attach", tmp_path / "none.xlsx", "--json").out)
    assert failed["error"] and failed["hint"]


def test_a_folder_gives_one_summary(command: Command, project: Path, tmp_path: Path) -> None:
    folder = tmp_path / "results"
    folder.mkdir()
    book(folder / "gain.xlsx", ROWS)
    book(folder / "bad.xlsx", [["Item", "f", "Gain (dB)"], ["LNA-1", 27.5, 20]])
    (folder / "~$gain.xlsx").write_text("", encoding="utf-8")
    tried = command("attach", folder, "--dry-run")
    assert tried.code == ExitCode.BAD_INPUT and "nothing was stored" in tried.err and tables(project) == []
    done = command("attach", folder, "--yes")
    assert done.code == ExitCode.BAD_INPUT and tables(project) == ["EV-1"]
    assert "data, B1: 1 question is open" in done.out and "the lock of a program" in done.out
    assert "2 of 2 files: 1 accepted, 1 rejected, 1 passed over" in done.err
    assert tried.out.replace("Files, as they would be attached", "Files") == done.out
    (folder / "bad.xlsx").unlink()
    again = json.loads(command("attach", folder, "--yes", "--json").out)
    assert again["counts"] == {"accepted": 0, "unchanged": 1, "rejected": 0}
    assert command("attach", folder, "--yes").code == ExitCode.CLEAN


def test_a_folder_asks_once(
    command: Command, project: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    folder = tmp_path / "results"
    folder.mkdir()
    book(folder / "a.xlsx", ROWS)
    book(folder / "b.xlsx", [HEADER, ["LNA-2", 27.5, 20.1]])
    book(folder / "c.xlsx", [["Item", "f", "Gain (dB)"], ["LNA-1", 27.5, 20]])
    done = command("attach", folder)
    assert done.code == ExitCode.BAD_INPUT and "--yes" in done.err and tables(project) == []
    asked: list[str] = []

    def answer(question: str) -> bool:
        asked.append(question)
        return len(asked) == 2

    monkeypatch.setattr(folder_command, "ask", answer)
    assert command("attach", folder).code == ExitCode.CLEAN and tables(project) == []
    done = command("attach", folder)
    assert asked == ["store the 2 files that are clean?"] * 2
    assert done.code == ExitCode.BAD_INPUT and tables(project) == ["EV-1", "EV-2"]
    assert "3 of 3 files: 2 accepted, 1 rejected" in done.err


def test_a_folder_without_results_and_a_call_without_a_file(
    command: Command, project: Path, tmp_path: Path
) -> None:
    folder = tmp_path / "results"
    folder.mkdir()
    done = command("attach", folder, "--yes")
    assert done.code == ExitCode.BAD_INPUT and "without measurement files" in done.err
    done = command("attach")
    assert done.code == ExitCode.BAD_INPUT and "no file is named" in done.err


def test_verify_says_what_changed_and_ends_with_1(command: Command, project: Path, tmp_path: Path) -> None:
    path = book(tmp_path / "gain.xlsx", ROWS)
    command("attach", path, "--yes", "--keep")
    done = command("attach", "--verify")
    assert done.code == ExitCode.CLEAN and "1 file: 1 unchanged" in done.err
    book(path, [HEADER, ["LNA-1", 27.5, 20.2]])
    done = command("attach", "--verify", tmp_path)
    assert done.code == ExitCode.FINDINGS and "C2" in done.out and "20.1 dB" in done.out
    assert json.loads(command("attach", "--verify", "--json").out)["files"][0]["state"] == "changed"
    path.unlink()
    assert command("attach", "--verify").code == ExitCode.CLEAN
    done = command("export", "--file", "F-1", "-o", "back.xlsx")
    assert done.out.strip() == "back.xlsx" and (tmp_path / "back.xlsx").is_file()
    done = command("export", "--file", "F-1", "-o", "back.xlsx")
    assert done.code == ExitCode.BAD_INPUT and "exists already" in done.err
    assert command("export", "--file", "F-1", "--format", "csv").code == ExitCode.BAD_INPUT
    assert command("attach", "--verify", "none").code == ExitCode.BAD_INPUT
    done = command("attach", "--verify", "--take-rest", "--state", "block=LNA")
    assert (
        done.code == ExitCode.BAD_INPUT and "--state, --take-rest have no meaning with --verify" in done.err
    )


def test_a_correction_is_added_and_can_be_traced(command: Command, project: Path, tmp_path: Path) -> None:
    points = (CorrectionPoint(frequency_hz=27e9, added=3.0), CorrectionPoint(frequency_hz=30e9, added=3.6))
    with open_project(project) as store:
        store.apply(adding(Correction(id="CABLE-3", points=points, issue="B")), by="A. B.")
    rows = [HEADER, ["LNA-1", 28, 20.0]]
    said = ("--state", "correction=CABLE-3", "--yes", "--by", "A. B.")
    done = command("attach", book(tmp_path / "gain.xlsx", rows), *said)
    assert done.code == ExitCode.CLEAN and "CABLE-3 issue B: 3.2 dB added" in done.out
    with open_project(project) as store:
        snapshot = store.load()
        (columns,) = snapshot.load_columns(["EV-1"]).values()
        assert columns.values["Gain"].low.tolist() == [23.2]
        assert columns.extra["Gain as read"].word(0) == "20.0"
        assert snapshot.tables[0].applied[0].revision == 1
    assert "CABLE-3 issue B: 3.2 dB added" in command("trace", "EV-1").out
    beyond = book(tmp_path / "beyond.xlsx", [HEADER, ["LNA-1", 31, 20.0]])
    done = command("attach", beyond, *said)
    assert done.code == ExitCode.BAD_INPUT and "never extrapolated" in done.out
    assert tables(project) == ["EV-1"]
