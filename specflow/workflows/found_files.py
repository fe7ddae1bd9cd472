"""Files in folders: which of them are measurement files, which are passed over and why, and where a known one is."""

from __future__ import annotations

import hashlib
import os
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, field
from pathlib import Path

from specflow.errors import FileError
from specflow.importers.readers import READERS
from specflow.importers.readers.touchstone import is_touchstone
from specflow.model.evidence import EvidenceFile

_BLOCK = 1 << 20
_UNFINISHED = (".tmp", ".temp", ".part", ".partial", ".crdownload", ".swp", ".bak", "~")
_OWN = (".specflow", ".specflow-wal", ".specflow-shm")


@dataclass(frozen=True, slots=True)
class PassedOver:
    """A file of a folder that is not read, and why."""

    path: Path
    reason: str


@dataclass
class FoundFiles:
    """What some paths hold: measurement files in order, mapping files, and what is passed over."""

    files: list[Path] = field(default_factory=list)
    mappings: list[Path] = field(default_factory=list)
    passed_over: list[PassedOver] = field(default_factory=list)


def find_files(paths: Sequence[Path]) -> FoundFiles:
    """Return the files named, and those of the folders named and of all folders below, sorted, each once.

    In folders, files that are hidden, locked, unfinished or of a kind that is not read are passed over, and links to
    folders are not followed; a file that is named itself is always taken. FileError for a path that is not there.
    """
    found = FoundFiles()
    seen: set[Path] = set()
    for path in paths:
        if not path.exists():
            raise FileError("there is no such file or folder", where=str(path), hint="check the path")
        is_folder = path.is_dir()
        for file in _below(path, found) if is_folder else [path]:
            if file.resolve() not in seen:
                seen.add(file.resolve())
                _sort_in(file, found, named=not is_folder)
    return found


def _sort_in(file: Path, found: FoundFiles, *, named: bool) -> None:
    if not named and file.suffix.lower() == ".toml" and not reason_of_name(file):
        found.mappings.append(file)
        return
    reason = "" if named else reason_to_pass(file)
    if reason:
        found.passed_over.append(PassedOver(file, reason))
    else:
        found.files.append(file)


def reason_to_pass(path: Path) -> str:
    """Return why a file of a folder is not read; "" when it is."""
    reason = reason_of_name(path)
    if reason:
        return reason
    endings = {ending for reader in READERS for ending in reader.endings}
    if path.suffix.lower() not in endings and not is_touchstone(path.name):
        return f"files of the kind {path.suffix!r} are not read" if path.suffix else "it has no ending"
    return "" if path.is_file() else "no plain file"


def reason_of_name(path: Path) -> str:
    """Return what a name says against a file: a lock, a temporary copy, hidden, or a project."""
    name = path.name
    if name.startswith(("~$", ".~lock")):
        return "the lock of a program that has the file open"
    if name.startswith("."):
        return "hidden"
    if name.startswith("~") or name.lower().endswith(_UNFINISHED):
        return "a temporary or unfinished copy"
    return "a project, no results" if name.lower().endswith(_OWN) else ""


def _below(folder: Path, found: FoundFiles) -> Iterator[Path]:
    """Give the files of a folder and of those below it, in the order of their paths."""
    try:
        entries = sorted(folder.iterdir(), key=lambda path: (path.name.casefold(), path.name))
    except OSError as error:
        raise FileError(
            f"the folder cannot be read: {error.strerror or error}",
            where=str(folder),
            hint="check the rights on it",
        ) from error
    for path in entries:
        if not path.is_dir():
            yield path
        elif path.is_symlink():
            found.passed_over.append(PassedOver(path, "a link to a folder"))
        elif path.name.startswith("."):
            found.passed_over.append(PassedOver(path, "a hidden folder"))
        else:
            yield from _below(path, found)


@dataclass(frozen=True, slots=True)
class Whereabouts:
    """Where a stored file is now: ``same`` has its bytes, ``other`` its name and other bytes; both None: nowhere.

    Both: the bytes lie there under another name.
    """

    same: Path | None = None
    other: Path | None = None


class FileSearch:
    """Finds stored files among some paths, by name and by bytes; no file is hashed twice."""

    def __init__(self, paths: Iterable[Path]) -> None:
        self._by_name: dict[str, list[Path]] = {}
        self._by_size: dict[int, list[Path]] = {}
        self._hashes: dict[Path, str] = {}
        for path in dict.fromkeys(paths):
            try:
                size = path.stat().st_size
            except OSError:
                continue
            self._by_name.setdefault(path.name, []).append(path)
            self._by_size.setdefault(size, []).append(path)

    def find(self, file: EvidenceFile) -> Whereabouts:
        """Return where a file is, the one under its own name first."""
        named = self._by_name.get(file.name, [])
        sized = self._by_size.get(file.size, [])
        near = sorted(named, key=lambda path: not _ends_as(path, file.path))
        other = near[0] if near else None
        for path in sorted(sized, key=lambda path: (path.name != file.name, not _ends_as(path, file.path))):
            if self._hash(path) == file.sha256:
                return Whereabouts(path, other if path.name != file.name else None)
        return Whereabouts(None, other)

    def unknown(self, paths: Iterable[Path], files: Sequence[EvidenceFile]) -> list[Path]:
        """Return those paths that have neither the name nor the bytes of one of the files."""
        names = {file.name for file in files}
        sums = {(file.size, file.sha256) for file in files}
        sizes = {size for size, _ in sums}
        return [
            path
            for path in paths
            if path.name not in names
            and not (path.stat().st_size in sizes and (path.stat().st_size, self._hash(path)) in sums)
        ]

    def _hash(self, path: Path) -> str:
        if path not in self._hashes:
            try:
                self._hashes[path] = sha256_of(path)
            except OSError:
                self._hashes[path] = ""
        return self._hashes[path]


def _ends_as(path: Path, recorded: str) -> bool:
    return bool(recorded) and path.as_posix().endswith(recorded.removeprefix("../"))


def sha256_of(path: Path) -> str:
    """Return the digest of a file, read piece by piece. OSError when it cannot be read."""
    sums = hashlib.sha256()
    with path.open("rb") as stream:
        while block := stream.read(_BLOCK):
            sums.update(block)
    return sums.hexdigest()


def shown_path(path: Path) -> str:
    """Return a path as it is shown: from the current folder where it is below it."""
    try:
        return os.path.relpath(path) if path.resolve().is_relative_to(Path.cwd()) else str(path)
    except ValueError:  # another drive
        return str(path)
