"""Root sums of squares of tolerances, where these are legitimate, and the reason where they are not."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain, Overrides
from specflow.budgets.evaluate import nominal_result, prepare
from specflow.budgets.margins import Bar
from specflow.budgets.outputs import Output
from specflow.budgets.ranges import ServedRange, held_between, slopes_at, value_at
from specflow.budgets.result import BudgetResult
from specflow.budgets.spread import bounds, check_bounds, correlation_matrix, elements, moments, moves
from specflow.errors import CalculationError
from specflow.model.base import code_key
from specflow.model.budget import Budget
from specflow.model.budget_line import Meaning
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary

Floats = NDArray[np.float64]
#: RSS is refused where what bends the law reaches this part of the root sum itself (our choice, no source).
MOST_BEND = 0.15
MOST_SIGMA = 10.0
_SMALL = 1e-9


@dataclass(frozen=True, slots=True, eq=False)
class OutputRss:
    """One quantity with the root sum of squares of its tolerances: ``low``, ``high`` (n,) about the nominal.

    ``means`` says what they are: "limits" (neither a k·σ nor guaranteed) or "2 sigma". ``deviation`` (n,) is the
    standard deviation, None where a line names no distribution; ``shift`` (n,) how far the means of tolerances with
    unlike sides take the result from the nominal: a range of k·σ that was asked for lies about that.
    """

    parameter: str
    unit: str
    nominal: Floats
    low: Floats
    high: Floats
    means: str
    deviation: Floats | None
    served: tuple[ServedRange, ...]
    shift: Floats | None = None


@dataclass(frozen=True, slots=True, eq=False)
class Rss:
    """A budget with the root sum of squares of its tolerances."""

    budget: Budget
    nominal: BudgetResult
    outputs: tuple[OutputRss, ...]
    notes: tuple[str, ...]

    def of(self, parameter: str) -> OutputRss:
        """Return one quantity. KeyError for one that the budget does not give."""
        for one in self.outputs:
            if code_key(one.parameter) == code_key(parameter):
                return one
        raise KeyError(parameter)


def rss(
    budget: Budget,
    snapshot: Snapshot,
    dictionary: Dictionary,
    *,
    k: float | None = None,
    values: Overrides | None = None,
) -> Rss:
    """Return the root sum of squares of the tolerances at every required condition.

    ``k`` asks for that many standard deviations, for which every line has to name its distribution; without it the
    tolerances are taken as they are stated: limits, their common k·σ, or one σ where they differ.

    Formula: √(dᵀ R d), d_i = slope · tolerance, R the correlation of the lines; the two sides apart. Valid where the
    law is roughly linear over the tolerances and every line says what its tolerance means.

    Raises CalculationError where a line does not say it, or where the law bends too much; else as ``evaluate_budget``.
    """
    if k is not None and not 0 < k <= MOST_SIGMA:
        raise CalculationError(
            f"{k:g} is no number of standard deviations", hint=f"give one above 0, at most {MOST_SIGMA:g}"
        )
    prepared = prepare(budget, snapshot, dictionary, values=values)
    check_bounds(prepared.chain)
    means = _one_meaning(prepared.chain) if k is None else f"{k:g} sigma"
    if k is not None:
        _check_named(prepared.chain, k)
    nominal = nominal_result(prepared)
    outputs = tuple(
        _rss(prepared.chain, output, bars, one.result, means, k)
        for output, bars, one in zip(prepared.outputs, prepared.bars, nominal.outputs, strict=True)
    )
    return Rss(budget, nominal, outputs, nominal.notes)


def _one_meaning(chain: Chain) -> str:
    """Return what the root sum means; refuse lines that do not say, and meanings that do not go together."""
    moving = [read.line for read in chain.lines if moves(read.line)]
    silent = [line.place for line in moving if line.tolerance is not None and line.tolerance.meaning is None]
    if silent:
        raise CalculationError(
            f"a root sum of squares needs to know what tolerances mean, and these do not say: {', '.join(silent)}",
            where=f"budget {chain.budget.id}",
            hint="say 'limits' or 'k sigma' with its k; or take the worst case, which needs neither",
        )
    meanings = {(line.tolerance.meaning, line.tolerance.k) for line in moving if line.tolerance is not None}
    if all(meaning is Meaning.LIMITS for meaning, _ in meanings):
        return "limits"
    if len(meanings) == 1:
        return f"{next(iter(meanings))[1]:g} sigma"
    mixed = [line.place for line in moving if line.tolerance is not None and moments(line.tolerance) is None]
    if mixed:
        raise CalculationError(
            f"limits and k·σ do not combine as they stand, and these name no distribution: {', '.join(mixed)}",
            where=f"budget {chain.budget.id}",
            hint="name the distribution between the limits, so that they have a σ",
        )
    return "1 sigma"


def _check_named(chain: Chain, k: float) -> None:
    """A standard deviation comes from a distribution: refuse lines that name none."""
    silent = [
        read.line.place
        for read in chain.lines
        if moves(read.line) and read.line.tolerance is not None and moments(read.line.tolerance) is None
    ]
    if silent:
        raise CalculationError(
            f"{k:g} σ need standard deviations, and these lines name no distribution: {', '.join(silent)}",
            where=f"budget {chain.budget.id}",
            hint="name the distribution between the limits, or leave the number of σ out",
        )


def _rss(
    chain: Chain, output: Output, bars: Sequence[Bar], nominal: Floats, means: str, k: float | None
) -> OutputRss:
    slopes = slopes_at(chain, output, chain.nominal())
    lines = [read.line for read in chain.lines]
    matrix = correlation_matrix(chain.budget, lines)
    up, down = _amounts(chain, slopes, means)
    high = nominal + _root(up, matrix)
    low = nominal - _root(down, matrix)
    _refuse_bend(chain, output, slopes, nominal, (high - low) / 2.0)
    deviation = None
    found = [None if line.tolerance is None else moments(line.tolerance) for line in lines]
    shift = None
    if all(one is not None or not moves(line) for one, line in zip(found, lines, strict=True)):
        each = np.array(
            [
                0.0 if one is None else one.deviation / np.sqrt(elements(chain, read))
                for one, read in zip(found, chain.lines, strict=True)
            ]
        )
        deviation = _root(slopes * each[:, None], matrix)
        shift = np.array([0.0 if one is None else one.mean for one in found]) @ slopes
    if k is not None:
        assert deviation is not None and shift is not None  # checked before
        low, high = nominal + shift - k * deviation, nominal + shift + k * deviation
    served = tuple(held_between(bar, low, high) for bar in bars)
    return OutputRss(output.parameter, output.unit, nominal, low, high, means, deviation, served, shift)


def _amounts(chain: Chain, slopes: Floats, means: str) -> tuple[Floats, Floats]:
    """Return signed contributions (lines, n) towards higher and lower results."""
    plus, minus = np.zeros(len(chain.lines)), np.zeros(len(chain.lines))
    for number, read in enumerate(chain.lines):
        tolerance = read.line.tolerance
        if tolerance is None or not moves(read.line):
            continue
        plus[number], minus[number] = tolerance.plus, tolerance.minus
        if means == "1 sigma":
            found = moments(tolerance)
            assert found is not None  # refused before
            plus[number] = minus[number] = found.deviation
        few = np.sqrt(elements(chain, read))
        plus[number], minus[number] = plus[number] / few, minus[number] / few
    up = slopes * np.where(slopes >= 0, plus[:, None], minus[:, None])
    down = slopes * np.where(slopes >= 0, minus[:, None], plus[:, None])
    return up, down


def _root(parts: Floats, matrix: Floats) -> Floats:
    """Return √(dᵀ R d) at every place."""
    squares = np.einsum("in,ij,jn->n", parts, matrix, parts)
    return np.asarray(np.sqrt(np.maximum(squares, 0.0)))


def _refuse_bend(chain: Chain, output: Output, slopes: Floats, nominal: Floats, size: Floats) -> None:
    """Refuse a root sum where the law is far from linear: what bends along each line alone, added as squares."""
    bend = np.zeros(chain.size)
    for number, read in enumerate(chain.lines):
        tolerance = read.line.tolerance
        if tolerance is None or not moves(read.line):
            continue
        both = np.zeros(chain.size)
        for end in bounds(read):
            values = chain.nominal()
            values[number] = end
            both = both + value_at(chain, output, values) / 2.0
        straight = slopes[number] * (tolerance.plus - tolerance.minus) / 2.0
        bend = bend + (both - nominal - straight) ** 2
    bend = np.sqrt(bend)
    worst = int(np.argmax(bend - MOST_BEND * size))
    if bend[worst] > MOST_BEND * size[worst] + _SMALL:
        raise CalculationError(
            f"{output.parameter} is not near enough to linear over these tolerances for a root sum of squares "
            f"({chain.required.words(worst)})",
            where=f"budget {chain.budget.id}",
            hint="take the worst case or a Monte Carlo",
        )
