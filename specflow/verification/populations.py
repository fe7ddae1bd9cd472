"""Limits on a statistic of many values: the value that is judged at each point, made from the readings there.

*Worst*: every value must meet the limit. *Mean* of values, of power, of dB or of squares. *Percentile*: over a sphere
each direction weighs as much as its solid angle, and directions that do not cover the sphere say nothing about it.
*Tolerance bound* (95/95): one value an item, the worst of it; normal population, exact factor. *Exceptions* and
allowances: so many values may exceed so far. Uncertainty is taken as common to all values of a point (it does not
average out), the largest of them.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from specflow.errors import ExpressionError
from specflow.limits import evaluate_condition
from specflow.limits.tree import side_of
from specflow.model.columns import Columns
from specflow.model.limit import (
    Exceptions,
    Mean,
    Percentile,
    Population,
    Side,
    ToleranceBound,
    Worst,
)
from specflow.model.verdict import Verdict
from specflow.statistics.sphere import covers_sphere, grid_weights, percentile
from specflow.statistics.tolerance import one_sided_factor, two_sided_factor
from specflow.units import convert, parse_unit
from specflow.verification.credit import Credit
from specflow.verification.readings import Readings, Served
from specflow.verification.records import Records

Floats = NDArray[np.float64]
Rows = NDArray[np.intp]

_DEGREES = parse_unit("deg")
_ITEM_NAMES = frozenset({"item", "items", "unit", "units", "serial", "sample", "samples"})
_SPHERE_NAMES = frozenset({"sphere", "direction", "directions", "angle", "angles"})


def over_items(node: Population) -> bool:
    """Whether a statistic is one of the values of all items."""
    over = {name.casefold() for name in node.over}
    return bool(over & _ITEM_NAMES) or isinstance(node.statistic, ToleranceBound)


@dataclass(frozen=True, slots=True)
class Statistic:
    """The population limit of a requirement: what is judged, over what, and how many values are needed."""

    node: Population
    unit: str
    columns: Columns
    records: Records

    @property
    def over_items(self) -> bool:
        """Whether the values of all items belong together."""
        return over_items(self.node)

    @property
    def over_sphere(self) -> bool:
        """Whether directions are weighed by solid angle."""
        return bool({name.casefold() for name in self.node.over} & _SPHERE_NAMES)

    def credit_of(self, served: Served, weights: Credit) -> Credit:
        """Return the credit of the readings in this statistic: one that names no item is no sample of items."""
        names = self.records.items
        if not self.over_items or "" not in names:
            return weights
        nameless = self.records.item[served.record] == names.index("")
        if not nameless.any():
            return weights
        why = f"{int(nameless.sum())} readings name no item, and the limit is on a sample of items"
        return replace(weights, counts=weights.counts & ~nameless, why=(*weights.why, why))


@dataclass(frozen=True, slots=True)
class Condensed:
    """One value a group: ``served`` (g,), the pair that stands for it, and the records that it was made of.

    ``few`` (g,): made of too few values, in ``few_words``. ``why``: the statistic cannot be computed at all.
    """

    served: Served
    pairs: Rows
    records: list[Rows]
    few: NDArray[np.bool_]
    few_words: str = ""
    why: str = ""


def condensed(statistic: Statistic, served: Served, groups: Rows) -> Condensed:
    """Return one value for each group of pairs (``groups`` (p,) numbers them).

    The record of a value is the one nearest to it on the bad side. Where the limit is on every value (*worst*,
    *exceptions*) all of them stay.
    """
    node, every = statistic.node, np.arange(len(served.record))
    if node.of is not None:
        return _nothing(served, "a statistic of a formula of several quantities is not computed")
    try:
        pairs = every if node.where is None else every[_counting(statistic, served)]
    except ExpressionError as error:
        return _nothing(served, f"which values count cannot be decided: {error.message}")
    members = [pairs[rows] for rows in split(groups[pairs])]
    counts = [_size(statistic, served, rows) for rows in members]
    words = f"fewer values than the {node.least or _fewest(statistic)} that the limit asks for"
    if isinstance(node.statistic, Worst | Exceptions):
        few = np.zeros(len(every), bool)
        for rows, count in zip(members, counts, strict=True):
            few[rows] = count < (node.least or 1)
        records = [served.record[one : one + 1] for one in pairs.tolist()]
        return Condensed(served.take(pairs), pairs, records, few[pairs], words)
    reduce = _reduction(statistic)
    parts = [reduce(served, rows) for rows in members]
    few = np.array([count < max(node.least or 1, _fewest(statistic)) for count in counts], bool)
    chosen = np.array([part[0] for part in parts], np.intp)
    low, high, u = (np.array([part[place] for part in parts], np.float64) for place in (1, 2, 3))
    values = Served(served.record[chosen], served.point[chosen], low, high, u)
    return Condensed(values, chosen, [served.record[rows] for rows in members], few, words)


def _nothing(served: Served, why: str) -> Condensed:
    every = np.arange(len(served.record))
    few = np.zeros(len(every), bool)
    return Condensed(served, every, list(served.record[:, None]), few, why=why)


def _counting(statistic: Statistic, served: Served) -> NDArray[np.bool_]:
    assert statistic.node.where is not None
    holds, _ = evaluate_condition(statistic.node.where, statistic.columns)
    return np.asarray(holds[served.record])


def split(groups: Rows) -> list[Rows]:
    """Return the places of each group; ``groups`` (p,) numbers them."""
    if not len(groups):
        return []
    order = np.argsort(groups, kind="stable")
    starts = np.flatnonzero(np.diff(groups[order])) + 1
    return list(np.split(order, starts))


def _size(statistic: Statistic, served: Served, rows: Rows) -> int:
    """Return how many values a group has; items, not readings, where it runs over items."""
    if not statistic.over_items:
        return len(rows)
    codes = np.unique(statistic.records.item[served.record[rows]]).tolist()
    return sum(statistic.records.items[code] != "" for code in codes)


def _fewest(statistic: Statistic) -> int:
    return 2 if isinstance(statistic.node.statistic, ToleranceBound) else 1


Part = tuple[int, float, float, float]


def _reduction(statistic: Statistic) -> Callable[[Served, Rows], Part]:
    """Return the function from a group of readings to (representative pair, low, high, u)."""
    how = statistic.node.statistic
    if isinstance(how, Mean):
        return lambda served, rows: _ends(served, rows, _mean(how, statistic.unit))
    if isinstance(how, Percentile):
        return lambda served, rows: _percentile(how, statistic, served, rows)
    assert isinstance(how, ToleranceBound)
    return lambda served, rows: _tolerance_bound(how, statistic, served, rows)


def _ends(served: Served, rows: Rows, reduce: Callable[[Floats], float]) -> Part:
    low, high = reduce(served.low[rows]), reduce(served.high[rows])
    nearest = rows[np.argmin(np.abs(np.nan_to_num(served.low[rows]) - low))]
    return int(nearest), low, high, _common(served.u[rows])


def _common(u: Floats) -> float:
    return float(np.max(u)) if len(u) else np.nan


def _mean(how: Mean, unit: str) -> Callable[[Floats], float]:
    if how.of == "power" and parse_unit(unit or "1").is_log:
        return lambda values: float(10 * np.log10(np.mean(10 ** (values / 10))))
    if how.of == "squares":
        return lambda values: float(np.sqrt(np.mean(values**2)))
    return lambda values: float(np.mean(values))


def _percentile(how: Percentile, statistic: Statistic, served: Served, rows: Rows) -> Part:
    weights = np.ones(len(rows))
    if statistic.over_sphere:
        theta, phi = (_angles(statistic, name, served, rows) for name in ("theta", "phi"))
        if not covers_sphere(theta, phi):
            return int(rows[0]), -np.inf, np.inf, _common(served.u[rows])
        weights = grid_weights(theta)
    level = how.percent.value
    return _ends(
        served, rows, lambda values: percentile(values, weights, level, complement=how.sense == "CCDF")
    )


def _angles(statistic: Statistic, name: str, served: Served, rows: Rows) -> Floats:
    """Return an angle of the readings in degrees, NaN where it is not stated."""
    values = statistic.columns.numeric.get(name)
    if values is None:
        return np.full(len(rows), np.nan)
    return convert(
        values[served.record[rows]], parse_unit(statistic.columns.units.get(name) or "deg"), _DEGREES
    )


def _tolerance_bound(how: ToleranceBound, statistic: Statistic, served: Served, rows: Rows) -> Part:
    """Return mean ± k·s over the items; an interval that the population fills, for a two-sided limit."""
    side = side_of(statistic.node.limit)
    worst = min if side is Side.LOWER else max
    item = statistic.records.item[served.record[rows]]
    values = np.array([worst(served.low[rows][item == one]) for one in np.unique(item)])
    if len(values) < 2:
        return int(rows[0]), float(values[0]), float(values[0]), _common(served.u[rows])
    coverage, confidence = how.coverage.value / 100, how.confidence.value / 100
    factor = two_sided_factor if side is None else one_sided_factor
    reach = factor(len(values), coverage, confidence) * float(np.std(values, ddof=1))
    low = high = float(np.mean(values))
    low, high = (
        (low - reach, high + reach)
        if side is None
        else (low - reach,) * 2
        if side is Side.LOWER
        else (high + reach,) * 2
    )
    extreme = np.argmin(served.low[rows]) if side is Side.LOWER else np.argmax(served.low[rows])
    return int(rows[extreme]), low, high, _common(served.u[rows])


def with_too_few(readings: Readings, few: NDArray[np.bool_], words: str) -> Readings:
    """Return readings of which those from too few values are insufficient, whatever they would say."""
    hit = few & (readings.verdict <= Verdict.CONDITIONAL_PASS)
    if not hit.any():
        return readings
    verdict = readings.verdict.copy()
    verdict[hit] = Verdict.INSUFFICIENT
    return replace(readings, verdict=verdict, why=(*readings.why, words))


def without_value(readings: Readings) -> Readings:
    """Return readings of which those that are no value at all (of a sphere that was not covered) are insufficient."""
    nothing = np.isneginf(readings.low) & np.isposinf(readings.high)
    if not nothing.any():
        return readings
    verdict = np.where(nothing, np.int8(Verdict.INSUFFICIENT), readings.verdict)
    margin, guarded = (np.where(nothing, np.nan, one) for one in (readings.margin, readings.guarded))
    words = "the directions are no grid of constant steps over the whole sphere"
    return replace(readings, verdict=verdict, margin=margin, guarded=guarded, why=(*readings.why, words))


def forgiven(
    readings: Readings, relaxed: Readings | None, groups: Rows, most: Callable[[int], int]
) -> Readings:
    """Return readings of which, in each group (p,), up to ``most`` fails that keep the relaxed limit are let pass."""
    failing = readings.verdict >= Verdict.CONDITIONAL_FAIL
    if not failing.any():
        return readings
    verdict = readings.verdict.copy()
    kept = np.ones(len(verdict), bool) if relaxed is None else relaxed.verdict <= Verdict.CONDITIONAL_PASS
    for group in np.unique(groups[failing]):
        rows = np.flatnonzero(groups == group)
        fails = rows[failing[rows]]
        if len(fails) <= most(len(rows)) and kept[fails].all():
            verdict[fails] = Verdict.PASS
    return replace(readings, verdict=verdict)
