"""Worst cases: the ends that a result reaches when every line may stand at either end of its tolerance."""

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
from specflow.budgets.spread import bounds, check_bounds, is_cut, moves
from specflow.model.base import code_key
from specflow.model.budget import Budget, BudgetLine
from specflow.model.budget_line import Meaning
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary

Floats = NDArray[np.float64]
_MOST_PASSES = 8


@dataclass(frozen=True, slots=True, eq=False)
class OutputRange:
    """One quantity between its extremes ``low`` and ``high`` (n,), in ``unit``.

    ``is_exact``: they are the true extremes, because the law is monotonic in every line and they are evaluated at the
    corners; otherwise they were searched among corners and ``words`` say so. ``parts`` (lines, n) is how far each line
    alone takes the result towards its adverse side, in linear terms (slope times tolerance, the larger side).
    """

    parameter: str
    unit: str
    nominal: Floats
    low: Floats
    high: Floats
    is_exact: bool
    words: str
    parts: Floats
    served: tuple[ServedRange, ...]


@dataclass(frozen=True, slots=True, eq=False)
class WorstCase:
    """The extremes of a budget when every line may stand at either end of its tolerance, whatever the others do."""

    budget: Budget
    nominal: BudgetResult
    lines: tuple[BudgetLine, ...]
    outputs: tuple[OutputRange, ...]
    notes: tuple[str, ...]

    def of(self, parameter: str) -> OutputRange:
        """Return one quantity. KeyError for one that the budget does not give."""
        for one in self.outputs:
            if code_key(one.parameter) == code_key(parameter):
                return one
        raise KeyError(parameter)


def worst_case(
    budget: Budget, snapshot: Snapshot, dictionary: Dictionary, *, values: Overrides | None = None
) -> WorstCase:
    """Return the adverse and favourable extremes at every required condition.

    Every line stands at the end of its tolerance that moves the result most. The lines of one correlation group stand
    all at their upper ends or all at their lower ones; correlations between groups do not soften it. A tolerance of
    k·σ is taken at the k·σ it states. Raises SpecflowError as ``evaluate_budget``.
    """
    prepared = prepare(budget, snapshot, dictionary, values=values)
    check_bounds(prepared.chain)
    nominal = nominal_result(prepared)
    outputs = tuple(
        _range(prepared.chain, output, bars, one.result)
        for output, bars, one in zip(prepared.outputs, prepared.bars, nominal.outputs, strict=True)
    )
    lines = tuple(read.line for read in prepared.chain.lines)
    notes = (*nominal.notes, *_sigma_notes(lines), *cut_notes(prepared.chain))
    return WorstCase(budget, nominal, lines, outputs, notes)


def _sigma_notes(lines: Sequence[BudgetLine]) -> list[str]:
    named = [
        line.place
        for line in lines
        if moves(line) and line.tolerance is not None and line.tolerance.meaning is Meaning.SIGMA
    ]
    return [f"taken at the k·σ stated, beyond which they may go: {', '.join(named)}"] if named else []


def cut_notes(chain: Chain) -> list[str]:
    """Say which lines would reach beyond 0 dB or 0 K at the k·σ stated and are cut there."""
    named = [read.line.place for read in chain.lines if is_cut(read)]
    return [f"cut at 0 dB or 0 K, where no block can be beyond: {', '.join(named)}"] if named else []


def _range(chain: Chain, output: Output, bars: Sequence[Bar], nominal: Floats) -> OutputRange:
    units = _units(chain)
    low = _extreme(chain, output, units, -1)
    high = _extreme(chain, output, units, +1)
    is_exact, words = _trust(chain, output, units)
    served = tuple(held_between(bar, low, high) for bar in bars)
    return OutputRange(
        output.parameter,
        output.unit,
        nominal,
        low,
        high,
        is_exact,
        words,
        _parts(chain, output),
        served,
    )


def _units(chain: Chain) -> list[list[int]]:
    """Return the numbers of the lines that move, those of one correlation group together."""
    units: dict[str, list[int]] = {}
    for number, read in enumerate(chain.lines):
        if moves(read.line):
            units.setdefault(code_key(read.line.correlation_group) or f"#{number}", []).append(number)
    return list(units.values())


