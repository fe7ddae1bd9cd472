"""Running a command as a person does, in this process and in an empty folder."""

from __future__ import annotations

import sys
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import pytest

from specflow.cli import build
from specflow.cli.console import run
from specflow.cli.options import PROJECT_VARIABLE


@dataclass(frozen=True)
class Outcome:
    """How a command ended and what it wrote: data to ``out``, talk to ``err``."""

    code: int
    out: str
    err: str


Command = Callable[..., Outcome]


@pytest.fixture
def command(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str], tmp_path: Path) -> Command:
    """Return what runs ``specflow`` with the given words; the current folder is ``tmp_path``."""
    monkeypatch.chdir(tmp_path)
    monkeypatch.delenv(PROJECT_VARIABLE, raising=False)

    def specflow(*words: object) -> Outcome:
        monkeypatch.setattr(sys, "argv", ["specflow", *map(str, words)])
        capsys.readouterr()
        code = run(build())
        written = capsys.readouterr()
        return Outcome(code, written.out, written.err)

    return specflow
