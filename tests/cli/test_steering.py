"""Cells and names that would steer the terminal are spelt out; a named pipe is refused instead of waited for."""

from __future__ import annotations

import os
import shutil
from pathlib import Path

import pytest

from specflow.cli.streams import fitting, harmless
from tests.cli.conftest import Command
from tests.cli.refusing import content, refused

ESCAPES = (
    "Item,f (GHz),Gain (dB),\x1b[31mred\x1b]0;title\x07\nLNA-1,27.5,\x1b[2J20.5,\u202ex\nLNA-1,28.5,20.3,y\n"
)


@pytest.fixture
def project(made_once: Path, tmp_path: Path) -> Path:
    """Return a project of blocks and items, beside which the commands run."""
    return Path(shutil.copy(made_once / "terminal.specflow", tmp_path))


def test_escape_sequences_of_a_cell_never_reach_the_terminal(
    command: Command, project: Path, tmp_path: Path
) -> None:
    path = tmp_path / "bench.csv"
    path.write_text(ESCAPES, encoding="utf-8")
    before = content(project)
    outcome = command("attach", path, "--yes", "--project", project)
    shown = outcome.out + outcome.err
    assert outcome.code == 2 and content(project) == before
    assert r"\x1b[2J20.5" in shown and r"\x1b[31mred" in shown
    assert not {"\x1b", "\x07", "\u202e"} & set(shown)


@pytest.mark.parametrize(
    ("text", "shown"),
    [
        ("a\rb", r"a\rb"),
        ("\x9b31m", r"\x9b31m"),
        ("lbs\u202egpj.s2p", r"lbs\u202egpj.s2p"),
        ("two\nlines\tand ≥ Ω", "two\nlines\tand ≥ Ω"),
        ("a\udcfcb", "a\udcfcb"),
    ],
)
def test_only_what_steers_is_spelt_out(text: str, shown: str) -> None:
    assert harmless(text) == shown
    assert "\x1b" not in fitting(text + "\x1b")


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="there are no named pipes here")
@pytest.mark.parametrize("name", ["bench.csv", "bench.xlsx", "bench.s2p"])
def test_a_named_pipe_is_refused_and_not_waited_for(
    command: Command, project: Path, tmp_path: Path, name: str
) -> None:
    os.mkfifo(tmp_path / name)
    before = content(project)
    refused(command("attach", tmp_path / name, "--yes", "--project", project), "no plain file", place=name)
    assert content(project) == before
