"""Conflicts: two readings of the same item at one point that differ by more than their uncertainties allow.

|d| > √(U1² + U2²) with U = 2u; where no uncertainty is known, the house's threshold for marginal results stands for U.
Compared are accepted readings of one rank: a difference between simulation and test is a correlation result. Along a
range only readings at one value are compared, and other conditions that both state must agree.
"""

from __future__ import annotations

from collections.abc import Iterator
from itertools import islice

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.words import point_words
from specflow.model.columns import UNSTATED
from specflow.model.project import Policy
from specflow.model.verdict import Conflict
from specflow.units import parse_unit
from specflow.verification.points import Bench
from specflow.verification.standing import ACCEPTED

Floats = NDArray[np.float64]

#: The most that are named for one requirement: by then nobody trusts its evidence.
MOST_CONFLICTS = 20
_CLOSE = 1e-6


def conflicts(bench: Bench, unit: str, tolerance_unit: str, policy: Policy) -> tuple[Conflict, ...]:
    """Return the conflicts among the readings of one activity, one a point and item: the pair that differs most."""
    readings = bench.readings
    if readings.size == len(np.unique(readings.point)):
        return ()
    allowed = _expanded(bench, unit, policy)
    keep = np.isfinite(readings.low) & (readings.low == readings.high)
    keep &= bench.records.standing[readings.record] == ACCEPTED
    found = (
        _worst_pair(bench, group, allowed) for group in _suspicious(bench, allowed, np.flatnonzero(keep))
    )
    worst = islice((pair for pair in found if pair is not None), MOST_CONFLICTS)
    return tuple(_conflict(bench, first, second, allowed, tolerance_unit) for first, second in worst)


def _expanded(bench: Bench, unit: str, policy: Policy) -> Floats:
    u = bench.readings.u
    if parse_unit(unit or "1").is_log:
        house: Floats | float = policy.marginal_db
    else:
        house = policy.marginal_relative * np.abs(
            np.where(np.isfinite(bench.readings.low), bench.readings.low, 0.0)
        )
    return np.where(np.isnan(u), house, 2 * u)


def _suspicious(bench: Bench, allowed: Floats, keep: NDArray[np.intp]) -> Iterator[NDArray[np.intp]]:
    """Yield groups (item, point, rank, value along the range) whose extremes may differ too much.

    √(U1² + U2²) is at least (U1 + U2)/√2, so intervals of U/√2 that all overlap hold no conflict.
    """
    if len(keep) < 2:
        return
    readings, records = bench.readings, bench.records
    key = readings.point[keep].astype(np.int64) * len(records.items) + records.item[readings.record[keep]]
    key = key * 8 + bench.credit.rank[keep]
    along = _along(bench, keep)
    order = np.lexsort((along, key))
    key, along, rows = key[order], along[order], keep[order]
    change = (key[1:] != key[:-1]) | ~np.isclose(along[1:], along[:-1], rtol=_CLOSE, atol=0)
    starts = np.flatnonzero(np.concatenate([[True], change]))
    half = allowed[rows] / np.sqrt(2)
    low = np.minimum.reduceat(readings.low[rows] + half, starts)
    high = np.maximum.reduceat(readings.low[rows] - half, starts)
    stops = np.append(starts[1:], len(rows))
    for place in np.flatnonzero(high > low):
        yield rows[starts[place] : stops[place]]


def _along(bench: Bench, keep: NDArray[np.intp]) -> Floats:
    if bench.matching.along is None:
        return np.zeros(len(keep))
    by_record = np.zeros(bench.records.size)
    by_record[bench.matching.record] = bench.matching.along
    return by_record[bench.readings.record[keep]]


def _worst_pair(bench: Bench, group: NDArray[np.intp], allowed: Floats) -> tuple[int, int] | None:
    """Return the pair of a group that differs most beyond what is allowed, under conditions that agree."""
    values, spread = bench.readings.low[group], allowed[group]
    beyond = np.abs(values[:, None] - values[None, :]) - np.hypot(spread[:, None], spread[None, :])
    records = bench.readings.record
    while True:
        first, second = divmod(int(beyond.argmax()), len(group))
        if beyond[first, second] <= 0:
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
