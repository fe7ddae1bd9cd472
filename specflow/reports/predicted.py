"""What the budgets that serve a requirement predict for it: margin and probability, before anything is built."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from specflow.model.base import code_key
from specflow.model.budget_outcome import BudgetOutcome, ChanceOutcome, ServedOutcome, Way
from specflow.model.picture import Distribution, Picture
from specflow.model.requirement import Requirement
from specflow.reports.budget import Named, ways_of
from specflow.reports.figures import margin
from specflow.reports.pictures import budget_pictures, probability_words


def predicted_facts(
    requirement: Requirement, outcomes: Sequence[BudgetOutcome]
) -> tuple[tuple[str, str], ...]:
    """Return (name, value) pairs: what each budget predicts, nominal and over its tolerances."""
    return tuple(fact for outcome in outcomes for fact in _facts(requirement, outcome))


def _facts(requirement: Requirement, outcome: BudgetOutcome) -> Iterator[tuple[str, str]]:
    served = _of(requirement, outcome)
    name = f"Predicted by {outcome.budget.id}"
    if served is None or served.worst < 0:
        yield name, "no limit is known at any of its points"
        return
    nominal = margin(served.smallest_margin, served.margin_unit).text
    words = f"margin {nominal} nominal, at {outcome.places[served.worst]}"
    worst = [one for one in ways_of(outcome, Way.WORST_CASE) if _same(one.requirement, requirement.id)]
    if worst and not worst[0].refused:
        words += f"; {margin(worst[0].margin, worst[0].margin_unit).text} worst case"
    yield name, words
    chance = _chance(requirement, outcome)
    if chance is not None:
        words = f"{probability_words(chance)} of {outcome.trials:,} specimens meet it at all conditions (sampling only)"
        yield f"Probability by {outcome.budget.id}", words


def predicted_pictures(
    requirement: Requirement, outcomes: Sequence[BudgetOutcome], named: Named
) -> tuple[Picture, ...]:
    """Return the pictures of the budgets that serve a requirement, each where it is worst for this one."""
    found: list[Picture] = []
    for outcome in outcomes:
        served = _of(requirement, outcome)
        place = served.worst if served is not None and served.worst >= 0 else outcome.place
        for picture in budget_pictures(outcome, place, named):
            if not isinstance(picture, Distribution) or requirement.id in picture.title:
                found.append(picture)
    return tuple(found)


def _of(requirement: Requirement, outcome: BudgetOutcome) -> ServedOutcome | None:
    return next((one for one in outcome.served if _same(one.requirement.id, requirement.id)), None)


def _chance(requirement: Requirement, outcome: BudgetOutcome) -> ChanceOutcome | None:
    return next((one for one in outcome.chances if _same(one.requirement.id, requirement.id)), None)


def _same(first: str, second: str) -> bool:
    return code_key(first) == code_key(second)
