"""A project as people use it: created, changed, loaded again; on SQLite and PostgreSQL alike."""

from __future__ import annotations

import hashlib
import subprocess
import sys
from concurrent.futures import ThreadPoolExecutor
from datetime import date
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from specflow.errors import ConflictError, DocumentError, StoreError
from specflow.exchange import payload_text
from specflow.model.baseline import Baseline
from specflow.model.block import Block
from specflow.model.budget import Budget, BudgetLine
from specflow.model.decision import Waiver
from specflow.model.evidence import EvidenceFile, EvidenceTable, ItemChange
from specflow.model.requirement import Requirement
from specflow.store import ProjectStore, create_project, open_project
from tests.builders import (
    a_block,
    a_conditions_set,
    a_project,
    a_quantity,
    a_requirement,
    adding,
    an_activity,
    an_evidence_file,
    an_evidence_table,
    an_item,
    editing,
    removing,
    some_evidence,
)
from tests.conftest import noon

ME = "Ann Invented"


def filled(store: ProjectStore) -> ProjectStore:
    """Give the project a block, a requirement on it, an item and a table of evidence."""
    documents = (
        a_requirement(),
        an_activity(),
        a_conditions_set(),
        an_item(),
        a_block(),
        an_evidence_table(),
        an_evidence_file(),
    )
    store.apply(adding(*documents), columns={"T-1": some_evidence()}, by=ME)
    return store


def test_a_new_project_holds_its_project_document(where: str) -> None:
    with create_project(where, a_project(name="Ferry terminal"), clock=noon) as store:
        assert store.revision == 1
        assert store.load().project.name == "Ferry terminal"
        assert store.notes == ()
    with open_project(where) as store:
        assert store.load().project.name == "Ferry terminal"


def test_documents_of_all_kinds_come_back_whatever_their_order(store: ProjectStore) -> None:
    documents = (
        ItemChange(id="C-1", block="LNA", item="LNA-1", effective=date(2026, 5, 1), description="new bias"),
        Waiver(id="W-1", requirement="R-1", permitted=">= 19 dB", reason="late"),
        Budget(
            id="B-1",
            requirements=("R-1", "R-2"),
            quantity=a_quantity(),
            law="cascade",
            lines=(BudgetLine(position=1, block="LNA", parameter="gain", value=20.0, unit="dB"),),
        ),
        a_requirement("R-2", parents=("R-1",)),
        a_requirement("R-1"),
        a_conditions_set(),
        an_item(),
        a_block("LNA", parent="RX"),
        a_block("RX"),
    )
    assert store.apply(adding(*documents), by=ME) == 2
    snapshot = store.load()
    for document in documents:
        assert snapshot.find(type(document), document.id) == document
    assert snapshot.revision == store.revision == 2


