"""Where a project is, and how to get at it: a file (SQLite) or a database on a server (PostgreSQL).

Reading takes a ``Run``: a function that executes plain SQL and returns rows. Writing takes a SQLAlchemy engine,
which is imported when it is asked for. Connections are opened when needed and closed at once, so a project may be
used from several threads and nothing is locked while a person thinks.
"""

from __future__ import annotations

import sqlite3
from collections.abc import Callable, Iterable, Iterator, Sequence
from contextlib import AbstractContextManager, contextmanager, suppress
from functools import cached_property
from pathlib import Path
from typing import TYPE_CHECKING, Any, Protocol

from specflow.errors import StoreError
from specflow.store.faults import translated

if TYPE_CHECKING:
    from sqlalchemy import Connection, Engine

Run = Callable[[str], Iterable[Sequence[Any]]]

#: How long a write waits for another one, in seconds.
PATIENCE = 10.0

#: Marks a SQLite file as ours ("SPFL"), so that another program's database is not taken for a project.
APPLICATION_ID = 0x5350464C

_HEADER = b"SQLite format 3\0"


class Place(Protocol):
    """A file or a database."""

    read_only: bool

    @property
    def name(self) -> str:
        """How messages call it."""

    def check(self) -> None:
        """Raise StoreError when there is nothing here that could be a project."""

    def reading(self) -> AbstractContextManager[Run]:
        """Open a connection to read with."""

    def querying(self) -> AbstractContextManager[Connection]:
        """Open a connection to read with statements that SQLAlchemy composes; all of them see one moment."""

    def writing(self) -> AbstractContextManager[Connection]:
        """Open the one transaction that may write; it is rolled back when the block raises."""

    def migrating(self) -> AbstractContextManager[Connection]:
        """Open a transaction in which the schema may change."""

    def close(self) -> None:
        """Let go of everything that is held open."""


def place_of(where: str | Path, *, read_only: bool = False, patience: float = PATIENCE) -> Place:
    """Return the place that a path or a URL names. Raises StoreError for a URL of another kind of database."""
    text = str(where)
    if "://" not in text:
        return ProjectFile(Path(text), read_only=read_only, patience=patience)
    if text.startswith("postgresql"):
        return ProjectDatabase(text, read_only=read_only, patience=patience)
    raise StoreError(
        f"{text.partition('://')[0]} databases are not supported",
        where="project address",
        hint="give the path of a *.specflow file or a postgresql+psycopg:// address",
    )


