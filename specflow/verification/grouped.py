"""Judging readings that others must be taken into account for: statistics, allowances, masks that must be swept.

They are made of readings that belong together: of one point and item, and of one *kin*: the same rank, standing and
credit. So what may not count never enters a statistic that does; it is put together by itself and shows what it would
come to, as progress or as an open fail.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from specflow.model.limit import Allowance, Exceptions, Population
from specflow.model.verdict import Verdict
from specflow.verification.credit import Credit
from specflow.verification.judging import Judging, allowances
from specflow.verification.limit_inputs import limit_columns
from specflow.verification.populations import (
    Statistic,
    condensed,
    forgiven,
    split,
    with_too_few,
    without_value,
)
from specflow.verification.readings import Readings, Served
from specflow.verification.standing import STANDINGS
from specflow.verification.sweeps import along, sweep_of

Rows = NDArray[np.intp]


def judge_grouped(judging: Judging, served: Served, weights: Credit) -> tuple[Readings, Credit]:
    """Return readings (or the statistics made of them) judged with those they belong to, and their credit."""
    tree = judging.limit.tree
    if isinstance(tree, Population):
        statistic = Statistic(tree, judging.limit.unit, judging.conditions, judging.records)
        return _of_population(judging, statistic, served, weights)
    readings = judging.one_by_one(served)
    groups = _groups(judging, served, weights)
    for allowance in allowances(judging.limit):
        readings = _allowed(readings, allowance, groups)
    for axis in judging.swept:
        readings = _if_swept(judging, axis, readings, groups)
    return readings, weights


def _if_swept(judging: Judging, axis: str, readings: Readings, groups: Rows) -> Readings:
    """Let the samples of a mask pass only where they sweep all of it."""
    limit, points, declared = judging.limit, judging.points, judging.workspace.declared
    sweep, served = sweep_of(axis, limit, points, declared), readings.served
    columns = limit_columns(limit, points, judging.conditions, served.record, served.point, declared)
    values, few = along(sweep, columns), np.zeros(readings.size, bool)
    for rows in split(groups):
        judged = rows[readings.verdict[rows] != Verdict.NONE]
        few[rows] = not sweep.covered(int(served.point[rows[0]]), values[judged])
    words = (
        f"the mask over {axis.replace('_', ' ')} is not swept: readings must reach both ends of each piece and "
        f"leave no gap above a tenth of it (or name {axis} in the conditions set, with its step)"
    )
    return with_too_few(readings, few, words)


def _of_population(
    judging: Judging, statistic: Statistic, served: Served, weights: Credit
) -> tuple[Readings, Credit]:
    weights = statistic.credit_of(served, weights)
    found = condensed(statistic, served, _groups(judging, served, weights))
    weights = weights.take(found.pairs)
    if found.why:
        return judging.undecided(found.served, found.why), weights
    readings = judging.judged(judging.limit, found.served)
    if isinstance(statistic.node.statistic, Exceptions):
        readings = _excepted(judging, readings, statistic.node.statistic, weights)
    readings = judging.within_validated_range(readings, found.records)
    return without_value(with_too_few(readings, found.few, found.few_words)), weights


def _excepted(judging: Judging, readings: Readings, node: Exceptions, weights: Credit) -> Readings:
    relaxed, served = None, readings.served
    if node.relaxed is not None:
        relaxed = judging.judged(judging.limit.model_copy(update={"tree": node.relaxed}), served)
    return forgiven(readings, relaxed, _groups(judging, served, weights), lambda count: node.count)


def _groups(judging: Judging, served: Served, weights: Credit) -> Rows:
    """Return for every pair (p,) the number of the group it belongs to: point, item, kin."""
    records, group = judging.records, served.point.astype(np.intp)
    if not judging.together and not judging.requirement.provers.may_complete_each_other:
        group = group * len(records.items) + records.item[served.record]
    standing = records.standing[served.record].astype(np.intp)
    kin = ((weights.rank.astype(np.intp) * 2 + weights.counts) * 2 + weights.stale) * len(STANDINGS)
    return np.asarray((group << 8) + kin + standing)


def _allowed(readings: Readings, allowance: Allowance, groups: Rows) -> Readings:
    """Let a share of the samples of each group exceed the limit by the excess."""
    share = allowance.share.value / (100 if allowance.share.unit == "%" else 1)
    within = readings.margin >= -allowance.excess.value
    relaxed = replace(readings, verdict=np.where(within, np.int8(Verdict.PASS), np.int8(Verdict.FAIL)))
    return forgiven(readings, relaxed, groups, lambda count: int(share * count + 1e-9))
