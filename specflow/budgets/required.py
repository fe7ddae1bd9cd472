"""Where a budget is evaluated: every required point of its conditions set, ranges sampled from end to end."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.conditions import Points, compile_points, conditions_words
from specflow.errors import DocumentError
from specflow.model.base import code_key
from specflow.model.budget import Budget
from specflow.model.columns import Columns
from specflow.model.conditions import ConditionsSet
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot

Rows = NDArray[np.intp]


@dataclass(frozen=True, slots=True, eq=False)
class Required:
    """The conditions of a budget, in system terms.

    ``columns`` (n rows) are the places of evaluation; ``point`` (n,) says which required point each belongs to. They
    are the required points themselves unless the set has a range, which is sampled at its step with both ends.
    ``points`` is None where nothing is stated: one place, any conditions.
    """

    points: Points | None
    columns: Columns
    point: Rows

    @property
    def size(self) -> int:
        """How many places of evaluation there are."""
        return self.columns.size

    def words(self, row: int) -> str:
        """Say the conditions of one place."""
        return conditions_words(self.columns, row) or "any conditions"


def required_conditions(budget: Budget, snapshot: Snapshot) -> Required:
    """Return where a budget is evaluated. DocumentError where its conditions set is unknown or not clear."""
    conditions = _conditions_set(budget, snapshot)
    if conditions is None:
        return Required(None, Columns(1), np.zeros(1, np.intp))
    points = compile_points(conditions)
    if points.columns_lo is points.columns_hi or _same_ends(points):
        return Required(points, points.columns_lo, np.arange(points.size, dtype=np.intp))
    return _sampled(points)


def _conditions_set(budget: Budget, snapshot: Snapshot) -> ConditionsSet | None:
    code = budget.conditions or _of_requirements(budget, snapshot)
    if code is None:
        return None
    found = snapshot.find(ConditionsSet, code)
    if found is None:
        raise DocumentError(
            f"the conditions set {code} is not in the project",
            where=f"budget {budget.id}",
            hint="load the set, or correct its id",
        )
    return found


def _of_requirements(budget: Budget, snapshot: Snapshot) -> str | None:
    """Return the one conditions set that all served requirements have."""
    served = [snapshot.find(Requirement, code) for code in budget.requirements]
    sets = {code_key(one.conditions): one.conditions for one in served if one is not None and one.conditions}
    if len(sets) > 1:
        raise DocumentError(
            f"the requirements served have several conditions sets: {', '.join(sets.values())}",
            where=f"budget {budget.id}",
            hint="name the conditions set of the budget, or make a budget for each",
        )
    return next(iter(sets.values()), None)


def _same_ends(points: Points) -> bool:
    low, high = points.columns_lo.numeric, points.columns_hi.numeric
    return all(np.array_equal(low[name], high[name], equal_nan=True) for name in low)


def _sampled(points: Points) -> Required:
    """Sample every range at its step; a range without one (matched anywhere, or corners) at its ends."""
    low, high = points.columns_lo.numeric, points.columns_hi.numeric
    wide = [name for name in low if not np.array_equal(low[name], high[name], equal_nan=True)]
    counts = np.ones(points.size, np.intp)
    for name in wide:
        step = points.step.get(name)
        width = high[name] - low[name]
        needed = np.where(width > 0, np.ceil(width / step - 1e-9) if step else 1, 0).astype(np.intp) + 1
        counts = np.maximum(counts, needed)
    point = np.repeat(np.arange(points.size, dtype=np.intp), counts)
    first = np.repeat(np.cumsum(counts) - counts, counts)
    part = (np.arange(len(point)) - first) / np.maximum(counts[point] - 1, 1)
    columns = points.columns_lo.take(point)
    numeric = dict(columns.numeric)
    for name in wide:
        start, end = low[name][point], high[name][point]
        numeric[name] = np.where(part == 1, end, start + part * (end - start))
    return Required(points, Columns(len(point), numeric, columns.text, columns.units), point)