def _trust(chain: Chain, output: Output, units: Sequence[Sequence[int]]) -> tuple[bool, str]:
    """Return whether the ends are the true extremes, and what they are in words."""
    groups = [unit for unit in units if len(unit) > 1]
    together = f"; together: {_listed(chain, groups)}" if groups else ""
    if not output.is_monotonic:
        return False, (
            f"{output.parameter} is not monotonic in every line: the ends were searched among the corners, and a "
            f"value inside the tolerances may go beyond them{together}"
        )
    slopes = slopes_at(chain, output, chain.nominal())
    mixed = [unit for unit in groups if (slopes[unit].max(axis=0) * slopes[unit].min(axis=0) < 0).any()]
    if mixed:
        return False, (
            f"lines that move together work against each other ({_listed(chain, mixed)}): both ends of the group were "
            f"tried, and a value between them may go beyond{together}"
        )
    return True, f"both ends evaluated at the corners of the tolerances{together}"


def _listed(chain: Chain, groups: Sequence[Sequence[int]]) -> str:
    return "; ".join(" and ".join(chain.lines[number].line.place for number in unit) for unit in groups)


def _extreme(chain: Chain, output: Output, units: Sequence[Sequence[int]], side: int) -> Floats:
    """Return the result (n,) with every line at the end of its tolerance that moves it to ``side``.

    The end is told by the sign of the slope, taken again at the corner found: a slope that is zero at nominal need not
    be zero there; of a group by the sum of slope times tolerance of its lines. Where a law is not monotonic, or lines
    move together, the corner is improved one after the other.
    """
    ends = [bounds(read) for read in chain.lines]
    values = chain.nominal()
    signs = np.zeros((len(chain.lines), chain.size), np.int8)
    for _ in range(_MOST_PASSES):
        found = _wanted(chain, slopes_at(chain, output, values), units, side)
        found = np.where(found == 0, signs, found)
        if np.array_equal(found, signs):
            break
        signs = found
        values = _at_ends(chain, ends, signs)
    result = value_at(chain, output, values)
    if output.is_monotonic and all(len(unit) == 1 for unit in units):
        return result
    return _searched(chain, output, units, side, ends, signs, result)


def _wanted(chain: Chain, slopes: Floats, units: Sequence[Sequence[int]], side: int) -> NDArray[np.int8]:
    """Return which end every line that moves should stand at (lines, n): +1 the upper one, 0 where it is the same."""
    found = np.zeros(slopes.shape, np.int8)
    for unit in units:
        up, down = np.zeros(slopes.shape[1]), np.zeros(slopes.shape[1])
        for number in unit:
            low, high = bounds(chain.lines[number])
            up += slopes[number] * (high - chain.lines[number].values)
            down += slopes[number] * (low - chain.lines[number].values)
        found[unit] = np.sign((up - down) * side).astype(np.int8)
    return found


def _searched(
    chain: Chain,
    output: Output,
    units: Sequence[Sequence[int]],
    side: int,
    ends: Sequence[tuple[Floats, Floats]],
    signs: NDArray[np.int8],
    best: Floats,
) -> Floats:
    """Turn one line (or group) after the other to its other end as long as that helps somewhere."""
    for _ in range(_MOST_PASSES):
        improved = False
        for unit in units:
            trial = signs.copy()
            trial[unit] = np.where(signs[unit] == 0, 1, -signs[unit])
            result = value_at(chain, output, _at_ends(chain, ends, trial))
            better = (result - best) * side > 1e-12
            if better.any():
                signs = np.where(better, trial, signs)
                best = np.where(better, result, best)
                improved = True
        if not improved:
            break
    return best


def _at_ends(chain: Chain, ends: Sequence[tuple[Floats, Floats]], signs: NDArray[np.int8]) -> list[Floats]:
    values = []
    for read, (low, high), sign in zip(chain.lines, ends, signs, strict=True):
        if moves(read.line):
            values.append(np.where(sign > 0, high, np.where(sign < 0, low, read.values)))
        else:
            values.append(read.values)
    return values


def _parts(chain: Chain, output: Output) -> Floats:
    """Return slope times tolerance of every line, the larger side, at every place."""
    slopes = np.abs(slopes_at(chain, output, chain.nominal()))
    amounts = np.array(
        [
            0.0 if read.line.tolerance is None else max(read.line.tolerance.minus, read.line.tolerance.plus)
            for read in chain.lines
        ]
    )
    return np.asarray(slopes * amounts[:, None])
