"""The pictures of a budget: levels along the chain, contributions, distribution against the limit."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence

import numpy as np
from numpy.typing import NDArray

from specflow.model.budget import Law
from specflow.model.budget_outcome import BudgetOutcome, ChanceOutcome, QuantityOutcome
from specflow.model.picture import Bar, ContributionBars, Distribution, LevelDiagram, Mark, Picture, Series
from specflow.reports.budget import position_words
from specflow.reports.chances import share_words
from specflow.reports.figures import DASH, margin, rounded, with_unit

Floats = NDArray[np.float64]
Named = Callable[[str], str]
_TOLD = {0.01: "99 % do better", 0.5: "half do better"}


def budget_pictures(outcome: BudgetOutcome, place: int, named: Named) -> tuple[Picture, ...]:
    """Return all pictures of a budget at one place of evaluation."""
    return (
        *_levels(outcome, place),
        *(_bars(outcome, one, place, named) for one in outcome.quantities if one.shares is not None),
        *(_reach(outcome, one, place, named) for one in outcome.quantities if _moves(outcome, one, place)),
        *(_distribution(outcome, one, named) for one in outcome.chances if one.counts.sum() > 0),
    )


# Levels


def _levels(outcome: BudgetOutcome, place: int) -> Iterator[LevelDiagram]:
    if outcome.budget.law is not Law.CASCADE or "gain" not in outcome.figures:
        return
    series = list(_series(outcome, place))
    unit = "dBm"
    if not series:
        gain = np.concatenate([[0.0], np.cumsum(outcome.figures["gain"][:, place])])
        series, unit = [_one("gain", gain, "signal")], "dB"
    yield LevelDiagram(
        title=f"{outcome.budget.id}: {_and([one.name for one in series])} along the chain at {outcome.places[place]}",
        words=" ".join(_course(one, unit) for one in series),
        unit=unit,
        stations=("input", *(position_words(outcome, row) for row in range(len(outcome.positions)))),
        series=tuple(series),
    )


def _series(outcome: BudgetOutcome, place: int) -> Iterator[Series]:
    if outcome.levels is not None:
        yield _one("level", outcome.levels[:, place], "signal")
    if outcome.noise is not None:
        yield _one("noise", outcome.noise[:, place], "noise")
    if outcome.levels is not None and "ip1db" in outcome.figures:
        behind = outcome.figures["ip1db"][:, place] + outcome.figures["gain"][:, place] - 1.0
        yield _one("compression point of the block", np.concatenate([[math.nan], behind]), "bound")


def _one(name: str, values: Floats, look: str) -> Series:
    known = [float(value) if math.isfinite(value) else None for value in values]
    texts = tuple(DASH if value is None else rounded(value, 1) for value in known)
    return Series.model_validate({"name": name, "values": tuple(known), "texts": texts, "look": look})


def _course(one: Series, unit: str) -> str:
    known = [place for place, value in enumerate(one.values) if value is not None]
    if not known:
        return f"{one.name.capitalize()}: none."
    first, last = one.texts[known[0]], one.texts[known[-1]]
    return f"{one.name.capitalize()} from {first} {unit} to {last} {unit}."


def _and(names: Sequence[str]) -> str:
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"


# Contributions


def _bars(outcome: BudgetOutcome, one: QuantityOutcome, place: int, named: Named) -> ContributionBars:
    assert one.shares is not None
    parts = [float(part) for part in one.shares[:, place]]
    bars = [_bar(position_words(outcome, row), part) for row, part in enumerate(parts)]
    rest = 1.0 - sum(parts)
    if rest > 1e-9:
        bars.append(_bar("what feeds the chain", rest))
    largest = max(bars, key=lambda bar: bar.part)
    return ContributionBars(
        title=f"{outcome.budget.id}: who makes how much of {named(one.parameter)} at {outcome.places[place]}",
        words=f"Parts of {one.shared}. The largest is {largest.name} with {largest.text}.",
        bars=tuple(bars),
    )


def _reaches(outcome: BudgetOutcome, one: QuantityOutcome, place: int) -> list[tuple[str, float]]:
    """Return how far each line takes the quantity: slope times tolerance, the larger side.

    Elements that move each by itself average, as in a root sum of squares: theirs is less by the root of their number.
    """
    found = []
    for at, line in enumerate(outcome.lines):
        tolerance = line.line.tolerance
        if tolerance is not None:
            few = outcome.positions[line.row].count if line.line.shared == "per element" else 1
            reach = abs(float(one.slopes[at, place])) * max(tolerance.minus, tolerance.plus) / math.sqrt(few)
            found.append((f"{position_words(outcome, line.row)} {line.line.parameter}", reach))
    return found


def _moves(outcome: BudgetOutcome, one: QuantityOutcome, place: int) -> bool:
    return any(reach > 1e-9 for _, reach in _reaches(outcome, one, place))


def _reach(outcome: BudgetOutcome, one: QuantityOutcome, place: int, named: Named) -> ContributionBars:
    reaches = [
        (name.replace("_", " "), reach) for name, reach in _reaches(outcome, one, place) if reach > 1e-9
    ]
    whole = sum(reach for _, reach in reaches)
    unit = one.served[0].margin_unit if one.served else one.unit
    largest = max(reaches, key=lambda pair: pair[1])
    return ContributionBars(
        title=f"{outcome.budget.id}: how far the tolerance of each line takes {named(one.parameter)} "
        f"at {outcome.places[place]}",
        words=f"Slope times tolerance, the larger side; elements that move each by itself average. "
        f"The largest is {largest[0]} with "
        f"{_reach_text(largest[1], unit)}.",
        bars=tuple(
            Bar(name=name, part=reach / whole, text=_reach_text(reach, unit)) for name, reach in reaches
        ),
    )


def _reach_text(reach: float, unit: str) -> str:
    return with_unit(reach, unit) if reach >= 1 else f"{reach:.2g} {unit}".strip()


def _bar(name: str, part: float) -> Bar:
    plain = 0.0 if abs(part) < 1e-12 else part
    return Bar(name=name, part=plain, text=f"{rounded(100.0 * plain, 1)} %")


# Distribution


def _distribution(outcome: BudgetOutcome, one: ChanceOutcome, named: Named) -> Distribution:
    marks = [
        Mark(at=one.quantiles[part], text=f"{words}: {margin(one.quantiles[part], one.margin_unit).text}")
        for part, words in _TOLD.items()
        if math.isfinite(one.quantiles.get(part, math.nan))
    ]
    return Distribution(
        title=f"{outcome.budget.id}: worst margin of a specimen to {one.requirement.id}, {named(one.parameter)}",
        words=f"{probability_words(one)} of {outcome.trials:,} specimens meet the limit at all conditions. The worst "
        f"margin lies between {with_unit(float(one.edges[0]), one.margin_unit)} and "
        f"{with_unit(float(one.edges[-1]), one.margin_unit)}.",
        unit=one.margin_unit,
        edges=tuple(float(edge) for edge in one.edges),
        counts=tuple(int(count) for count in one.counts),
        marks=tuple(marks),
    )


def probability_words(one: ChanceOutcome) -> str:
    """Return the joint probability, short; never 100 % or 0 % where a specimen says otherwise."""
    return share_words(one.joint)
