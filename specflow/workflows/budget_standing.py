"""Whether the budgets that are allocated close with the requirements on their blocks as they are."""

from __future__ import annotations

from collections.abc import Mapping

from specflow.budgets.closure import closure_of_children
from specflow.budgets.probe import Probe
from specflow.errors import SpecflowError
from specflow.model.base import code_key
from specflow.model.budget import Budget
from specflow.model.budget_standing import BudgetStanding
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary
from specflow.workflows.as_known import children_of_budget


def budget_standings(snapshot: Snapshot, dictionary: Dictionary) -> Mapping[str, BudgetStanding]:
    """Return the standing of every budget that has allocations, by its key; of one that cannot be read, why."""
    found = {}
    for budget in snapshot.all(Budget):
        children = children_of_budget(snapshot, budget)
        if children:
            try:
                closure = closure_of_children(Probe.of(budget, snapshot, dictionary), children)
                standing = BudgetStanding(budget.id, closure.closes, closure.sentence)
            except SpecflowError as error:
                standing = BudgetStanding(budget.id, None, f"the budget cannot be evaluated: {error}")
            found[code_key(budget.id)] = standing
    return found
