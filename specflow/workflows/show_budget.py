"""Show budgets: all of them in a list, or one with its tables and pictures at one condition point."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from difflib import get_close_matches

from specflow.errors import DocumentError, SpecflowError
from specflow.model.base import code_key
from specflow.model.budget import Budget
from specflow.model.budget_outcome import BudgetOutcome, Way
from specflow.model.picture import Picture
from specflow.model.report import Report, ReportTable
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary
from specflow.reports.budget import budget_report, titles, worst_words
from specflow.reports.budget_list import budgets_table
from specflow.reports.pictures import budget_pictures, probability_words
from specflow.store import ProjectStore
from specflow.workflows.budget_outcome import HowToCompute, Step, budget_outcome
from specflow.workflows.evaluate_project import project_dictionary

MOST_LISTED = 8
NOMINAL_ONLY = HowToCompute(ways=())


@dataclass(frozen=True, slots=True)
class ShownBudget:
    """A budget that was computed, the place it is looked at, its tables and its pictures."""

    outcome: BudgetOutcome
    place: int
    report: Report
    pictures: tuple[Picture, ...]


def _silent(text: str) -> None:
    """Tell nobody."""


def list_budgets(store: ProjectStore) -> ReportTable:
    """Return all budgets with their smallest nominal margins; of one that cannot be evaluated, why."""
    snapshot = store.load()
    dictionary = project_dictionary(snapshot)
    budgets = snapshot.all(Budget)
    return budgets_table(budgets, outcomes_of(budgets, snapshot, dictionary, NOMINAL_ONLY))


def show_budget(
    store: ProjectStore, code: str, *, at: str = "", how: HowToCompute | None = None, step: Step = _silent
) -> ShownBudget:
    """Compute one budget and return its tables at one place.

    ``at`` names the place: its number, or words of its conditions ("30 GHz, +55 °C"); by default the worst one.
    DocumentError for an unknown budget, SpecflowError for a place that is none or not clear, and as
    ``evaluate_budget``.
    """
    snapshot = store.load()
    dictionary = project_dictionary(snapshot)
    outcome = budget_outcome(budget_named(snapshot, code), snapshot, dictionary, how, step=step)
    place = place_named(outcome, at) if at else outcome.place
    named = titles(dictionary)
    return ShownBudget(
        outcome,
        place,
        budget_report(outcome, place, named),
        budget_pictures(outcome, place, named),
    )


def nearest_budget(snapshot: Snapshot, dictionary: Dictionary) -> str:
    """Say how the budget with the smallest nominal margin stands; "" where none has any."""
    found = outcomes_of(snapshot.all(Budget), snapshot, dictionary)
    known = [one for one in found.values() if isinstance(one, BudgetOutcome) and one.worst is not None]
    if not known:
        return ""

    def smallest(outcome: BudgetOutcome) -> float:
        return min(one.smallest_margin for one in outcome.served if one.worst >= 0)

    nearest = min(known, key=smallest)
    chances = (
        f"; {probability_words(nearest.chances[0])} of specimens meet it everywhere"
        if nearest.chances
        else ""
    )
    return f"Nearest to its limit: {nearest.budget.id} ({nearest.budget.title}), {worst_words(nearest)}{chances}."


def outcomes_of(
    budgets: Sequence[Budget],
    snapshot: Snapshot,
    dictionary: Dictionary,
    how: HowToCompute | None = None,
) -> dict[str, BudgetOutcome | str]:
    """Return what each budget comes to, by its id; of one that cannot be evaluated, the reason."""
    found: dict[str, BudgetOutcome | str] = {}
    for budget in budgets:
        try:
            found[budget.id] = budget_outcome(budget, snapshot, dictionary, how)
        except SpecflowError as error:
            found[budget.id] = str(error)
    return found


def budget_named(snapshot: Snapshot, code: str) -> Budget:
    """Return the budget of an id. DocumentError when there is none, with what is near to it."""
    found = snapshot.find(Budget, code)
    if found is not None:
        return found
    by_key = {code_key(one.id): one.id for one in snapshot.all(Budget)}
    near = [by_key[key] for key in get_close_matches(code_key(code), by_key, n=3)] or list(by_key.values())
    hint = "load a workbook with the sheets Budgets and Budget lines"
    hint = f"budgets: {', '.join(near[:MOST_LISTED])}" if near else hint
    raise DocumentError(f"there is no budget {code!r}", hint=hint)


def place_named(outcome: BudgetOutcome, at: str) -> int:
    """Return the place that a number (from 1) or words of its conditions name.

    SpecflowError where no place or several have all these words; they are listed.
    """
    plain = at.strip().removeprefix("#")
    if plain.isdecimal():
        if 1 <= int(plain) <= len(outcome.places):
            return int(plain) - 1
        raise SpecflowError(
            f"there is no condition point {plain}", hint=f"points are numbered 1 to {len(outcome.places)}"
        )
    wanted = [_plain(part) for part in at.split(",") if part.strip()]
    said = [[_plain(part) for part in words.split(",")] for words in outcome.places]
    found = [
        place
        for place, parts in enumerate(said)
        if all(any(_says(part, one) for part in parts) for one in wanted)
    ]
    if len(found) == 1:
        return found[0]
    listed = "; ".join(
        f"{one + 1} = {outcome.places[one]}" for one in (found or range(len(said)))[:MOST_LISTED]
    )
    if not found:
        raise SpecflowError(
            f"no condition point of {outcome.budget.id} is at {at!r}", hint=f"points: {listed}"
        )
    raise SpecflowError(
        f"{len(found)} condition points are at {at!r}", hint=f"say more, or a number: {listed}"
    )


def _plain(words: str) -> str:
    return " ".join(words.replace("−", "-").replace("+", "").casefold().split())


def _says(part: str, wanted: str) -> bool:
    """Whether the words of one condition begin with or hold what is wanted, word for word."""
    return f" {wanted} " in f" {part} "


def ways_named(names: Sequence[str]) -> tuple[Way, ...]:
    """Return the ways of treating tolerances that a person names. SpecflowError for one that is none."""
    known = {way.value.replace(" ", "-"): way for way in Way} | {"rss": Way.RSS}
    found = []
    for name in names:
        way = known.get(name.strip().casefold().replace(" ", "-"))
        if way is None:
            raise SpecflowError(
                f"there is no method {name!r}", hint="methods: nominal, worst-case, rss, monte-carlo"
            )
        found.append(way)
    return tuple(found)
