"""Judging the readings of one limit: plain, as a statistic of many, or with exceptions that are let pass."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.points import Points
from specflow.limits import LimitContext
from specflow.limits.tree import walk_limit
from specflow.model.columns import Columns
from specflow.model.limit import Allowance, Allowed, Exceptions, Limit, Mask, Population
from specflow.model.requirement import Requirement
from specflow.model.verdict import Verdict
from specflow.verification.limit_inputs import is_plain, limit_columns
from specflow.verification.model_range import outside_validated_range
from specflow.verification.populations import Statistic, condensed, forgiven, with_too_few
from specflow.verification.readings import Judgement, Readings, Served, judge
from specflow.verification.records import Records
from specflow.verification.workspace import Workspace


@dataclass(frozen=True, slots=True)
class Judging:
    """One limit of a requirement, over the records that serve its points; ``conditions`` in the terms of its set."""

    requirement: Requirement
    limit: Limit
    points: Points
    records: Records
    conditions: Columns
    workspace: Workspace

    def readings(self, served: Served) -> tuple[Readings, bool]:
        """Return the judged readings, and whether the values of all items were taken together."""
        readings, together = self._by_shape(served)
        outside = outside_validated_range(self.records, self.conditions)
        if outside is not None and outside[readings.record].any():
            verdict = np.where(outside[readings.record], np.int8(Verdict.INCONCLUSIVE), readings.verdict)
            why = (*readings.why, "some results lie outside the range in which their model was validated")
            readings = replace(readings, verdict=verdict, why=why)
        return readings, together

    def _by_shape(self, served: Served) -> tuple[Readings, bool]:
        if is_plain(self.limit):
            return self._judged(self.limit, served), False
        tree = self.limit.tree
        if isinstance(tree, Population):
            return self._of_population(tree, served)
        if isinstance(tree, Allowed):
            return self._allowed(
                self._judged(self.limit, served), served, tree.allowance, self.records.item
            ), False
        if isinstance(tree, Mask) and tree.allowances:
            readings = self._judged(self.limit, served)
            for allowance in tree.allowances:
                readings = self._allowed(readings, served, allowance, self.records.item)
            return readings, False
        if any(isinstance(node, Population | Allowed) for node in walk_limit(tree) if node is not tree):
            return self._undecided(served, "a statistic inside a table or a gate is not computed"), False
        return self._judged(self.limit, served), False

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

    def _of_population(self, node: Population, served: Served) -> tuple[Readings, bool]:
        statistic = Statistic(node, self.limit.unit, self.conditions, self.records.item)
        values, few, why = condensed(statistic, self.records, served)
        if why:
            return self._undecided(values, why), statistic.over_items
        readings = self._judged(self.limit, values)
        if isinstance(node.statistic, Exceptions):
            readings = self._excepted(readings, values, node.statistic, statistic)
        return with_too_few(readings, few, node.least), statistic.over_items

    def _excepted(
        self, readings: Readings, served: Served, node: Exceptions, statistic: Statistic
    ) -> Readings:
        relaxed = None
        if node.relaxed is not None:
            relaxed = self._judged(self.limit.model_copy(update={"tree": node.relaxed}), served)
        groups = self._groups(served, None if statistic.over_items else self.records.item)
        return forgiven(readings, relaxed, groups, lambda count: node.count)

    def _allowed(
        self, readings: Readings, served: Served, allowance: Allowance, item: NDArray[np.intp]
    ) -> Readings:
        """Let a share of the samples of each point exceed the limit by the excess."""
        share = allowance.share.value / (100 if allowance.share.unit == "%" else 1)
        excess = allowance.excess.value
        within = readings.margin >= -excess
        relaxed = replace(
            readings, verdict=np.where(within, np.int8(Verdict.PASS), np.int8(Verdict.FAIL)).astype(np.int8)
        )
        return forgiven(
            readings, relaxed, self._groups(served, item), lambda count: int(share * count + 1e-9)
        )

    def _groups(self, served: Served, item: NDArray[np.intp] | None) -> NDArray[np.intp]:
        if item is None:
            return served.point.astype(np.intp)
        return served.point.astype(np.intp) * len(self.records.items) + item[served.record]
