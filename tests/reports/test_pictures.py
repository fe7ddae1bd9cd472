"""Pictures of budgets: the same figures as the tables, as data and as lines of text."""

from __future__ import annotations

from typing import Any, TypeVar

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from pydantic import ValidationError

from specflow.model.picture import (
    Bar,
    ContributionBars,
    Distribution,
    LevelDiagram,
    Mark,
    Series,
)
from specflow.reports.budget import titles
from specflow.reports.picture_text import SIGNS, Scale, column_heights, picture_lines
from specflow.reports.pictures import budget_pictures, probability_words
from specflow.reports.predicted import predicted_facts, predicted_pictures
from specflow.workflows.budget_outcome import HowToCompute
from tests import receiver
from tests.budgets.chains import a_chain
from tests.builders import a_requirement

P = TypeVar("P", LevelDiagram, ContributionBars, Distribution)
NAMED = titles(receiver.DICTIONARY)
OUTCOME = receiver.outcome()
PICTURES = budget_pictures(OUTCOME, OUTCOME.place, NAMED)


def of(kind: type[P]) -> list[P]:
    return [one for one in PICTURES if isinstance(one, kind)]


def test_a_budget_gives_levels_contributions_reaches_and_distributions() -> None:
    assert [one.kind for one in PICTURES] == [
        "levels",
        "contributions", "contributions",  # who makes how much of noise figure and G/T
        "contributions", "contributions",  # how far each line takes them
        "distribution", "distribution",
    ]  # fmt: skip


def test_the_level_diagram_has_signal_noise_and_compression_of_the_blocks() -> None:
    (diagram,) = of(LevelDiagram)
    assert diagram.stations == ("input", "ANT", "FIL", "LNA × 4", "MIX", "IF")
    level, noise, bound = diagram.series
    assert level.values == pytest.approx((-60, -60, -61, -41, -48, -18))
    assert [one.look for one in (level, noise, bound)] == ["signal", "noise", "bound"]
    # four elements bear four times the power: 8 dBm and 6.02 dB
    assert bound.values[3] == pytest.approx(8 + 6.0206, abs=1e-4)
    assert bound.values[2] is None and bound.texts[2] == "–"


def test_without_level_and_bandwidth_the_gain_is_drawn() -> None:
    budget = receiver.a_receiver(input_level=None, bandwidth_hz=None)
    (diagram,) = [
        one
        for one in budget_pictures(receiver.outcome(budget, HowToCompute(ways=())), 0, NAMED)
        if isinstance(one, LevelDiagram)
    ]
    (gain,) = diagram.series
    assert diagram.unit == "dB" and gain.name == "gain"
    assert gain.values == pytest.approx((0, 0, -1, 19, 12, 42))


def test_contributions_are_the_shares_of_the_table() -> None:
    bars = next(one for one in of(ContributionBars) if "Noise figure" in one.title)
    assert sum(bar.part for bar in bars.bars) == pytest.approx(1.0)
    assert "The largest is " in bars.words


def test_elements_that_move_each_by_itself_reach_less_far() -> None:
    def reach(shared: str) -> float:
        stages = ({"block": "A", "gain": 10.0, "noise_figure": 2.0, "count": 16},)
        more: dict[str, Any] = {"conditions": None, "requirements": ("R-noise_figure",)}
        budget = receiver.tolerances(a_chain(*stages, **more))
        lines = tuple(one.model_copy(update={"shared": shared}) for one in budget.lines)
        budget = budget.model_copy(update={"lines": lines, "conditions": "CS-AIR"})
        found = receiver.outcome(budget, HowToCompute(ways=()), ("noise_figure",))
        bars = next(one for one in budget_pictures(found, 0, NAMED) if "how far" in one.title)
        assert isinstance(bars, ContributionBars)
        return float(bars.bars[0].text.split()[0])

    assert reach("common") == pytest.approx(0.3)
    assert reach("per element") == pytest.approx(0.3 / 4, abs=1e-3)


def test_the_distribution_says_how_many_meet_the_limit() -> None:
    picture, chance = of(Distribution)[0], OUTCOME.chances[0]
    assert sum(picture.counts) == OUTCOME.trials
    assert picture.words.startswith(probability_words(chance))
    assert [mark.at for mark in picture.marks] == [chance.quantiles[0.01], chance.quantiles[0.5]]


