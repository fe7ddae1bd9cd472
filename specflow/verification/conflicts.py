"""Conflicts: two readings of the same item at one point that differ by more than their uncertainties allow.

|d| > √(U1² + U2²) with U = 2u; where no uncertainty is known, the house's threshold for marginal results stands for U.
Compared are accepted readings of one rank: a difference between simulation and test is a correlation result. Along a
range only readings at one value are compared, and other conditions that both state must agree.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.words import point_words
from specflow.limits.conversion import unit_of
from specflow.model.columns import UNSTATED
from specflow.model.project import Policy
from specflow.model.verdict import Conflict
from specflow.verification.grid import Bench, at_one_value
from specflow.verification.standing import ACCEPTED

Floats = NDArray[np.float64]
Flags = NDArray[np.bool_]
Rows = NDArray[np.intp]

#: The most that are named for one requirement: by then nobody trusts its evidence.
MOST_CONFLICTS = 20
_CLOSE = 1e-6
_HALF = 0.5**0.5
#: Up to so many readings every pair is compared; above, the extremes.
_LARGE = 200


def conflicts(bench: Bench, unit: str, tolerance_unit: str, policy: Policy) -> tuple[Conflict, ...]:
    """Return the conflicts among the readings of one activity, one a point and item: the pair that differs most."""
    allowed = expanded(bench, unit, policy)
    pairs: list[tuple[int, int]] = []
    for group in _suspicious(bench, allowed):
        pair = _worst_pair(bench, group, allowed) if len(group) > 1 else None
        if pair is not None:
            pairs.append(pair)
            if len(pairs) == MOST_CONFLICTS:
                break
    return tuple([_conflict(bench, first, second, allowed, tolerance_unit) for first, second in pairs])


def expanded(bench: Bench, unit: str, policy: Policy) -> Floats:
    """Return U of every reading, the house's threshold where none is known."""
    spread = 2 * bench.readings.u
    unknown = spread != spread
    if np.count_nonzero(unknown):
        low = bench.readings.low
        house: Floats | float = policy.marginal_db
        if not unit_of(unit or "1").is_log:
            house = policy.marginal_relative * np.abs(np.where(np.isfinite(low), low, 0.0))
        return np.where(unknown, house, spread)
    return spread


def doubtful_cells(bench: Bench, allowed: Floats) -> tuple[Rows, Flags]:
    """Return the cell (item, point, value along the range) of each reading, and whose extremes may differ too much.

    √(U1² + U2²) is at least (U1 + U2)/√2, so intervals of U/√2 that all overlap hold no conflict.
    """
    readings, records = bench.readings, bench.records
    cell = records.item[readings.record] * bench.points.size + readings.point
    cells = len(records.items) * bench.points.size
    cell, cells = at_one_value(bench, cell, None, cells)
    half = allowed * _HALF
    lowest, highest = np.empty(cells), np.empty(cells)
    lowest.fill(np.inf)
    highest.fill(-np.inf)
    np.minimum.at(lowest, cell, readings.low + half)
    np.maximum.at(highest, cell, readings.high - half)
    return cell, highest > lowest


def _suspicious(bench: Bench, allowed: Floats) -> Iterator[Rows]:
    """Yield groups of accepted readings of one rank in a doubtful cell."""
    readings, records = bench.readings, bench.records
    cell, doubtful = doubtful_cells(bench, allowed)
    if not np.count_nonzero(doubtful):
        return
    rows = np.flatnonzero(doubtful[cell] & (readings.low == readings.high))
    rows = rows[records.standing[readings.record[rows]] == ACCEPTED]
    rank = bench.credit.rank[rows].astype(np.intp)
    rows = rows[np.argsort(cell[rows] * 8 + rank, kind="stable")]
    key = cell[rows] * 8 + bench.credit.rank[rows]
    for group in np.split(rows, np.flatnonzero(np.diff(key)) + 1):
        yield from _same_elsewhere(bench, group) if len(group) > _LARGE else [group]


def _same_elsewhere(bench: Bench, group: Rows) -> Iterator[Rows]:
    """Split a large group by the conditions that its point does not name: only like readings are compared anyway.

    Unlike in small groups, an unstated condition is here one more value.
    """
    record = bench.readings.record[group]
    conditions = bench.records.conditions
    compared = {name for axis in bench.points.axes for name in axis.names}
    numbers = {name: values for name, values in conditions.numeric.items() if name not in compared}
    words = {name: column.codes for name, column in conditions.text.items() if name not in compared}
    every: list[NDArray[Any]] = [*numbers.values(), *words.values()]
    codes = [np.unique(values[record], return_inverse=True)[1] for values in every]
    if not codes:
        yield group
        return
    order = np.lexsort(codes)
    change = np.logical_or.reduce([np.diff(one[order]) != 0 for one in codes])
    yield from np.split(group[order], np.flatnonzero(change) + 1)


def _worst_pair(bench: Bench, group: Rows, allowed: Floats) -> tuple[int, int] | None:
    """Return the pair of a group that differs most beyond what is allowed, under conditions that agree."""
    if len(group) > _LARGE:
        half = allowed[group] * _HALF
        values = bench.readings.low[group]
        group = group[[(values - half).argmax(), (values + half).argmin()]]
    values, spread = bench.readings.low[group], allowed[group]
    with np.errstate(invalid="ignore"):  # two readings of no power at all (-inf dB) do not differ
        beyond = np.abs(values[:, None] - values[None, :]) - np.hypot(spread[:, None], spread[None, :])
    beyond[np.isnan(beyond)] = -np.inf
    records = bench.readings.record
    while True:
        first, second = divmod(int(beyond.argmax()), len(group))
        if not beyond[first, second] > 0:
            return None
        if _same_conditions(bench, int(records[group[first]]), int(records[group[second]])):
            return int(group[first]), int(group[second])
        beyond[first, second] = beyond[second, first] = -np.inf


def _same_conditions(bench: Bench, first: int, second: int) -> bool:
    """Whether two readings agree in every condition that both state and that the points do not compare already."""
    conditions = bench.records.conditions
    compared = {name for axis in bench.points.axes for name in axis.names}
    for name, values in conditions.numeric.items():
        a, b = float(values[first]), float(values[second])
        if name not in compared and a == a and b == b and not np.isclose(a, b, rtol=_CLOSE, atol=0):
            return False
    for name, column in conditions.text.items():
        codes = int(column.codes[first]), int(column.codes[second])
        if name not in compared and UNSTATED not in codes and codes[0] != codes[1]:
            return False
    return True


def _conflict(bench: Bench, first: int, second: int, allowed: Floats, unit: str) -> Conflict:
    readings, records = bench.readings, bench.records
    point = int(readings.point[first])
    one, other = int(readings.record[first]), int(readings.record[second])
    return Conflict(
        point,
        point_words(bench.points, point),
        records.items[int(records.item[one])],
        records.reference(one),
        records.reference(other),
        abs(float(readings.low[first] - readings.low[second])),
        float(np.hypot(allowed[first], allowed[second])),
        unit,
    )
