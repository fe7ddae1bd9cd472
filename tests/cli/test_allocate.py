"""``specflow allocate`` as a person runs it."""

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


def test_a_dry_run_shows_and_stores_nothing(command: Command, project: Path) -> None:
    done = command("allocate", "RX", "--equal", "--dry-run")
    assert done.code == ExitCode.CLEAN
    assert "LNA-NOISE-FIGURE" in done.out and "17.5 dB..18.5 dB" in done.out
    assert "closes:" in done.out
    assert "nothing was stored" in done.err
    assert revision(project) == 2


def test_yes_stores_and_status_knows_the_children(command: Command, project: Path) -> None:
    assert command("allocate", "RX", "--yes").code == ExitCode.CLEAN
    assert revision(project) == 3
    assert "LNA-NOISE-FIGURE" in command("status", "--as-of", "2026-06-01").out


def test_json_has_the_numbers(command: Command, project: Path) -> None:
    told = json.loads(
        command(
            "allocate",
            "RX",
            "--least-effort",
            "--reserve",
            "noise_figure 0.2 dB Systems",
            "--dry-run",
            "--json",
        ).out
    )
    assert told["closure"]["closes"] is True and told["stored"] is False
    assert told["reserves"][0]["holder"] == "Systems"
    one = next(one for one in told["allocations"] if one["requirement"] == "LNA-NOISE-FIGURE")
    assert one["low"] is None and one["high"] > 0 and one["parents"] == ["SYS-NF"]
    assert told["effort"] and told["binding"]


def test_solving_one_line(command: Command, project: Path) -> None:
    told = json.loads(command("allocate", "RX", "--solve", "LNA gain", "--json").out)
    assert told["at_least"]["requirement"] == "SYS-NF" and told["at_most"]["requirement"] == "SYS-IP"
    shown = command("allocate", "RX", "--solve", "position 4 noise figure")
    assert "IF noise_figure: at most" in shown.out


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (("RX", "--equal", "--least-effort"), "several ways"),
        (("XX",), "there is no budget 'XX'"),
        (("RX", "--reserve", "nonsense"), "is no reserve"),
        (("RX", "--fix", "ABC"), "no block abc stands in the budget"),
        (("RX", "--by-hand", "LNA noise_figure <= 1 dB"), "no reason is given"),
        (("RX", "--weight", "LNA=-1"), "is no weight"),
        (("RX", "--weight", "LNA=2"), "belong to the least effort"),
        (("RX", "--solve", "LNA op1db"), "there is no line 'LNA op1db'"),
        (("RX", "--reserve", "noise_figure 2.97 dB Systems"), "infeasible, and short by"),
    ],
)
def test_bad_input_is_one_message_and_stores_nothing(
    command: Command, project: Path, words: tuple[str, ...], message: str
) -> None:
    done = command("allocate", *words, "--yes")
    assert done.code == ExitCode.BAD_INPUT
    assert message in done.err and "Traceback" not in done.err
    assert revision(project) == 2
