"""Compute everything that is derived: verdicts, status, findings. Nothing of it is stored."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import date
from functools import cached_property

from specflow.model.budget import Budget
from specflow.model.finding import Finding
from specflow.model.parameter import Parameter
from specflow.model.snapshot import Results, Snapshot
from specflow.parameters import Dictionary, load_dictionary
from specflow.store import ProjectStore
from specflow.verification import evaluate


@dataclass(frozen=True)
class Evaluation:
    """A snapshot with what was computed from it, as of one date. Findings are made when first asked for."""

    snapshot: Snapshot
    dictionary: Dictionary
    results: Results
    as_of: date

    @cached_property
    def findings(self) -> Sequence[Finding]:
        """What the rules report, worst first."""
        return self.findings_at("")

    def findings_at(self, gate: str) -> Sequence[Finding]:
        """Return what the rules report, worst first, as it weighs at a review gate."""
        # Status needs neither the rules nor the budgets; loading them only here keeps it quick.
        from specflow.rules import run_rules

        return run_rules(self.snapshot, self._with_budgets(), self.dictionary, gate=gate)

    def _with_budgets(self) -> Results:
        if not self.snapshot.all(Budget):
            return self.results
        from specflow.workflows.budget_standing import budget_standings

        return replace(self.results, budgets=budget_standings(self.snapshot, self.dictionary))


def evaluate_project(store: ProjectStore, as_of: date) -> Evaluation:
    """Load the project and judge all of it."""
    snapshot = store.load()
    dictionary = project_dictionary(snapshot)
    return Evaluation(snapshot, dictionary, evaluate(snapshot, dictionary, as_of=as_of), as_of)


def project_dictionary(snapshot: Snapshot) -> Dictionary:
    """Return the parameter dictionary with the project's own additions."""
    return load_dictionary(snapshot.all(Parameter))
