"""A project that is open: load it, change it, look back.

What needs SQLAlchemy is imported where it is used: loading does without it.
"""

from __future__ import annotations

import uuid
from collections.abc import Callable, Mapping, Sequence
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING, Self

from specflow.errors import StoreError
from specflow.exchange import payload_text
from specflow.model.baseline import Baseline
from specflow.model.change import Change
from specflow.model.evidence import EvidenceColumns
from specflow.model.project import Project
from specflow.model.snapshot import Snapshot
from specflow.store.database import ProjectDatabase
from specflow.store.faults import translated
from specflow.store.file import ProjectFile
from specflow.store.history import HistoryEntry, read_history
from specflow.store.place import PATIENCE, Place
from specflow.store.reading import load_snapshot, read_revision
from specflow.store.schema import check_version, migrate, newest_version, stored_version

if TYPE_CHECKING:
    from sqlalchemy import Connection

    from specflow.store.batch import Batch

Clock = Callable[[], datetime]


def utc_now() -> datetime:
    """Return the time of the machine."""
    return datetime.now(UTC)


def place_of(where: str | Path, *, read_only: bool = False, patience: float = PATIENCE) -> Place:
    """Return the place that a path or an address names. Raises StoreError for an address of another kind."""
    text = str(where)
    if "://" not in text:
        return ProjectFile(Path(text), read_only=read_only, patience=patience)
    if text.startswith(("postgresql:", "postgresql+psycopg:")):
        return ProjectDatabase(text, read_only=read_only, patience=patience)
    raise StoreError(
        f"{text.partition('://')[0]} databases are not supported",
        where="project address",
        hint="give the path of a *.specflow file or a postgresql+psycopg:// address",
    )


def create_project(
    where: str | Path,
    project: Project,
    *,
    by: str = "specflow",
    clock: Clock = utc_now,
    patience: float = PATIENCE,
) -> ProjectStore:
    """Create a project in a new file or an empty database, and open it. It holds ``project``, at revision 1.

    Raises StoreError when there is a project (or any other file) already; what was begun is then not left behind.
    """
    place = place_of(where, patience=patience)
    with place.new(), place.migrating() as connection:
        _fill(connection, place.name, project, by, clock)
    return ProjectStore(place, clock)


def _fill(connection: Connection, name: str, project: Project, by: str, clock: Clock) -> None:
    from sqlalchemy import inspect

    from specflow.store.batch import Batch
    from specflow.store.convert import read_edits
    from specflow.store.rows import project_state
    from specflow.store.writing import Acceptance, accept

    if inspect(connection).has_table("alembic_version"):
        raise StoreError("there is a project already", where=name, hint="open it, or name another database")
    migrate(connection)
    state = {"pk": 1, "uuid": str(uuid.uuid4()), "created_at": _iso(clock), "revision": 0}
    connection.execute(project_state.insert().values(state))
    add = Change(noun="project", id=project.id, action="add", after=payload_text(project))
    accept(connection, Batch(read_edits([add])), Acceptance(by, "created"), lambda: _iso(clock))


def open_project(
    where: str | Path,
    *,
    clock: Clock = utc_now,
    read_only: bool = False,
    patience: float = PATIENCE,
    backup_folder: Path | None = None,
) -> ProjectStore:
    """Open a project; one of an older schema is copied aside (see ``ProjectStore.notes``) and upgraded first.

    ``patience``: seconds that a write waits for another program's. ``backup_folder``: where the copy goes instead of
    beside the file (for a server: the current folder). Raises StoreError when there is no project, it is not one,
    it is of a newer schema, or of an older one and only to be read.
    """
    place = place_of(where, read_only=read_only, patience=patience)
    place.check()
    if check_version(place):
        return ProjectStore(place, clock)
    return ProjectStore(place, clock, notes=(_upgrade(place, clock, backup_folder),))


def _upgrade(place: Place, clock: Clock, backup_folder: Path | None) -> str:
    """Copy the project aside and bring its schema up to date; return what was done, in words."""
    if place.read_only:
        raise StoreError(
            "the project has an older schema and is opened to be read only",
            where=place.name,
            hint="any command that stores (load, attach, allocate; not with --dry-run), as in specflow load, copies it "
            "aside and upgrades it first",
        )
    with translated(place.name):
        with place.reading() as run:
            before = stored_version(run)
        # the ending is another, so that a folder with one project goes on having one
        name = f"{place.copies.name}.specflow-schema{before}-{clock():%Y%m%dT%H%M%S}"
        copy = (backup_folder or place.copies.parent) / name
        place.copy_to(copy)
        with place.migrating() as connection:
            migrate(connection)
    return f"upgraded from schema {before} to {newest_version()}; the project as it was is kept in {copy}"


