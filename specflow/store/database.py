"""A project in a PostgreSQL database on a server."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from functools import cached_property
from pathlib import Path
from typing import TYPE_CHECKING, Any

from specflow.errors import StoreError
from specflow.store.faults import translated
from specflow.store.file import APPLICATION_ID, new_file
from specflow.store.place import PATIENCE, Run

if TYPE_CHECKING:
    from sqlalchemy import Connection, Engine

_ROWS_AT_ONCE = 500


class ProjectDatabase:
    """A PostgreSQL database of its own, by its address (``postgresql+psycopg://user@host/database``)."""

    def __init__(self, address: str, *, read_only: bool = False, patience: float = PATIENCE) -> None:
        self._address = address
        self.read_only = read_only
        self.patience = patience

    @property
    def name(self) -> str:
        """The address without its password."""
        return self._engine.url.render_as_string(hide_password=True)

    @property
    def folder(self) -> None:
        """A database lies in no folder."""
        return None

    @property
    def copies(self) -> Path:
        """The name of the database: copies go to the current folder."""
        return Path(self._engine.url.database or "project")

    @cached_property
    def _engine(self) -> Engine:
        from sqlalchemy import create_engine, make_url
        from sqlalchemy.exc import ArgumentError

        try:
            url = make_url(self._address).set(drivername="postgresql+psycopg")
            said = "connect_timeout" in url.query  # what is given here outdoes what the address says
            return create_engine(url, connect_args={} if said else {"connect_timeout": 10})
        except ImportError:  # also: psycopg is there, but the library of PostgreSQL below it is not
            raise StoreError(
                "the driver for PostgreSQL is not installed",
                where="project address",
                hint="install it: pip install 'specflow-rf[server]'",
            ) from None
        except (ArgumentError, ValueError):
            raise StoreError(
                "not an address of a database",
                where="project address",
                hint="write it as postgresql+psycopg://user@host/database",
            ) from None

    def check(self) -> None:
        """Raise StoreError when the database does not answer."""
        with translated(self.name), self.reading() as run:
            run("SELECT 1")

    @contextmanager
    def new(self) -> Iterator[None]:
        """Nothing to prepare: the tables are created in the transaction that fills them."""
        self.check()
        with translated(self.name):
            yield

    @contextmanager
    def reading(self) -> Iterator[Run]:
        """Open a connection to read with."""
        with self._engine.connect() as connection:
            yield connection.exec_driver_sql

    @contextmanager
    def querying(self) -> Iterator[Connection]:
        """Open a transaction that only reads, and sees one moment."""
        with self._engine.connect().execution_options(isolation_level="REPEATABLE READ") as connection:
            yield connection

    @contextmanager
    def writing(self) -> Iterator[Connection]:
        """Open a write transaction that waits only so long for another one."""
        with self._engine.begin() as connection:
            connection.exec_driver_sql(f"SET LOCAL lock_timeout = {int(self.patience * 1000)}")
            yield connection

    @contextmanager
    def migrating(self) -> Iterator[Connection]:
        """Open a write transaction that keeps everybody else from changing the schema too."""
        with self.writing() as connection:
            connection.exec_driver_sql(f"SELECT pg_advisory_xact_lock({APPLICATION_ID})")
            yield connection

    def copy_to(self, target: Path) -> None:
        """Copy table by table, as they are here: the schema may be older than this program's."""
        from sqlalchemy import MetaData, create_engine, event, insert, select

        tables = MetaData()

        @event.listens_for(tables, "column_reflect")
        def in_general_terms(_inspector: object, _table: object, column: Any) -> None:
            column["type"] = column["type"].as_generic()

        with (
            new_file(target),
            self.querying() as source,
            create_engine(f"sqlite:///{target}").begin() as copy,
        ):
            tables.reflect(source)
            tables.create_all(copy)
            for table in tables.sorted_tables:
                rows = source.execution_options(yield_per=_ROWS_AT_ONCE).execute(select(table)).mappings()
                for portion in rows.partitions(_ROWS_AT_ONCE):
                    copy.execute(insert(table), [dict(row) for row in portion])

    def close(self) -> None:
        """Close the pooled connections."""
        self._engine.dispose()
