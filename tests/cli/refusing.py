"""What every refusal has to be: one message with place and remedy, the right exit code, and nothing changed."""

from __future__ import annotations

import hashlib
import sqlite3
from contextlib import closing
from pathlib import Path

from specflow.errors import ExitCode
from specflow.store import open_project
from tests.cli.conftest import Outcome


def content(project: Path) -> tuple[int, str]:
    """Return the revision of a project and a digest of all rows of all its tables."""
    with open_project(project, read_only=True) as store:
        revision = store.revision
    digest = hashlib.sha256()
    with closing(sqlite3.connect(project)) as connection:
        for line in connection.iterdump():
            digest.update(line.encode())
    return revision, digest.hexdigest()


def refused(outcome: Outcome, *words: str, code: ExitCode = ExitCode.BAD_INPUT, place: str = "") -> None:
    """Check that a command ended with this code and said one thing, which has these words.

    ``place`` is (a part of) the file, sheet and cell that it names.
    """
    assert outcome.code == code, outcome
    assert "Traceback" not in outcome.err + outcome.out, outcome.err
    lines = outcome.err.splitlines()
    said = [line for line in lines if line.startswith("specflow: ")]
    places = [line for line in lines if line.startswith("  where: ")]
    remedies = [line for line in lines if line.startswith("  do:    ")]
    assert len(said) == 1 and len(remedies) == 1, outcome.err
    assert len(remedies[0]) > len("  do:    ") + 5
    if place:
        assert len(places) == 1 and place in places[0], outcome.err
    for word in words:
        assert word in said[0] or word in remedies[0], outcome.err


def misused(outcome: Outcome, *words: str) -> None:
    """Check that the command line itself was refused: how it is used, and one sentence with these words."""
    assert outcome.code == ExitCode.BAD_INPUT, outcome
    assert "Traceback" not in outcome.err
    assert outcome.err.startswith("Usage: ") and outcome.err.count("Error: ") == 1, outcome.err
    for word in words:
        assert word in outcome.err, outcome.err
