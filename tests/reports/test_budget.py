"""Budgets as tables: published numbers in their places, ways side by side, nothing shown that is not there."""

from __future__ import annotations

import pytest

from specflow.limits import parse_limit
from specflow.model.budget_line import Distribution, LineTolerance, Meaning
from specflow.model.budget_outcome import BudgetOutcome, Way
from specflow.model.report import CellTone, ReportTable
from specflow.reports.budget import (
    budget_report,
    cumulative_table,
    margins_table,
    shares_table,
    slopes_table,
    titles,
    tolerance_words,
    ways_of,
    ways_table,
    worst_words,
)
from specflow.reports.budget_list import budgets_table
from specflow.reports.chances import chances_table, share_words
from specflow.workflows.budget_outcome import HowToCompute, budget_outcome
from specflow.workflows.show_budget import outcomes_of
from tests import receiver
from tests.budgets.chains import POZAR_10_2, a_chain, project_of
from tests.builders import a_budget, a_budget_line

NAMED = titles(receiver.DICTIONARY)
OUTCOME = receiver.outcome()


def column(table: ReportTable, key: str) -> list[str]:
    place = [one.key for one in table.columns].index(key)
    return [row.cells[place].text for row in table.rows]


def numbers(table: ReportTable, key: str) -> list[float | None]:
    place = [one.key for one in table.columns].index(key)
    return [row.cells[place].number for row in table.rows]


def pozar() -> BudgetOutcome:
    budget = a_chain(*POZAR_10_2)
    return budget_outcome(budget, project_of(budget), receiver.DICTIONARY, HowToCompute(ways=()))


def test_the_published_chain_stands_in_the_cumulative_table() -> None:
    """D. M. Pozar, Microwave Engineering, 4th ed., Example 10.2: F = 1.80, that is 2.55 dB."""
    table = cumulative_table(pozar(), 0, NAMED)
    assert column(table, "block") == ["AMP", "FIL", "MIX"]
    assert column(table, "own_gain") == ["10.00 dB", "-1.00 dB", "-3.00 dB"]
    found = numbers(table, "noise_figure")
    assert found[0] == pytest.approx(2.0)
    assert found[-1] == pytest.approx(2.55, abs=0.01)


def test_what_nobody_states_is_no_column_of_zeros() -> None:
    keys = [one.key for one in cumulative_table(pozar(), 0, NAMED).columns]
    assert "own_antenna_gain" not in keys and "level" not in keys and "noise" not in keys


def test_levels_and_noise_run_behind_each_position() -> None:
    table = cumulative_table(OUTCOME, 0, NAMED)
    assert numbers(table, "level") == pytest.approx([-60, -61, -41, -48, -18])
    noise = numbers(table, "noise")
    assert all(low < high for low, high in zip(noise, numbers(table, "level"), strict=True))  # type: ignore[operator]


def test_a_position_tells_how_many_elements_it_has() -> None:
    assert "LNA × 4" in column(cumulative_table(OUTCOME, 0, NAMED), "block")


def test_margins_name_limit_place_and_reserve() -> None:
    kept = receiver.a_receiver(
        reserves=({"parameter": "noise_figure", "amount": 0.2, "unit": "dB", "holder": "Ann"},)
    )
    plain, less = (margins_table(receiver.outcome(one), NAMED) for one in (None, kept))
    assert column(less, "reserve")[0] == "0.2 dB held by Ann"
    first, second = numbers(plain, "margin")[0], numbers(less, "margin")[0]
    assert first is not None and second == pytest.approx(first - 0.2)
    assert column(plain, "limit") == ["at most 4 dB", "at least 3 dB/K"]
    assert column(plain, "worst")[0] == "17.7 GHz, +55 °C ambient"  # the loss is warmest there


def test_all_ways_stand_side_by_side_with_what_they_assume() -> None:
    table = ways_table(OUTCOME, NAMED)
    assert column(table, "way")[:4] == [
        "nominal",
        "worst case",
        "root sum of squares, of limits",
        "monte carlo",
    ]
    assert set(column(table, "requirement")) == {"R-noise_figure", "R-g_over_t"}
    for way in Way:
        assert f"{way.value}: " in table.intro
    nominal, worst, rss, _ = numbers(table, "margin")[:4]
    assert worst < rss < nominal  # type: ignore[operator]
    assert "sampling only" in column(table, "probability")[3]


def test_a_way_that_is_not_legitimate_says_why_and_leaves_the_others() -> None:
    silent = receiver.tolerances(receiver.a_receiver(), 0.3, meaning=None, distribution=None)
    found = receiver.outcome(silent)
    table = ways_table(found, NAMED)
    refused = [row for row in table.rows if row.cells[2].text == "not legitimate"]
    assert {row.cells[1].text for row in refused} == {"root sum of squares", "monte carlo"}
    assert all(row.cells[-1].tone is CellTone.DOUBTFUL for row in refused)
    assert any("do not say" in row.cells[-1].text for row in refused)
    assert [one.refused for one in ways_of(found, Way.WORST_CASE)] == ["", ""]


