"""The trail over a budget: parent, budget with its revision, the lines, the child that answers for them."""

from __future__ import annotations

from specflow.model.base import Document
from specflow.model.budget import Allocation
from specflow.model.card import TrailStep
from specflow.model.report import CellTone
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.reports.budget_trail import line_words, lines_of, value_words
from specflow.reports.trace import requirement_trail
from specflow.verification import evaluate
from tests import harbour, receiver
from tests.builders import a_block, a_budget_line, a_quantity, a_requirement, at_most

PANEL = a_block("PANEL", parent="SYS")
BUDGET = receiver.a_receiver()


def child(id: str, block: str, parameter: str = "noise_figure") -> Requirement:
    return a_requirement(
        id,
        block=block,
        quantity=a_quantity(parameter),
        limit=at_most(2),
        parents=("R-noise_figure",),
        conditions="CS-AIR",
    )


def link(child: str, **fields: object) -> Allocation:
    return Allocation.model_validate(
        {
            "id": f"A-{child}",
            "parent": "R-noise_figure",
            "child": child,
            "budget": "B-RX",
            "budget_revision": 1,
        }
        | fields
    )


def snapshot(*documents: Document) -> Snapshot:
    below = a_block("MIX", parent="PANEL")
    made = receiver.receiver_project(BUDGET, *documents)
    known = {noun: dict(group) for noun, group in made.documents.items()}
    known["block"] |= {"mix": below, "panel": PANEL}
    return Snapshot(made.revision, known)


def trail(id: str, *documents: Document) -> tuple[TrailStep, ...]:
    made = snapshot(*documents)
    results = evaluate(made, receiver.DICTIONARY, as_of=harbour.AS_OF)
    requirement = next(one for one in made.requirements if one.id == id)
    return requirement_trail(requirement, made, results)


def test_a_parent_leads_over_budget_and_line_to_the_child() -> None:
    steps = trail("R-noise_figure", child("C-1", "LNA"), link("C-1"))
    found = [(step.depth, step.kind, step.id) for step in steps if step.depth > 0 and step.kind != "point"]
    start = found.index((1, "budget", "B-RX"))
    assert found[start : start + 3] == [
        (1, "budget", "B-RX"),
        (2, "budget line", ""),
        (3, "allocation", "C-1"),
    ]
    budget, line, allocation = (
        step for step in steps if step.kind in ("budget", "budget line", "allocation")
    )
    assert budget.text == "Receiver: cascade of 5 positions, revision 1"
    assert line.text.startswith("position 3 LNA noise_figure 1.5 dB, ± 0.3 dB")
    assert "proposed · from budget B-RX revision 1" in allocation.text


def test_children_of_one_budget_stand_below_it_together() -> None:
    steps = trail("R-noise_figure", child("C-1", "LNA"), child("C-2", "IF"), link("C-1"), link("C-2"))
    kinds = [step.kind for step in steps if step.depth > 0][:5]
    assert kinds == ["budget", "budget line", "allocation", "budget line", "allocation"]


def test_a_child_leads_up_over_the_same_budget() -> None:
    steps = trail("C-1", child("C-1", "LNA"), link("C-1"))
    above = [(step.kind, step.id) for step in steps if step.depth < 0]
    assert above == [("requirement", "R-noise_figure"), ("budget", "B-RX"), ("budget line", "")]


def test_a_budget_that_went_on_says_by_which_revision_it_was_shared_out() -> None:
    old = link("C-1", budget_revision=1)
    later = BUDGET.model_copy(update={"revision": 3})
    made = snapshot(child("C-1", "LNA"), old)
    documents = {noun: dict(group) for noun, group in made.documents.items()}
    documents["budget"] = {"b-rx": later}
    made = Snapshot(made.revision, documents)
    results = evaluate(made, receiver.DICTIONARY, as_of=harbour.AS_OF)
    requirement = next(one for one in made.requirements if one.id == "R-noise_figure")
    (step,) = (one for one in requirement_trail(requirement, made, results) if one.kind == "budget")
    assert step.text.endswith("revision 3; shared out by revision 1")
    assert step.tone is CellTone.DOUBTFUL


def test_what_was_set_by_hand_says_so_without_a_budget() -> None:
    by_hand = link("C-1", budget=None, budget_revision=None, manual_reason="agreed at review")
    steps = trail("R-noise_figure", child("C-1", "LNA"), by_hand)
    (step,) = (one for one in steps if one.id == "C-1")
    assert (step.depth, step.kind) == (1, "allocation")
    assert step.text.endswith("set by hand: agreed at review")


def test_an_assembly_answers_for_the_lines_of_what_it_is_made_of() -> None:
    parent = child("C-P", "PANEL", "conversion_loss")
    made = snapshot(parent)
    (line,) = lines_of(BUDGET, parent, made)
    assert line.block == "MIX"


def test_a_child_without_a_line_names_its_position_or_says_there_is_none() -> None:
    made = snapshot()
    assert line_words(BUDGET, child("C", "FIL", "return_loss"), made) == "position 2 FIL"
    words = line_words(BUDGET, child("C", "SYS", "return_loss"), made)
    assert words == "no line of it is on this block or below"


def test_values_are_said_as_they_depend_on_conditions() -> None:
    table = {
        "kind": "table",
        "dimension": "frequency",
        "dimension_unit": "GHz",
        "at": (1, 2),
        "values": (3, 5),
    }
    assert value_words(a_budget_line(value=table)) == "3 to 5 dB by frequency"
    drift = {
        "dimension": "temperature_ambient", "dimension_unit": "°C", "slope": -0.02, "reference": 23,
    }  # fmt: skip
    line = a_budget_line(value=24.0, drifts=(drift,))
    assert value_words(line) == "24 dB, -0.02 for each K of temperature_ambient"
    trace = {"kind": "trace", "table": "T-1", "column": "Gain"}
    assert value_words(a_budget_line(value=trace)) == "as recorded in T-1"
