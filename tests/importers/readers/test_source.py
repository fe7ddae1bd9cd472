from __future__ import annotations

import hashlib
import os
from pathlib import Path

import pytest

from specflow.errors import FileError
from specflow.importers.readers import open_grids, read_source
from specflow.importers.readers import source as source_module
from tests.importers.readers.workbooks import refused


def test_fingerprint_is_that_of_the_bytes(tmp_path: Path) -> None:
    path = tmp_path / "gain.csv"
    path.write_bytes(b"f,g\n1,2\n")
    fingerprint = open_grids(path).fingerprint
    assert (fingerprint.name, fingerprint.size) == ("gain.csv", 8)
    assert fingerprint.sha256 == hashlib.sha256(b"f,g\n1,2\n").hexdigest()


def test_missing_file_is_refused(tmp_path: Path) -> None:
    assert "there is no such file" in refused(lambda: open_grids(tmp_path / "none.xlsx"))


def test_folder_is_refused(tmp_path: Path) -> None:
    assert "this is a folder" in refused(lambda: open_grids(tmp_path))


@pytest.mark.parametrize("name", ["a.xlsx", "a.csv"])
def test_file_of_no_bytes_is_refused(tmp_path: Path, name: str) -> None:
    (tmp_path / name).touch()
    assert f"{name}: the file is empty (0 bytes)" in refused(lambda: open_grids(tmp_path / name))


@pytest.mark.parametrize("name", ["a.pdf", "a", "a.xlsb"])
def test_unknown_endings_are_refused_with_those_that_are_read(tmp_path: Path, name: str) -> None:
    (tmp_path / name).write_text("1,2")
    text = refused(lambda: open_grids(tmp_path / name))
    assert ("save it as .xlsx" in text) == (name == "a.xlsb")
    assert "known: .xlsx, .xlsm, .xls, .ods, .jsonl, .ndjson, .csv" in refused(
        lambda: open_grids(tmp_path / name)
    )


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="this system has no named pipes")
def test_pipe_is_refused_without_waiting(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "pipe.csv")
    assert "no plain file" in refused(lambda: open_grids(tmp_path / "pipe.csv"))


def test_too_large_file_is_refused_unread(tmp_path: Path) -> None:
    with (tmp_path / "huge.csv").open("wb") as file:
        file.truncate(source_module.MAX_FILE_BYTES + 1)  # sparse: takes no space
    assert "split it" in refused(lambda: open_grids(tmp_path / "huge.csv"))


def test_file_that_changed_since_the_preview_is_refused(tmp_path: Path) -> None:
    path = tmp_path / "gain.csv"
    path.write_text("f,g\n1,2\n")
    seen = open_grids(path).fingerprint
    assert open_grids(path, expected=seen).fingerprint == seen
    path.write_text("f,g\n1,3\n")
    assert "has changed since it was looked at" in refused(lambda: open_grids(path, expected=seen))


def test_file_that_is_written_while_it_is_read_is_refused(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = tmp_path / "gain.csv"
    path.write_text("f,g\n1,2\n")
    read_bytes = Path.read_bytes

    def read_and_append(self: Path) -> bytes:
        content = read_bytes(self)
        with self.open("a") as file:
            file.write("3,4\n")
        return content

    monkeypatch.setattr(Path, "read_bytes", read_and_append)
    with pytest.raises(FileError, match="changed while it was read"):
        read_source(path)


@pytest.mark.skipif(not hasattr(os, "symlink"), reason="this system has no symbolic links")
def test_links_that_lead_nowhere_or_in_a_ring_are_refused(tmp_path: Path) -> None:
    (tmp_path / "a.csv").symlink_to(tmp_path / "b.csv")
    (tmp_path / "b.csv").symlink_to(tmp_path / "a.csv")
    (tmp_path / "lost.csv").symlink_to(tmp_path / "gone.csv")
    for name in ("a.csv", "lost.csv"):
        assert "there is no such file" in refused(lambda name=name: open_grids(tmp_path / name))  # type: ignore[misc]


@pytest.mark.skipif(
    not hasattr(os, "geteuid") or os.geteuid() == 0, reason="the superuser may read everything"
)
def test_a_file_that_may_not_be_read_is_refused(tmp_path: Path) -> None:
    (tmp_path / "a.csv").write_text("f,G\n1,2\n")
    (tmp_path / "a.csv").chmod(0)
    assert "check the path and its permissions" in refused(lambda: open_grids(tmp_path / "a.csv"))