def test_shares_add_up_with_what_feeds_the_chain() -> None:
    table = shares_table(OUTCOME, 0, NAMED)
    assert column(table, "block")[-1] == "what feeds the chain"
    for key in receiver.SMALL:
        assert sum(part for part in numbers(table, key) if part is not None) == pytest.approx(100.0)


def test_slopes_stand_beside_the_line_they_are_of() -> None:
    table = slopes_table(OUTCOME, 0, NAMED)
    assert len(table.rows) == len(OUTCOME.lines)
    gain = next(row for row in table.rows if row.id == "B-RX/1/antenna_gain")
    assert gain.cells[-1].number == pytest.approx(1.0)  # 1 dB of antenna gain is 1 dB of G/T
    assert gain.cells[-2].number == 0.0  # and nothing of the noise figure


def test_the_report_says_where_it_is_worst_and_what_was_assumed() -> None:
    report = budget_report(OUTCOME, OUTCOME.place, NAMED)
    facts = dict(report.facts)
    assert facts["Worst point"] == worst_words(OUTCOME)
    assert "sampling only" in facts["Probability that a specimen meets all"]
    assert any("noise of the loss" in value for name, value in report.facts if name == "Assumed")
    assert [one.key for one in report.tables] == [
        "cumulative",
        "margins",
        "ways",
        "chances",
        "shares",
        "slopes",
    ]


def test_the_list_has_every_budget_and_says_why_one_cannot_be_evaluated() -> None:
    good, bad = receiver.a_receiver(), a_budget("B-BAD", requirements=("R-none",))
    snapshot = receiver.receiver_project(good, bad)
    found = outcomes_of([bad, good], snapshot, receiver.DICTIONARY, HowToCompute(ways=()))
    table = budgets_table([bad, good], found)
    assert column(table, "id") == ["B-BAD", "B-RX"]
    assert "R-none" in table.rows[0].cells[-1].text and table.rows[0].cells[-1].tone is CellTone.BAD
    assert table.rows[1].cells[-2].number == pytest.approx(min(one.smallest_margin for one in OUTCOME.served))


def test_a_limit_that_is_not_known_has_no_margin() -> None:
    budget = a_chain(*POZAR_10_2)
    open_limit = parse_limit("TBD dB max")
    found = budget_outcome(
        budget, project_of(budget, limit=open_limit), receiver.DICTIONARY, HowToCompute(ways=())
    )
    assert found.worst is None and found.place == 0
    assert worst_words(found) == "no limit is known at any point"
    assert column(margins_table(found, NAMED), "margin") == ["–"]


@pytest.mark.parametrize(
    ("tolerance", "words"),
    [
        (LineTolerance(minus=0.5, plus=0.5), "± 0.5 dB, meaning not said"),
        (LineTolerance(minus=0.1, plus=0.3, meaning=Meaning.LIMITS), "+0.3/-0.1 dB, limits"),
        (LineTolerance(minus=0.2, plus=0.2, meaning=Meaning.SIGMA, k=2), "± 0.2 dB, 2 σ, normal"),
        (
            LineTolerance(minus=1, plus=1, meaning=Meaning.LIMITS, distribution=Distribution.TRUNCATED_NORMAL, k=3),
            "± 1 dB, limits, normal cut at 3 σ",
        ),
        (
            LineTolerance(minus=1, plus=1, meaning=Meaning.LIMITS, distribution=Distribution.U_SHAPED),
            "± 1 dB, limits, u-shaped",
        ),
    ],
)  # fmt: skip
def test_tolerances_are_said_with_what_they_mean(tolerance: LineTolerance, words: str) -> None:
    assert tolerance_words(a_budget_line(tolerance=tolerance)) == words


def test_a_tolerance_says_what_moves_together_and_what_by_itself() -> None:
    tolerance = LineTolerance(minus=1, plus=1, meaning=Meaning.LIMITS)
    assert tolerance_words(a_budget_line(tolerance=tolerance, correlation_group="lot")).endswith(
        "moves with lot"
    )
    assert tolerance_words(a_budget_line(tolerance=tolerance, shared="per element")).endswith(
        "each element by itself"
    )


def test_the_probability_of_every_point_stands_beside_the_joint_one() -> None:
    table = chances_table(OUTCOME)
    assert column(table, "place") == list(OUTCOME.places)
    one = OUTCOME.chances[0]
    found = numbers(table, one.requirement.id)
    assert found == [pytest.approx(100 * share) for share in one.probability]
    assert one.joint <= min(one.probability)
    assert "may not be multiplied" in table.intro
    assert "chances" in [one.key for one in budget_report(OUTCOME, 0, NAMED).tables]


def test_without_a_monte_carlo_run_there_is_no_table_of_probabilities() -> None:
    assert not chances_table(pozar()).rows


def test_a_share_of_specimens_never_reads_all_or_none_where_one_says_otherwise() -> None:
    assert [share_words(one) for one in (1.0, 0.99999, 0.00001, 0.0)] == [
        "100.00 %",
        "more than 99.99 %",
        "less than 0.01 %",
        "0.00 %",
    ]
