"""Cases that are alike, judged abreast: one array operation for all of them instead of one for each.

A project has hundreds of requirements with a handful of points each. Judged one by one, nearly all of the time goes
into starting operations on a few numbers (measured: a thousand requirements with ten readings of ten points each take
half as long abreast). So the readings of cases with a plain limit of the same kind on the same points are laid end to
end, their items numbered through, and the very functions that judge one case judge all of them; each gets its part.
What asks for more than that (several limits, ranges, statistics, rules that must speak of a missing uncertainty) is
left to be judged alone.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from specflow.limits import LimitContext, evaluate_limit
from specflow.limits.bounds import Bounds
from specflow.model.columns import Columns
from specflow.model.limit import Bound
from specflow.model.requirement import RuleName
from specflow.verification.case import Case, LaidOut, bench_with
from specflow.verification.conflicts import doubtful_cells, expanded
from specflow.verification.credit import Credit, credit, is_of_design
from specflow.verification.grid import Bench, Grid
from specflow.verification.limit_inputs import is_plain
from specflow.verification.points import Cells, ItemPoints, governed
from specflow.verification.readings import NO_BOUND, Judgement, Readings, Served, held_against
from specflow.verification.records import Records
from specflow.verification.workspace import Workspace

Rows = NDArray[np.intp]

#: With more pairs of reading and point than this a case gains nothing by company.
MOST_PAIRS = 1_000


def judge_abreast(cases: Iterable[Case], workspace: Workspace) -> None:
    """Judge the cases that are alike and note in each what was found; leave the others as they are."""
    alike: dict[tuple[object, ...], list[Case]] = defaultdict(list)
    for case in cases:
        kind = _kind(case)
        if kind is not None:
            alike[kind].append(case)
    for group in alike.values():
        if len(group) > 1:
            _judge(group, workspace)


def _kind(case: Case) -> tuple[object, ...] | None:
    """Return what cases must have in common to be judged abreast; None for one that is to be judged alone."""
    if len(case.grounds) != 1 or case.requirement.provers.may_complete_each_other:
        return None
    ground, rule = case.grounds[0], case.requirement.decision_rule
    limit, records = ground.judging.limit, ground.records
    if not is_plain(limit) or limit.rounding is not None or limit.test_tolerance is not None:
        return None
    if rule.comparison != "absolute" or rule.greatest_uncertainty is not None or not _are_simple(records):
        return None
    if rule.name is not RuleName.SIMPLE and (records.u is None or bool(np.isnan(records.u).any())):
        return None
    if ground.matching.along is not None or not 0 < len(ground.served.record) <= MOST_PAIRS:
        return None
    tree = limit.tree
    side = (tree.side, tree.strict) if isinstance(tree, Bound) else ()
    how = rule.name, rule.guard_factor, rule.conditional_pass_counts
    return id(case.points), len(case.activities), records.items, records.exact, limit.unit, side, how


def _are_simple(records: Records) -> bool:
    """Whether the readings are of one column, and each of the one item that it names."""
    if len(records.sources) != 1 or records.replacements:
        return False
    (source,) = records.sources
    if source.table.simulation_validated or not isinstance(records.exact, bool):
        return False
    return len(records.items) == 1 or "" not in records.items or not is_of_design(source)


@dataclass(frozen=True, slots=True)
class _Row:
    """Cases end to end, with the records and pairs of all; the pairs of case i are ``edges[i]:edges[i + 1]``.

    Of the records only what tells readings, items and columns apart is that of all; ``items`` comes once for each case.
    """

    cases: Sequence[Case]
    records: Records
    served: Served
    edges: Sequence[int]
    bounds: Sequence[Bounds]

    @classmethod
    def of(cls, cases: Sequence[Case]) -> _Row:
        """Lay the cases end to end."""
        grounds = [case.grounds[0] for case in cases]
        parts, served = [one.records for one in grounds], [one.served for one in grounds]
        edges = np.cumsum([0, *[len(one.record) for one in served]]).tolist()
        bounds = [evaluate_limit(one.judging.limit, LimitContext(Columns(0))) for one in grounds]
        return cls(cases, _records_of(parts), _served_of(served, parts), edges, bounds)


def _records_of(parts: Sequence[Records]) -> Records:
    items = len(parts[0].items)
    return replace(
        parts[0],
        low=np.concatenate([one.low for one in parts]),
        high=np.concatenate([one.high for one in parts]),
        u=None,
        item=np.concatenate([one.item + place * items for place, one in enumerate(parts)]),
        items=parts[0].items * len(parts),
        source=np.repeat(np.arange(len(parts), dtype=np.int32), [one.size for one in parts]),
        sources=tuple([one.sources[0] for one in parts]),
        row=np.concatenate([one.row for one in parts]),
        standing=np.concatenate([one.standing for one in parts]),
    )


def _served_of(served: Sequence[Served], parts: Sequence[Records]) -> Served:
    starts = np.cumsum([0, *[one.size for one in parts[:-1]]]).tolist()
    low = np.concatenate([one.low for one in served])
    same = all(one.high is one.low for one in served)
    return Served(
        np.concatenate([one.record + start for one, start in zip(served, starts, strict=True)]),
        np.concatenate([one.point for one in served]),
        low,
        low if same else np.concatenate([one.high for one in served]),
        np.concatenate([one.u for one in served]),
    )


def _judge(cases: Sequence[Case], workspace: Workspace) -> None:
    row = _Row.of(cases)
    every = _readings(row, workspace)
    apart = _apart(row, every)
    for place in range(len(cases[0].activities)):
        weights = [_credit(case, place, workspace) for case in cases]
        found = _laid_out(row, every, apart, weights, workspace)
        for case, one in zip(cases, found, strict=True):
            case.found = (*case.found, one)


def _credit(case: Case, place: int, workspace: Workspace) -> Credit:
    ground = case.grounds[0]
    provers, record = case.requirement.provers, ground.served.record
    return credit(case.activities[place], provers, ground.records, record, workspace)


def _readings(row: _Row, workspace: Workspace) -> Readings:
    """Judge the readings of all cases, each by the bounds of its own limit."""
    served, first = row.served, row.cases[0].grounds[0].judging
    counts = np.diff(row.edges)
    one = row.bounds[0]
    bounds = replace(
        one,
        lower=None if one.lower is None else np.repeat(_side(row.bounds, "lower"), counts),
        upper=None if one.upper is None else np.repeat(_side(row.bounds, "upper"), counts),
    )
    rule = first.requirement.decision_rule
    judgement = Judgement(first.limit, first.limit.unit, rule, workspace.policy, LimitContext(Columns(0)))
    seen = served.low, served.high, np.zeros(served.low.shape, bool)
    return held_against(bounds, served, seen, judgement, exact=row.records.exact)


def _side(bounds: Sequence[Bounds], name: str) -> NDArray[np.float64]:
    """Return the number on one side of each limit, NaN where that side has no bound."""
    sides = [getattr(one, name) for one in bounds]
    return np.array([np.nan if side is None else side[0] for side in sides])


def _apart(row: _Row, every: Readings) -> list[Readings]:
    """Return the readings of each case by themselves."""
    apart = []
    for case, bounds, (start, stop) in zip(row.cases, row.bounds, pairwise(row.edges), strict=True):
        served = case.grounds[0].served
        readings = Readings(
            served,
            served.record,
            served.point,
            served.low,
            served.high,
            served.u,
            NO_BOUND if bounds.lower is None else bounds.lower,
            NO_BOUND if bounds.upper is None else bounds.upper,
            every.verdict[start:stop],
            every.margin[start:stop],
            every.guarded[start:stop],
            every.marginal[start:stop],
        )
        apart.append(readings)
    return apart


def _laid_out(
    row: _Row,
    every: Readings,
    apart: Sequence[Readings],
    weights: Sequence[Credit],
    workspace: Workspace,
) -> list[LaidOut]:
    """Lay the readings of all cases out over their items and points, and give each case its part."""
    bench = replace(bench_with(row.cases[0].grounds[0], every, _end_to_end(weights)), records=row.records)
    lines, n = len(row.records.items), bench.points.size
    item = row.records.item[row.served.record]
    grid = Grid.over(bench, None, item, lines, item * n + row.served.point)
    own = zip(row.cases, apart, weights, strict=True)
    benches = [bench_with(case.grounds[0], readings, credited) for case, readings, credited in own]
    _, doubtful = doubtful_cells(bench, expanded(bench, bench.judging.limit.unit, workspace.policy))
    doubts = np.any(doubtful.reshape(len(row.cases), -1), axis=1).tolist()
    return [
        LaidOut(one, items, doubt)
        for one, items, doubt in zip(benches, _items_of(row, grid, benches), doubts, strict=True)
    ]


def _end_to_end(weights: Sequence[Credit]) -> Credit:
    return Credit(
        np.concatenate([one.rank for one in weights]),
        np.concatenate([one.counts for one in weights]),
        np.concatenate([one.stale for one in weights]),
    )


def _items_of(row: _Row, grid: Grid, benches: Sequence[Bench]) -> list[list[ItemPoints]]:
    """Return the items of each case that have evidence, as they would be laid out on its own bench."""
    n = grid.bench.points.size
    each = len(row.records.items) // len(row.cases)
    seen = np.bincount(grid.item, minlength=grid.items).tolist()
    cells = _of_own_table(row, governed(grid), each * n)
    found = []
    for place, (bench, (start, stop)) in enumerate(zip(benches, pairwise(row.edges), strict=True)):
        line = place * each
        own = Grid(bench, None, grid.item[start:stop] - line, each, grid.cell[start:stop] - line * n)
        own.weighing = grid.weighing[start:stop]
        names, tables = bench.records.items, (bench.records.sources[0].table,)
        codes = [code for code in range(each) if seen[line + code]]
        found.append([cells.item(line + code, names[code], tables, own, code) for code in codes])
    return found


def _of_own_table(row: _Row, cells: Cells, each: int) -> Cells:
    """Return the cells, ``each`` a case, told as those of one case: it has one table, and one limit everywhere."""
    lower, upper = (
        np.repeat(_side(row.bounds, side), each).reshape(cells.verdict.shape) for side in ("lower", "upper")
    )
    return replace(cells, table=np.minimum(cells.table, 0), lower=lower, upper=upper)
