"""Files that cannot be read: one message with place and remedy, and the store is as it was."""

from __future__ import annotations

import shutil
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from specflow.errors import ExitCode, SpecflowError
from specflow.store import create_project, open_project
from specflow.workflows.attach import AttachOptions, Decision, accept_attach, preview_attach
from tests.builders import a_project, adding
from tests.importers.measured.make import PROJECT, book
from tests.importers.readers.workbooks import by_hand

ROWS = [["Item", "f (GHz)", "Gain (dB)"], ["LNA-1", 27.5, 20.1]]


def truncated(path: Path) -> Path:
    whole = book(path, ROWS).read_bytes()
    path.write_bytes(whole[: len(whole) // 2])
    return path


def written(path: Path, content: bytes) -> Path:
    path.write_bytes(content)
    return path


FILES: dict[str, Callable[[Path], Path]] = {
    "missing": lambda folder: folder / "none.xlsx",
    "a folder": lambda folder: folder,
    "empty": lambda folder: written(folder / "a.csv", b""),
    "blank": lambda folder: written(folder / "a.csv", b"\n \n"),
    "truncated": lambda folder: truncated(folder / "a.xlsx"),
    "encrypted": lambda folder: written(
        folder / "a.xlsx", b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + "EncryptedPackage".encode("utf-16-le")
    ),
    "not a workbook": lambda folder: written(folder / "a.xlsx", b"\x00\x01\x02"),
    "another ending": lambda folder: written(folder / "a.pdf", b"%PDF-1.7"),
    "no cells": lambda folder: book(folder / "a.xlsx", []),
    "prose": lambda folder: book(folder / "a.xlsx", [["only prose"]]),
    "a bomb": lambda folder: by_hand(
        folder / "a.xlsx", "", parts={"xl/worksheets/sheet1.xml": b"<worksheet>" + b" " * 400_000_000}
    ),
    "a header only": lambda folder: book(folder / "a.xlsx", ROWS[:1]),
    "a unit of another kind": lambda folder: book(
        folder / "a.xlsx", [["Item", "f (GHz)", "NF (dBm)"], ["LNA-1", 27, 1]]
    ),
    "an unknown parameter": lambda folder: book(
        folder / "a.xlsx", [["Item", "f (GHz)", "Zap (dB)"], ["LNA-1", 27, 1]]
    ),
    "not a number": lambda folder: book(folder / "a.xlsx", [*ROWS, ["LNA-1", 28, "NaN"]]),
    "an error cell": lambda folder: book(folder / "a.xlsx", [*ROWS, ["LNA-1", 28, "#REF!"]]),
    "a formula without a value": lambda folder: book(folder / "a.xlsx", [*ROWS, ["LNA-1", 28, "=B2"]]),
}


@pytest.mark.parametrize("name", FILES)
def test_one_message_with_place_and_remedy_and_the_store_as_it_was(tmp_path: Path, name: str) -> None:
    where = tmp_path / "p.specflow"
    with create_project(where, a_project()) as store:
        store.apply(adding(*PROJECT), by="A. B.")
        before = store.revision
        path = FILES[name](tmp_path)
        with pytest.raises(SpecflowError) as caught:
            accept_attach(store, preview_attach(store, path), Decision("A. B."))
        error = caught.value
        assert error.message and error.where and error.hint, error
        assert "\n" not in error.message and error.exit_code is ExitCode.BAD_INPUT
        assert store.revision == before


def test_a_sheet_that_is_not_there(tmp_path: Path) -> None:
    with create_project(tmp_path / "p.specflow", a_project()) as store:
        with pytest.raises(SpecflowError, match="there is no sheet 'Gian'") as caught:
            preview_attach(store, book(tmp_path / "a.xlsx", ROWS), AttachOptions(sheets=["Gian"]))
        assert "data" in caught.value.hint


def test_interrupting_leaves_the_store_as_it_was(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    where = tmp_path / "p.specflow"
    with create_project(where, a_project()) as store:
        store.apply(adding(*PROJECT), by="A. B.")
        preview = preview_attach(store, book(tmp_path / "a.xlsx", ROWS))
        before = store.revision

        def interrupt(*_: Any) -> None:
            raise KeyboardInterrupt

        monkeypatch.setattr("specflow.store.writing._write_attachments", interrupt)
        with pytest.raises(KeyboardInterrupt):
            accept_attach(store, preview, Decision("A. B."))
        monkeypatch.undo()
        assert store.revision == before and not store.load().tables
    copy = shutil.copy(where, tmp_path / "copy.specflow")
    with open_project(copy) as store:
        assert store.revision == before
