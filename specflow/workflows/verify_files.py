"""Verify the files that evidence was read from: which are unchanged, and which cells of the others read differently."""

from __future__ import annotations

import tempfile
from collections import Counter
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field
from enum import StrEnum
from pathlib import Path
from typing import Any

from specflow.errors import DocumentError
from specflow.model.base import code_key
from specflow.model.evidence import EvidenceFile, EvidenceTable, Supersession, Withdrawal
from specflow.model.snapshot import Snapshot
from specflow.store import ProjectStore
from specflow.workflows.found_files import FileSearch, Whereabouts, find_files, reason_to_pass, shown_path
from specflow.workflows.kept_copy import kept_content
from specflow.workflows.reread import Rereader, TableCheck

Tell = Callable[[str], object]


class FileState(StrEnum):
    """What became of a file that evidence was read from."""

    UNCHANGED = "unchanged"
    MOVED = "moved"  # the same bytes under another name
    CHANGED = "changed"
    VANISHED = "vanished"
    KEPT = "kept copy"  # the original is not there; the copy in the project was read
    DAMAGED = "damaged copy"  # the original is not there, and the copy in the project has other bytes
    REPLACED = "replaced"  # changed or gone, and all its tables are superseded or withdrawn
    READ_OTHERWISE = (
        "reads otherwise"  # the same bytes, and this version or this project reads them otherwise
    )

    @property
    def is_fault(self) -> bool:
        """Whether the stored evidence can no longer be shown to be what the file says."""
        return self not in (FileState.UNCHANGED, FileState.MOVED, FileState.KEPT, FileState.REPLACED)


@dataclass(frozen=True, slots=True)
class FileCheck:
    """One stored file: its state, where it is now ("" nowhere), and its tables read again."""

    file: EvidenceFile
    state: FileState
    found: str = ""
    tables: Sequence[TableCheck] = ()

    @property
    def cells(self) -> int:
        """How many stored cells read differently."""
        return sum(table.count for table in self.tables)


@dataclass(frozen=True)
class Verification:
    """All files that were looked for, and the measurement files of the folders that are not attached."""

    checks: Sequence[FileCheck]
    strangers: Sequence[Path] = field(default=())

    @property
    def is_clean(self) -> bool:
        """Whether no file has changed or vanished."""
        return not any(check.state.is_fault for check in self.checks)

    def counts(self) -> str:
        """Say how many files there are of each state."""
        found = Counter(check.state for check in self.checks)
        total = f"{len(self.checks)} file{'s' * (len(self.checks) != 1)}"
        return f"{total}: " + (", ".join(f"{found[one]} {one}" for one in FileState if found[one]) or "none")


def verify_files(
    store: ProjectStore, paths: Sequence[Path] = (), tell: Tell = lambda words: None
) -> Verification:
    """Read the original files again, each table by the mapping revision it was read with, and compare cell by cell.

    Files are looked for in ``paths``: in folders (and those below) by name and by bytes; where only files are named,
    those alone are checked. Without paths, where they lay when they were attached and in those folders. A file that is
    not found is read from its kept copy, if there is one. ``tell`` is called with each name. Nothing is stored.

    FileError for a path that is not there, DocumentError when a file that is named was never attached.
    """
    snapshot = store.load()
    wanted, search, strangers = _scope(store, snapshot, paths)
    reader = Rereader(store, snapshot)
    checks = []
    for file in wanted:
        tell(file.name)
        checks.append(_check(store, snapshot, reader, file, search.find(file)))
    return Verification(tuple(checks), tuple(strangers))


def _scope(
    store: ProjectStore, snapshot: Snapshot, paths: Sequence[Path]
) -> tuple[Sequence[EvidenceFile], FileSearch, Sequence[Path]]:
    """Which stored files are wanted, where to look for them, and what in the folders is not attached."""
    stored = snapshot.all(EvidenceFile)
    if not paths:
        if store.folder is None:
            raise DocumentError(
                "a project in a database does not know where its files lie",
                where=store.name,
                hint="name their folder: specflow attach --verify FOLDER",
            )
        return stored, FileSearch(_recorded_places(store, stored)), ()
    found = find_files(paths)
    there = [*found.files, *(one.path for one in found.passed_over if one.path.is_file())]
    search = FileSearch(there)
    strangers = search.unknown(found.files, stored)
    if any(path.is_dir() for path in paths):
        return stored, search, strangers
    if strangers:
        raise DocumentError(
            "this file was never attached: neither its name nor its content is known",
            where=str(strangers[0]),
            hint="specflow attach FILE attaches it; specflow export --table evidence lists what is known",
        )
    return [file for file in stored if search.find(file) != Whereabouts()], search, ()


