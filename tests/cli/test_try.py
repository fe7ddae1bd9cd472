"""``specflow try`` as a person runs it."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from specflow.errors import ExitCode
from specflow.store import open_project
from tests.budgets import receiver
from tests.cli.conftest import Command


@pytest.fixture
def project(tmp_path: Path) -> Path:
    """Make the receiver project, the only one of the folder."""
    receiver.make_store(tmp_path / "rx.specflow").close()
    return tmp_path / "rx.specflow"


def revision(project: Path) -> int:
    """Return the project revision."""
    with open_project(project, read_only=True) as store:
        return store.revision


def test_a_trial_shows_what_would_change_and_stores_nothing(command: Command, project: Path) -> None:
    done = command("try", "RX LNA gain = 15 dB", "--as-of", "2026-06-01")
    assert done.code == ExitCode.CLEAN
    assert "SYS-NF" in done.out and "no status would change" in done.out
    assert "nothing was stored" in done.err
    assert revision(project) == 2


def test_json_and_keeping(command: Command, project: Path) -> None:
    told = json.loads(
        command("try", "SYS-NF limit <= 2 dB", "--keep", "--reason", "asked for", "--yes", "--json").out
    )
    assert told["stored"] is True and told["changes"][0]["id"] == "SYS-NF"
    assert told["budgets"][0]["after"]["limits"]
    assert revision(project) == 3


def test_alternatives_side_by_side(command: Command, project: Path) -> None:
    assert "RX" in command("try", "--alternatives", "SYS-NF").out
    assert json.loads(command("try", "--alternatives", "SYS-NF", "--json").out)[0]["budget"] == "RX"


@pytest.mark.parametrize(
    ("words", "message"),
    [
        ((), "there is nothing to try"),
        (("RX LNA gain = 15 dB", "--alternatives", "SYS-NF"), "two questions"),
        (("RX LNA gain = 15 dB", "--keep"), "needs a reason"),
        (("XX gain = 1 dB",), "neither a requirement nor a budget"),
    ],
)
def test_bad_input_is_one_message(
    command: Command, project: Path, words: tuple[str, ...], message: str
) -> None:
    done = command("try", *words)
    assert done.code == ExitCode.BAD_INPUT and message in done.err
    assert revision(project) == 2
