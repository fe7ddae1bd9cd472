"""A project in one SQLite file."""

from __future__ import annotations

import os
import sqlite3
from collections.abc import Iterator
from contextlib import AbstractContextManager, closing, contextmanager, suppress
from pathlib import Path
from typing import TYPE_CHECKING

from specflow.errors import StoreError
from specflow.store.faults import translated
from specflow.store.place import PATIENCE, Run

if TYPE_CHECKING:
    from sqlalchemy import Connection

#: Marks a SQLite file as ours ("SPFL"), so that another program's database is not taken for a project.
APPLICATION_ID = 0x5350464C

_HEADER = b"SQLite format 3\0"
#: How a file is opened that nobody can change: without a log, an index or a lock beside it.
_AS_IT_STANDS = "mode=ro&immutable=1"


@contextmanager
def new_file(path: Path) -> Iterator[None]:
    """Create an empty project file for the block to fill; delete it when the block raises.

    Raises StoreError when there is a file of this name already, or none can be created.
    """
    try:
        path.touch(exist_ok=False)
    except FileExistsError:
        raise StoreError(
            "there is a file of this name already", where=str(path), hint="name another one"
        ) from None
    except OSError as error:
        raise StoreError(
            f"the project cannot be created: {error.strerror}",
            where=str(path),
            hint="check that the folder exists and may be written",
        ) from None
    try:
        with translated(str(path)):
            with closing(sqlite3.connect(path)) as connection:
                connection.execute(f"PRAGMA application_id = {APPLICATION_ID}")
                connection.execute("PRAGMA journal_mode = WAL")
            yield
    except BaseException:
        for suffix in ("", "-wal", "-shm", "-journal"):
            Path(f"{path}{suffix}").unlink(missing_ok=True)
        raise


class ProjectFile:
    """A SQLite file, ``*.specflow``."""

    def __init__(self, path: Path, *, read_only: bool = False, patience: float = PATIENCE) -> None:
        self.path = path
        self.read_only = read_only
        self.patience = patience
        self._written = False

    @property
    def name(self) -> str:
        """The path."""
        return str(self.path)

    @property
    def folder(self) -> Path:
        """The folder of the file."""
        return self.path.parent

    @property
    def copies(self) -> Path:
        """The path without its suffix: copies go beside the file."""
        return self.path.with_suffix("")

    def check(self) -> None:
        """Raise StoreError when the file is missing, empty or no database of this program."""
        try:
            with self.path.open("rb") as file:
                header = file.read(len(_HEADER))
        except FileNotFoundError:
            raise StoreError(
                "there is no such project",
                where=self.name,
                hint="check the path; specflow init NAME makes a new one",
            ) from None
        except OSError as error:
            raise StoreError(
                f"the project cannot be opened: {error.strerror}",
                where=self.name,
                hint="name a *.specflow file that you may read",
            ) from None
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

    def new(self) -> AbstractContextManager[None]:
        """Create the file for the block to fill."""
        return new_file(self.path)

    def connect(self) -> sqlite3.Connection:
        """Open the file; it must exist. Transactions are begun by hand (``isolation_level`` None).

        A project that is only to be read is opened for writing too, with writes forbidden: SQLite deletes the log and
        its index when the last connection is closed, but one of mode=ro makes them and may not delete them. So would
        one of a file that may not be written in a folder that may; where nobody has it open it is read as it stands.
        """
        if not self._may_be_written() and not self._is_open():
            return self._connect(_AS_IT_STANDS)
        connection = self._connect("mode=rw")
        try:
            connection.execute("PRAGMA schema_version")
            if self.read_only:
                connection.execute("PRAGMA query_only = ON")
        except sqlite3.OperationalError as error:
            connection.close()
            # A database in WAL mode needs a folder that can be written, and a disk that is not full, even to be read,
            # unless nothing is left in the log.
            no_room = self.read_only and error.sqlite_errorname.startswith("SQLITE_IOERR_SHM")
            if not (no_room or _cannot_write(error)) or self._has_log():
                raise
            return self._connect(_AS_IT_STANDS)
        except BaseException:
            connection.close()
            raise
        return connection

    def _may_be_written(self) -> bool:
        return os.access(self.path, os.W_OK, effective_ids=os.access in os.supports_effective_ids)

    def _is_open(self) -> bool:
        """Whether another connection is open, or one ended without closing."""
        return any(Path(f"{self.path}{suffix}").exists() for suffix in ("-wal", "-shm"))

    def _has_log(self) -> bool:
        try:
            return Path(f"{self.path}-wal").stat().st_size > 0
        except FileNotFoundError:
            return False

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
        with closing(self.connect()) as connection:
            yield connection.execute

    def querying(self) -> AbstractContextManager[Connection]:
        """Open a transaction that only reads."""
        return self._transaction("BEGIN")

    def writing(self) -> AbstractContextManager[Connection]:
        """Open a write transaction, with foreign keys on and the lock taken at once."""
        self._written = True
        return self._transaction("BEGIN IMMEDIATE")

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

    def copy_to(self, target: Path) -> None:
        """Copy by SQLite's backup, which sees the log too; a plain copy of an open file would not."""
        with new_file(target), closing(self.connect()) as source, closing(sqlite3.connect(target)) as copy:
            source.backup(copy)

    def close(self) -> None:
        """Move what was written from the log into the file itself, so that the one file is the whole project."""
        if self._written:
            with suppress(sqlite3.OperationalError), closing(self.connect()) as connection:
                connection.execute("PRAGMA wal_checkpoint(TRUNCATE)").fetchall()
            self._written = False


def _cannot_write(error: sqlite3.OperationalError) -> bool:
    return error.sqlite_errorname.startswith(("SQLITE_CANTOPEN", "SQLITE_READONLY"))
