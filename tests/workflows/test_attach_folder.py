"""Attaching folders: each file by itself, and what is said of each."""

from __future__ import annotations

import shutil
from collections.abc import Iterator
from pathlib import Path

import pytest
from openpyxl import load_workbook

from specflow.errors import DocumentError, FileError
from specflow.model.evidence import EvidenceFile, TableMapping
from specflow.store import ProjectStore, create_project
from specflow.workflows import attach_folder as module
from specflow.workflows.attach import (
    AttachOptions,
    AttachPreview,
    Decision,
    accept_attach,
    preview_attach,
)
from specflow.workflows.attach_folder import FolderRun, attach_folder, copy_to_try_on, folder_job
from specflow.workflows.found_files import find_files
from specflow.workflows.verify_files import verify_files
from tests.builders import a_block, a_project, adding
from tests.conftest import noon
from tests.importers.measured.make import PROJECT, book

HEADER = ["Item", "f (GHz)", "Gain (dB)"]
GAIN = [HEADER, ["LNA-1", 27.5, 20.1], ["LNA-1", 30, 19.9]]
OTHER = [HEADER, ["LNA-2", 27.5, 20.4]]
UNCLEAR = [["Item", "f", "Gain (dB)"], ["LNA-1", 27.5, 20]]
ME = Decision("A. B.")
SETTLED = """
[[table]]
layout = "{key}"
[[table.column]]
header = "f"
unit = "GHz"
"""


@pytest.fixture
def store(tmp_path: Path) -> Iterator[ProjectStore]:
    with create_project(tmp_path / "p.specflow", a_project(), clock=noon) as project:
        project.apply(adding(*PROJECT), by="A. B.")
        yield project


@pytest.fixture
def results(tmp_path: Path) -> Path:
    folder = tmp_path / "results"
    (folder / "second").mkdir(parents=True)
    return folder


def run_of(store: ProjectStore, folder: Path, decision: Decision = ME, **options: object) -> FolderRun:
    return attach_folder(store, folder_job([folder], AttachOptions(**options), decision))  # type: ignore[arg-type]


def said(run: FolderRun) -> dict[str, tuple[str, tuple[str, ...]]]:
    return {one.path.name: (str(one.outcome), tuple(one.tables)) for one in run.files}


def test_a_folder_is_looked_through_in_order_and_what_is_passed_over_is_said(results: Path) -> None:
    for name in ("b.csv", "A.csv", "second/c.csv", "~$b.xlsx", ".~lock.b.csv#", ".hidden.csv", "d.pdf", "e.csv.tmp",
                 "README", "x.specflow"):  # fmt: skip
        (results / name).write_text("x", encoding="utf-8")
    (results / ".git").mkdir()
    (results / ".git" / "in.csv").write_text("x", encoding="utf-8")
    (results / "round").symlink_to(results, target_is_directory=True)
    found = find_files([results, results / "b.csv"])
    assert [path.relative_to(results).as_posix() for path in found.files] == [
        "A.csv",
        "b.csv",
        "second/c.csv",
    ]
    assert {one.path.name: one.reason for one in found.passed_over} == {
        "~$b.xlsx": "the lock of a program that has the file open",
        ".~lock.b.csv#": "the lock of a program that has the file open",
        ".hidden.csv": "hidden",
        ".git": "a hidden folder",
        "d.pdf": "files of the kind '.pdf' are not read",
        "e.csv.tmp": "a temporary or unfinished copy",
        "README": "it has no ending",
        "round": "a link to a folder",
        "x.specflow": "a project, no results",
    }
    with pytest.raises(FileError, match="no such file or folder"):
        find_files([results / "none"])


def test_each_file_is_a_transaction_of_its_own(store: ProjectStore, results: Path) -> None:
    book(results / "a.xlsx", GAIN)
    book(results / "b.xlsx", UNCLEAR)
    book(results / "c.xlsx", OTHER)
    before = store.revision
    run = run_of(store, results)
    assert said(run) == {
        "a.xlsx": ("accepted", ("EV-1",)),
        "b.xlsx": ("rejected", ()),
        "c.xlsx": ("accepted", ("EV-2",)),
    }
    refused = run.files[1]
    assert (refused.where, "without a unit" in refused.words) == ("data, B1", True)
    assert store.revision == before + 2 and run.counts() == "3 of 3 files: 2 accepted, 1 rejected"
    again = run_of(store, results)
    assert [str(one.outcome) for one in again.files] == ["unchanged", "rejected", "unchanged"]
    assert store.revision == before + 2


