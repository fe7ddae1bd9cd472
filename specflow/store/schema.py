"""Versions of the schema: which one a project has, which one this program knows, and the way between them.

Versions are the numbers of the files in ``migrations/versions`` (``0001_...py``). The folder is found inside the
package (a wheel ships it there) or beside it (a checkout), always from where this very package lies.
"""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import specflow
from specflow.errors import StoreError
from specflow.store.faults import translated
from specflow.store.place import Place, Run

if TYPE_CHECKING:
    from alembic.config import Config
    from sqlalchemy import Connection


def migrations_folder() -> Path:
    """Return the folder of the migrations that belong to this copy of the package."""
    package = Path(specflow.__file__).parent
    for folder in (package / "migrations", package.parent / "migrations"):
        if (folder / "env.py").is_file():
            return folder
    raise StoreError("the migrations are missing", where=str(package), hint="install specflow again")


def newest_version() -> int:
    """Return the version of the schema that this program knows."""
    versions = (migrations_folder() / "versions").glob("[0-9][0-9][0-9][0-9]_*.py")
    return max(int(file.name[:4]) for file in versions)


def stored_version(run: Run) -> int:
    """Return the version of the schema that a project has. Raises StoreError when the tables are of another program."""
    rows = [
        str(version) for (version,) in run("SELECT version_num FROM alembic_version CROSS JOIN project_state")
    ]
    if len(rows) != 1 or not rows[0].isdecimal():
        raise StoreError("not a specflow project: its tables are of another program or incomplete")
    return int(rows[0])


def check_version(place: Place) -> bool:
    """Return whether the schema is the one this program knows; False when it is older.

    Raises StoreError when it is newer: nothing of it is touched.
    """
    with translated(place.name), place.reading() as run:
        stored = stored_version(run)
    newest = newest_version()
    if stored > newest:
        raise StoreError(
            f"the project has schema {stored}; this program knows schemas up to {newest}",
            where=place.name,
            hint="update specflow: a newer version of it wrote the project",
        )
    return stored == newest


def migrate(connection: Connection, version: str = "head") -> None:
    """Bring the schema to a version ("head", "base" or a number as text) within the transaction of ``connection``."""
    from alembic import command

    config = alembic_config(connection)
    current = config.attributes["current"]
    going_down = version == "base" or (version.isdigit() and int(version) < current)
    (command.downgrade if going_down else command.upgrade)(config, version)


def alembic_config(connection: Connection) -> Config:
    """Return an Alembic configuration for the open ``connection``, made in code: there is no ``alembic.ini``."""
    from alembic.config import Config
    from alembic.runtime.migration import MigrationContext

    config = Config()
    config.set_main_option("script_location", str(migrations_folder()).replace("%", "%%"))
    config.attributes["connection"] = connection
    config.attributes["current"] = int(MigrationContext.configure(connection).get_current_revision() or 0)
    return config
