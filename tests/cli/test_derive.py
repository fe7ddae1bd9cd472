"""``specflow derive``: listing, explaining, previewing, storing; exit codes and what is written where."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from specflow.derive import LAWS
from specflow.store import create_project
from tests.builders import a_block, a_project, adding, an_evidence_file, an_item
from tests.cli.conftest import Command
from tests.derive.deriving import a_trace

WORST = ("derive", "worst", "--from", "T-1", "--over", "frequency 17.7..20.2 GHz")


@pytest.fixture
def project(tmp_path: Path) -> Path:
    """A project with a gain trace."""
    table, columns = a_trace()
    path = tmp_path / "p.specflow"
    with create_project(path, a_project()) as store:
        store.apply(
            adding(a_block(), an_item(), an_evidence_file(), table), columns={"T-1": columns}, by="me"
        )
    return path


def test_all_laws_are_listed_without_a_project(command: Command) -> None:
    done = command("derive", "--json")
    assert done.code == 0
    assert [row["law"] for row in json.loads(done.out)] == [law.name for law in LAWS]


@pytest.mark.parametrize("law", [law.name for law in LAWS])
def test_every_law_explains_itself(command: Command, law: str) -> None:
    done = command("derive", "--explain", law)
    assert done.code == 0
    assert done.out.startswith(f"{law}: ")
    for part in ("Needs: ", "Formula: ", "Valid: ", "Source: "):
        assert part in done.out


def test_a_preview_stores_nothing(command: Command, project: Path) -> None:
    done = command(*WORST, "--dry-run")
    assert done.code == 0
    assert "21.0000 dB" in done.out and "17.7 GHz" in done.out
    assert "nothing was stored" in done.err
    assert "EV-1" not in command("export", "--table", "evidence", "--format", "csv").out


def test_yes_stores_and_says_under_which_id(command: Command, project: Path) -> None:
    done = command(*WORST, "--yes", "--json", "--by", "A. B.")
    assert done.code == 0
    data = json.loads(done.out)
    assert (data["stored"], data["derivation"]) == ("EV-1", "DV-1")
    assert data["covers"][0]["largest_gap"] == pytest.approx(1.3)
    assert "unchanged: this is stored as EV-1" in command(*WORST, "--yes").err


def test_without_a_terminal_nothing_is_stored_unasked(command: Command, project: Path) -> None:
    done = command(*WORST)
    assert done.code == 2
    assert "there is no terminal to ask on" in done.err


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (("derive", "wurst", "--from", "T-1"), "near to it: worst"),
        (("derive", "worst", "--over", "frequency 17.7..20.2 GHz"), "no table is named"),
        ((*WORST[:-1], "frequency 17..21 GHz"), "neither end is reached"),
        ((*WORST, "--set", "side"), "is not NAME=VALUE"),
        (("derive", "--explain", "nothing"), "there is no law 'nothing'"),
    ],
)
def test_bad_usage_ends_with_2_and_one_message(
    command: Command, project: Path, words: tuple[str, ...], message: str
) -> None:
    done = command(*words)
    assert done.code == 2
    assert message in done.err and "Traceback" not in done.err


def test_nothing_to_derive_again_is_said(command: Command, project: Path) -> None:
    command(*WORST, "--yes")
    done = command("derive", "--again")
    assert (done.code, done.out) == (0, "")
    assert "nothing to derive again" in done.err


def test_nothing_to_propose_is_said(command: Command, project: Path) -> None:
    done = command("derive", "--proposed")
    assert (done.code, done.out) == (0, "")