def test_a_copy_of_a_file_and_of_a_table_are_said(store: ProjectStore, results: Path) -> None:
    shutil.copy(book(results / "a.xlsx", GAIN), results / "second" / "copy.xlsx")
    workbook = load_workbook(book(results / "z.xlsx", GAIN))
    workbook.create_sheet("remarks")["A1"] = "sent again"
    workbook.save(results / "z.xlsx")
    words = {one.path.name: one.words for one in run_of(store, results).files}
    assert words["copy.xlsx"].startswith("a copy of ") and words["copy.xlsx"].endswith("a.xlsx")
    assert words["z.xlsx"].startswith("the same tables as in ") and words["z.xlsx"].endswith("a.xlsx")
    assert len(store.load().all(EvidenceFile)) == 1
    again = {one.path.name: one.words for one in run_of(store, results).files}
    assert again["z.xlsx"].startswith("the same tables as in ") and again["a.xlsx"] == ""


def test_a_trial_says_what_would_happen_and_stores_nothing(store: ProjectStore, results: Path) -> None:
    book(results / "a.xlsx", GAIN)
    book(results / "b.xlsx", [HEADER, ["LNA-1", 27.5, 21]])
    before = store.revision
    job = folder_job([results], AttachOptions(), ME)
    with copy_to_try_on(store) as copy:
        tried = attach_folder(copy, job)
    assert store.revision == before and not store.load().tables
    real = attach_folder(store, job)
    assert said(tried) == said(real) == {"a.xlsx": ("accepted", ("EV-1",)), "b.xlsx": ("rejected", ())}
    assert "1 row is that of EV-1, 1 with other values" in real.files[1].words


def test_earlier_tables_are_superseded_by_the_files_that_have_their_rows(
    store: ProjectStore, results: Path
) -> None:
    book(results / "a.xlsx", GAIN)
    run_of(store, results)
    book(results / "b.xlsx", [HEADER, ["LNA-1", 27.5, 21]])
    book(results / "c.xlsx", OTHER)
    run = run_of(
        store, results, Decision("A. B.", supersedes=("EV-1", "EV-9"), resolves="NCR-1: typed wrongly")
    )
    assert [one.superseded for one in run.files] == [(), ("EV-1",), ()]
    assert run.notes == ["--supersedes EV-9: no file has rows of it"]
    assert "superseded EV-1" in run.counts()


def test_mapping_files_of_the_folder_settle_the_layouts_that_they_name(
    store: ProjectStore, results: Path, tmp_path: Path
) -> None:
    path = book(results / "b.xlsx", UNCLEAR)
    key = preview_attach(store, path).measurements.tables[0].layout_key
    (results / "bench.toml").write_text(SETTLED.format(key=key), encoding="utf-8")
    (results / "other.toml").write_text(SETTLED.format(key="L-0"), encoding="utf-8")
    (results / "loose.toml").write_text(SETTLED.replace('layout = "{key}"', ""), encoding="utf-8")
    (results / "config.toml").write_text("colour = 3", encoding="utf-8")
    run = run_of(store, results)
    assert said(run) == {"b.xlsx": ("accepted", ("EV-1",))}
    assert [mapping.layout_key for mapping in store.load().all(TableMapping)] == [key]
    assert run.notes == ["other.toml settles the layout L-0, which no table of these files has"]
    assert {one.path.name for one in run.passed_over} == {"loose.toml", "config.toml"}
    with pytest.raises(DocumentError, match="does not say which layout"):
        folder_job([results], AttachOptions(mapping=results / "loose.toml"), ME)
    clash = tmp_path / "clash.toml"
    clash.write_text(SETTLED.format(key=key).replace("GHz", "MHz"), encoding="utf-8")
    with pytest.raises(DocumentError, match=r"settle the layout .* differently"):
        folder_job([results], AttachOptions(mapping=clash), ME)


