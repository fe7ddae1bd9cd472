"""Files that are written for people."""

from __future__ import annotations

from pathlib import Path

import pytest

from specflow.errors import FileError
from specflow.exporters.files import write_file
from tests.harbour import make_store


def test_a_file_is_written_whole_and_over_another_only_when_that_is_said(tmp_path: Path) -> None:
    path = tmp_path / "out.xlsx"
    write_file(path, b"one", remedy="name another")
    with pytest.raises(FileError, match="exists already") as error:
        write_file(path, b"two", remedy="name another")
    assert error.value.hint == "name another" and path.read_bytes() == b"one"
    write_file(path, b"two", overwrite=True, remedy="name another")
    assert path.read_bytes() == b"two" and [one.name for one in tmp_path.iterdir()] == ["out.xlsx"]


def test_a_file_that_cannot_be_written_leaves_nothing(tmp_path: Path) -> None:
    with pytest.raises(FileError, match="cannot be written: No such file"):
        write_file(tmp_path / "none" / "out.xlsx", b"one", remedy="")
    with pytest.raises(FileError, match="a folder"):
        write_file(tmp_path, b"one", overwrite=True, remedy="")
    assert not list(tmp_path.iterdir())


def test_a_project_is_never_written_over(tmp_path: Path) -> None:
    path = tmp_path / "harbour.specflow"
    make_store(path).close()
    before = path.read_bytes()
    with pytest.raises(FileError, match="is a project"):
        write_file(path, b"one", overwrite=True, remedy="")
    assert path.read_bytes() == before
