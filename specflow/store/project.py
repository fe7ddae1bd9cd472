"""A project that is open: load it, change it, look back.

What needs SQLAlchemy is imported where it is used: loading does without it.
"""

from __future__ import annotations

import uuid
from collections.abc import Callable, Mapping, Sequence
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING, Self

from specflow.errors import DocumentError, StoreError
from specflow.exchange import payload_text
from specflow.model.baseline import Baseline
from specflow.model.change import Change
from specflow.model.evidence import EvidenceColumns
from specflow.model.project import Project
from specflow.model.snapshot import Snapshot
from specflow.store.backup import back_up, create_file
from specflow.store.faults import translated
from specflow.store.history import HistoryEntry, read_history
from specflow.store.place import APPLICATION_ID, PATIENCE, Place, ProjectFile, place_of
from specflow.store.reading import load_snapshot, read_revision
from specflow.store.schema import check_version, migrate, newest_version, stored_version

if TYPE_CHECKING:
    from specflow.store.batch import Batch

Clock = Callable[[], datetime]


def utc_now() -> datetime:
    """Return the time of the machine."""
    return datetime.now(UTC)


def create_project(
    where: str | Path,
    project: Project,
    *,
    by: str = "specflow",
    clock: Clock = utc_now,
    patience: float = PATIENCE,
) -> ProjectStore:
    """Create an empty project in a new file or an empty database, and open it.

    Raises StoreError when there is a project (or any other file) already; what was begun is then not left behind.
    """
    place = place_of(where, patience=patience)
    if isinstance(place, ProjectFile):
        create_file(place.path, lambda: _fill(place, project, by, clock))
    else:
        with translated(place.name):
            place.check()
            _fill(place, project, by, clock)
    return ProjectStore(place, clock)


def _fill(place: Place, project: Project, by: str, clock: Clock) -> None:
    from sqlalchemy import inspect

    from specflow.store.rows import project_state

    if isinstance(place, ProjectFile):
        with place.reading() as run:
            run(f"PRAGMA application_id = {APPLICATION_ID}")
            run("PRAGMA journal_mode = WAL")
    with place.migrating() as connection:
        if inspect(connection).has_table("alembic_version"):
            raise StoreError(
                "there is a project already", where=place.name, hint="open it, or name another database"
            )
        migrate(connection)
        created = {"pk": 1, "uuid": str(uuid.uuid4()), "created_at": _iso(clock), "revision": 0}
        connection.execute(project_state.insert().values(created))
    add = Change(noun="project", id=project.id, action="add", after=payload_text(project))
    ProjectStore(place, clock).apply([add], by=by, reason="created")


def open_project(
    where: str | Path,
    *,
    clock: Clock = utc_now,
    read_only: bool = False,
    patience: float = PATIENCE,
    backup_folder: Path | None = None,
) -> ProjectStore:
    """Open a project; one of an older schema is copied aside (see ``ProjectStore.notes``) and upgraded first.

    ``patience``: seconds that a write waits for another program's. ``backup_folder``: where the copy goes; beside
    the file, or the current folder for a server. Raises StoreError when there is no project, it is not one, it is
    of a newer schema, or of an older one and only to be read.
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
            hint="open it once for writing; it is copied and upgraded then",
        )
    file = (
        place.path
        if isinstance(place, ProjectFile)
        else Path(place.name.rpartition("/")[2].partition("?")[0])
    )
    with translated(place.name):
        with place.reading() as run:
            before = stored_version(run)
        copy = (backup_folder or file.parent) / f"{file.stem}-schema{before}-{clock():%Y%m%dT%H%M%S}.specflow"
        back_up(place, copy)
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
    def revision(self) -> int:
        """The project revision as stored now; it grows when anybody accepts changes, so it may be polled."""
        with translated(self.name), self._place.reading() as run:
            return read_revision(run)

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

        ``columns``: the arrays of every evidence table that is added, by id. ``files``: bytes of added evidence
        files that are to be kept. ``expected_revision``: refuse when the project went on since.

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
        from specflow.store.writing import Acceptance, write_batch, write_history

        if self._place.read_only:
            raise StoreError("the project was opened to be read only", where=self.name)
        if not by.strip():
            raise DocumentError("nobody is named who accepts the changes", where=self.name)
        if not batch.edits:
            return self.revision
        acceptance = Acceptance(by.strip(), reason, expected_revision)
        with translated(self.name), self._place.writing() as connection:
            revision = write_batch(connection, batch, acceptance)
            write_history(connection, batch.edits, revision, acceptance, _iso(self._clock))
        return revision

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
        back_up(self._place, Path(path))


def _iso(clock: Clock) -> str:
    return clock().astimezone(UTC).isoformat(timespec="seconds").replace("+00:00", "Z")
