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
from specflow.store import create_project
from tests.builders import a_project, adding
from tests.harbour import make_store
from tests.importers.measured.make import PROJECT


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


@pytest.fixture(scope="session")
def made_once(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return a folder of projects to copy: ``empty``, ``terminal`` (no evidence yet) and ``harbour``, all .specflow."""
    folder = tmp_path_factory.mktemp("projects")
    create_project(folder / "empty.specflow", a_project()).close()
    with create_project(folder / "terminal.specflow", a_project()) as store:
        store.apply(adding(*PROJECT), by="A. B.")
    make_store(folder / "harbour.specflow").close()
    return folder