def test_a_file_that_changes_after_it_was_looked_at_is_refused(store: ProjectStore, results: Path) -> None:
    path = book(results / "a.xlsx", GAIN)
    job = folder_job([results], AttachOptions(), ME)
    with copy_to_try_on(store) as copy:
        tried = attach_folder(copy, job)
    seen = {one.path: one.sha256 for one in tried.files}
    book(path, OTHER)
    [outcome] = attach_folder(store, job, only=seen).files
    assert (str(outcome.outcome), "has changed since" in outcome.words) == ("rejected", True)
    assert not store.load().tables


def test_an_interrupt_leaves_whole_files_and_says_how_far_it_got(
    store: ProjectStore, results: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    for number in range(4):
        book(results / f"{number}.xlsx", [HEADER, ["LNA-1", 27.5 + number, 20 + number]])
    accept = accept_attach

    def interrupted(store: ProjectStore, preview: AttachPreview, decision: Decision) -> object:
        if preview.path.name == "1.xlsx":
            accept(store, preview, decision)
            raise KeyboardInterrupt  # it comes when the file is stored and nobody was told yet
        return accept(store, preview, decision)

    monkeypatch.setattr(module, "accept_attach", interrupted)
    run = run_of(store, results)
    assert [one.path.name for one in run.files] == ["0.xlsx"] and run.interrupted.endswith("1.xlsx")
    assert run.notes[0].endswith("1.xlsx was stored before the interrupt was seen")
    assert run.counts() == "1 of 4 files: 1 accepted"
    assert [table.id for table in store.load().tables] == ["EV-1", "EV-2"]
    monkeypatch.undo()
    again = run_of(store, results)
    assert [str(one.outcome) for one in again.files] == ["unchanged", "unchanged", "accepted", "accepted"]


def test_another_process_that_stores_in_between_does_not_keep_a_file_out(
    store: ProjectStore, results: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    book(results / "a.xlsx", GAIN)
    preview, times = preview_attach, iter(range(3))

    def overtaken(store: ProjectStore, path: Path, options: AttachOptions) -> AttachPreview:
        found = preview(store, path, options)
        if (number := next(times)) < 2:
            store.apply(adding(a_block(f"B{number}")), by="another")
        return found

    monkeypatch.setattr(module, "preview_attach", overtaken)
    assert said(run_of(store, results)) == {"a.xlsx": ("accepted", ("EV-1",))}


def test_what_was_left_out_once_is_unchanged_the_next_time(store: ProjectStore, results: Path) -> None:
    book(results / "a.xlsx", [*GAIN, ["LNA-1", 31, "abc"]])
    rest = Decision("A. B.", take_rest=True)
    assert run_of(store, results, rest).files[0].words == "1 cells or rows left out"
    assert [str(one.outcome) for one in run_of(store, results, rest).files] == ["unchanged"]


@pytest.mark.postgres
def test_a_project_on_a_server_is_tried_on_a_copy_and_keeps_its_files(database: str, results: Path) -> None:
    book(results / "a.xlsx", GAIN)
    with create_project(database, a_project(), clock=noon) as store:
        store.apply(adding(*PROJECT), by="A. B.")
        before = store.revision
        job = folder_job([results], AttachOptions(), Decision("A. B.", keep=True))
        with copy_to_try_on(store) as copy:
            assert said(attach_folder(copy, job)) == {"a.xlsx": ("accepted", ("EV-1",))}
        assert store.revision == before
        assert said(attach_folder(store, job)) == {"a.xlsx": ("accepted", ("EV-1",))}
        assert store.file_bytes("F-1") == (results / "a.xlsx").read_bytes()
        with pytest.raises(DocumentError, match="does not know where its files lie"):
            verify_files(store)
        assert verify_files(store, [results]).is_clean
        (results / "a.xlsx").unlink()
        assert [str(check.state) for check in verify_files(store, [results]).checks] == ["kept copy"]
