"""Attaching: what is stored when, what is refused, and what replaces what."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from specflow.errors import ConflictError, DocumentError, FileError
from specflow.model.evidence import EvidenceFile, EvidenceTable, Supersession, TableMapping
from specflow.model.project import Policy
from specflow.model.verdict import RecordRef
from specflow.reports.origins import OriginFinder
from specflow.store import ProjectStore, create_project
from specflow.workflows.attach import (
    Attached,
    AttachOptions,
    Decision,
    accept_attach,
    preview_attach,
)
from tests.builders import a_project, adding, editing
from tests.conftest import noon
from tests.importers.measured.make import PROJECT, book

HEADER = ["Item", "f (GHz)", "Gain (dB)"]
FIRST = [HEADER, ["LNA-1", 27.5, 20.1], ["LNA-1", 28.75, 19.9], ["LNA-1", 30, 17.9]]
RETEST = [HEADER, ["LNA-1", 30, 20.2], ["LNA-1", 28.75, 19.9], ["LNA-1", 31, 20]]
ME = Decision("A. B.")


@pytest.fixture
def store(tmp_path: Path) -> Iterator[ProjectStore]:
    with create_project(tmp_path / "p.specflow", a_project(), clock=noon) as project:
        project.apply(adding(*PROJECT), by="A. B.")
        yield project


def attached(store: ProjectStore, path: Path, decision: Decision = ME, **options: Any) -> Attached:
    return accept_attach(store, preview_attach(store, path, AttachOptions(**options)), decision)


def test_a_tidy_workbook_is_stored_with_where_each_value_stands(store: ProjectStore, tmp_path: Path) -> None:
    path = book(tmp_path / "gain.xlsx", FIRST)
    done = attached(store, path)
    assert (done.file, list(done.tables), done.values) == ("F-1", ["EV-1"], 3)
    snapshot = store.load()
    [file], [table] = snapshot.all(EvidenceFile), snapshot.all(EvidenceTable)
    columns = snapshot.load_columns(["EV-1"])["EV-1"]
    assert (file.name, file.received_at, file.size) == (
        "gain.xlsx",
        "2026-05-04T12:00:00Z",
        path.stat().st_size,
    )
    assert (table.block, table.accepted_by, table.accepted_at) == ("LNA", "A. B.", "2026-05-04T12:00:00Z")
    assert not table.provisional and table.left_out == ()
    assert list(columns.values["Gain"].low) == [20.1, 19.9, 17.9] and list(columns.source_rows) == [2, 3, 4]
    assert (table.values[0].column, table.sheet) == (3, "data")


def test_a_csv_is_stored_alike(store: ProjectStore, tmp_path: Path) -> None:
    path = tmp_path / "gain.csv"
    path.write_text("Item,f (GHz),Gain (dB)\nLNA-1,27.5,20.1\n", encoding="utf-8")
    assert attached(store, path).values == 1
    assert store.load().all(EvidenceTable)[0].sheet == ""


def test_the_same_file_again_adds_nothing(store: ProjectStore, tmp_path: Path) -> None:
    path = book(tmp_path / "gain.xlsx", FIRST)
    first = attached(store, path)
    preview = preview_attach(store, path)
    assert preview.is_unchanged and preview.known == {0: "EV-1"}
    again = accept_attach(store, preview, ME)
    assert (again.revision, list(again.tables)) == (first.revision, [])
    renamed = path.rename(tmp_path / "other name.xlsx")
    assert preview_attach(store, renamed).is_unchanged


def test_what_was_answered_for_a_file_is_not_asked_again_of_the_same_file(
    store: ProjectStore, tmp_path: Path
) -> None:
    rows = [["Item", "f (GHz)", "Result (dB)"], ["LNA-1", 27.5, 20.0]]
    path = book(tmp_path / "gain.xlsx", rows)
    assert preview_attach(store, path).unresolved
    attached(store, path, stated={"column C": "gain", "block": "LNA"})
    assert preview_attach(store, path).is_unchanged
    other = book(tmp_path / "other.xlsx", [*rows, ["LNA-1", 28.5, 20.0]])
    assert preview_attach(store, other).unresolved, "another file is asked about"


def test_with_rejected_cells_nothing_is_stored_unless_the_rest_is_taken(
    store: ProjectStore, tmp_path: Path
) -> None:
    path = book(tmp_path / "gain.xlsx", [*FIRST, ["LNA-1", 31, "abc"]])
    before = store.revision
    with pytest.raises(DocumentError, match="1 cell or row is rejected; nothing was stored"):
        attached(store, path)
    assert store.revision == before and not store.load().all(EvidenceFile)
    assert attached(store, path, Decision("A. B.", take_rest=True)).values == 3
    [left] = store.load().all(EvidenceTable)[0].left_out
    assert (left.cell, left.text, "not a number" in left.reason) == ("C5", "abc", True)


def test_an_open_question_keeps_everything_out(store: ProjectStore, tmp_path: Path) -> None:
    path = book(tmp_path / "gain.xlsx", [["Item", "f", "Gain (dB)"], ["LNA-1", 27.5, 20]])
    for take_rest in (False, True):
        with pytest.raises(DocumentError, match="1 question is open; nothing was stored") as caught:
            attached(store, path, Decision("A. B.", take_rest=take_rest))
        assert "B1" in caught.value.where and "unit" in caught.value.hint


def test_one_clear_table_of_two_is_stored_when_the_rest_is_taken(store: ProjectStore, tmp_path: Path) -> None:
    path = book(tmp_path / "gain.xlsx", [*FIRST, [], ["Item", "f (GHz)", "NF (dBm)"], ["LNA-1", 27.5, 1]])
    with pytest.raises(DocumentError):
        attached(store, path)
    assert list(attached(store, path, Decision("A. B.", take_rest=True)).tables) == ["EV-1"]


def test_other_values_under_the_same_identity_need_a_word(store: ProjectStore, tmp_path: Path) -> None:
    attached(store, book(tmp_path / "gain.xlsx", FIRST))
    path = book(tmp_path / "retest.xlsx", RETEST)
    preview = preview_attach(store, path)
    [replacement] = preview.replacements[0]
    assert replacement.words() == "2 rows are those of EV-1, 1 with other values"
    assert replacement.rows == (1, 2)
    with pytest.raises(DocumentError, match="it was not said which holds") as caught:
        accept_attach(store, preview, ME)
    assert "--supersedes EV-1" in caught.value.hint and "--beside" in caught.value.hint
    assert len(store.load().tables) == 1


def test_a_retest_supersedes_the_rows_it_repeats(store: ProjectStore, tmp_path: Path) -> None:
    attached(store, book(tmp_path / "gain.xlsx", FIRST))
    decision = Decision(
        "A. B.", supersedes=["ev-1"], resolves="NCR-12: reworked, retest passes", reason="retest"
    )
    done = attached(store, book(tmp_path / "retest.xlsx", RETEST), decision)
    assert (list(done.tables), list(done.superseded)) == (["EV-2"], ["EV-1"])
    [step] = store.load().all(Supersession)
    assert (step.earlier, step.later, step.rows) == ("EV-1", "EV-2", (1, 2))
    assert (step.names_fail, step.by, step.at) == (
        "NCR-12: reworked, retest passes",
        "A. B.",
        "2026-05-04T12:00:00Z",
    )
    third = book(tmp_path / "third.xlsx", [HEADER, ["LNA-1", 30, 21.0]])
    assert [one.earlier for one in preview_attach(store, third).replacements[0]] == [
        "EV-2"
    ]  # replaced rows are gone


def test_a_whole_table_is_superseded_as_a_whole(store: ProjectStore, tmp_path: Path) -> None:
    attached(store, book(tmp_path / "gain.xlsx", FIRST))
    higher = [HEADER, *([item, frequency, 25.0] for item, frequency, _ in FIRST[1:])]
    attached(store, book(tmp_path / "retest.xlsx", higher), Decision("A. B.", supersedes=["EV-1"]))
    assert store.load().all(Supersession)[0].rows is None


def test_beside_lets_both_stand(store: ProjectStore, tmp_path: Path) -> None:
    attached(store, book(tmp_path / "gain.xlsx", FIRST))
    done = attached(store, book(tmp_path / "retest.xlsx", RETEST), Decision("A. B.", beside=True))
    assert list(done.tables) == ["EV-2"] and not store.load().all(Supersession)


@pytest.mark.parametrize(
    "change",
    [
        {"stated": {"set_up": "another bench"}},
        {"stated": {"performer": "another laboratory"}},
    ],
)
def test_another_laboratory_or_set_up_stands_beside_by_itself(
    store: ProjectStore, tmp_path: Path, change: dict[str, Any]
) -> None:
    attached(store, book(tmp_path / "gain.xlsx", FIRST))
    path = book(tmp_path / "retest.xlsx", RETEST)
    assert not preview_attach(store, path, AttachOptions(**change)).replacements


def test_another_item_is_another_identity(store: ProjectStore, tmp_path: Path) -> None:
    attached(store, book(tmp_path / "gain.xlsx", FIRST))
    other = [HEADER, *(["LNA-2", frequency, gain + 1] for _, frequency, gain in FIRST[1:])]
    assert not preview_attach(store, book(tmp_path / "other.xlsx", other)).replacements


def test_superseding_what_is_not_replaced_is_refused(store: ProjectStore, tmp_path: Path) -> None:
    path = book(tmp_path / "gain.xlsx", FIRST)
    with pytest.raises(DocumentError, match="no evidence table 'EV-9'"):
        attached(store, path, Decision("A. B.", supersedes=["EV-9"]))
    with pytest.raises(DocumentError, match="nothing is superseded"):
        attached(store, path, Decision("A. B.", resolves="NCR-1"))


def test_a_mapping_is_kept_and_its_revision_grows(store: ProjectStore, tmp_path: Path) -> None:
    path = book(tmp_path / "gain.xlsx", [["Item", "f", "G"], ["LNA-1", 27.5, 20]])
    mapping = tmp_path / "m.toml"
    toml = (
        'format = 1\n[[table]]\n[[table.column]]\nheader = "f"\nunit = "GHz"\n'
        '[[table.column]]\nheader = "G"\nparameter = "gain"\nunit = "dB"\n'
    )
    mapping.write_text(toml, encoding="utf-8")
    attached(store, path, mapping=mapping)
    [kept] = store.load().all(TableMapping)
    [table] = store.load().tables
    assert (kept.id, kept.revision, table.mapping, table.mapping_revision) == ("MAP-1", 1, "MAP-1", 1)
    later = book(tmp_path / "later.xlsx", [["Item", "f", "G"], ["LNA-2", 27.5, 20]])
    attached(store, later)  # recognised by its layout
    assert store.load().tables[1].mapping == "MAP-1"
    mapping.write_text(toml + 'plane = "input to output"\n', encoding="utf-8")
    attached(store, book(tmp_path / "third.xlsx", [["Item", "f", "G"], ["LNA-2", 28, 20]]), mapping=mapping)
    [kept] = store.load().all(TableMapping)
    assert (kept.revision, store.load().tables[2].mapping_revision) == (2, 2)


def test_another_mapping_of_the_same_cells_replaces_what_the_first_one_gave(
    store: ProjectStore, tmp_path: Path
) -> None:
    path = book(tmp_path / "gain.xlsx", [["Item", "f (GHz)", "G"], ["LNA-1", 27.5, 20], ["LNA-1", 28, 21]])
    mapping = tmp_path / "m.toml"
    toml = 'format = 1\n[[table]]\n[[table.column]]\nheader = "G"\nparameter = "isolation"\nunit = "dB"\n'
    mapping.write_text(toml, encoding="utf-8")
    attached(store, path, mapping=mapping)
    mapping.write_text(toml.replace("isolation", "gain"), encoding="utf-8")
    preview = preview_attach(store, path, AttachOptions(mapping=mapping))
    assert not preview.known  # another mapping, another table
    assert [one.words() for one in preview.replacements[0]] == [
        "2 rows are those of EV-1, 2 with other values"
    ]
    with pytest.raises(DocumentError, match="it was not said which holds"):
        accept_attach(store, preview, ME)
    accept_attach(store, preview, Decision("A. B.", supersedes=["EV-1"]))
    assert [(step.earlier, step.rows) for step in store.load().all(Supersession)] == [("EV-1", None)]
    assert len(store.load().all(EvidenceFile)) == 1


def test_a_stacked_value_is_traced_to_its_own_cell(store: ProjectStore, tmp_path: Path) -> None:
    path = book(
        tmp_path / "wide.xlsx", [["Item", "Gain @ 27.5 GHz (dB)", "Gain @ 30 GHz (dB)"], ["LNA-1", 20, 21]]
    )
    mapping = tmp_path / "m.toml"
    mapping.write_text(
        'format = 1\n[[table]]\n[table.pivot]\nheader = "Gain @ {frequency} GHz (dB)"\nparameter = "gain"\n'
        'unit = "dB"\nunits = { frequency = "GHz" }\n',
        encoding="utf-8",
    )
    attached(store, path, mapping=mapping)
    finder = OriginFinder(store.load())
    places = [finder.origin(RecordRef("EV-1", "gain", row)) for row in (0, 1)]
    assert [place.cell for place in places if place] == ["B2", "C2"]


def test_a_value_of_a_turned_table_is_traced_to_its_own_cell(store: ProjectStore, tmp_path: Path) -> None:
    rows = [["Item", "LNA-1", "LNA-2"], ["f (GHz)", 27.5, 27.5], ["Gain (dB)", 20, 21], ["NF (dB)", 1.5, 1.6]]
    attached(store, book(tmp_path / "turned.xlsx", rows))
    finder = OriginFinder(store.load())
    places = [finder.origin(RecordRef("EV-1", "NF", row)) for row in (0, 1)]
    assert [place.cell for place in places if place] == ["B4", "C4"]
    assert preview_attach(store, tmp_path / "turned.xlsx", AttachOptions()).is_unchanged


def test_a_table_by_its_area_is_known_again(store: ProjectStore, tmp_path: Path) -> None:
    rows = [["Bench 3"], [None, "reading", "x"], ["LNA-1", 20, 27.5]]
    mapping = tmp_path / "m.toml"
    mapping.write_text(
        'format = 1\n[[table]]\narea = "A2:C9"\nalone = true\n[[table.column]]\ncolumn = "A"\nrole = "item"\n'
        '[[table.column]]\nheader = "reading"\nparameter = "gain"\nunit = "dB"\n'
        '[[table.column]]\nheader = "x"\ndimension = "frequency"\nunit = "GHz"\n',
        encoding="utf-8",
    )
    attached(store, book(tmp_path / "first.xlsx", rows), mapping=mapping)
    rows[2] = ["LNA-2", 21, 28]
    preview = preview_attach(store, book(tmp_path / "second.xlsx", rows), AttachOptions())
    assert preview.values == 1 and not preview.unresolved
    assert "recognised by its layout" in preview.measurements.tables[0].mapping_from


def test_a_mapping_that_is_not_there_is_named(store: ProjectStore, tmp_path: Path) -> None:
    with pytest.raises(FileError, match="cannot be read") as caught:
        preview_attach(store, book(tmp_path / "a.xlsx", FIRST), AttachOptions(mapping=tmp_path / "no.toml"))
    assert "no.toml" in caught.value.where


def test_a_second_review_makes_it_provisional(store: ProjectStore, tmp_path: Path) -> None:
    project = store.load().project
    store.apply([editing(project, policy=Policy(second_review=True))], by="A. B.")
    attached(store, book(tmp_path / "gain.xlsx", FIRST))
    assert store.load().tables[0].provisional


def test_somebody_else_wrote_in_between(store: ProjectStore, tmp_path: Path) -> None:
    preview = preview_attach(store, book(tmp_path / "gain.xlsx", FIRST))
    attached(store, book(tmp_path / "other.xlsx", [HEADER, ["LNA-2", 27.5, 20]]))
    with pytest.raises(ConflictError):
        accept_attach(store, preview, ME)
    assert len(store.load().tables) == 1


def test_intervals_and_uncertainty_survive_the_store(store: ProjectStore, tmp_path: Path) -> None:
    rows = [["Item", "f (GHz)", "Gain (dB)", "u (dB)"], ["LNA-1", 27.5, "<18", 0.2], ["LNA-1", 28, 20, None]]
    attached(store, book(tmp_path / "a.xlsx", rows))
    arrays = store.load().load_columns(["EV-1"])["EV-1"].values["Gain"]
    assert (list(arrays.low), list(arrays.high)) == ([-np.inf, 20], [18, 20])
    assert arrays.u is not None and arrays.u[0] == 0.2 and np.isnan(arrays.u[1])


def test_a_retest_in_another_layout_replaces_the_rows_of_the_table_that_is_named(
    store: ProjectStore, tmp_path: Path
) -> None:
    attached(store, book(tmp_path / "gain.xlsx", FIRST))
    other = [["f (GHz)", "Gain (dB)", "Serial", "Limit (dB)"], [30, 20.2, "LNA-1", 18], [31, 20, "LNA-1", 18]]
    path = book(tmp_path / "retest.xlsx", other, sheet="Retest")
    assert not preview_attach(store, path).replacements
    preview = preview_attach(store, path, AttachOptions(supersedes=["ev-1"]))
    [replacement] = preview.replacements[0]
    assert (replacement.earlier, replacement.rows, replacement.differing) == ("EV-1", (2,), 1)
    accept_attach(store, preview, Decision("A. B.", supersedes=["EV-1"]))
    [step] = store.load().all(Supersession)
    assert (step.earlier, step.later, step.rows) == ("EV-1", "EV-2", (2,))


def test_another_laboratory_replaces_nothing(store: ProjectStore, tmp_path: Path) -> None:
    attached(store, book(tmp_path / "gain.xlsx", FIRST))
    path = book(tmp_path / "other.xlsx", [["Laboratory", "Pier (invented)"], HEADER, ["LNA-1", 30, 20.2]])
    assert not preview_attach(store, path, AttachOptions(supersedes=["EV-1"])).replacements