@pytest.mark.parametrize("wrong", [
    lambda: LevelDiagram(title="", words="", unit="dB", stations=("a", "b"),
                         series=(Series(name="x", values=(1.0,), texts=("1",)),)),
    lambda: Distribution(title="", words="", unit="dB", edges=(0.0, 1.0), counts=(1, 2)),
])  # fmt: skip
def test_a_picture_that_contradicts_itself_is_refused(wrong: object) -> None:
    with pytest.raises(ValidationError):
        wrong()  # type: ignore[operator]


# As text


def test_every_station_is_a_row_with_its_values_and_marks() -> None:
    (diagram,) = of(LevelDiagram)
    title, axis, *rows, legend = picture_lines(diagram, 90)
    assert title == diagram.title
    assert axis.strip().endswith("dBm")
    lna = next(row for row in rows if row.startswith("LNA"))
    assert "-41.0" in lna and SIGNS["signal"] in lna and SIGNS["noise"] in lna
    assert lna.index(SIGNS["noise"]) < lna.index(SIGNS["signal"])
    assert legend.startswith("● level")


@settings(deadline=None)  # a busy machine is no failure
@given(st.integers(48, 200))
def test_no_line_of_a_picture_is_wider_than_asked(width: int) -> None:
    for picture in PICTURES:
        assert max(map(len, picture_lines(picture, width)[1:])) <= width


def test_bars_are_as_long_as_their_parts() -> None:
    bars = ContributionBars(
        title="t",
        words="w",
        bars=(
            Bar(name="A", part=0.5, text="50 %"),
            Bar(name="B", part=0.25, text="25 %"),
            Bar(name="C", part=0, text="0 %"),
        ),
    )
    first, second, third = (line.count("█") for line in picture_lines(bars, 60)[1:])
    assert abs(first - 2 * second) <= 1 and third == 0


NEAR = Distribution(
    title="t", words="w", unit="dB", edges=(-1.0, 0.0, 1.0), counts=(1, 3), marks=(Mark(at=0.5, text="m"),)
)
FAR = Distribution(title="t", words="w", unit="dB", edges=(90.0, 91.0, 92.0), counts=(1, 3))


def test_the_limit_stands_on_the_axis_where_it_is_near() -> None:
    lines = picture_lines(NEAR, 60)
    axis = next(line for line in lines if "┼" in line)
    assert abs(axis.index("┼") - 30) <= 1
    assert "  m" in lines


@pytest.mark.parametrize(("edges", "side"), [((90.0, 91.0, 92.0), "left"), ((-92.0, -91.0, -90.0), "right")])
def test_a_limit_far_away_is_told_and_does_not_squeeze_the_counts(
    edges: tuple[float, ...], side: str
) -> None:
    far = FAR.model_copy(update={"edges": edges})
    assert not far.shows_limit and far.span == (edges[0], edges[-1])
    assert picture_lines(far, 60)[-1] == f"  the limit is 90 dB further to the {side}"


def test_counts_that_all_have_one_value_still_show() -> None:
    one = Distribution(title="t", words="w", unit="dB", edges=(2.0, 2.0), counts=(7,))
    assert max(column_heights(one, Scale(*one.span, width=40))) > 0


# On the card


def test_the_card_predicts_margin_and_probability() -> None:
    requirement = a_requirement("r-NOISE_figure")
    facts = dict(predicted_facts(requirement, [OUTCOME]))
    served = OUTCOME.served[0]
    assert f"+{served.smallest_margin:.2f} dB nominal" in facts["Predicted by B-RX"]
    assert "worst case" in facts["Predicted by B-RX"]
    assert facts["Probability by B-RX"].startswith(probability_words(OUTCOME.chances[0]))


def test_the_card_draws_only_its_own_distribution() -> None:
    pictures = predicted_pictures(a_requirement("R-g_over_t"), [OUTCOME], NAMED)
    (own,) = [one for one in pictures if isinstance(one, Distribution)]
    assert "R-g_over_t" in own.title


def test_a_probability_is_never_certain_where_a_specimen_says_otherwise() -> None:
    from dataclasses import replace

    chance = OUTCOME.chances[0]
    words = [
        probability_words(replace(chance, joint=joint))
        for joint in (1.0, 0.999_999, 0.5, 1e-6, 0.0, float("nan"))
    ]
    assert words == ["100.00 %", "more than 99.99 %", "50.00 %", "less than 0.01 %", "0.00 %", "–"]