class ProjectStore:
    """A project that is open. Use it in a ``with`` statement, so that closing leaves one complete file.

    ``notes`` tells what happened on opening (an upgrade, and the name of the copy made before).
    """

    def __init__(self, place: Place, clock: Clock = utc_now, notes: tuple[str, ...] = ()) -> None:
        self._place = place
        self._clock = clock
        self.notes = notes

    def __enter__(self) -> Self:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    def close(self) -> None:
        """Let go of the project; what was written is moved from the log into the file itself."""
        self._place.close()

    @property
    def name(self) -> str:
        """The path or the address (without password)."""
        return self._place.name

    @property
    def folder(self) -> Path | None:
        """The folder that the project file lies in; None for a database on a server."""
        return self._place.folder

    @property
    def revision(self) -> int:
        """The project revision as stored now; it grows when anybody accepts changes, so it may be polled."""
        with translated(self.name), self._place.reading() as run:
            return read_revision(run)

    def now(self) -> str:
        """Return the time of the project's clock, UTC, as it is stored."""
        return _iso(self._clock)

    def load(self) -> Snapshot:
        """Return all documents as stored now; the arrays of evidence are read when they are asked for."""
        return load_snapshot(self._place)

    def apply(
        self,
        changes: Sequence[Change],
        *,
        columns: Mapping[str, EvidenceColumns] | None = None,
        files: Mapping[str, bytes] | None = None,
        by: str,
        reason: str = "",
        expected_revision: int | None = None,
    ) -> int:
        """Store changes, all or none; return the project revision (unchanged when there are no changes).

        ``columns``: the arrays of every evidence table that is added, by id. ``files``: bytes of evidence
        files of which a copy is to be kept from now on. ``expected_revision``: refuse when the project went on since.

        Raises ConflictError when somebody else changed the same documents (or the project went on), DocumentError
        when the changes contradict each other or the project, StoreError when the database cannot be written. The
        store is unchanged then.
        """
        from specflow.store.batch import make_batch

        return self._write(make_batch(changes, columns or {}, files or {}), by, reason, expected_revision)

    def save_baseline(self, baseline: Baseline, content: bytes, *, by: str = "") -> int:
        """Store a baseline with the bytes it froze; return the project revision.

        Raises DocumentError when the bytes are not those that the document tells of.
        """
        from specflow.store.batch import make_baseline_batch

        return self._write(
            make_baseline_batch(baseline, content), by or baseline.created_by, "baseline", None
        )

    def _write(self, batch: Batch, by: str, reason: str, expected_revision: int | None) -> int:
        from specflow.store.writing import Acceptance, accept

        if self._place.read_only:
            raise StoreError("the project was opened to be read only", where=self.name)
        if not batch.edits:
            return self.revision
        with translated(self.name), self._place.writing() as connection:
            return accept(
                connection, batch, Acceptance(by, reason, expected_revision), lambda: _iso(self._clock)
            )

    def history(self, noun: str | None = None, id: str | None = None) -> list[HistoryEntry]:
        """Return the accepted changes of the project, of one noun or of one document, oldest first."""
        with translated(self.name), self._place.querying() as connection:
            return list(read_history(connection, noun, id))

    def baseline_bytes(self, id: str) -> bytes:
        """Return the bytes that a baseline froze. Raises DocumentError when there is no such baseline."""
        from specflow.store.kept import read_baseline

        with translated(self.name), self._place.querying() as connection:
            return read_baseline(connection, id)

    def file_bytes(self, id: str) -> bytes | None:
        """Return the kept bytes of an evidence file, None when none were kept."""
        from specflow.store.kept import read_file

        with translated(self.name), self._place.querying() as connection:
            return read_file(connection, id)

    def backup(self, path: str | Path) -> None:
        """Write a copy of the project to a new file, while others may be writing."""
        with translated(self.name):
            self._place.copy_to(Path(path))


def _iso(clock: Clock) -> str:
    return clock().astimezone(UTC).isoformat(timespec="seconds").replace("+00:00", "Z")
