"""What a database says when it fails, as one StoreError with what to do about it."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from contextlib import contextmanager

from specflow.errors import SpecflowError, StoreError

#: Start of SQLite's error name -> (message, hint). The first that fits is used.
_SQLITE = (
    (
        "SQLITE_BUSY",
        "the project is locked: another program is writing to it",
        "wait for it to finish and try again",
    ),
    (
        "SQLITE_LOCKED",
        "the project is locked: another program is writing to it",
        "wait for it to finish and try again",
    ),
    ("SQLITE_FULL", "the disk is full", "free some space; the project is as it was before"),
    (
        "SQLITE_READONLY",
        "the project is read-only",
        "make the file and its folder writable, or work on a copy",
    ),
    ("SQLITE_NOTADB", "not a specflow project: the file is no database", "name a *.specflow file"),
    ("SQLITE_CORRUPT", "the project file is damaged", "go back to a backup"),
    (
        "SQLITE_CANTOPEN",
        "the project file cannot be opened",
        "check that file and folder exist and may be written",
    ),
    ("SQLITE_IOERR", "the disk does not read or write", "check the disk and its free space, and try again"),
    (
        "SQLITE_ERROR: no such table",
        "not a complete specflow project: a table is missing",
        "go back to a backup",
    ),
    ("SQLITE_TOOBIG", "one column of evidence is larger than the database takes", "split the table"),
)

#: Start of the SQLSTATE of PostgreSQL -> (message, hint).
_POSTGRESQL = (
    (
        "55P03",
        "the project is locked: another program is writing to it",
        "wait for it to finish and try again",
    ),
    ("57014", "the server broke off the statement", "try again"),
    ("53100", "the disk of the server is full", "free some space; the project is as it was before"),
    ("25006", "the database is read-only", "connect to the server that takes writes"),
    ("42501", "the database user may not do this", "ask for the rights on the database"),
    ("42P01", "not a specflow project: its tables are missing", "create the project in this database first"),
    ("XX001", "the database is damaged", "go back to a backup"),
    ("08", "the connection to the server was lost", "try again; what was not accepted is not stored"),
    ("57P", "the connection to the server was lost", "try again; what was not accepted is not stored"),
)


@contextmanager
def translated(where: str) -> Iterator[None]:
    """Turn what a database driver raises inside the block into StoreError; ``where`` names the project."""
    try:
        yield
    except SpecflowError as error:
        if isinstance(error, StoreError):
            error.where = error.where or where
        raise
    except Exception as error:
        fault = store_error(error, where)
        if fault is None:
            raise
        raise fault from error


def store_error(error: Exception, where: str) -> StoreError | None:
    """Return the StoreError for a driver's error (or SQLAlchemy's wrapper of one), None for any other error."""
    cause = getattr(error, "orig", None) or error
    if isinstance(cause, sqlite3.Error):
        return _fault(f"{getattr(cause, 'sqlite_errorname', '')}: {cause}", _SQLITE, cause, where)
    if type(cause).__module__.partition(".")[0] == "psycopg":
        state = getattr(cause, "sqlstate", None)
        if state is None:
            return StoreError(
                f"the database server does not answer ({_first_line(cause)})",
                where=where,
                hint="check the address, the name of the database and that the server runs",
            )
        return _fault(state, _POSTGRESQL, cause, where)
    return None


def _fault(
    code: str, known: tuple[tuple[str, str, str], ...], cause: BaseException, where: str
) -> StoreError:
    for start, message, hint in known:
        if code.startswith(start):
            return StoreError(message, where=where, hint=hint)
    return StoreError(
        f"the database refuses: {_first_line(cause)}",
        where=where,
        hint="the project is as it was before; report this message if it comes again",
    )


def _first_line(error: BaseException) -> str:
    return str(error).strip().partition("\n")[0]
