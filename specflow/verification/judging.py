"""Judging the readings of one limit, one by one; ``grouped`` does it where others must be taken into account."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.points import Points
from specflow.limits import LimitContext, evaluate_condition
from specflow.limits.expression_shape import expression_names
from specflow.limits.tree import walk_limit
from specflow.model.columns import Columns, TextColumn
from specflow.model.expression import Expression
from specflow.model.limit import Allowance, Allowed, Limit, Mask, Population
from specflow.model.requirement import Requirement
from specflow.model.verdict import Verdict
from specflow.verification.bandwidths import states_bandwidth
from specflow.verification.comparable import Wanted
from specflow.verification.limit_inputs import columns_of, is_plain, limit_columns
from specflow.verification.model_range import outside_validated_range
from specflow.verification.readings import Judgement, Readings, Served, judge
from specflow.verification.records import Records
from specflow.verification.workspace import Workspace

Rows = NDArray[np.intp]
_INSIDE = "a statistic inside a table or a gate is not computed"


@dataclass(frozen=True, slots=True)
class Judging:
    """One limit of a requirement, over the records that serve its points; ``conditions`` in the terms of its set.

    ``want`` is the quantity that the limit is on.
    """

    requirement: Requirement
    want: Wanted
    limit: Limit
    points: Points
    records: Records
    conditions: Columns
    workspace: Workspace

    @property
    def each_alone(self) -> bool:
        """Whether the verdict of a reading depends on nothing but itself."""
        if is_plain(self.limit):
            return True
        several = isinstance(self.limit.tree, Population | Allowed) or bool(allowances(self.limit))
        return not several and not self.swept

    @property
    def together(self) -> bool:
        """Whether the values of all items are taken together."""
        tree = self.limit.tree
        if not isinstance(tree, Population):
            return False
        from specflow.verification.populations import over_items  # late, as for ``swept``

        return over_items(tree)

    def one_by_one(self, served: Served) -> Readings:
        """Return the readings, each judged by itself: samples, before any of them is let pass."""
        tree = self.limit.tree
        below = () if is_plain(self.limit) else (node for node in walk_limit(tree) if node is not tree)
        if any(isinstance(node, Population | Allowed) for node in below):
            return self.undecided(served, _INSIDE)
        return self.within_validated_range(self.judged(self.limit, served))

    def against(self, permitted: Limit, readings: Readings, pairs: Rows) -> NDArray[np.int8]:
        """Return the verdicts of some readings held against another limit in the same unit, under the same rule.

        Where that limit states no bandwidth it is that of this limit.
        """
        served = readings.served.take(pairs)
        if not states_bandwidth(permitted):
            served = replace(served, low=readings.low[pairs], high=readings.high[pairs])
        return self.judged(permitted, served).verdict

    def holds(self, condition: Expression, readings: Readings, pairs: Rows) -> NDArray[np.bool_]:
        """Return for which readings a condition holds: at what their points require, else at what was recorded.

        ``item`` is the item of a reading. Where the condition cannot be decided it does not hold.
        """
        record, point = readings.record[pairs], readings.point[pairs]
        names = expression_names(condition)
        columns = columns_of(names, self.points, self.conditions, record, point, self.workspace.declared)
        items = TextColumn(self.records.item[record].astype(np.int32), self.records.items)
        columns = replace(columns, text={"item": items, **columns.text})
        holds, known = evaluate_condition(condition, columns)
        return np.asarray(holds & known)

    @property
    def swept(self) -> tuple[str, ...]:
        """The axes of masks that the evidence itself must sweep."""
        if is_plain(self.limit):
            return ()
        # What judges masks and statistics is long to load, and most projects have few of either.
        from specflow.verification.sweeps import swept_axes

        return swept_axes(self.limit, self.points, self.workspace.declared)

    def within_validated_range(self, readings: Readings, groups: list[Rows] | None = None) -> Readings:
        """Decide nothing from results outside the range in which their model was validated.

        ``groups`` are the readings that each value is made of: one of them outside is enough.
        """
        outside = outside_validated_range(self.records, self.conditions)
        if outside is None:
            return readings
        hit = (
            outside[readings.record]
            if groups is None
            else np.array([outside[rows].any() for rows in groups], bool)
        )
        if not hit.any():
            return readings
        verdict = np.where(hit, np.int8(Verdict.INCONCLUSIVE), readings.verdict)
        why = (*readings.why, "some results lie outside the range in which their model was validated")
        return replace(readings, verdict=verdict, why=why)

    def judged(self, limit: Limit, served: Served) -> Readings:
        """Return the readings, each held by itself against a limit in the unit of this one, under the same rule."""
        declared = self.workspace.declared
        columns = limit_columns(limit, self.points, self.conditions, served.record, served.point, declared)
        context = LimitContext(columns, declared, len(served.record))
        rule = self.requirement.decision_rule
        return judge(self.records, served, Judgement(limit, limit.unit, rule, self.workspace.policy, context))

    def undecided(self, served: Served, why: str) -> Readings:
        """Return the readings as they were held against the limit, none of them decided, and why."""
        readings = self.judged(self.limit, served)
        verdict = np.full(readings.size, Verdict.INCONCLUSIVE, np.int8)
        return replace(readings, verdict=verdict, why=(why, *readings.why))


def allowances(limit: Limit) -> tuple[Allowance, ...]:
    """Return the allowances of a limit: shares of the samples that may exceed it."""
    tree = limit.tree
    if isinstance(tree, Allowed):
        return (tree.allowance,)
    return tree.allowances if isinstance(tree, Mask) else ()
