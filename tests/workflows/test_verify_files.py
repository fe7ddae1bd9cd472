"""Verifying attached files against what is stored of them, with and without kept copies."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from contextlib import closing
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from specflow.errors import DocumentError, FileError
from specflow.model.evidence import EvidenceFile
from specflow.model.project import Policy
from specflow.store import ProjectStore, create_project
from specflow.workflows import kept_copy as kept_copies
from specflow.workflows.attach import AttachOptions, Decision, accept_attach, preview_attach
from specflow.workflows.kept_copy import kept_copy, write_kept
from specflow.workflows.verify_files import Verification, verification_as_json, verify_files
from tests.builders import a_project, adding, editing
from tests.conftest import noon
from tests.importers.measured.make import PROJECT, book

HEADER = ["Item", "f (GHz)", "Gain (dB)", "U Gain (dB), k=2"]
GAIN = [HEADER, ["LNA-1", 27.5, 20.1, 0.4], ["LNA-1", 28.75, 19.9, 0.4], ["LNA-1", 30, 17.9, 0.4]]
ME = Decision("A. B.")
KEEP = Decision("A. B.", keep=True)
UNITS = """
[[table]]
[[table.column]]
header = "f"
unit = "{unit}"
"""


@pytest.fixture
def store(tmp_path: Path) -> Iterator[ProjectStore]:
    with create_project(tmp_path / "p.specflow", a_project(), clock=noon) as project:
        project.apply(adding(*PROJECT), by="A. B.")
        yield project


def attach(store: ProjectStore, path: Path, decision: Decision = ME, **options: Any) -> Path:
    accept_attach(store, preview_attach(store, path, AttachOptions(**options)), decision)
    return path


def edit(path: Path, **cells: Any) -> None:
    workbook = openpyxl.load_workbook(path)
    for cell, value in cells.items():
        workbook.worksheets[0][cell] = value
    workbook.save(path)


def states(found: Verification) -> list[str]:
    return [str(check.state) for check in found.checks]


def cells(found: Verification) -> list[tuple[str, str, str, str]]:
    return [
        (one.cell, one.what, one.was, one.now)
        for check in found.checks
        for table in check.tables
        for one in table.differences
    ]


def test_a_file_that_is_as_it_was(store: ProjectStore, tmp_path: Path) -> None:
    attach(store, book(tmp_path / "gain.xlsx", GAIN))
    for paths in ([], [tmp_path], [tmp_path / "gain.xlsx"]):
        found = verify_files(store, paths)
        assert found.is_clean and states(found) == ["unchanged"] and not cells(found)
    assert store.load().all(EvidenceFile)[0].path == "gain.xlsx"


def test_cells_that_read_differently_are_told_with_what_they_were(
    store: ProjectStore, tmp_path: Path
) -> None:
    path = attach(store, book(tmp_path / "gain.xlsx", GAIN))
    edit(path, A2="LNA-2", B3=29, C2=20.3, D4=0.6)
    found = verify_files(store)
    assert states(found) == ["changed"] and not found.is_clean and found.checks[0].cells == 4
    assert set(cells(found)) == {
        ("C2", "Gain (dB)", "20.1 dB", "20.3 dB"),
        ("D4".replace("D", "C"), "standard uncertainty of Gain (dB)", "0.2", "0.3"),
        ("B3", "f (GHz)", "28.75 GHz", "29 GHz"),
        ("row 2", "item", "LNA-1", "LNA-2"),
    }
    told = verification_as_json(found)["files"][0]["tables"][0]
    assert told["differing"] == 4 and len(told["cells"]) == 4


def test_rows_that_are_gone_or_new(store: ProjectStore, tmp_path: Path) -> None:
    path = attach(store, book(tmp_path / "gain.xlsx", GAIN))
    book(path, [*GAIN[:3], ["LNA-1", 30, "N/A", 0.4], ["LNA-1", 31, 17, 0.4]])
    found = verify_files(store)
    [table] = found.checks[0].tables
    assert ("C4", "Gain (dB)", "17.9 dB", "empty") in cells(found) and table.added == 1


def test_another_unit_in_the_header_makes_every_cell_read_otherwise(
    store: ProjectStore, tmp_path: Path
) -> None:
    path = attach(store, book(tmp_path / "gain.xlsx", GAIN))
    edit(path, B1="f (MHz)")
    assert {one for one in cells(verify_files(store)) if one[0] == "B2"} == {
        ("B2", "f (GHz)", "27.5 GHz", "27.5 MHz")
    }


def test_a_table_that_cannot_be_read_any_more(store: ProjectStore, tmp_path: Path) -> None:
    path = attach(store, book(tmp_path / "gain.xlsx", GAIN))
    edit(path, B1="f")
    [table] = verify_files(store).checks[0].tables
    assert "cannot be read as before; B1: column B: frequency without a unit" in table.problem
    book(path, [["only prose"]])
    [table] = verify_files(store).checks[0].tables
    assert "no such table any more" in table.problem
    path.write_bytes(b"PK\x03\x04 nothing")
    found = verify_files(store)
    assert found.checks[0].tables[0].problem and states(found) == ["changed"]


def test_moved_and_vanished(store: ProjectStore, tmp_path: Path) -> None:
    path = attach(store, book(tmp_path / "gain.xlsx", GAIN))
    moved = path.rename(tmp_path / "gain final.xlsx")
    found = verify_files(store)
    assert states(found) == ["moved"] and found.is_clean and found.checks[0].found.endswith("gain final.xlsx")
    folder = tmp_path / "archive"
    folder.mkdir()
    moved.rename(folder / "gain.xlsx")
    assert states(verify_files(store)) == ["vanished"]
    found = verify_files(store, [folder])
    assert states(found) == ["unchanged"] and found.is_clean


def test_the_same_bytes_win_over_the_same_name(store: ProjectStore, tmp_path: Path) -> None:
    path = attach(store, book(tmp_path / "gain.xlsx", GAIN))
    path.rename(tmp_path / "gain-1.xlsx")
    book(path, GAIN[:2])
    assert states(verify_files(store, [tmp_path])) == ["moved"]


def test_what_is_named_and_what_was_never_attached(store: ProjectStore, tmp_path: Path) -> None:
    first = attach(store, book(tmp_path / "a.xlsx", GAIN))
    attach(store, book(tmp_path / "b.xlsx", [HEADER, ["LNA-2", 27.5, 20, 0.4]]))
    stranger = book(tmp_path / "c.xlsx", [HEADER, ["LNA-2", 31, 20, 0.4]])
    assert [check.file.name for check in verify_files(store, [first]).checks] == ["a.xlsx"]
    assert verify_files(store, [tmp_path]).strangers == (stranger,)
    with pytest.raises(DocumentError, match="never attached"):
        verify_files(store, [stranger])
    with pytest.raises(FileError, match="no such file or folder"):
        verify_files(store, [tmp_path / "none"])


def test_each_table_is_read_by_the_mapping_revision_that_it_was_read_with(
    store: ProjectStore, tmp_path: Path
) -> None:
    header, mapping = ["Item", "f", "Gain (dB)"], tmp_path / "m.toml"
    mapping.write_text(UNITS.format(unit="GHz"), encoding="utf-8")
    attach(store, book(tmp_path / "a.xlsx", [header, ["LNA-1", 27.5, 20]]), mapping=mapping)
    mapping.write_text(UNITS.format(unit="MHz"), encoding="utf-8")
    attach(store, book(tmp_path / "b.xlsx", [header, ["LNA-2", 28000, 21]]), mapping=mapping)
    tables = store.load().tables
    assert [(table.mapping, table.mapping_revision) for table in tables] == [("MAP-1", 1), ("MAP-1", 2)]
    found = verify_files(store)
    assert found.is_clean and states(found) == ["unchanged", "unchanged"]


def test_what_the_person_stated_is_stated_again(store: ProjectStore, tmp_path: Path) -> None:
    path = book(tmp_path / "gain.xlsx", [["f (GHz)", "T (°C)", "G"], [27.5, 23, 20]])
    stated = {"item": "LNA-2", "block": "LNA", "temperature": "case", "column C": "gain in dB"}
    attach(store, path, stated=stated)
    assert verify_files(store).is_clean
    hidden = book(tmp_path / "hidden.xlsx", GAIN, change=lambda sheet: hide(sheet, 3))
    attach(store, hidden, include_hidden_rows=True)
    assert states(verify_files(store)) == ["unchanged", "unchanged"]


def hide(sheet: Any, row: int) -> None:
    sheet.row_dimensions[row].hidden = True


def test_the_same_bytes_that_read_otherwise_are_no_longer_shown_to_be_so(
    store: ProjectStore, tmp_path: Path
) -> None:
    attach(store, book(tmp_path / "gain.xlsx", GAIN))
    table = store.load().tables[0]
    values = (table.values[0].model_copy(update={"unit": "dBm"}),)
    store.apply([editing(table, values=values)], by="A. B.")
    found = verify_files(store)
    assert states(found) == ["reads otherwise"] and not found.is_clean


def test_a_kept_copy_stands_in_for_an_original_that_is_gone(store: ProjectStore, tmp_path: Path) -> None:
    path = attach(store, book(tmp_path / "gain.xlsx", GAIN), KEEP)
    content = path.read_bytes()
    path.unlink()
    found = verify_files(store)
    assert states(found) == ["kept copy"] and found.is_clean and len(found.checks[0].tables) == 1
    copy = kept_copy(store, "gain.xlsx")
    assert copy.content == content and kept_copy(store, "f-1") == copy
    out = write_kept(copy, tmp_path / "out.xlsx")
    assert out.read_bytes() == content and not list(tmp_path.glob("*.part"))
    with pytest.raises(FileError, match="exists already"):
        write_kept(copy, out)
    assert write_kept(copy, tmp_path, overwrite=True) == path and path.read_bytes() == content
    with pytest.raises(FileError, match="cannot be written"):
        write_kept(copy, tmp_path / "none" / "out.xlsx")
    with pytest.raises(FileError, match="is a project"):
        write_kept(copy, tmp_path / "p.specflow", overwrite=True)
    edit(path, C2=21)
    assert states(verify_files(store)) == ["moved"]  # the written copy has the bytes
    out.unlink()
    assert states(verify_files(store)) == ["changed"]


def test_a_copy_may_be_kept_later_and_is_kept_once(store: ProjectStore, tmp_path: Path) -> None:
    path = attach(store, book(tmp_path / "gain.xlsx", GAIN))
    with pytest.raises(DocumentError, match="no copy of this file is kept"):
        kept_copy(store, "F-1")
    done = accept_attach(store, preview_attach(store, path), KEEP)
    assert done.kept and done.file == "F-1" and not done.tables
    assert store.load().all(EvidenceFile)[0].kept and kept_copy(store, "F-1").content == path.read_bytes()
    assert accept_attach(store, preview_attach(store, path), KEEP).revision == done.revision
    with pytest.raises(DocumentError, match="evidence file"):
        kept_copy(store, "F-9")


def test_the_policy_of_the_project_keeps_copies_and_a_size_is_the_most(
    store: ProjectStore, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    store.apply([editing(store.load().project, policy=Policy(keep_copies=True))], by="A. B.")
    attach(store, book(tmp_path / "a.xlsx", GAIN))
    assert store.load().all(EvidenceFile)[0].kept
    monkeypatch.setattr(kept_copies, "MOST_KEPT_BYTES", 100)
    path = attach(store, book(tmp_path / "b.xlsx", [HEADER, ["LNA-2", 27.5, 20, 0.4]]))
    assert not store.load().all(EvidenceFile)[1].kept
    with pytest.raises(DocumentError, match="copies are kept of files up to"):
        accept_attach(store, preview_attach(store, path), KEEP)


def test_a_file_that_changes_between_preview_and_acceptance_is_refused(
    store: ProjectStore, tmp_path: Path
) -> None:
    path = book(tmp_path / "gain.xlsx", GAIN)
    preview = preview_attach(store, path)
    edit(path, C2=21)
    with pytest.raises(FileError, match="changed since it was looked at"):
        accept_attach(store, preview, ME)
    path.unlink()
    with pytest.raises(FileError, match="cannot be read any more"):
        accept_attach(store, preview, ME)
    assert not store.load().tables


def test_no_path_of_a_machine_is_stored(tmp_path: Path) -> None:
    home, beside, far = tmp_path / "a" / "b" / "project", tmp_path / "a" / "b" / "results", tmp_path / "far"
    for folder in (home, beside, far):
        folder.mkdir(parents=True)
    with create_project(home / "p.specflow", a_project(), clock=noon) as store:
        store.apply(adding(*PROJECT), by="A. B.")
        attach(store, book(beside / "a.xlsx", GAIN))
        attach(store, book(far / "b.xlsx", [HEADER, ["LNA-2", 27.5, 20, 0.4]]))
        assert [file.path for file in store.load().all(EvidenceFile)] == ["../results/a.xlsx", ""]
        assert states(verify_files(store)) == ["unchanged", "vanished"]
        assert states(verify_files(store, [far])) == ["vanished", "unchanged"]


def test_a_kept_copy_that_is_damaged_is_not_given_out(store: ProjectStore, tmp_path: Path) -> None:
    path = attach(store, book(tmp_path / "gain.xlsx", GAIN), KEEP)
    with closing(sqlite3.connect(tmp_path / "p.specflow")) as connection:
        connection.execute("UPDATE file_copy SET data = substr(data, 1, 100)")
        connection.commit()
    with pytest.raises(DocumentError, match="the kept copy is damaged"):
        kept_copy(store, "F-1")
    assert states(verify_files(store)) == ["unchanged"]
    path.unlink()
    found = verify_files(store)
    assert states(found) == ["damaged copy"] and not found.is_clean


def test_a_file_whose_tables_are_all_superseded_need_not_be_there(
    store: ProjectStore, tmp_path: Path
) -> None:
    path = attach(store, book(tmp_path / "gain.xlsx", GAIN[:2]))
    again = book(tmp_path / "again.xlsx", [HEADER, ["LNA-1", 27.5, 20.4, 0.4]])
    attach(store, again, Decision("A. B.", supersedes=("EV-1",)))
    path.unlink()
    assert states(verify_files(store)) == ["replaced", "unchanged"] and verify_files(store).is_clean
