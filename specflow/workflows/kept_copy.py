"""Copies of evidence files in the project: when one is kept, where the file lay, and writing the copy out again."""

from __future__ import annotations

import hashlib
import os
from dataclasses import dataclass
from pathlib import Path, PurePosixPath

from specflow.errors import DocumentError, FileError
from specflow.exporters.files import write_file
from specflow.importers.readers import FileFingerprint, read_source
from specflow.model.base import code_key
from specflow.model.evidence import EvidenceFile
from specflow.store import ProjectStore
from specflow.workflows.attach_preview import AttachPreview
from specflow.workflows.found_files import sha256_of
from specflow.workflows.subjects import not_found

#: The largest file of which a copy is kept: the project is one file that people send to each other.
MOST_KEPT_BYTES = 64 * 1024 * 1024


@dataclass(frozen=True, slots=True)
class KeptCopy:
    """An evidence file with the bytes that were kept of it."""

    file: EvidenceFile
    content: bytes


def path_from_project(store: ProjectStore, path: Path) -> str:
    """Return where a file lies, seen from the folder of the project file, with ``/``.

    "" where that would be no use to another machine: outside the folder above the project's, on another drive, or
    when the project is in a database on a server.
    """
    if store.folder is None:
        return ""
    try:
        relative = Path(os.path.relpath(path.resolve(), store.folder.resolve()))
    except ValueError:  # another drive
        return ""
    if relative.parts[:2] == (os.pardir, os.pardir):
        return ""
    return str(PurePosixPath(*relative.parts))


def refuse_changed(preview: AttachPreview) -> None:
    """Raise FileError when the file is not the one that was previewed any more. It is not taken into memory again."""
    file, path = preview.measurements.file, preview.path
    try:
        found = sha256_of(path)
    except OSError as error:
        raise FileError(
            f"cannot be read any more: {error.strerror or error}",
            where=str(path),
            hint="look at the preview again",
        ) from error
    if found != file.sha256:
        raise FileError(
            "the file has changed since it was looked at", where=path.name, hint="look at the preview again"
        )


def unchanged_content(preview: AttachPreview) -> bytes:
    """Read the previewed file again and return its bytes. FileError when they are not those of the preview."""
    file = preview.measurements.file
    return read_source(preview.path, FileFingerprint(file.name, file.size, file.sha256)).content


def keeps_copy(preview: AttachPreview, *, asked: bool) -> bool:
    """Return whether a copy of the previewed file is to be kept: asked for, or the policy of the project.

    DocumentError when one was asked for and the file is too large. The policy passes over such files.
    """
    size = preview.measurements.file.size
    if size <= MOST_KEPT_BYTES:
        return asked or preview.snapshot.project.policy.keep_copies
    if asked:
        raise DocumentError(
            f"the file has {size >> 20} MiB; copies are kept of files up to {MOST_KEPT_BYTES >> 20} MiB",
            where=preview.path.name,
            hint="attach it without --keep, and archive the file itself",
        )
    return False


def kept_copy(store: ProjectStore, name: str) -> KeptCopy:
    """Return the kept copy of an evidence file, named by its id or its name.

    DocumentError when there is no such file or no copy of it, or the copy is damaged.
    """
    file = _file_named(store, name)
    return KeptCopy(file, kept_content(store, file))


def write_kept(copy: KeptCopy, target: Path | None, *, overwrite: bool = False) -> Path:
    """Write a kept copy to ``target`` (a file or a folder), else under its own name in this folder; return the path.

    FileError when the target exists or cannot be written; nothing is left half-written.
    """
    path = Path(Path(copy.file.name).name) if target is None else target
    path = path / Path(copy.file.name).name if path.is_dir() else path
    remedy = "say --overwrite, or name another file with -o"
    write_file(path, copy.content, overwrite=overwrite, remedy=remedy)
    return path


def kept_content(store: ProjectStore, file: EvidenceFile) -> bytes:
    """Return the kept bytes of a file. DocumentError when there are none, or they are not those that were received."""
    content = store.file_bytes(file.id)
    if content is None:
        raise DocumentError(
            "no copy of this file is kept",
            where=f"{file.id} {file.name}",
            hint="attach the file again with --keep; its tables stay as they are",
        )
    if hashlib.sha256(content).hexdigest() != file.sha256:
        raise DocumentError(
            "the kept copy is damaged: it has not the digest of the file that was received",
            where=f"{file.id} {file.name}",
            hint="restore the project from a backup, or use the original file",
        )
    return content


def _file_named(store: ProjectStore, name: str) -> EvidenceFile:
    snapshot = store.load()
    found = snapshot.find(EvidenceFile, name)
    named = [one for one in snapshot.all(EvidenceFile) if code_key(one.name) == code_key(name)]
    if found is not None:
        return found
    if len(named) > 1:
        raise DocumentError(
            f"{len(named)} files are called {name}: {', '.join(one.id for one in named)}",
            hint="name one by its id",
        )
    if not named:
        raise not_found("evidence file", name, [one.id for one in snapshot.all(EvidenceFile)])
    return named[0]
