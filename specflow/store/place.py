"""What the store needs of the place where a project is kept.

Reading takes a ``Run``: a function that executes plain SQL and returns rows. Writing takes a SQLAlchemy connection,
and SQLAlchemy is imported when that is asked for. Connections are opened when needed and closed at once, so a
project may be used from several threads, and nothing is locked while a person thinks.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from contextlib import AbstractContextManager
from pathlib import Path
from typing import TYPE_CHECKING, Any, Protocol

if TYPE_CHECKING:
    from sqlalchemy import Connection

Run = Callable[[str], Iterable[Sequence[Any]]]

#: How long a write waits for another one, in seconds.
PATIENCE = 10.0


class Place(Protocol):
    """A file (``ProjectFile``) or a database on a server (``ProjectDatabase``)."""

    read_only: bool

    @property
    def name(self) -> str:
        """How messages call it."""

    @property
    def folder(self) -> Path | None:
        """The folder that the project lies in; None for a database on a server."""

    @property
    def copies(self) -> Path:
        """What names of copies made by themselves begin with."""

    def check(self) -> None:
        """Raise StoreError when there is nothing here that could be a project."""

    def new(self) -> AbstractContextManager[None]:
        """Make room for a project that is created in the block; nothing is left of it when the block raises."""

    def reading(self) -> AbstractContextManager[Run]:
        """Open a connection to read with."""

    def querying(self) -> AbstractContextManager[Connection]:
        """Open a connection to read with statements that SQLAlchemy composes; all of them see one moment."""

    def writing(self) -> AbstractContextManager[Connection]:
        """Open the one transaction that may write; it is rolled back when the block raises."""

    def migrating(self) -> AbstractContextManager[Connection]:
        """Open a transaction in which the schema may change."""

    def copy_to(self, target: Path) -> None:
        """Copy the whole project, at one moment, to a new project file."""

    def close(self) -> None:
        """Let go of everything that is held open."""
