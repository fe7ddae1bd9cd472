"""Hand a terminal view what it shows: outlines of all requirements, and the card of one when it is asked for."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from datetime import date
from threading import Lock

from specflow.model.base import code_key
from specflow.model.budget import Budget
from specflow.model.budget_outcome import BudgetOutcome
from specflow.model.card import Card
from specflow.model.finding import Finding
from specflow.model.outline import Outline
from specflow.model.requirement import Requirement
from specflow.reports.about import cautions
from specflow.reports.card import findings_about, requirement_card
from specflow.reports.outline import headline, outlines
from specflow.reports.status import points_sentence
from specflow.store import ProjectStore
from specflow.workflows.evaluate_project import Evaluation, evaluate_project
from specflow.workflows.show_budget import outcomes_of
from specflow.workflows.subjects import not_found


@dataclass(frozen=True, slots=True)
class BrowseData:
    """What is shown of a project at one revision. ``card`` makes the card of a requirement; it may take a moment.

    ``findings`` gives those about a requirement. The first time it runs the rules, which takes longer; cards made
    before have none.
    """

    project: str
    revision: int
    as_of: str
    headline: str
    totals: str
    outlines: Sequence[Outline]
    cautions: Sequence[str]
    card: Callable[[str], Card]
    findings: Callable[[str], tuple[Finding, ...]]


@dataclass(frozen=True, slots=True)
class Browsing:
    """A project that is being looked at. Both may be called from any thread, again and again."""

    store: ProjectStore
    as_of: date

    def load(self) -> BrowseData:
        """Judge the project as it is stored now."""
        return browse_data(evaluate_project(self.store, self.as_of))

    def revision(self) -> int:
        """Return the project revision; another one than before calls for loading again."""
        return self.store.revision


class _Predictions:
    """What the budgets of a project come to, each computed when it is first asked for."""

    def __init__(self, evaluation: Evaluation) -> None:
        self._evaluation = evaluation
        self._known: dict[str, BudgetOutcome | str] = {}

    def __call__(self, requirement: Requirement) -> Sequence[BudgetOutcome]:
        """Return the outcomes of the budgets that serve a requirement; of one that cannot be evaluated nothing."""
        key = code_key(requirement.id)
        serving = [
            budget
            for budget in self._evaluation.snapshot.all(Budget)
            if key in (code_key(code) for code in budget.requirements)
        ]
        missing = [budget for budget in serving if budget.id not in self._known]
        if missing:
            made = outcomes_of(missing, self._evaluation.snapshot, self._evaluation.dictionary)
            self._known.update(made)
        found = (self._known[budget.id] for budget in serving)
        return [outcome for outcome in found if not isinstance(outcome, str)]


class _Findings:
    """What the rules find; ``known`` is None until they ran."""

    def __init__(self, evaluation: Evaluation) -> None:
        self._evaluation = evaluation
        self._one_at_a_time = Lock()
        self.known: Sequence[Finding] | None = None

    def about(self, code: str) -> tuple[Finding, ...]:
        """Return the findings about a requirement, running the rules if nobody has."""
        with self._one_at_a_time:
            self.known = self._evaluation.findings
        return findings_about(self.known, code)


def browse_data(evaluation: Evaluation) -> BrowseData:
    """Return what is shown of an evaluated project."""
    snapshot, results = evaluation.snapshot, evaluation.results
    predictions = _Predictions(evaluation)
    findings = _Findings(evaluation)

    def card(code: str) -> Card:
        requirement = snapshot.find(Requirement, code)
        if requirement is None:
            raise not_found("requirement", code, [one.id for one in snapshot.requirements])
        predicted = predictions(requirement)
        return requirement_card(
            requirement, snapshot, results, findings.known, evaluation.dictionary, predicted
        )

    return BrowseData(
        project=snapshot.project.name,
        revision=snapshot.revision,
        as_of=results.as_of,
        headline=headline(results, snapshot.requirements),
        totals=points_sentence(results, snapshot.requirements),
        outlines=outlines(snapshot, results),
        cautions=cautions(snapshot, evaluation.dictionary),
        card=card,
        findings=findings.about,
    )
