"""``specflow budget`` as a person runs it: list, one budget, JSON, an edit."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from specflow.errors import ExitCode
from specflow.store import open_project
from tests import receiver
from tests.cli.conftest import Command

FEW = ("--trials", "500")


@pytest.fixture
def project(tmp_path: Path) -> Path:
    """Make the receiver project, the only one of the folder."""
    receiver.receiver_store(tmp_path / "receiver.specflow").close()
    return tmp_path / "receiver.specflow"


def test_without_an_id_all_budgets_are_listed(command: Command, project: Path) -> None:
    done = command("budget")
    assert done.code == ExitCode.CLEAN
    line = next(line for line in done.out.splitlines() if line.startswith("B-RX"))
    for part in ("Receiver", "cascade", "R-noise_figure, R-g_over_t", "17.7 GHz, +55 °C ambient"):
        assert part in line
    (row,) = json.loads(command("budget", "--json").out)
    assert row["id"] == "B-RX" and row["margin_number"] > 0


def test_one_budget_shows_its_tables_and_pictures(command: Command, project: Path) -> None:
    done = command("budget", "B-RX", *FEW)
    assert done.code == ExitCode.CLEAN
    for part in (
        "B-RX: Receiver",
        "Along the chain at 17.7 GHz, +55 °C ambient",
        "Margins to the limits, nominal",
        "Tolerances, way by way",
        "Who makes how much",
        "Lines and slopes",
        "● level  ○ noise",
        "limit",
        "Worst point: R-noise_figure",
        "sampling only",
    ):
        assert part in done.out, part


def test_json_has_tables_with_numbers_and_the_data_of_the_pictures(command: Command, project: Path) -> None:
    told = json.loads(command("budget", "B-RX", "--at", "1", "--json", *FEW).out)
    outcome = receiver.outcome()
    assert told["at"] == outcome.places[0]
    last = told["cumulative"][-1]
    assert last["noise_figure_number"] == pytest.approx(float(outcome.quantities[0].result[0]))
    assert {"margins", "ways", "shares", "slopes", "facts"} <= told.keys()
    assert told["facts"]["Assumed"] == list(outcome.notes) and len(outcome.notes) > 1
    assert [one["kind"] for one in told["pictures"]][:2] == ["levels", "contributions"]


def test_the_same_seed_gives_the_same_answer_and_another_one_another(command: Command, project: Path) -> None:
    def ways(seed: int) -> object:
        return json.loads(
            command("budget", "B-RX", "--method", "monte-carlo", "--seed", seed, "--json", *FEW).out
        )["ways"]

    assert ways(1) == ways(1)
    assert ways(1) != ways(2)


def test_only_the_asked_methods_are_gone(command: Command, project: Path) -> None:
    told = json.loads(command("budget", "B-RX", "--method", "rss", "--json").out)
    assert [row["way"] for row in told["ways"]] == ["nominal", "root sum of squares, of limits"] * 2
    assert all(picture["kind"] != "distribution" for picture in told["pictures"])


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (("B-none",), "there is no budget 'B-none'"),
        (("B-RX", "--at", "99"), "there is no condition point 99"),
        (("B-RX", "--method", "guess"), "there is no method 'guess'"),
        (("B-RX", "--set", "3 gain = 21 dB"), "needs a reason"),
        (("--set", "3 gain = 21 dB", "--reason", "r"), "does not say of which budget"),
        (("B-RX", "--set", "3 gain = 21 dBm", "--dry-run"), "cannot be"),
    ],
)
def test_what_cannot_be_is_one_message_and_changes_nothing(
    command: Command, project: Path, words: tuple[str, ...], said: str
) -> None:
    done = command("budget", *words)
    assert done.code == ExitCode.BAD_INPUT
    assert said in done.err and "Traceback" not in done.err and done.out == ""
    with open_project(project, read_only=True) as store:
        assert store.load().revision == 2


def test_an_edit_is_shown_first_and_stored_when_accepted(command: Command, project: Path) -> None:
    setting = ("--set", "3 noise_figure = 1.8 dB", "--reason", "first tile measured")
    looked = command("budget", "B-RX", *setting, "--dry-run")
    assert (
        "up by 0.30 dB" in looked.out and "What it does" in looked.out and "nothing was stored" in looked.err
    )
    refused = command("budget", "B-RX", *setting)
    assert refused.code == ExitCode.BAD_INPUT and "--yes" in refused.err
    done = command("budget", "B-RX", *setting, "--yes", "--by", "Ann")
    assert done.code == ExitCode.CLEAN and "stored; the project is at revision 3" in done.err
    assert "first tile measured" in command("history", "B-RX").out
    told = json.loads(command("budget", "B-RX", *setting, "--yes", "--json").out)
    assert told == {"changes": [], "moved": told["moved"], "stored": False, "project_revision": 3}
