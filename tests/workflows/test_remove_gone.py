"""Requirements whose rows are gone: named and kept, or removed on request with what hangs on them."""

from __future__ import annotations

from collections.abc import Iterator
from datetime import date
from pathlib import Path

import pytest

from specflow.errors import SpecflowError
from specflow.model.base import Document
from specflow.model.budget import Allocation, Budget
from specflow.model.decision import Approval, DeclaredSplit, Nonconformance, Waiver
from specflow.model.evidence import EvidenceTable
from specflow.model.requirement import Activity, Requirement
from specflow.store import ProjectStore, create_project
from specflow.workflows.load_workbook import LoadPreview, accept_load, preview_load
from tests.builders import (
    a_budget,
    a_project,
    a_quantity,
    a_value_column,
    a_waiver,
    adding,
    an_evidence_file,
    an_evidence_table,
    project_workbook,
    some_evidence,
)

ME, ON = "Ann Invented", date(2026, 5, 1)
BLOCKS = [{"ID": "LNA", "Name": "Invented amplifier"}]


def row(name: str, **more: str) -> dict[str, str]:
    fields = {"ID": name, "Block": "LNA", "Parameter": "gain", "Limit": ">= 20 dB", "Method": "test"}
    return fields | more


ALL = [row("R-0"), row("R-1", Parent="R-0"), row("R-2", Parent="R-1"), row("R-3", Parent="R-0, R-1")]
LEFT = [row("R-0"), row("R-2"), row("R-3", Parent="R-0, R-1")]


@pytest.fixture
def store(tmp_path: Path) -> Iterator[ProjectStore]:
    """A project of four requirements; on R-1 hangs one of everything."""
    with create_project(tmp_path / "harbour.specflow", a_project()) as opened:
        accept_load(opened, preview(opened, tmp_path, ALL), by=ME)
        hanging: list[Document] = [
            Allocation(id="AL-1", parent="R-1", child="R-2", manual_reason="shared by hand"),
            a_waiver("W-1", "R-1"),
            DeclaredSplit(
                id="S-1", requirement="R-1", scope_not_met="frequency > 29 GHz", reason="x", by=ME, on=ON
            ),
            Approval(id="AP-1", requirement="R-1", decision="kept open", by=ME, on=ON),
            Nonconformance(id="NCR-1", requirement="R-1", description="a scratch"),
            an_evidence_file(),
            an_evidence_table(
                requirement="R-1", values=(a_value_column(quantity=a_quantity("gain")),), how_read={}
            ),
        ]
        opened.apply(adding(*hanging), columns={"T-1": some_evidence()}, by=ME)
        yield opened


def preview(
    store: ProjectStore, tmp_path: Path, rows: list[dict[str, str]], *, remove_gone: bool = False
) -> LoadPreview:
    book = project_workbook(tmp_path / "reqs.xlsx", blocks=BLOCKS, requirements=rows)
    return preview_load(store, book, remove_gone=remove_gone)


def test_without_being_asked_nothing_is_removed_and_the_row_is_named(
    store: ProjectStore, tmp_path: Path
) -> None:
    found = preview(store, tmp_path, LEFT)
    assert not [change for change in found.changes if change.action == "remove"]
    (gone,) = [one for one in found.findings if one.rule == "workbook-row-gone"]
    assert gone.subject == "R-1" and "load --remove-gone" in gone.remedy


def test_a_removal_says_what_goes_and_what_stays_and_takes_both_along(
    store: ProjectStore, tmp_path: Path
) -> None:
    found = preview(store, tmp_path, LEFT, remove_gone=True)
    (said,) = [one for one in found.findings if one.subject == "R-1"]
    assert said.rule == "requirement-removed"
    for words in ("activity R-1", "allocation AL-1", "waiver W-1", "declared split S-1", "approval AP-1"):
        assert words in said.message.split("; kept")[0]
    kept = "kept without naming it any more: requirement R-3, evidence table T-1, nonconformance NCR-1"
    assert kept in said.message
    assert "evidence of its quantity stays: evidence table T-1" in said.message
    assert "its id is never used again" in said.message
    accept_load(store, found, by=ME)
    after = store.load()
    assert [one.id for one in after.requirements] == ["R-0", "R-2", "R-3"]
    assert [one.parents for one in after.requirements] == [(), (), ("R-0",)]
    for kind in (Allocation, Waiver, DeclaredSplit, Approval):
        assert not after.all(kind)
    assert "R-1" not in {one.requirement for one in after.all(Activity)}
    assert [one.requirement for one in after.all(Nonconformance)] == [None]
    (table,) = after.all(EvidenceTable)
    assert (
        table.requirement is None
        and after.load_columns(["T-1"])["T-1"].values["Gain"].low.tolist() == [21.0] * 3
    )


def test_the_id_is_gone_for_good(store: ProjectStore, tmp_path: Path) -> None:
    accept_load(store, preview(store, tmp_path, LEFT, remove_gone=True), by=ME)
    again = preview(store, tmp_path, ALL)
    with pytest.raises(SpecflowError, match="never used again"):
        accept_load(store, again, by=ME)
    assert store.history(id="R-1")[-1].change.action == "remove"


def test_a_requirement_on_which_a_budget_rests_stays(store: ProjectStore, tmp_path: Path) -> None:
    store.apply(adding(a_budget(requirements=("R-1",), lines=())), by=ME)
    found = preview(store, tmp_path, LEFT, remove_gone=True)
    (said,) = [one for one in found.findings if one.subject == "R-1"]
    assert said.message == "cannot be removed: budget B-1 serves nothing else"
    with pytest.raises(SpecflowError, match="rejected; nothing was stored"):
        accept_load(store, found, by=ME)
    accept_load(store, found, by=ME, take_rest=True)
    assert store.load().find(Requirement, "R-1") is not None


def test_a_budget_of_several_goes_on_without_it(store: ProjectStore, tmp_path: Path) -> None:
    store.apply(adding(a_budget(requirements=("R-0", "R-1"), lines=())), by=ME)
    accept_load(store, preview(store, tmp_path, LEFT, remove_gone=True), by=ME)
    assert [one.requirements for one in store.load().all(Budget)] == [("R-0",)]


def test_when_all_rows_are_there_nothing_is_removed(store: ProjectStore, tmp_path: Path) -> None:
    found = preview(store, tmp_path, ALL, remove_gone=True)
    assert not [change for change in found.changes if change.action == "remove"]
