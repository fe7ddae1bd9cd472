"""The bytes of a file, read once, and their fingerprint.

Everything after this works on the bytes in memory, so what was hashed is what is read, whatever happens to the file.
"""

from __future__ import annotations

import hashlib
from dataclasses import dataclass
from pathlib import Path

from specflow.errors import FileError

MAX_FILE_BYTES = 512 * 1024 * 1024


@dataclass(frozen=True, slots=True)
class FileFingerprint:
    """What identifies the content of a file: its name without folders, its size and its SHA-256."""

    name: str
    size: int
    sha256: str


@dataclass(frozen=True, slots=True)
class Source:
    """The content of one file in memory."""

    fingerprint: FileFingerprint
    content: bytes

    @property
    def name(self) -> str:
        """The file name, as messages give it."""
        return self.fingerprint.name


def read_source(path: Path, expected: FileFingerprint | None = None) -> Source:
    """Read a file once.

    Raises FileError when it is missing, no plain file, empty or too large, when it changes while it is read, and when
    ``expected`` (the fingerprint seen at the preview) is given and the content is another.
    """
    try:
        content = _read(path)
    except OSError as error:
        raise FileError(
            f"cannot be read: {error.strerror or error}",
            where=path.name,
            hint="check the path and its permissions",
        ) from error
    if not content:
        raise FileError("the file is empty (0 bytes)", where=path.name, hint="export it again")
    fingerprint = FileFingerprint(path.name, len(content), hashlib.sha256(content).hexdigest())
    if expected is not None and expected.sha256 != fingerprint.sha256:
        raise FileError(
            "the file has changed since it was looked at", where=path.name, hint="look at the preview again"
        )
    return Source(fingerprint, content)


def _read(path: Path) -> bytes:
    if not path.exists():
        raise FileError("there is no such file", where=str(path), hint="check the path")
    if not path.is_file():
        kind = "a folder" if path.is_dir() else "no plain file"
        raise FileError(f"this is {kind}", where=str(path), hint="name one workbook or csv file")
    before = path.stat()
    if before.st_size > MAX_FILE_BYTES:
        size, most = before.st_size >> 20, MAX_FILE_BYTES >> 20
        raise FileError(
            f"the file has {size} MiB, more than the {most} MiB that are read",
            where=path.name,
            hint="split it",
        )
    content = path.read_bytes()
    after = path.stat()
    changed = (before.st_size, before.st_mtime_ns) != (after.st_size, after.st_mtime_ns)
    if changed or len(content) != after.st_size:
        raise FileError(
            "the file changed while it was read",
            where=path.name,
            hint="wait until it is written, then try again",
        )
    return content