@settings(max_examples=15, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(
    note=st.text(st.characters(codec="utf-8", exclude_characters="\0"), max_size=40).map(str.strip),
    code=st.text(st.characters(categories=["L", "N", "P", "S"]), min_size=1, max_size=20),
    value=st.floats(allow_nan=False, allow_infinity=False),
)
def test_texts_and_numbers_come_back_exactly(store: ProjectStore, note: str, code: str, value: float) -> None:
    stored = store.load()
    number = len(stored.blocks)
    block = a_block(
        f"{number}-{code}",
        note=note,
        paths=({"start": "a", "end": "b", "gain_db": value + 0.0, "standard_uncertainty_db": 0.0},),
    )
    store.apply(adding(block), by=ME)
    assert store.load().find(Block, block.id) == block


def test_an_edit_changes_the_document_and_its_links(store: ProjectStore) -> None:
    filled(store)
    other = a_block("PA")
    second = a_requirement("R-2", parents=("R-1",))
    store.apply(adding(other, second), by=ME)
    store.apply([editing(second, block="PA", parents=(), revision=2)], by=ME)
    changed = store.load().find(Requirement, "r-2")
    assert changed is not None
    assert (changed.block, changed.parents, changed.revision) == ("PA", (), 2)
    store.apply([removing(a_requirement("R-2", block="PA", revision=2)), removing(other)], by=ME)
    assert store.load().find(Block, "PA") is None


def test_the_project_document_is_edited_but_never_added_or_removed(store: ProjectStore) -> None:
    store.apply([editing(a_project(), name="Other")], by=ME)
    assert store.load().project.name == "Other"
    for change in (removing(a_project(name="Other")), *adding(a_project(id="second"))):
        with pytest.raises(DocumentError, match="one project document"):
            store.apply([change], by=ME)


def test_no_changes_leave_the_revision_alone(store: ProjectStore) -> None:
    assert store.apply([], by=ME) == 1
    assert store.history() == store.history()[:1]


def test_who_accepts_must_be_said(store: ProjectStore) -> None:
    with pytest.raises(DocumentError, match="nobody"):
        store.apply(adding(a_block()), by=" ")


# -- ids -------------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(("first", "second"), [("LNA", "lna"), ("Größe", "GRÖSSE"), ("Å", "A\u030a")])
def test_ids_are_the_same_without_case_and_in_any_unicode_form(
    store: ProjectStore, first: str, second: str
) -> None:
    store.apply(adding(a_block(first)), by=ME)
    with pytest.raises(DocumentError, match=f"the id is taken.*{ME}"):
        store.apply(adding(a_block(second)), by=ME)
    with pytest.raises(DocumentError, match="twice"):
        store.apply(adding(a_block("X" + first), a_block("X" + second)), by=ME)
    found = store.load().find(Block, second)
    assert found is not None
    assert found.id == first
    assert store.revision == 2


def test_a_removed_id_is_never_used_again(store: ProjectStore) -> None:
    store.apply(adding(a_block()), by=ME)
    store.apply([removing(a_block())], by="Bo Invented")
    assert not store.load().blocks
    assert store.load().removed == {"block": frozenset({"lna"})}
    with pytest.raises(DocumentError, match=r"removed \(by Bo Invented at 2026-05-04T12:00:00Z\)"):
        store.apply(adding(a_block("lna")), by=ME)
    with pytest.raises(ConflictError, match="removed by Bo Invented"):
        store.apply([editing(a_block(), name="again")], by=ME)


# -- links -----------------------------------------------------------------------------------------------------------


def test_links_that_lead_nowhere_are_all_named(store: ProjectStore) -> None:
    with pytest.raises(DocumentError) as caught:
        store.apply(adding(a_requirement(parents=("R-0",))), by=ME)
    assert caught.value.message.startswith("3 links lead")
    for name in (
        "parents names requirement R-0",
        "block names block LNA",
        "conditions names conditions set CS",
    ):
        assert f"requirement R-1: {name}" in caught.value.where
    assert store.revision == 1


def test_a_link_to_a_removed_document_is_refused(store: ProjectStore) -> None:
    store.apply(adding(a_block()), by=ME)
    with pytest.raises(DocumentError, match="item LNA-1: block names block LNA"):
        store.apply([removing(a_block()), *adding(an_item())], by=ME)
    store.apply([removing(a_block())], by=ME)
    with pytest.raises(DocumentError, match="item LNA-1: block names block LNA"):
        store.apply(adding(an_item()), by=ME)


def test_what_is_in_use_is_not_removed_and_its_users_are_named(store: ProjectStore) -> None:
    filled(store)
    store.apply(adding(a_requirement("R-2", parents=("R-1",))), by=ME)
    with pytest.raises(DocumentError, match="still in use") as caught:
        store.apply([removing(a_requirement())], by=ME)
    assert "requirement R-2: parents names R-1" in caught.value.where
    assert "activity R-1/test: requirement names R-1" in caught.value.where
    store.apply(
        [
            removing(a_requirement()),
            removing(an_activity()),
            removing(a_requirement("R-2", parents=("R-1",))),
        ],
        by=ME,
    )
    assert not store.load().requirements


def test_a_circle_of_blocks_is_named(store: ProjectStore) -> None:
    store.apply(adding(a_block("A"), a_block("B", parent="a"), a_block("C", parent="B")), by=ME)
    with pytest.raises(DocumentError, match=r"may not stand above itself: ([ABC] → ){3}[ABC] ") as caught:
        store.apply([editing(a_block("A"), parent="C")], by=ME)
    assert "parent" in caught.value.hint
    with pytest.raises(DocumentError, match="D → D"):
        store.apply(adding(a_block("D", parent="D")), by=ME)
    assert store.revision == 2


def test_a_circle_of_requirements_is_named(store: ProjectStore) -> None:
    filled(store)
    second, third = a_requirement("R-2", parents=("R-1",)), a_requirement("R-3", parents=("R-1", "R-2"))
    store.apply(adding(third, second), by=ME)
    with pytest.raises(DocumentError, match=r"R-[123] → R-[123]"):
        store.apply([editing(a_requirement(), parents=("R-3",))], by=ME)


# -- guards ----------------------------------------------------------------------------------------------------------


def test_an_edit_of_what_somebody_else_edited_is_refused_with_who_and_when(store: ProjectStore) -> None:
    filled(store)
    store.apply([editing(a_block(), name="one", revision=2)], by="Bo Invented")
    with pytest.raises(
        ConflictError, match=r"revision 1 to 2.*Bo Invented at 2026-05-04T12:00:00Z"
    ) as caught:
        store.apply([editing(a_block(), name="two", revision=2)], by=ME)
    assert caught.value.where == "block LNA"
    assert store.load().blocks[0].name == "one"


def test_an_edit_that_left_the_revision_alone_is_not_overwritten_either(store: ProjectStore) -> None:
    filled(store)
    store.apply([editing(a_block(), note="spelling")], by="Bo Invented")
    with pytest.raises(ConflictError, match="changed by Bo Invented"):
        store.apply([editing(a_block(), name="two")], by=ME)
    with pytest.raises(ConflictError, match="changed by Bo Invented"):
        store.apply([removing(a_block())], by=ME)


def test_an_edit_must_say_what_it_was_made_from(store: ProjectStore) -> None:
    filled(store)
    blind = editing(a_block(), name="x").model_copy(update={"before": None, "base_revision": None})
    with pytest.raises(DocumentError, match="made from"):
        store.apply([blind], by=ME)
    with pytest.raises(DocumentError, match="no such document"):
        store.apply([editing(a_block("PA"), name="x")], by=ME)


def test_the_project_revision_can_be_asked_for(store: ProjectStore) -> None:
    filled(store)
    with pytest.raises(ConflictError, match=f"revision 1 to 2.*{ME}"):
        store.apply(adding(a_block("PA")), by=ME, expected_revision=1)
    assert store.apply(adding(a_block("PA")), by=ME, expected_revision=2) == 3


def test_one_bad_change_keeps_all_out(store: ProjectStore) -> None:
    with pytest.raises(DocumentError):
        store.apply(adding(a_block(), an_item(block="nowhere")), by=ME)
    assert not store.load().blocks
    assert store.revision == 1


@pytest.mark.parametrize(
    ("update", "message"),
    [
        ({"noun": "gadget"}, "no noun"),
        ({"after": None}, "what the document becomes"),
        ({"id": "PA"}, "another document, LNA"),
        ({"after": '{"format":1,"id":"LNA"}'}, "name: Field required"),
        ({"after": payload_text(a_block()).replace('"quantity":1', '"quantity":NaN')}, "NaN"),
    ],
)
def test_a_change_that_makes_no_sense_is_refused(
    store: ProjectStore, update: dict[str, str | None], message: str
) -> None:
    with pytest.raises(DocumentError, match=message):
        store.apply([adding(a_block())[0].model_copy(update=update)], by=ME)


# -- history ---------------------------------------------------------------------------------------------------------


def test_the_history_tells_every_change(store: ProjectStore) -> None:
    store.apply(adding(a_block(), an_item()), by=ME, reason="first load")
    store.apply([editing(a_block(), name="low noise", revision=2)], by="Bo Invented", reason="review")
    store.apply([removing(an_item())], by=ME)
    entries = store.history(noun="block", id="lna")
    assert [(entry.revision, entry.by, entry.reason, entry.change.action) for entry in entries] == [
        (2, ME, "first load", "add"),
        (3, "Bo Invented", "review", "edit"),
    ]
    assert entries[1].at == "2026-05-04T12:00:00Z"
    assert entries[1].change.before == payload_text(a_block())
    assert entries[1].change.after == payload_text(a_block(name="low noise", revision=2))
    assert [entry.change.id for entry in store.history()] == ["project", "LNA", "LNA-1", "LNA", "LNA-1"]
    assert [entry.change.action for entry in store.history(noun="item")] == ["add", "remove"]


# -- bytes -----------------------------------------------------------------------------------------------------------


def test_a_baseline_keeps_its_bytes(store: ProjectStore) -> None:
    content = b'{"frozen":true}\x00\xff'
    baseline = Baseline(
        id="PDR",
        created_at="2026-05-04T12:00:00Z",
        created_by=ME,
        project_revision=1,
        content_sha256=hashlib.sha256(content).hexdigest(),
        size=len(content),
    )
    assert store.save_baseline(baseline, content) == 2
    assert store.baseline_bytes("pdr") == content
    assert store.load().find(Baseline, "PDR") == baseline
    assert store.history("baseline")[0].by == ME
    with pytest.raises(DocumentError, match="no such baseline"):
        store.baseline_bytes("CDR")
    with pytest.raises(DocumentError, match="bytes"):
        store.save_baseline(baseline.model_copy(update={"id": "CDR"}), content + b" ")
    with pytest.raises(DocumentError, match="bytes"):
        store.apply(adding(baseline.model_copy(update={"id": "CDR"})), by=ME)


def test_a_copy_of_a_file_is_kept_when_asked_for(store: ProjectStore) -> None:
    data = b"freq,gain\n1,2\n"
    kept = an_evidence_file("F-1", sha256=hashlib.sha256(data).hexdigest(), size=len(data), kept=True)
    store.apply(adding(kept, an_evidence_file("F-2")), files={"f-1": data}, by=ME)
    assert store.file_bytes("F-1") == data
    assert store.file_bytes("F-2") is None
    with pytest.raises(DocumentError, match="digest"):
        store.apply(adding(an_evidence_file("F-3", kept=True)), files={"F-3": data}, by=ME)
    with pytest.raises(DocumentError, match="does not become one with a copy"):
        store.apply(adding(an_evidence_file("F-3")), files={"F-4": data}, by=ME)


def test_a_copy_may_come_later_than_its_file(store: ProjectStore) -> None:
    data = b"freq,gain\n1,2\n"
    file = an_evidence_file("F-1", sha256=hashlib.sha256(data).hexdigest(), size=len(data))
    store.apply(adding(file), by=ME)
    with pytest.raises(DocumentError, match="does not become one with a copy"):
        store.apply([editing(file, note="seen")], files={"F-1": data}, by=ME)
    store.apply([editing(file, kept=True)], files={"F-1": data}, by=ME)
    assert store.file_bytes("F-1") == data
    assert store.load().all(EvidenceFile)[0].kept


def test_a_backup_is_a_project_of_its_own(store: ProjectStore, tmp_path: Path) -> None:
    filled(store)
    copy = tmp_path / "copy.specflow"
    store.backup(copy)
    store.apply(adding(a_block("PA")), by=ME)
    with open_project(copy) as copied:
        snapshot = copied.load()
        assert copied.revision == 2
        assert [block.id for block in snapshot.blocks] == ["LNA"]
        assert len(copied.history()) == len(store.history()) - 1
        np.testing.assert_array_equal(
            snapshot.load_columns(["T-1"])["T-1"].values["Gain"].low, some_evidence().values["Gain"].low
        )
        assert copied.apply(adding(a_block("PA")), by=ME) == 3
    with pytest.raises(StoreError, match="already"):
        store.backup(copy)


def test_a_snapshot_outlives_its_store(where: str) -> None:
    with create_project(where, a_project(), clock=noon) as store:
        snapshot = filled(store).load()
    assert len(snapshot.load_columns([table.id for table in snapshot.all(EvidenceTable)])) == 1


def test_loading_needs_no_mapper(project_file: Path) -> None:
    with create_project(project_file, a_project(), clock=noon) as store:
        filled(store)
    program = """
import sys
from specflow.store import open_project
with open_project(sys.argv[1]) as store:
    snapshot = store.load()
    assert len(snapshot.load_columns(["T-1"])) == 1
print(sorted({"sqlalchemy", "alembic", "psycopg"} & sys.modules.keys()))
"""
    ran = subprocess.run(
        [sys.executable, "-c", program, str(project_file)], capture_output=True, text=True, check=True
    )
    assert ran.stdout == "[]\n"


def test_several_threads_read_and_write_one_store(store: ProjectStore) -> None:
    def add(number: int) -> int:
        revision = store.apply(adding(a_block(f"B-{number}")), by=ME)
        assert store.load().find(Block, f"B-{number}") is not None
        return revision

    with ThreadPoolExecutor(4) as threads:
        revisions = list(threads.map(add, range(12)))
    assert sorted(revisions) == list(range(2, 14))


def test_nul_in_names_and_reasons_is_stripped(store: ProjectStore) -> None:
    store.apply(adding(a_block(note="a\0b")), by="An\0n", reason="be\0cause")
    (entry,) = store.history("block")
    assert (entry.by, entry.reason) == ("Ann", "because")
    assert store.load().blocks[0].note == "ab"
