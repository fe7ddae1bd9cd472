"""Allocating through the store: proposals, closure, hand overrides, what no longer follows."""

from __future__ import annotations

from datetime import date
from pathlib import Path

import numpy as np
import pytest

from specflow.errors import ConflictError, DocumentError
from specflow.limits import parse_limit
from specflow.model.block import Block, Plane
from specflow.model.budget import Allocation, Budget, Reserve
from specflow.model.limit import Limit
from specflow.model.requirement import Requirement
from specflow.store import ProjectStore
from specflow.workflows.allocate import (
    AllocateOptions,
    AllocatePreview,
    ByHand,
    accept_allocation,
    preview_allocation,
)
from specflow.workflows.as_known import children_of_budget
from specflow.workflows.budget_standing import budget_standings
from specflow.workflows.evaluate_project import evaluate_project, project_dictionary
from specflow.workflows.solve_budget import solve_budget
from specflow.workflows.try_change import keep_trial, try_changes, with_documents
from tests.budgets import receiver
from tests.builders import a_requirement, between, editing

AS_OF = date(2026, 6, 1)


def test_proposals_become_requirements_with_their_links(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        preview = preview_allocation(store, "rx", AllocateOptions("equal"))
        assert preview.closure.closes is True
        assert store.load().find(Requirement, "LNA-NOISE-FIGURE") is None  # a preview stores nothing
        accept_allocation(store, preview, by="A. Invented")
        snapshot = store.load()
    child = snapshot.find(Requirement, "LNA-NOISE-FIGURE")
    assert child is not None
    assert child.parents == ("SYS-NF",)
    assert child.conditions == "HOT-COLD"
    assert child.limit.text.startswith("<= ")
    gain = snapshot.find(Requirement, "LNA-GAIN")
    assert gain is not None and gain.limit.text == "17.5 dB..18.5 dB"
    assert set(gain.parents) == {"SYS-NF", "SYS-IP"}
    link = snapshot.find(Allocation, "SYS-NF > LNA-NOISE-FIGURE")
    assert link is not None
    assert (link.budget, link.budget_revision, link.parent_revision) == ("RX", 1, 1)
    assert link.proposed == child.limit.text and link.state == "proposed"


def test_allocating_again_changes_nothing(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        accept_allocation(store, preview_allocation(store, "RX"), by="A. Invented")
        assert not preview_allocation(store, "RX").changes


def test_what_is_given_by_hand_keeps_reason_and_difference_and_counts_in_closure(tmp_path: Path) -> None:
    hand = ByHand("LNA", "noise_figure", "<= 2.8 dB", "the supplier offers no better")
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        preview = preview_allocation(store, "RX", AllocateOptions("equal", by_hand=[hand]))
        assert preview.closure.closes is False
        one = next(one for one in preview.proposals if one.child.id == "LNA-NOISE-FIGURE")
        assert one.given.text == "<= 2.8 dB" and "relaxed by" in one.difference
        accept_allocation(store, preview, by="A. Invented")
        again = preview_allocation(store, "RX", AllocateOptions("equal"))
        kept = next(one for one in again.proposals if one.child.id == "LNA-NOISE-FIGURE")
        link = store.load().find(Allocation, "SYS-NF > LNA-NOISE-FIGURE")
    assert kept.reason == "the supplier offers no better" and kept.given.text == "<= 2.8 dB"
    assert not again.changes
    assert link is not None and link.manual_reason == "the supplier offers no better"


def test_by_hand_needs_a_reason_and_a_share(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        for hand, message in (
            (ByHand("LNA", "noise_figure", "<= 2 dB", ""), "no reason is given"),
            (ByHand("LNA", "op1db", ">= 2 dBm", "why"), "allocates no op1db to LNA"),
        ):
            with pytest.raises(DocumentError, match=message):
                preview_allocation(store, "RX", AllocateOptions(by_hand=[hand]))


def test_reserve_is_stored_with_its_holder_and_the_links_name_the_new_revision(tmp_path: Path) -> None:
    reserve = Reserve(parameter="noise_figure", amount=0.3, unit="dB", holder="Systems")
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        plain = preview_allocation(store, "RX", AllocateOptions("equal"))
        kept = preview_allocation(store, "RX", AllocateOptions("equal", reserves=[reserve]))
        accept_allocation(store, kept, by="A. Invented")
        snapshot = store.load()
    budget = snapshot.find(Budget, "RX")
    link = snapshot.find(Allocation, "SYS-NF > LNA-NOISE-FIGURE")
    assert budget is not None and budget.revision == 2 and budget.reserves == (reserve,)
    assert link is not None and link.budget_revision == 2
    first, second = (
        next(one.allotment.high for one in each.proposals if one.child.id == "LNA-NOISE-FIGURE")
        for each in (plain, kept)
    )
    assert second < first


def test_a_project_that_went_on_refuses_an_old_preview(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        preview = preview_allocation(store, "RX")
        budget = store.load().find(Budget, "RX")
        assert budget is not None
        store.apply([editing(budget, title="Receiver")], by="somebody")
        with pytest.raises(ConflictError):
            accept_allocation(store, preview, by="A. Invented")


def test_least_effort_says_what_binds_and_closes(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        preview = preview_allocation(store, "RX", AllocateOptions("least effort"))
    assert preview.closure.closes is True
    assert any(one.startswith("SYS-NF at ") for one in preview.binding)
    assert any(one.startswith("SYS-IP at ") for one in preview.binding)
    assert {one.line for one in preview.strains} >= {"LNA noise_figure", "IF iip3"}


def test_solving_a_line_for_both_limits(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        solved = solve_budget(store, "RX", "LNA gain")
    assert solved.solution.at_least is not None and solved.solution.at_most is not None
    assert solved.solution.at_least.requirement == "SYS-NF"
    assert solved.solution.at_most.requirement == "SYS-IP"
    assert len(solved.table.rows) == 3


def test_a_requirement_that_stands_is_kept_as_what_its_block_takes_first(tmp_path: Path) -> None:
    standing = a_requirement(
        "LNA-G", block="LNA", parents=("SYS-NF",), limit=between(16, 20), conditions="HOT-COLD"
    )
    with receiver.make_store(tmp_path / "rx.specflow", standing) as store:
        preview = preview_allocation(store, "RX", AllocateOptions("equal"))
    one = next(one for one in preview.proposals if one.child.id == "LNA-G")
    assert one.given == standing.limit and one.allotment.words == "LNA-G as it stands"
    edited = [
        change.id for change in preview.changes if change.action == "edit" and "limit" in str(change.fields)
    ]
    assert edited == []
    assert preview.closure.closes is True
    assert any("LNA gain 16 dB" in limit.stands for limit in preview.closure.limits)


def test_a_figure_that_follows_conditions_gets_a_limit_that_follows_them(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        text = "RX FIL insertion_loss = table temperature_ambient: -30 °C 0.5; 55 °C 3 dB linear"
        keep_trial(store, try_changes(store, [text], AS_OF), by="A. Invented", reason="measured")
        preview = preview_allocation(store, "RX", AllocateOptions("equal"))
        limit = next(one.given for one in preview.proposals if one.child.id == "FIL-INSERTION-LOSS")
        # on the line from 0.5 dB at -30 °C to 3 dB at 55 °C, and ± 0.3 dB
        assert (
            limit.text
            == "by temperature_ambient[°C] (-30: 0.2 dB..0.8 dB; 20: 1.67 dB..2.28 dB; 55: 2.7 dB..3.3 dB)"
        )
        assert preview.closure.closes is True
        accept_allocation(store, preview, by="A. Invented")
        snapshot = store.load()
        standing = budget_standings(snapshot, project_dictionary(snapshot))["rx"]
        assert standing.closes is True, standing.sentence
        cold = preview_allocation(store, "RX", AllocateOptions("equal"))
        assert not cold.changes and not cold.outdated


def test_a_child_is_held_to_its_bound_at_each_condition(tmp_path: Path) -> None:
    """A table of limits that is loose in the cold only, where the system has room: closure holds point by point."""
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        accept_allocation(store, preview_allocation(store, "RX", AllocateOptions("equal")), by="A. Invented")
        snapshot = store.load()
        children = children_of_budget(snapshot, snapshot.find(Budget, "RX"))  # type: ignore[arg-type]
        noise = next(one for one in children if one.id == "LNA-NOISE-FIGURE")
        system = snapshot.find(Requirement, "SYS-NF")
        assert system is not None
        cold = parse_limit("by temperature_ambient[°C] (-30: <= 3.5 dB; 20: <= 3 dB; 55: <= 3 dB)")
        own = parse_limit(
            f"by temperature_ambient[°C] (-30: <= 1.6 dB; 20: {noise.limit.text}; 55: {noise.limit.text})"
        )
        for text, closes in ((cold, True), (system.limit, False)):
            documents = [
                noise.model_copy(update={"limit": own}),
                system.model_copy(update={"limit": text}),
            ]
            changed = with_documents(snapshot, documents)
            standing = budget_standings(changed, project_dictionary(changed))["rx"]
            assert standing.closes is closes, standing.sentence


def test_shares_by_conditions_follow_the_drift_of_a_block(tmp_path: Path) -> None:
    """A gain that falls with heat has to be so much only where it is: the one number asks for it everywhere."""
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        text = "RX LNA noise_figure = 1.2 dB + 0.01 dB/K of temperature_ambient from 20 °C"
        keep_trial(store, try_changes(store, [text], AS_OF), by="A. Invented", reason="measured")
        one = preview_allocation(store, "RX", AllocateOptions("proportional"))
        each = preview_allocation(store, "RX", AllocateOptions("proportional", by_conditions=True))
        limits = {name: limit.text for name, limit in _limits(each).items()}
        assert limits["LNA-NOISE-FIGURE"].startswith("by temperature_ambient[°C] (-30: <= ")
        assert each.closure.closes is True
        left = [
            float(np.nanmax(found.margin)) for found in each.closure.limits if found.requirement == "SYS-NF"
        ]
        assert 0 <= left[0] < 0.02  # nothing left but rounding, at every condition
        assert _limits(one)["LNA-NOISE-FIGURE"].text.startswith("<= ")
        accept_allocation(store, each, by="A. Invented")
        snapshot = store.load()
        assert budget_standings(snapshot, project_dictionary(snapshot))["rx"].closes is True


def test_a_share_carries_plane_and_statistic_where_they_are_known(tmp_path: Path) -> None:
    """What a line states; else a block's plane called as the port that the figure belongs to; never a guess."""
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        snapshot = store.load()
        budget = snapshot.find(Budget, "RX")
        block = snapshot.find(Block, "MIX")
        assert budget is not None and block is not None
        stated = {("LNA", "noise_figure"): {"plane": "element port", "statistic": "worst"}}
        lines = tuple(
            one.model_copy(update=stated.get((one.block, one.parameter), {})) for one in budget.lines
        )
        planes = (Plane(name="input"), Plane(name="output"))
        store.apply([editing(budget, lines=lines), editing(block, planes=planes)], by="A. Invented")
        preview = preview_allocation(store, "RX", AllocateOptions("equal"))
    found = {one.child.id: one.child.quantity for one in preview.proposals}
    assert (found["LNA-NOISE-FIGURE"].plane, found["LNA-NOISE-FIGURE"].statistic) == ("element port", "worst")
    assert found["MIX-NOISE-FIGURE"].plane == "input" and found["MIX-IIP3"].plane == "input"
    assert found["MIX-GAIN"].plane == "" and found["IF-NOISE-FIGURE"].plane == ""


def test_the_share_of_a_mixer_is_on_the_sideband_that_its_line_states(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        budget = store.load().find(Budget, "RX")
        assert budget is not None
        stated = {("MIX", "noise_figure"): {"sideband": "SSB"}}
        lines = tuple(
            one.model_copy(update=stated.get((one.block, one.parameter), {})) for one in budget.lines
        )
        store.apply([editing(budget, lines=lines)], by="A. Invented")
        preview = preview_allocation(store, "RX", AllocateOptions("equal"))
    found = {one.child.id: one.child for one in preview.proposals}
    assert found["MIX-NOISE-FIGURE"].quantity.plane == "SSB"
    assert "(single sideband)" in found["MIX-NOISE-FIGURE"].title
    assert found["IF-NOISE-FIGURE"].quantity.plane == ""
    assert preview.closure.closes is True


def _limits(preview: AllocatePreview) -> dict[str, Limit]:
    return {one.child.id: one.given for one in preview.proposals}


def test_a_changed_line_limit_or_child_marks_what_no_longer_follows(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        accept_allocation(store, preview_allocation(store, "RX", AllocateOptions("equal")), by="A. Invented")
        assert not _codes(store) & {"outdated-allocation", "closure-not-shown", "allocation-differs"}
        keep_trial(
            store,
            try_changes(store, ["RX LNA gain = 15 dB", "MIX-IIP3 limit >= 5 dBm"], AS_OF),
            by="A. Invented",
            reason="another part",
        )
        assert _codes(store) >= {"outdated-allocation", "closure-not-shown", "allocation-differs"}
        again = preview_allocation(store, "RX", AllocateOptions("equal"))
        reasons = {one.child: " | ".join(one.reasons) for one in again.outdated}
        assert "made from revision 1 of RX, now 2" in reasons["LNA-NOISE-FIGURE"]
        assert "the budget gives 14.5 dB..15.5 dB now" in reasons["LNA-GAIN"]
        assert "MIX-IIP3 carries >= 5 dBm" in reasons["MIX-IIP3"]
        accept_allocation(store, again, by="A. Invented")
        assert not _codes(store) & {"outdated-allocation", "closure-not-shown", "allocation-differs"}


def _codes(store: ProjectStore) -> set[str]:
    return {finding.rule for finding in evaluate_project(store, AS_OF).findings}
