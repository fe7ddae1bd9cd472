"""Files that are written for people: whole or not at all, and never over something that cannot be had again."""

from __future__ import annotations

from pathlib import Path

from specflow.errors import FileError

_DATABASE = b"SQLite format 3\0"


def write_file(path: Path, content: bytes, *, overwrite: bool = False, remedy: str) -> None:
    """Write the bytes to a file, whole or not at all.

    FileError, with the remedy, when there is a file already that may not be written over. A folder and a project never
    may; FileError too when the file cannot be written.
    """
    if path.exists() and not path.is_file():
        what = "a folder" if path.is_dir() else "no plain file"
        raise FileError(
            f"this is {what}, and is not written over",
            where=str(path),
            hint="name a file; specflow export -o - writes to stdout",
        )
    if path.is_file() and _is_project(path):
        raise FileError(
            "this is a project, and is never written over", where=str(path), hint="name another file"
        )
    if path.exists() and not overwrite:
        raise FileError("the file exists already", where=str(path), hint=remedy)
    part = path.with_name(f"{path.name}.part")
    try:
        part.write_bytes(content)
        part.replace(path)
    except BaseException as error:
        part.unlink(missing_ok=True)
        if not isinstance(error, OSError):
            raise
        raise FileError(
            f"the file cannot be written: {error.strerror or error}",
            where=str(path),
            hint="check the folder and the space left; a spreadsheet program may hold the file open",
        ) from error


def _is_project(path: Path) -> bool:
    """Whether a file is a database, which would be lost; one that cannot be read may be one."""
    try:
        with path.open("rb") as file:
            return file.read(len(_DATABASE)) == _DATABASE
    except OSError:
        return True
