"""Copies of a whole project, taken while others may be writing."""

from __future__ import annotations

import sqlite3
from collections.abc import Callable
from contextlib import closing
from pathlib import Path
from typing import Any

from specflow.errors import StoreError
from specflow.store.faults import translated
from specflow.store.place import APPLICATION_ID, Place, ProjectFile

_ROWS_AT_ONCE = 500


def back_up(place: Place, target: Path) -> None:
    """Write a copy of the project to a new file; from a server it becomes a project file of the same schema.

    Raises StoreError when the file exists or cannot be written; a copy that was not finished is deleted.
    """
    create_file(
        target, lambda: _copy_file(place, target) if isinstance(place, ProjectFile) else _copy(place, target)
    )


def create_file(target: Path, fill: Callable[[], None]) -> None:
    """Create a new file and let ``fill`` write it; delete it when that does not end well."""
    try:
        target.touch(exist_ok=False)
    except FileExistsError:
        raise StoreError(
            "there is a file of this name already", where=str(target), hint="name another one"
        ) from None
    except OSError as error:
        raise StoreError(f"cannot be created: {error.strerror}", where=str(target)) from None
    try:
        with translated(str(target)):
            fill()
    except BaseException:
        for leftover in (target, Path(f"{target}-wal"), Path(f"{target}-shm"), Path(f"{target}-journal")):
            leftover.unlink(missing_ok=True)
        raise


def _copy_file(place: ProjectFile, target: Path) -> None:
    with closing(place.connect()) as source, closing(sqlite3.connect(target)) as copy:
        source.backup(copy)


def _copy(place: Place, target: Path) -> None:
    """Copy table by table as the source has them, which may be an older schema than this program's."""
    from sqlalchemy import MetaData, create_engine, event, insert, select

    tables = MetaData()

    @event.listens_for(tables, "column_reflect")
    def in_general_terms(_inspector: Any, _table: Any, column: Any) -> None:
        column["type"] = column["type"].as_generic()

    with place.querying() as source, create_engine(f"sqlite:///{target}").begin() as copy:
        tables.reflect(source)
        tables.create_all(copy)
        for table in tables.sorted_tables:
            rows = source.execution_options(yield_per=_ROWS_AT_ONCE).execute(select(table)).mappings()
            for portion in rows.partitions(_ROWS_AT_ONCE):
                copy.execute(insert(table), [dict(row) for row in portion])
        copy.exec_driver_sql(f"PRAGMA application_id = {APPLICATION_ID}")
