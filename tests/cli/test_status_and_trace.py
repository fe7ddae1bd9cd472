"""``specflow status``, ``trace``, ``history`` and the list of commands, as a person runs them."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from specflow.cli.commands import COMMANDS
from specflow.errors import ExitCode
from specflow.parameters import load_dictionary
from specflow.reports.status import in_tree_order, status_table
from specflow.store import open_project
from specflow.verification import evaluate
from tests import harbour
from tests.cli.conftest import Command

AS_OF = ("--as-of", "2026-06-01")


@pytest.fixture
def project(tmp_path: Path) -> Path:
    """Make the harbour project, the only one of the folder."""
    harbour.make_store(tmp_path / "harbour.specflow").close()
    return tmp_path / "harbour.specflow"


def test_status_shows_every_requirement_with_totals(command: Command, project: Path) -> None:
    done = command("status", *AS_OF)
    assert done.code == ExitCode.CLEAN
    line = next(line for line in done.out.splitlines() if line.strip().startswith("PA-1"))
    for part in ("failing", "8 of 9", "-1.19 dB", "30 GHz, +85 °C ambient, item PA-A"):
        assert part in line
    assert "28 of 52 required points proved" in done.out and "1 of 8" in done.out


def test_status_in_json_has_the_text_and_the_number_behind_it(command: Command, project: Path) -> None:
    told = json.loads(command("status", "--json", *AS_OF).out)
    row = next(row for row in told["status"] if row["id"] == "PA-1")
    assert row["proved"] == "8 of 9" and row["proved_number"] == 8
    assert row["guarded_margin_number"] == pytest.approx(-1.188857538602619)
    assert {"compliance_totals", "close_out_totals", "facts"} <= told.keys()


def test_the_command_line_says_what_python_computes(command: Command, project: Path) -> None:
    with open_project(project, read_only=True) as store:
        snapshot = store.load()
    results = evaluate(snapshot, load_dictionary(), as_of=harbour.AS_OF)
    ours = status_table(snapshot, results, *in_tree_order(snapshot))
    told = json.loads(command("status", "--json", *AS_OF).out)["status"]
    keys = [column.key for column in ours.columns]
    assert [[row[key] for key in keys] for row in told] == [
        [cell.text for cell in row.cells] for row in ours.rows
    ]


def test_status_of_some_requirements_only(command: Command, project: Path) -> None:
    told = json.loads(command("status", "pa-2", "LNA-1", "--json", *AS_OF).out)
    assert [row["id"] for row in told["status"]] == ["PA-2", "LNA-1"]
    assert told["facts"]["Points"].startswith("16 of 19 ")


def test_status_of_one_state_only(command: Command, project: Path) -> None:
    told = json.loads(command("status", "--label", "Failing", "--json", *AS_OF).out)
    assert [row["id"] for row in told["status"]] == ["PA-1"]


@pytest.mark.parametrize(
    ("words", "message", "remedy"),
    [
        (("status", "PA-9"), "there is no requirement 'PA-9'", "near to it: PA-"),
        (("status", "--label", "red"), "there is no state 'red'", "states: not applicable, "),
        (("status", "--as-of", "1.6.2026"), "'1.6.2026' is not a date", "YYYY-MM-DD"),
        (("trace", "pa_bnech.xlsx"), "'pa_bnech.xlsx'", "near to it: pa_bench.xlsx"),
        (("history", "PA-99"), "there is no id 'PA-99'", "near to it: PA-"),
        (("status", "--project", "nowhere.specflow"), "there is no such project", "check the path"),
    ],
)
def test_what_is_not_there_is_told_with_what_to_do(
    command: Command, project: Path, words: tuple[str, ...], message: str, remedy: str
) -> None:
    done = command(*words)
    assert done.code in (ExitCode.BAD_INPUT, ExitCode.ENVIRONMENT)
    assert message in done.err and remedy in done.err
    assert done.out == "" and "Traceback" not in done.err


def test_trace_of_a_requirement_ends_at_the_cell(command: Command, project: Path) -> None:
    done = command("trace", "PA-1", *AS_OF)
    assert done.code == ExitCode.CLEAN
    lines = done.out.splitlines()
    assert lines[2].startswith("requirement") and "SYS-1" in lines[2]
    assert any(
        "-1.19 dB" in line and line.rstrip().endswith("pa_bench.xlsx · Bench 1 · D9") for line in lines
    )
    assert harbour.PA_FILE.sha256 in done.out, "which bytes it was"


def test_trace_in_json_has_origins_with_row_and_column(command: Command, project: Path) -> None:
    told = json.loads(command("trace", "PA-1", "--json", *AS_OF).out)
    origins = [row["origin_origin"] for row in told if row["kind"] == "point" and "origin_origin" in row]
    assert {
        "file": "pa_bench.xlsx",
        "sha256": "b2" * 32,
        "sheet": "Bench 1",
        "row": 9,
        "column": 4,
    } in origins


@pytest.mark.parametrize("name", ["T-PA", "F-PA", "pa_bench.xlsx", "results/PA_bench.xlsx"])
def test_trace_leads_back_from_table_and_file(command: Command, project: Path, name: str) -> None:
    told = json.loads(command("trace", name, "--json", *AS_OF).out)
    assert [row["id"] for row in told if row["kind"] == "requirement"] == ["PA-1", "PA-2"]


def test_trace_of_a_block_names_its_requirements(command: Command, project: Path) -> None:
    told = json.loads(command("trace", "PA", "--json", *AS_OF).out)
    assert [row["id"] for row in told if row["kind"] == "requirement"] == ["PA-1", "PA-2", "PA-3", "PA-4"]


def test_history_says_who_when_and_why(command: Command, project: Path) -> None:
    told = json.loads(command("history", "pa-1", "--json").out)
    assert [(row["revision"], row["by"], row["reason"]) for row in told] == [
        ("2", "array lead", "first issue")
    ]
    last = json.loads(command("history", "--last", "3", "--json").out)
    assert len(last) == 3
    assert command("history").out.splitlines()[0] == "History of the project"


def test_reading_commands_leave_the_project_as_it_was(command: Command, project: Path) -> None:
    before = project.read_bytes()
    for words in (("status",), ("trace", "PA-1"), ("history",), ("export", "-o", "-", "-f", "csv")):
        assert command(*words).code == ExitCode.CLEAN
    assert project.read_bytes() == before


def test_browse_without_a_terminal_says_what_to_use_instead(command: Command, project: Path) -> None:
    done = command("browse")
    assert done.code == ExitCode.BAD_INPUT and "specflow status" in done.err


@pytest.mark.parametrize("entry", COMMANDS, ids=[entry.name for entry in COMMANDS])
def test_every_command_has_help_that_begins_as_the_list_says(command: Command, entry: object) -> None:
    name, summary = entry.name, entry.summary  # type: ignore[attr-defined]
    done = command(name, "--help")
    assert done.code == ExitCode.CLEAN
    assert "[OPTIONS]" in done.out and summary.rstrip(".") in " ".join(done.out.split())
    assert summary in " ".join(command("--help").out.split())
    options = [line for line in done.out.splitlines() if line.lstrip().startswith("-")]
    assert options and not any("<" in line.split("  ")[1] for line in options), (
        "a value has a name, not a type"
    )


def test_a_command_that_is_misspelt_is_told_with_what_is_near(command: Command) -> None:
    done = command("statsu")
    assert done.code == ExitCode.BAD_INPUT and "did you mean status?" in done.err


def test_the_version_is_printed(command: Command) -> None:
    from specflow import __version__

    assert command("--version").out.strip() == __version__


def test_trace_says_how_each_table_was_read(command: Command, project: Path) -> None:
    for name in ("PA-1", "T-PA"):
        steps = json.loads(command("trace", name, "--json", *AS_OF).out)
        said = {step["kind"]: step["text"] for step in steps}
        assert said["read by"].startswith("importer ") and "no mapping" in said["read by"]
        columns = [step["text"] for step in steps if step["kind"] == "column"]
        assert any("in W (unit from units row); no conversion" in text for text in columns)
        assert "frequency in GHz" in " ".join(step["text"] for step in steps if step["kind"] == "condition")
    assert "recorded as 1.4 W, converted" in command("trace", "PA-1", *AS_OF).out
    received = next(step for step in steps if step["kind"] == "received")
    assert received["text"].startswith("20480 bytes, received ") and "no copy is kept" in received["text"]
