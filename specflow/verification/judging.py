"""Judging the readings of one limit: one by one, as a statistic of many, or with exceptions that are let pass.

A statistic (and an allowance, and a mask that asks for a whole sweep) is made of readings that belong together: of one
point and item, and of one *kin*: the same rank, standing and credit. So what may not count never enters a statistic
that does; it is put together by itself and shows what it would come to, as progress or as an open fail.
"""

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
from specflow.model.limit import Allowance, Allowed, Exceptions, Limit, Mask, Population
from specflow.model.requirement import Requirement
from specflow.model.verdict import Verdict
from specflow.verification.bandwidths import states_bandwidth
from specflow.verification.comparable import Wanted
from specflow.verification.credit import Credit
from specflow.verification.limit_inputs import columns_of, is_plain, limit_columns
from specflow.verification.model_range import outside_validated_range
from specflow.verification.populations import (
    Statistic,
    condensed,
    forgiven,
    split,
    with_too_few,
    without_value,
)
from specflow.verification.readings import Judgement, Readings, Served, judge
from specflow.verification.records import Records
from specflow.verification.standing import STANDINGS
from specflow.verification.sweeps import along, sweep_of, swept_axes
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
        several = isinstance(self.limit.tree, Population | Allowed) or bool(_allowances(self.limit))
        return not several and not self._swept

    @property
    def together(self) -> bool:
        """Whether the values of all items are taken together."""
        statistic = self._statistic()
        return statistic is not None and statistic.over_items

    def one_by_one(self, served: Served) -> Readings:
        """Return the readings, each judged by itself: samples, before any of them is let pass."""
        tree = self.limit.tree
        below = () if is_plain(self.limit) else (node for node in walk_limit(tree) if node is not tree)
        if any(isinstance(node, Population | Allowed) for node in below):
            return self._undecided(served, _INSIDE)
        return self._within_validated_range(self._judged(self.limit, served))

    def against(self, permitted: Limit, readings: Readings, pairs: Rows) -> NDArray[np.int8]:
        """Return the verdicts of some readings held against another limit in the same unit, under the same rule.

        Where that limit states no bandwidth it is that of this limit.
        """
        served = readings.served.take(pairs)
        if not states_bandwidth(permitted):
            served = replace(served, low=readings.low[pairs], high=readings.high[pairs])
        return self._judged(permitted, served).verdict

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

    def among_others(self, served: Served, weights: Credit) -> tuple[Readings, Credit]:
        """Return readings (or the statistics made of them) judged with those they belong to, and their credit."""
        statistic = self._statistic()
        if statistic is not None:
            return self._of_population(statistic, served, weights)
        readings = self.one_by_one(served)
        groups = self._groups(served, weights)
        for allowance in _allowances(self.limit):
            readings = _allowed(readings, allowance, groups)
        for axis in self._swept:
            readings = self._if_swept(axis, readings, served, groups)
        return readings, weights

    @property
    def _swept(self) -> tuple[str, ...]:
        return swept_axes(self.limit, self.points, self.workspace.declared)

    def _if_swept(self, axis: str, readings: Readings, served: Served, groups: Rows) -> Readings:
        """Let the samples of a mask pass only where they sweep all of it."""
        declared = self.workspace.declared
        sweep = sweep_of(axis, self.limit, self.points, declared)
        columns = limit_columns(
            self.limit, self.points, self.conditions, served.record, served.point, declared
        )
        values, few = along(sweep, columns), np.zeros(readings.size, bool)
        for rows in split(groups):
            judged = rows[readings.verdict[rows] != Verdict.NONE]
            few[rows] = not sweep.covered(int(served.point[rows[0]]), values[judged])
        words = (
            f"the mask over {axis.replace('_', ' ')} is not swept: readings must reach both ends of each piece and "
            f"leave no gap above a tenth of it (or name {axis} in the conditions set, with its step)"
        )
        return with_too_few(readings, few, words)

    def _statistic(self) -> Statistic | None:
        tree = self.limit.tree
        if not isinstance(tree, Population):
            return None
        return Statistic(tree, self.limit.unit, self.conditions, self.records)

    def _within_validated_range(self, readings: Readings, groups: list[Rows] | None = None) -> Readings:
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

    def _judged(self, limit: Limit, served: Served) -> Readings:
        declared = self.workspace.declared
        columns = limit_columns(limit, self.points, self.conditions, served.record, served.point, declared)
        context = LimitContext(columns, declared, len(served.record))
        rule = self.requirement.decision_rule
        return judge(self.records, served, Judgement(limit, limit.unit, rule, self.workspace.policy, context))

    def _undecided(self, served: Served, why: str) -> Readings:
        readings = self._judged(self.limit, served)
        verdict = np.full(readings.size, Verdict.INCONCLUSIVE, np.int8)
        return replace(readings, verdict=verdict, why=(why, *readings.why))

    def _of_population(
        self, statistic: Statistic, served: Served, weights: Credit
    ) -> tuple[Readings, Credit]:
        weights = statistic.credit_of(served, weights)
        found = condensed(statistic, served, self._groups(served, weights))
        weights = weights.take(found.pairs)
        if found.why:
            return self._undecided(found.served, found.why), weights
        readings = self._judged(self.limit, found.served)
        if isinstance(statistic.node.statistic, Exceptions):
            readings = self._excepted(readings, found.served, statistic.node.statistic, weights)
        readings = self._within_validated_range(readings, found.records)
        return without_value(with_too_few(readings, found.few, found.few_words)), weights

    def _excepted(self, readings: Readings, served: Served, node: Exceptions, weights: Credit) -> Readings:
        relaxed = None
        if node.relaxed is not None:
            relaxed = self._judged(self.limit.model_copy(update={"tree": node.relaxed}), served)
        return forgiven(readings, relaxed, self._groups(served, weights), lambda count: node.count)

    def _groups(self, served: Served, weights: Credit) -> Rows:
        """Return for every pair (p,) the number of the group it belongs to: point, item, kin."""
        group = served.point.astype(np.intp)
        if not self.together and not self.requirement.provers.may_complete_each_other:
            group = group * len(self.records.items) + self.records.item[served.record]
        standing = self.records.standing[served.record].astype(np.intp)
        kin = ((weights.rank.astype(np.intp) * 2 + weights.counts) * 2 + weights.stale) * len(STANDINGS)
        return np.asarray((group << 8) + kin + standing)


def _allowances(limit: Limit) -> tuple[Allowance, ...]:
    tree = limit.tree
    if isinstance(tree, Allowed):
        return (tree.allowance,)
    return tree.allowances if isinstance(tree, Mask) else ()


def _allowed(readings: Readings, allowance: Allowance, groups: Rows) -> Readings:
    """Let a share of the samples of each group exceed the limit by the excess."""
    share = allowance.share.value / (100 if allowance.share.unit == "%" else 1)
    within = readings.margin >= -allowance.excess.value
    relaxed = replace(readings, verdict=np.where(within, np.int8(Verdict.PASS), np.int8(Verdict.FAIL)))
    return forgiven(readings, relaxed, groups, lambda count: int(share * count + 1e-9))
