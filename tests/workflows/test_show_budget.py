"""Showing budgets from a store: which point, which ways, what is said of names that mean nothing."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest

from specflow.budgets import evaluate_budget, monte_carlo, worst_case
from specflow.errors import CalculationError, DocumentError, SpecflowError
from specflow.model.budget_outcome import Way
from specflow.store import ProjectStore
from specflow.workflows.budget_outcome import HowToCompute
from specflow.workflows.show_budget import (
    list_budgets,
    nearest_budget,
    place_named,
    show_budget,
    ways_named,
)
from tests import receiver

NOMINAL = HowToCompute(ways=())


@pytest.fixture
def store(tmp_path: Path) -> Iterator[ProjectStore]:
    with receiver.receiver_store(tmp_path / "receiver.specflow") as opened:
        yield opened


def test_what_is_shown_is_what_the_budget_computes(store: ProjectStore) -> None:
    snapshot = store.load()
    budget = receiver.a_receiver()
    shown = show_budget(store, "b-rx", how=HowToCompute(trials=500, seed=7))
    nominal = evaluate_budget(budget, snapshot, receiver.DICTIONARY)
    drawn = monte_carlo(budget, snapshot, receiver.DICTIONARY, trials=500, seed=7)
    worst = worst_case(budget, snapshot, receiver.DICTIONARY)
    outcome = shown.outcome
    for quantity, one in zip(outcome.quantities, nominal.outputs, strict=True):
        assert (quantity.result == one.result).all() and (quantity.cumulative == one.cumulative).all()
    assert [one.joint for one in outcome.chances] == [
        chance.joint.value for output in drawn.outputs for chance in output.served
    ]
    found = next(one for one in outcome.ways if one.way is Way.WORST_CASE)
    assert found.margin == worst.outputs[0].served[0].adverse.smallest_margin
    assert nominal.worst is not None and outcome.place == nominal.worst.worst == shown.place


@pytest.mark.parametrize(
    ("at", "place"),
    [
        ("1", 0),
        ("#4", 3),
        ("17.7 GHz, -25 °C", 0),
        ("+55 °C, 20.2 GHz", 3),
        ("55, 17.7", 1),
        ("−25 °C ambient, 20.2", 2),
    ],
)
def test_a_point_is_named_by_number_or_by_its_conditions(store: ProjectStore, at: str, place: int) -> None:
    shown = show_budget(store, "B-RX", at=at, how=NOMINAL)
    assert shown.place == place
    assert shown.outcome.places[place] in shown.report.tables[0].title


@pytest.mark.parametrize(
    ("at", "message"),
    [
        ("9", "no condition point 9"),
        ("30 GHz", "no condition point of B-RX is at '30 GHz'"),
        ("17.7", "2 condition points"),
    ],
)
def test_a_point_that_is_none_or_several_is_refused_with_those_there_are(at: str, message: str) -> None:
    with pytest.raises(SpecflowError, match=message) as caught:
        place_named(receiver.outcome(how=NOMINAL), at)
    assert caught.value.hint


def test_one_way_that_cannot_be_gone_is_an_error_among_others_it_is_told(tmp_path: Path) -> None:
    silent = receiver.tolerances(receiver.a_receiver(), meaning=None, distribution=None)
    with receiver.receiver_store(tmp_path / "b.specflow", receiver.receiver_project(silent)) as store:
        with pytest.raises(CalculationError, match="do not say"):
            show_budget(store, "B-RX", how=HowToCompute(ways=(Way.RSS,)))
        shown = show_budget(store, "B-RX", how=HowToCompute(ways=(Way.RSS, Way.WORST_CASE)))
        assert {one.way for one in shown.outcome.ways if one.refused} == {Way.RSS}
        assert {one.way for one in shown.outcome.ways if not one.refused} == {Way.NOMINAL, Way.WORST_CASE}


def test_a_tolerance_that_no_block_can_have_is_refused_by_its_line() -> None:
    wide = receiver.tolerances(receiver.a_receiver(), amount=20.0)
    refused = [one.refused for one in receiver.outcome(wide).ways if one.refused]
    assert refused and all(" (position " in one.partition(": the tolerance takes ")[0] for one in refused)


def test_a_dynamic_range_says_that_no_signal_to_noise_ratio_is_taken_off() -> None:
    notes = receiver.outcome(how=NOMINAL, names=("sfdr",)).notes
    assert any("no signal-to-noise ratio is taken off" in note for note in notes)


def test_every_step_is_told(store: ProjectStore) -> None:
    told: list[str] = []
    show_budget(store, "B-RX", how=HowToCompute(trials=1000), step=told.append)
    trials = ["monte carlo, 1,000 trials", "monte carlo, 1,000 of 1,000 trials"]
    assert told == ["nominal", "worst case", "root sum of squares", *trials]


def test_a_budget_that_is_not_there_is_refused_with_what_is_near(store: ProjectStore) -> None:
    with pytest.raises(DocumentError, match="no budget 'B-RY'") as caught:
        show_budget(store, "B-RY")
    assert "B-RX" in caught.value.hint


def test_the_list_has_the_smallest_margin(store: ProjectStore) -> None:
    (row,) = list_budgets(store).rows
    outcome = receiver.outcome(how=NOMINAL)
    assert row.cells[-2].number == pytest.approx(min(one.smallest_margin for one in outcome.served))


def test_the_nearest_budget_is_said_in_one_sentence(store: ProjectStore) -> None:
    words = nearest_budget(store.load(), receiver.DICTIONARY)
    assert words.startswith("Nearest to its limit: B-RX (Receiver), R-noise_figure +")
    assert words.endswith("of specimens meet it everywhere.")


def test_ways_are_named_as_options_and_as_words() -> None:
    assert ways_named(["rss", "Worst-Case", "monte carlo", "nominal"]) == (
        Way.RSS,
        Way.WORST_CASE,
        Way.MONTE_CARLO,
        Way.NOMINAL,
    )
    with pytest.raises(SpecflowError, match="no method 'guess'"):
        ways_named(["guess"])


def test_very_many_condition_points_are_given_fewer_trials_unless_asked() -> None:
    assert HowToCompute().trials_over(36) == 20_000
    assert 1_000 < HowToCompute().trials_over(1_000) < 20_000
    assert HowToCompute().trials_over(1_000_000) == 1_000
    assert HowToCompute(trials=7).trials_over(1_000_000) == 7
