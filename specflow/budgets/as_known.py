"""A budget as known: evaluated again with the best that is known of every line, at every place.

For the type it predicts the next system; for one serial as built it takes the specimens that stand in it. Spreads of
few specimens count with their degrees of freedom; an uncertainty that all readings of a line share is counted once.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import line_key
from specflow.budgets.evaluate import nominal_result
from specflow.budgets.knowledge import Knowledge, KnownLine, best_known
from specflow.budgets.probe import Probe, Target
from specflow.budgets.ranges import slopes_at
from specflow.budgets.result import BudgetResult
from specflow.budgets.spread import correlation_matrix
from specflow.model.base import code_key
from specflow.model.budget import Budget
from specflow.model.budget_outcome import ServedOutcome
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary
from specflow.statistics.prediction import effective_freedom, one_sided_quantile, probability_below

Floats = NDArray[np.float64]
BuiltIn = Mapping[str, Collection[str]]
"""The specimens that stand in one system, by the key of their block."""


@dataclass(frozen=True, slots=True, eq=False)
class KnownServed:
    """One requirement with what is known.

    ``served`` is held at the values known; ``spread`` (n,) is the standard uncertainty of the result in the unit of
    the margin, of ``freedom`` (n,) effective degrees; ``predicted`` (n,) the margin kept with ``confidence``,
    one-sided, about the means of tolerances whose sides are unlike; ``probability`` (n,) that the limit and the reserve
    are kept at that place. Never multiply these over places: one system meets all places or does not.
    """

    served: ServedOutcome
    spread: Floats
    freedom: Floats
    predicted: Floats
    probability: Floats

    @property
    def worst(self) -> int:
        """The place with the smallest predicted margin, -1 where there is none."""
        known = np.flatnonzero(~np.isnan(self.predicted))
        return int(known[np.argmin(self.predicted[known])]) if len(known) else -1


@dataclass(frozen=True, slots=True, eq=False)
class AsKnown:
    """A budget with the best that is known: ``lines`` say which source was used where; ``serial`` "" is the type."""

    budget: Budget
    serial: str
    confidence: float
    result: BudgetResult
    planned: BudgetResult
    lines: tuple[KnownLine, ...]
    served: tuple[KnownServed, ...]
    notes: tuple[str, ...]


def as_known(
    budget: Budget,
    snapshot: Snapshot,
    dictionary: Dictionary,
    knowledge: Sequence[Knowledge],
    *,
    serial: str = "",
    built_in: BuiltIn | None = None,
    confidence: float = 0.95,
) -> AsKnown:
    """Return a budget evaluated with the best that is known of each line, place by place.

    ``built_in`` with ``serial`` asks for one system as built: blocks of which a specimen stands in it are known by that
    specimen, the others as the type is. Raises SpecflowError as ``evaluate_budget``.
    """
    planned = Probe.of(budget, snapshot, dictionary)
    lines = tuple(
        best_known(planned.chain, number, knowledge, _specimens(built_in, read.line.block))
        for number, read in enumerate(planned.chain.lines)
    )
    probe = with_known(budget, snapshot, dictionary, lines)
    result = nominal_result(probe.prepared)
    held = {one.requirement.id: one for one in result.served}
    served = tuple(
        _served(probe, target, held[target.name], result, lines, confidence) for target in probe.targets
    )
    notes = list(dict.fromkeys(note for line in lines for note in line.notes))
    if built_in is not None:
        notes += _unbuilt(planned, built_in, serial)
    before = nominal_result(planned.prepared)
    return AsKnown(budget, serial, confidence, result, before, lines, served, (*notes, *result.notes))


def _specimens(built_in: BuiltIn | None, block: str) -> Collection[str] | None:
    return None if built_in is None else built_in.get(code_key(block), ())


def _unbuilt(probe: Probe, built_in: BuiltIn, serial: str) -> list[str]:
    return [
        f"no specimen of {position.block} is recorded as built into {serial}; it is known as the type is"
        for position in probe.chain.positions
        if not built_in.get(code_key(position.block))
    ]


def with_known(
    budget: Budget, snapshot: Snapshot, dictionary: Dictionary, lines: Sequence[KnownLine]
) -> Probe:
    """Read a budget with what is known; a growth allowance is for estimates and not added to what is known."""
    known = {line_key(one.read.line): one for one in lines if one.is_known.any()}
    plain = tuple(
        line.model_copy(update={"growth": 0.0}) if line_key(line) in known else line for line in budget.lines
    )
    values = {
        key: one.value if one.read.line.growth else np.where(one.is_known, one.value, np.nan)
        for key, one in known.items()
    }
    return Probe.of(budget.model_copy(update={"lines": plain}), snapshot, dictionary, values=values)


def _served(
    probe: Probe,
    target: Target,
    one: ServedOutcome,
    result: BudgetResult,
    lines: Sequence[KnownLine],
    confidence: float,
) -> KnownServed:
    chain = result.chain
    slopes = slopes_at(chain, target.output, chain.nominal())
    specimen, own_freedom = _specimen_parts(result.budget, lines, slopes)
    common = np.array([line.common for line in lines]) * slopes
    variances = np.concatenate([specimen, common**2])
    freedom = np.concatenate([own_freedom, np.full(common.shape, np.inf)])
    spread = np.sqrt(variances.sum(axis=0))
    degrees = effective_freedom(variances, freedom)
    reach = one_sided_quantile(confidence, degrees) * spread
    shift = np.sum([line.shift * slope for line, slope in zip(lines, slopes, strict=True)], axis=0)
    value = result.of(target.output.parameter).result + shift
    predicted = np.minimum(target.bar.margin(value - reach), target.bar.margin(value + reach))
    in_limit = spread * _rise(target, value)
    return KnownServed(one, in_limit, degrees, predicted, _probability(target, value, in_limit, degrees))


def _specimen_parts(budget: Budget, lines: Sequence[KnownLine], slopes: Floats) -> tuple[Floats, Floats]:
    """Return variances of the result and their degrees of freedom (parts, n) by what the specimens differ in.

    Lines that move together (one correlation group, or groups with a correlation stated between them) are one part,
    dᵀ R d with the correlations of the budget; it has the fewest degrees of freedom of its lines that count.
    """
    matrix = correlation_matrix(budget, [line.read.line for line in lines])
    moved = np.array([line.spread for line in lines]) * slopes
    each = np.array([line.freedom for line in lines])
    variances, freedom = [], []
    for part in _connected(matrix):
        d = moved[part]
        variances.append(np.maximum(np.einsum("in,ij,jn->n", d, matrix[np.ix_(part, part)], d), 0.0))
        freedom.append(np.where(d != 0, each[part], np.inf).min(axis=0))
    return np.array(variances), np.array(freedom)


def _connected(matrix: Floats) -> list[list[int]]:
    """Return the numbers of the lines in parts between which nothing is correlated."""
    left, parts = set(range(len(matrix))), []
    while left:
        part, found = set(), {min(left)}
        while found:
            part |= found
            found = {int(other) for one in found for other in np.flatnonzero(matrix[one])} - part
        parts.append(sorted(part))
        left -= part
    return parts


def _rise(target: Target, value: Floats) -> Floats:
    """Return by how much the result in the unit of the limit moves with the result in that of the law."""
    step = np.maximum(np.abs(value), 1.0) * 1e-6
    convert = target.bar.convert
    return np.abs(convert(value + step) - convert(value - step)) / (2.0 * step)


def _probability(target: Target, value: Floats, spread: Floats, degrees: Floats) -> Floats:
    """Return the probability (n,) that the limit less the reserve is kept, NaN where nothing is required."""
    bar = target.bar
    shown = bar.convert(value)
    scale = np.maximum(spread, 1e-300)
    below = probability_below((bar.upper - bar.reserve - shown) / scale, degrees)
    above = probability_below((shown - bar.lower - bar.reserve) / scale, degrees)
    return np.where(bar.required, np.maximum(below + above - 1.0, 0.0), np.nan)
