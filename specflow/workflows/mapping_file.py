"""The file in which a person settles the columns of a measurement table: read, and written when one is proposed."""

from __future__ import annotations

from pathlib import Path

from specflow.errors import FileError


def read_mapping_file(path: Path | None) -> str:
    """Return the text of a mapping file, "" without one."""
    if path is None:
        return ""
    try:
        return path.read_text(encoding="utf-8-sig")
    except (OSError, UnicodeDecodeError) as error:
        raise FileError(
            f"the mapping cannot be read: {getattr(error, 'strerror', None) or error}",
            where=str(path),
            hint="check the path; a mapping is a UTF-8 text file (--propose-mapping writes one)",
        ) from None


def write_new_mapping(path: Path, text: str) -> None:
    """Write a proposed mapping to a file that must not exist; raises FileError, and leaves nothing half-written."""
    try:
        with path.open("x", encoding="utf-8") as file:
            file.write(text)
    except FileExistsError:
        raise FileError(
            "there is a file of this name", where=str(path), hint="give the mapping another name"
        ) from None
    except OSError as error:
        if path.is_file():
            path.unlink()
        raise FileError(
            f"the mapping cannot be written: {error.strerror or error}",
            where=str(path),
            hint="check the folder, the rights on it and the space left",
        ) from error