class ProjectFile:
    """A SQLite file."""

    def __init__(self, path: Path, *, read_only: bool = False, patience: float = PATIENCE) -> None:
        self.path = path
        self.read_only = read_only
        self.patience = patience
        self._written = False

    @property
    def name(self) -> str:
        """The path."""
        return str(self.path)

    def check(self) -> None:
        """Raise StoreError when the file is missing, empty or no database of this program."""
        try:
            with self.path.open("rb") as file:
                header = file.read(len(_HEADER))
        except FileNotFoundError:
            raise StoreError(
                "there is no such project", where=self.name, hint="check the path, or create it"
            ) from None
        except OSError as error:
            raise StoreError(f"cannot be opened: {error.strerror}", where=self.name) from None
        if not header:
            raise StoreError(
                "the file is empty: its creation was interrupted",
                where=self.name,
                hint="delete it and create it again",
            )
        with translated(self.name), self.reading() as run:
            known = header == _HEADER and next(iter(run("PRAGMA application_id")))[0] == APPLICATION_ID
        if not known:
            raise StoreError("not a specflow project", where=self.name, hint="name a *.specflow file")

    def connect(self) -> sqlite3.Connection:
        """Open the file; it must exist. Transactions are begun by hand (``isolation_level`` None)."""
        connection = self._connect("mode=ro" if self.read_only else "mode=rw")
        try:
            connection.execute("PRAGMA schema_version")
        except sqlite3.OperationalError as error:
            connection.close()
            # A database in WAL mode needs its folder writable even to be read, unless nothing is left in the log.
            if not _cannot_write(error) or Path(f"{self.path}-wal").exists():
                raise
            return self._connect("mode=ro&immutable=1")
        except BaseException:
            connection.close()
            raise
        return connection

    def _connect(self, how: str) -> sqlite3.Connection:
        return sqlite3.connect(
            f"{self.path.absolute().as_uri()}?{how}",
            uri=True,
            timeout=self.patience,
            isolation_level=None,
            check_same_thread=False,
        )

    @contextmanager
    def reading(self) -> Iterator[Run]:
        """Open a connection to read with."""
        connection = self.connect()
        try:
            yield connection.execute
        finally:
            connection.close()

    @contextmanager
    def querying(self) -> Iterator[Connection]:
        """Open a transaction that only reads."""
        with self._transaction("BEGIN") as connection:
            yield connection

    @contextmanager
    def writing(self) -> Iterator[Connection]:
        """Open a write transaction, with foreign keys on and the lock taken at once."""
        self._written = True
        with self._transaction("BEGIN IMMEDIATE") as connection:
            yield connection

    @contextmanager
    def migrating(self) -> Iterator[Connection]:
        """Open a write transaction with foreign keys off: rebuilding a table with them on deletes its children."""
        self._written = True
        with self._transaction("BEGIN IMMEDIATE", foreign_keys="OFF") as connection:
            yield connection
            broken = connection.exec_driver_sql("PRAGMA foreign_key_check").fetchall()
            if broken:
                raise StoreError(
                    f"{len(broken)} links lead nowhere after the change of schema (first in {broken[0][0]})",
                    where=self.name,
                    hint="nothing was changed; report this with the file",
                )

    def _transaction(self, begin: str, *, foreign_keys: str = "ON") -> AbstractContextManager[Connection]:
        from sqlalchemy import NullPool, create_engine, event

        engine = create_engine("sqlite://", creator=self.connect, poolclass=NullPool)

        @event.listens_for(engine, "connect")
        def set_up(connection: sqlite3.Connection, _record: object) -> None:
            connection.execute(f"PRAGMA foreign_keys = {foreign_keys}")

        @event.listens_for(engine, "begin")
        def start(connection: Connection) -> None:
            connection.exec_driver_sql(
                begin
            )  # the driver would begin late, and by reading: that loses updates

        return engine.begin()

    def close(self) -> None:
        """Move what was written from the log into the file itself, so that the one file is the whole project."""
        if self._written:
            with suppress(sqlite3.OperationalError):  # another program reads: the last one to close does it
                connection = self.connect()
                try:
                    connection.execute("PRAGMA wal_checkpoint(TRUNCATE)").fetchall()
                finally:
                    connection.close()
            self._written = False


class ProjectDatabase:
    """A PostgreSQL database on a server."""

    def __init__(self, address: str, *, read_only: bool = False, patience: float = PATIENCE) -> None:
        self._address = address
        self.read_only = read_only
        self.patience = patience

    @cached_property
    def name(self) -> str:
        """The address without its password."""
        return self._engine.url.render_as_string(hide_password=True)

    @cached_property
    def _engine(self) -> Engine:
        try:
            from sqlalchemy import create_engine, make_url

            url = make_url(self._address)
            return create_engine(
                url.set(drivername="postgresql+psycopg"), connect_args={"connect_timeout": 10}
            )
        except ModuleNotFoundError:
            raise StoreError(
                "the driver for PostgreSQL is not installed",
                where="project address",
                hint="install it: pip install 'specflow-rf[server]'",
            ) from None
        except Exception as error:
            raise StoreError(f"not an address of a database: {error}", where="project address") from None

    def check(self) -> None:
        """Raise StoreError when the database does not answer."""
        with translated(self.name), self.reading() as run:
            run("SELECT 1")

    @contextmanager
    def reading(self) -> Iterator[Run]:
        """Open a connection to read with."""
        with self._engine.connect() as connection:
            yield connection.exec_driver_sql

    @contextmanager
    def querying(self) -> Iterator[Connection]:
        """Open a transaction that only reads."""
        with self._engine.connect().execution_options(isolation_level="REPEATABLE READ") as connection:
            yield connection

    @contextmanager
    def writing(self) -> Iterator[Connection]:
        """Open a write transaction that waits only so long for another one."""
        with self._engine.begin() as connection:
            connection.exec_driver_sql(f"SET LOCAL lock_timeout = {int(self.patience * 1000)}")
            yield connection

    migrating = writing

    def close(self) -> None:
        """Close the pooled connections."""
        self._engine.dispose()


def _cannot_write(error: sqlite3.OperationalError) -> bool:
    return error.sqlite_errorname.startswith(("SQLITE_CANTOPEN", "SQLITE_READONLY"))
