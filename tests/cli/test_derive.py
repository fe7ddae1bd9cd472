"""``specflow derive``: listing, explaining, previewing, storing; exit codes and what is written where."""

from __future__ import annotations

import json
import shlex
from pathlib import Path

import pytest

from specflow.derive import LAWS
from specflow.model.conditions import Span
from specflow.model.evidence import Supersession, Withdrawal
from specflow.store import create_project, open_project
from tests.builders import (
    a_block,
    a_conditions_set,
    a_dimension,
    a_project,
    a_quantity,
    a_requirement,
    adding,
    an_evidence_file,
    an_item,
    at_most,
)
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
        (("derive", "worst", "--again"), "--again takes no law before it"),
        (("derive", "worst", "--proposed"), "--proposed takes no law before it"),
        (("derive", "--again", "--from", "T-1"), "--from has no meaning with --again"),
        (("derive", "--from", "T-1", "--set", "a=b"), "--from, --set have no meaning without a law"),
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


def test_what_was_replaced_is_derived_again(command: Command, project: Path) -> None:
    command(*WORST, "--yes")
    table, columns = a_trace("T-2", {"Gain": [20.0, 21.0, 22.0]})
    step = Supersession(id="SUP-1", earlier="T-1", later="T-2", by="me", at="2026-05-20T00:00:00Z")
    with open_project(project) as store:
        store.apply(adding(table, step), columns={"T-2": columns}, by="me")
    assert "its input T-1 was superseded by T-2" in command("check").out
    looked = command("derive", "--again", "--dry-run")
    assert (looked.code, "20 dB" in looked.out or "20.0000 dB" in looked.out) == (0, True)
    done = command("derive", "--again", "--yes")
    assert done.code == 0
    assert "EV-1 is superseded by EV-2, derivation DV-2" in done.err
    assert "nothing to derive again" in command("derive", "--again").err


def test_what_cannot_be_derived_again_ends_with_findings(command: Command, project: Path) -> None:
    command(*WORST, "--yes")
    with open_project(project) as store:
        gone = Withdrawal(id="W-1", table="T-1", reason="cable loose", by="me", at="2026-05-20T00:00:00Z")
        store.apply(adding(gone), by="me")
    done = command("derive", "--again", "--yes")
    assert done.code == 1
    assert "the input T-1 was withdrawn and nothing replaces it" in done.err


def test_what_a_requirement_lacks_is_proposed(command: Command, project: Path) -> None:
    with open_project(project) as store:
        band = a_dimension(span=Span(low=17.7, high=20.2, step=1.5))
        flat = a_requirement(quantity=a_quantity("gain_flatness"), limit=at_most(3))
        store.apply(adding(a_conditions_set("CS", band), flat), by="me")
    [row] = json.loads(command("derive", "--proposed", "--json").out)
    assert row["requirement"] == "R-1"
    words = shlex.split(row["say"])[1:]
    done = command(*words, "--yes")
    assert done.code == 0
    assert "1 of 1" in command("status").out


def test_a_preview_says_whether_law_or_readings_lack_the_uncertainty(command: Command, project: Path) -> None:
    assert "uncertainty: none; the readings have none" in command(*WORST, "--dry-run").out
    table, columns = a_trace("T-2", u=[0.1, 0.2, 0.3])
    with open_project(project) as store:
        store.apply(adding(table), columns={"T-2": columns}, by="me")
    over = ("--from", "T-2", "--over", "frequency 17.7..20.2 GHz", "--dry-run")
    assert "uncertainty: that of the governing reading" in command("derive", "worst", *over).out
    flat = command("derive", "ripple", "--gives", "gain_flatness", *over)
    assert "uncertainty: none; this law knows no rule for it" in flat.out
