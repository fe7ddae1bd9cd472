"""What a removal takes along: links that may be empty are cut, what needs one goes too, and what hangs on that."""

from __future__ import annotations

from specflow.changes.removal import removal_of
from specflow.model.base import Document
from specflow.model.decision import Nonconformance
from tests.builders import a_block, a_budget, a_requirement, a_snapshot, a_waiver, an_activity, an_item

REPORT = Nonconformance(id="NCR-1", requirement="R-1", description="a scratch")


def ids(documents: tuple[Document, ...]) -> list[str]:
    return [str(getattr(one, "id", "")) for one in documents]


def test_what_hangs_on_a_block_goes_with_it_step_by_step() -> None:
    block, system = a_block("LNA", parent="SYS"), a_block("SYS")
    documents = (system, block, an_item(block="LNA"), a_requirement(), an_activity(), a_waiver(), REPORT)
    found = removal_of([block], a_snapshot(*documents))
    assert ids(found.removed) == ["LNA", "LNA-1", "R-1", an_activity().id, "W-1"]
    assert [(one.id, one.requirement) for one in found.changed] == [("NCR-1", None)]  # type: ignore[attr-defined]
    assert not found.bound


def test_a_list_loses_the_name_and_one_that_must_name_something_binds() -> None:
    parent, child = a_requirement(), a_requirement("R-2", parents=("R-0", "r-1"))
    one, only = a_budget("B-1", requirements=("R-1", "R-2")), a_budget("B-2", requirements=("R-1",))
    found = removal_of([parent], a_snapshot(a_block(), parent, child, one, only))
    assert [(each.id, each.parents) for each in found.changed if each.id == "R-2"] == [("R-2", ("R-0",))]  # type: ignore[attr-defined]
    assert ids(found.changed) == ["R-2", "B-1"] and ids(found.bound) == ["B-2"]


def test_what_is_about_to_be_stored_counts_instead_of_what_is() -> None:
    parent, child = a_requirement(), a_requirement("R-2", parents=("R-1",))
    freed = child.model_copy(update={"parents": ()})
    assert removal_of([parent], a_snapshot(a_block(), parent, child), [freed]).changed == ()
    new = an_activity("R-1", id="A-9")
    assert ids(removal_of([parent], a_snapshot(a_block(), parent), [new]).removed) == ["R-1", "A-9"]


def test_nothing_hangs_on_what_nobody_names() -> None:
    requirement = a_requirement()
    found = removal_of([requirement], a_snapshot(a_block(), requirement))
    assert (found.removed, found.changed, found.bound) == ((requirement,), (), ())
