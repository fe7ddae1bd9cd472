"""Trials: what changes would do, in words and numbers, with nothing stored."""

from __future__ import annotations

from datetime import date
from pathlib import Path

import pytest

from specflow.errors import SpecflowError
from specflow.model.budget import Allocation, Budget
from specflow.model.budget_line import Constant, LineTolerance, Meaning
from specflow.model.requirement import Requirement
from specflow.workflows.allocate import AllocateOptions, accept_allocation, preview_allocation
from specflow.workflows.change_text import read_tolerance
from specflow.workflows.try_change import compare_alternatives, keep_trial, try_changes
from specflow.workflows.try_tables import trial_tables
from tests.budgets import receiver
from tests.builders import (
    a_quantity,
    a_value_column,
    adding,
    an_activity,
    an_evidence_file,
    an_evidence_table,
    an_item,
    some_columns,
    some_evidence,
)

AS_OF = date(2026, 6, 1)


def test_a_line_moves_margins_and_the_allocations_of_its_budget(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        accept_allocation(store, preview_allocation(store, "RX", AllocateOptions("equal")), by="A. Invented")
        revision = store.revision
        trial = try_changes(store, ["RX LNA gain = 15 dB"], AS_OF)
        assert store.revision == revision
    (effect,) = trial.budgets
    limits = {name: (first, second) for name, first, second in effect.limits}
    before, after = limits["SYS-NF"]
    assert before is not None and after is not None and after.margin < before.margin
    assert effect.after is not None and effect.after.closure
    by_child = {one.child: one for one in trial.allocations}
    assert by_child["LNA-GAIN"].proposed == "14.5 dB..15.5 dB"
    assert by_child["MIX-NOISE-FIGURE"].difference.startswith("tightened by")
    assert all("RX changes" in one.why for one in trial.allocations)


def test_a_system_limit_moves_margin_and_allocations(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        accept_allocation(store, preview_allocation(store, "RX", AllocateOptions("equal")), by="A. Invented")
        trial = try_changes(store, ["SYS-NF limit <= 2 dB"], AS_OF)
    ((name, before, after),) = trial.budgets[0].limits
    assert name == "SYS-NF" and before is not None and after is not None
    assert before.margin - after.margin == pytest.approx(1.0)
    tightened = {one.child for one in trial.allocations if one.difference}
    assert tightened == {"LNA-NOISE-FIGURE", "MIX-NOISE-FIGURE", "IF-NOISE-FIGURE"}
    assert "LNA-IIP3" not in {one.child for one in trial.allocations}


def test_a_status_that_would_change_is_told(tmp_path: Path) -> None:
    column = a_value_column("NF", quantity=a_quantity("noise_figure"))
    table = an_evidence_table("EV-1", block="SYS", values=(column,), conditions=())
    arrays = some_evidence(
        {"NF": (1.9, 2.1, 2.4)},
        conditions=some_columns(temperature_ambient=[-30.0, 20.0, 55.0]),
        items="SYS-1",
        u=0.05,
    )
    with receiver.make_store(tmp_path / "rx.specflow", an_activity("SYS-NF")) as store:
        store.apply(
            adding(an_evidence_file(), an_item("SYS-1", block="SYS", hardware_type="qualification"), table),
            columns={"EV-1": arrays},
            by="A. Invented",
        )
        trial = try_changes(store, ["SYS-NF limit <= 2.2 dB"], AS_OF)
    (status,) = trial.statuses
    assert status.requirement == "SYS-NF"
    assert status.label[1] == "failing" and status.proved == ("3 of 3", "2 of 3")
    assert status.margin == (pytest.approx(0.6), pytest.approx(-0.2))


def test_several_changes_are_tried_together_and_may_be_kept(tmp_path: Path) -> None:
    texts = [
        "RX position 2 passive = no",
        "RX FIL noise_figure = 2 dB",
        "rx lna gain tolerance = +0.3/-0.2 dB limits uniform",
        "RX IF count = 2",
        "SYS-IP limit >= -10 dBm",
    ]
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        with pytest.raises(SpecflowError, match="there is no line 'FIL noise_figure'"):
            try_changes(store, texts, AS_OF)
        trial = try_changes(store, [texts[2], texts[3], texts[4]], AS_OF)
        keep_trial(store, trial, by="A. Invented", reason="looked better")
        snapshot = store.load()
    budget = snapshot.find(Budget, "RX")
    assert budget is not None and budget.revision == 2
    tolerance = budget.lines[0].tolerance
    assert tolerance is not None and (tolerance.plus, tolerance.minus) == (0.3, 0.2)
    assert budget.chain[3].count == 2
    requirement = snapshot.find(Requirement, "SYS-IP")
    assert requirement is not None and requirement.limit.text == ">= -10 dBm"


def test_lines_and_positions_may_be_added(tmp_path: Path) -> None:
    texts = [
        "RX position 9 block = IF",
        "RX add position 9 gain = 3 dB",
        "RX add position 9 noise figure = 5 dB",
    ]
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        trial = try_changes(store, [*texts, "RX add position 9 iip3 = 20 dBm"], AS_OF)
        swapped = try_changes(store, ["RX position 4 block = MIX"], AS_OF)
    after = trial.budgets[0].after
    assert after is not None and after.positions == 5 and not after.error
    assert not swapped.budgets  # the same figures under another name


def test_a_tolerance_moves_the_worst_case_only(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        trial = try_changes(store, ["RX LNA gain tolerance = 2 dB limits uniform"], AS_OF)
    for _, before, after in trial.budgets[0].limits:
        assert before is not None and after is not None
        assert after.margin == before.margin and after.worst_case < before.worst_case - 0.01


def test_a_position_may_be_taken_out(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        trial = try_changes(store, ["RX FIL removed"], AS_OF)
    after = trial.budgets[0].after
    assert after is not None and after.positions == 3 and not after.error


def test_a_budget_that_can_no_longer_be_evaluated_says_why(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        trial = try_changes(store, ["RX FIL passive = no"], AS_OF)
    after = trial.budgets[0].after
    assert after is not None and "there is no noise figure" in after.error


def test_a_change_after_which_a_budget_cannot_be_evaluated_is_not_kept(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        trial = try_changes(store, ["RX LNA noise_figure = -3 dB"], AS_OF)
        before = store.revision
        with pytest.raises(SpecflowError, match=r"RX could no longer be evaluated.*below 0 dB"):
            keep_trial(store, trial, by="A. Invented", reason="tried")
        assert store.revision == before


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("NOPE gain = 3 dB", "neither a requirement nor a budget"),
        ("RX LNA gain", "nothing can be made of"),
        ("RX LNA gain = wide", "RX LNA gain = wide"),
        ("RX LNA gain = 20 W", "cannot be taken in dB"),
        ("RX XX gain = 3 dB", "there is no line 'XX gain'"),
        ("SYS-NF title x", "of a requirement the limit may be tried"),
        ("SYS-NF limit", "of a requirement the limit may be tried"),
        ("SYS-NF limit <= 3 parsecs", "the limit is in parsec"),
        ("SYS-NF limit soft", "nothing supplies soft"),
        ("RX position 9 removed", "there is no position 9"),
        ("RX position 1 count = many", "is no count"),
        ("RX LNA gain tolerance = some", "is no tolerance"),
        ("RX LNA gain tolerance = 1 dB limits square", "is no distribution"),
        ("RX LNA gain tolerance = 1 dB normal", "a normal distribution has no limits"),
    ],
)
def test_what_cannot_be_read_is_one_message(tmp_path: Path, text: str, message: str) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        try:
            trial = try_changes(store, [text], AS_OF)
        except SpecflowError as error:
            assert message in str(error)
        else:
            assert any(one.after is not None and message in one.after.error for one in trial.budgets)


def test_tolerances_as_people_write_them() -> None:
    limits = LineTolerance(minus=0.5, plus=0.5, meaning=Meaning.LIMITS)
    assert read_tolerance("± 0.5 dB limits", "dBm") == limits
    sigma = read_tolerance("0.3 dB 2 sigma", "dB")
    assert sigma is not None and sigma.meaning is Meaning.SIGMA and sigma.k == 2
    assert read_tolerance("none", "dB") is None


def test_budgets_of_one_requirement_side_by_side(tmp_path: Path) -> None:
    other = receiver.a_receiver("RX-2")
    lines = tuple(
        line.model_copy(update={"value": Constant(value=0.8)})
        if (line.block, line.parameter) == ("LNA", "noise_figure")
        else line
        for line in other.lines
    )
    with receiver.make_store(tmp_path / "rx.specflow", other.model_copy(update={"lines": lines})) as store:
        states = compare_alternatives(store, "sys-nf")
    assert [state.budget for state in states] == ["RX-2", "RX"]
    first, second = (state.limit("SYS-NF") for state in states)
    assert first is not None and second is not None and first.margin > second.margin


def test_a_budget_is_shared_again_with_the_choices_it_was_shared_with(tmp_path: Path) -> None:
    """What a trial says each child would get is what allocating the changed budget with the same choices gives."""
    options = AllocateOptions("least effort", fixed=("IF",), free_gains=("LNA",), weights={"MIX": 3.0})
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        accept_allocation(store, preview_allocation(store, "RX", options), by="A. Invented")
        link = next(one for one in store.load().all(Allocation) if one.child == "LNA-NOISE-FIGURE")
        assert link.sharing == options.sharing
        trial = try_changes(store, ["SYS-NF limit <= 2.8 dB"], AS_OF)
        given = {one.child: one.proposed for one in trial.allocations if one.proposed}
        keep_trial(store, trial, by="A. Invented", reason="tighter")
        same = preview_allocation(store, "RX", options)
        other = preview_allocation(store, "RX", AllocateOptions("least effort"))
    expected = {one.child.id: one.given.text for one in same.proposals}
    assert given and all(expected[child] == text for child, text in given.items())
    plain = {one.child.id: one.given.text for one in other.proposals}
    assert any(plain.get(child) != text for child, text in given.items())


def test_a_budget_that_can_no_longer_be_shared_does_not_give_the_same(tmp_path: Path) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store:
        accept_allocation(store, preview_allocation(store, "RX"), by="A. Invented")
        trial = try_changes(store, ["RX LNA noise_figure = -2 dB"], AS_OF)
    assert trial.allocations
    assert all("cannot be shared" in one.difference and not one.proposed for one in trial.allocations)
    (change,) = trial.changes
    said = next(one.meaning for one in change.fields if one.field == "lines")
    assert said == "LNA noise_figure (position 1): 1.2 dB → -2 dB"
    table = next(one for one in trial_tables(trial) if one.key == "allocations")
    assert all(cell.text != "the same" for row in table.rows for cell in row.cells)


@pytest.mark.parametrize(
    ("text", "words"),
    [("RX noise source = -50 K", "a temperature below 0 K"), ("RX bandwidth = 0 Hz", "no bandwidth")],
)
def test_what_no_budget_can_have_is_refused_in_plain_words(tmp_path: Path, text: str, words: str) -> None:
    with receiver.make_store(tmp_path / "rx.specflow") as store, pytest.raises(SpecflowError) as caught:
        try_changes(store, [text], AS_OF)
    assert words in caught.value.message