def _recorded_places(store: ProjectStore, stored: Sequence[EvidenceFile]) -> Iterator[Path]:
    """Give the places where files lay when they were attached, then what else those folders and the project's hold."""
    home = store.folder or Path()
    recorded = [home / file.path for file in stored if file.path]
    yield from recorded
    for folder in dict.fromkeys([*(path.parent for path in recorded), home]):
        if folder.is_dir():
            yield from (path for path in sorted(folder.iterdir()) if not reason_to_pass(path))


def _check(
    store: ProjectStore, snapshot: Snapshot, reader: Rereader, file: EvidenceFile, found: Whereabouts
) -> FileCheck:
    tables = [
        table
        for table in snapshot.tables
        if code_key(table.file) == code_key(file.id) and table.derivation is None
    ]
    if found.same is not None:
        checks = reader.check(tables, found.same)
        state = FileState.UNCHANGED if found.same.name == file.name else FileState.MOVED
        state = state if all(check.is_same for check in checks) else FileState.READ_OTHERWISE
        where = shown_path(found.same)
        if found.other is not None:
            where += f" ({shown_path(found.other)} has other bytes)"
        return FileCheck(file, state, where, checks)
    if _is_replaced(tables, snapshot) and not file.kept:
        return FileCheck(file, FileState.REPLACED, shown_path(found.other) if found.other else "")
    if file.kept:
        return _check_copy(store, reader, file, tables, found.other)
    if found.other is not None:
        return FileCheck(file, FileState.CHANGED, shown_path(found.other), reader.check(tables, found.other))
    return FileCheck(file, FileState.VANISHED)


def _is_replaced(tables: Sequence[EvidenceTable], snapshot: Snapshot) -> bool:
    """Whether nothing that was read from a file stands any more."""
    gone = {code_key(one.earlier) for one in snapshot.all(Supersession) if one.rows is None}
    gone |= {code_key(one.table) for one in snapshot.all(Withdrawal) if one.rows is None}
    return bool(tables) and all(code_key(table.id) in gone for table in tables)


def _check_copy(
    store: ProjectStore,
    reader: Rereader,
    file: EvidenceFile,
    tables: Sequence[EvidenceTable],
    other: Path | None,
) -> FileCheck:
    """Check a file that is not there by its kept copy; one that is there with other bytes has changed all the same."""
    if other is not None:
        return FileCheck(file, FileState.CHANGED, shown_path(other), reader.check(tables, other))
    try:
        content = kept_content(store, file)
    except DocumentError:
        return FileCheck(file, FileState.DAMAGED, "in the project")
    if not file.importer_version:  # made by the project itself: no reader of files has a part in it
        return FileCheck(file, FileState.KEPT, "in the project")
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / Path(file.name).name
        path.write_bytes(content)
        checks = reader.check(tables, path)
    same = all(check.is_same for check in checks)
    return FileCheck(file, FileState.KEPT if same else FileState.READ_OTHERWISE, "in the project", checks)


def verification_as_json(verification: Verification) -> dict[str, Any]:
    """Return a verification as data for scripts."""
    return {
        "clean": verification.is_clean,
        "files": [_file_json(check) for check in verification.checks],
        "not_attached": [shown_path(path) for path in verification.strangers],
    }


def _file_json(check: FileCheck) -> dict[str, Any]:
    return {
        "id": check.file.id,
        "name": check.file.name,
        "sha256": check.file.sha256,
        "state": str(check.state),
        "found": check.found,
        "tables": [
            {
                "table": table.table,
                "differing": table.count,
                "added": table.added,
                "problem": table.problem,
                "cells": [
                    {"cell": one.cell, "what": one.what, "was": one.was, "now": one.now}
                    for one in table.differences
                ],
            }
            for table in check.tables
        ],
    }
