"""``specflow demo``: what it makes, when it refuses, and that it leaves nothing half-made."""

from __future__ import annotations

from pathlib import Path

import pytest

from specflow.errors import ExitCode, FileError
from specflow.model.project import Project
from specflow.store import create_project, open_project
from specflow.workflows import demo as workflow
from tests.cli.conftest import Command


def files_in(folder: Path) -> set[str]:
    return {path.relative_to(folder).as_posix() for path in folder.rglob("*") if path.is_file()}


MADE = {
    "README.md",
    "ferry-compliance.html",
    "ferry-compliance.xlsx",
    "ferry-requirements.xlsx",
    "ferry.specflow",
    "mappings/array_two_laboratories.toml",
    "mappings/receive_panel_sweep.toml",
    "mappings/tile_and_amplifier.toml",
    "results/array_simulation.xlsx",
    "results/array_two_laboratories.xlsx",
    "results/converter_bench.xlsx",
    "results/receive_panel_sweep.xlsx",
    "results/tile_and_amplifier.xlsx",
}


def test_it_makes_a_judged_project_and_says_what_to_try(command: Command, tmp_path: Path) -> None:
    outcome = command("demo", "shown")
    assert outcome.code == ExitCode.CLEAN
    assert files_in(tmp_path / "shown") == MADE
    assert set(outcome.out.split()) == {f"shown/{name}" for name in MADE}
    for word in ("create", "load", "attach", "check", "status", "export"):
        assert word in outcome.err
    assert "a noise figure is a ratio (dB)" in outcome.err
    assert "required points proved" in outcome.err
    assert "not a certificate" in outcome.err
    with open_project(tmp_path / "shown" / "ferry.specflow") as store:
        assert store.load().project.invented


def test_the_commands_that_it_proposes_work(
    command: Command, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    proposed = [
        line.split("   ")[0].split() for line in command("demo").err.splitlines() if "--as-of" in line
    ]
    monkeypatch.chdir(tmp_path / "specflow-demo")
    assert len(proposed) == 4
    for words in proposed:
        outcome = command(*words[1:])
        assert outcome.code == (ExitCode.FINDINGS if words[1] == "check" else ExitCode.CLEAN), words
        assert outcome.out


def test_a_folder_that_is_there_is_refused_with_a_hint(command: Command, tmp_path: Path) -> None:
    (tmp_path / "mine").mkdir()
    (tmp_path / "mine" / "notes.txt").write_text("mine")
    outcome = command("demo", "mine")
    assert outcome.code == ExitCode.BAD_INPUT
    assert "--again" in outcome.err
    assert files_in(tmp_path / "mine") == {"notes.txt"}


def test_again_rebuilds_a_demo_and_leaves_other_files_alone(command: Command, tmp_path: Path) -> None:
    command("demo", "shown")
    (tmp_path / "shown" / "notes.txt").write_text("mine")
    before = (tmp_path / "shown" / "ferry-compliance.html").read_bytes()
    outcome = command("demo", "shown", "--again")
    assert outcome.code == ExitCode.CLEAN
    assert files_in(tmp_path / "shown") == MADE | {"notes.txt"}
    assert (tmp_path / "shown" / "ferry-compliance.html").read_bytes() == before


@pytest.mark.parametrize("kind", ["other files", "a project that is not invented", "no project at all"])
def test_again_replaces_nothing_that_is_no_demo(command: Command, tmp_path: Path, kind: str) -> None:
    folder = tmp_path / "mine"
    folder.mkdir()
    if kind == "other files":
        (folder / "ferry-requirements.xlsx").write_bytes(b"mine")
    elif kind == "no project at all":
        (folder / "ferry.specflow").write_bytes(b"mine")
    else:
        create_project(folder / "ferry.specflow", Project(name="mine")).close()
    before = {name: (folder / name).read_bytes() for name in files_in(folder)}
    outcome = command("demo", "mine", "--again")
    assert outcome.code == ExitCode.BAD_INPUT
    assert "holds no demo" in outcome.err
    assert {name: (folder / name).read_bytes() for name in before} == before


def test_a_file_in_the_place_of_the_folder_is_refused(command: Command, tmp_path: Path) -> None:
    (tmp_path / "mine").write_text("mine")
    outcome = command("demo", "mine")
    assert outcome.code == ExitCode.BAD_INPUT
    assert (tmp_path / "mine").read_text() == "mine"


def test_nothing_is_left_behind_when_a_step_fails(tmp_path: Path) -> None:
    def stop(text: str) -> None:
        if "attach" in text:
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        workflow.build_demo(tmp_path / "shown", stop)
    assert list(tmp_path.iterdir()) == []


def test_missing_examples_are_an_error_of_ours(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(workflow.specflow, "__file__", str(tmp_path / "specflow" / "__init__.py"))
    with pytest.raises(FileError, match="examples are missing"):
        workflow.examples_folder()
