"""Solve one line of a budget so that all its limits hold at all points."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from specflow.budgets.required import Required, required_conditions
from specflow.budgets.solve import Edge, Solution, solve_line
from specflow.model.report import ReportCell, ReportRow, ReportTable
from specflow.reports.figures import number, text
from specflow.store import ProjectStore
from specflow.workflows.allocate_tables import table
from specflow.workflows.budget_lines import key_named
from specflow.workflows.evaluate_project import project_dictionary
from specflow.workflows.show_budget import budget_named


@dataclass(frozen=True, slots=True)
class SolvedLine:
    """The solution of one line, with the places it was solved at."""

    budget: str
    solution: Solution
    required: Required

    @property
    def table(self) -> ReportTable:
        """What each condition point asks of the line."""
        solution = self.solution
        rows = [
            ReportRow(
                id=str(place),
                cells=(
                    text(self.required.words(place)),
                    _bound(float(solution.low[place]), solution.unit),
                    _bound(float(solution.high[place]), solution.unit),
                ),
            )
            for place in range(len(solution.low))
        ]
        return table(
            "solution",
            f"{solution.line.block} {solution.line.parameter} in the budget {self.budget}",
            solution.sentence,
            ("Condition point", "At least", "At most"),
            rows,
        )

    @property
    def data(self) -> dict[str, Any]:
        """The solution for scripts."""
        solution = self.solution
        return {
            "budget": self.budget,
            "block": solution.line.block,
            "parameter": solution.line.parameter,
            "position": solution.line.position,
            "unit": solution.unit,
            "at_least": _edge(solution.at_least),
            "at_most": _edge(solution.at_most),
            "sentence": solution.sentence,
        }


def solve_budget(store: ProjectStore, code: str, line: str) -> SolvedLine:
    """Return what a line, named as ``LNA gain``, may be so that all limits of a budget hold.

    InfeasibleError with by how much where nothing is good enough; DocumentError for a line or budget that is not there.
    """
    snapshot = store.load()
    dictionary = project_dictionary(snapshot)
    budget = budget_named(snapshot, code)
    solution = solve_line(budget, snapshot, dictionary, key_named(budget, line, dictionary))
    size = required_conditions(budget, snapshot)
    spread = Solution(
        solution.line,
        solution.unit,
        solution.at_least,
        solution.at_most,
        np.broadcast_to(solution.low, (size.size,)),
        np.broadcast_to(solution.high, (size.size,)),
    )
    return SolvedLine(budget.id, spread, size)


def _bound(value: float, unit: str) -> ReportCell:
    return number(value, unit) if np.isfinite(value) else text("any")


def _edge(edge: Edge | None) -> dict[str, Any] | None:
    if edge is None:
        return None
    return {
        "value": edge.value,
        "requirement": edge.requirement,
        "at": edge.words,
        "is_closed_form": edge.is_closed_form,
    }
