"""How far lines spread: bounds, standard deviations, and which lines move together."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain, ReadLine
from specflow.budgets.forms import LOSSES
from specflow.errors import CalculationError
from specflow.model.base import code_key
from specflow.model.budget import Budget
from specflow.model.budget_line import BudgetLine, Distribution, LineTolerance, Meaning

Floats = NDArray[np.float64]
_SMALL = 1e-9


@dataclass(frozen=True, slots=True)
class Moments:
    """Mean and standard deviation of a line about its figure, in its tolerance unit."""

    mean: float
    deviation: float


def moves(line: BudgetLine) -> bool:
    """Whether a line has a tolerance that is not zero."""
    return line.tolerance is not None and (line.tolerance.minus > 0 or line.tolerance.plus > 0)


def bounds(read: ReadLine) -> tuple[Floats, Floats]:
    """Return the lowest and the highest value of a line, in its own unit.

    Of k·σ it is the k·σ that it states, cut where no block can be (``is_cut``); limits that reach there are refused.
    """
    tolerance = read.line.tolerance
    if tolerance is None:
        return read.values, read.values
    low, high = read.values - tolerance.minus, read.values + tolerance.plus
    if tolerance.meaning is Meaning.SIGMA:
        return np.maximum(low, read.least), np.minimum(high, read.most)
    return low, high


def is_cut(read: ReadLine) -> bool:
    """Whether the k·σ of a line reaches where no block can be, so that its bounds are cut there."""
    tolerance = read.line.tolerance
    if tolerance is None or tolerance.meaning is not Meaning.SIGMA:
        return False
    low, high = read.values - tolerance.minus, read.values + tolerance.plus
    return bool(np.min(low) < read.least - _SMALL or np.max(high) > read.most + _SMALL)


def moments(tolerance: LineTolerance) -> Moments | None:
    """Return mean and standard deviation by the distribution that a tolerance names; None where it names none."""
    minus, plus = tolerance.minus, tolerance.plus
    match tolerance.shape:
        case Distribution.NORMAL:
            assert tolerance.k is not None
            return Moments(0.0, plus / tolerance.k)
        case Distribution.UNIFORM:
            return Moments((plus - minus) / 2.0, (plus + minus) / math.sqrt(12.0))
        case Distribution.TRIANGULAR:
            return Moments((plus - minus) / 3.0, math.sqrt((minus**2 + plus**2 + minus * plus) / 18.0))
        case Distribution.U_SHAPED:
            return Moments((plus - minus) / 2.0, (plus + minus) / 2.0 / math.sqrt(2.0))
        case Distribution.TRUNCATED_NORMAL:
            return _truncated(tolerance)
    return None


def sigma_of_full_normal(tolerance: LineTolerance) -> float:
    """Return σ of the normal that a truncated normal is cut from: its limits lie k·σ from the figure."""
    assert tolerance.k is not None
    return (tolerance.minus + tolerance.plus) / (2.0 * tolerance.k)


def _truncated(tolerance: LineTolerance) -> Moments:
    sigma = sigma_of_full_normal(tolerance)
    low, high = -tolerance.minus / sigma, tolerance.plus / sigma

    def density(x: float) -> float:
        return math.exp(-x * x / 2.0) / math.sqrt(2.0 * math.pi)

    kept = 0.5 * (math.erf(high / math.sqrt(2.0)) - math.erf(low / math.sqrt(2.0)))
    mean = (density(low) - density(high)) / kept
    variance = 1.0 + (low * density(low) - high * density(high)) / kept - mean**2
    return Moments(sigma * mean, sigma * math.sqrt(variance))


def correlation_matrix(budget: Budget, lines: Sequence[BudgetLine]) -> Floats:
    """Return the correlation coefficients of the lines (lines, lines): 1 within a group, as stated between groups.

    CalculationError where the coefficients contradict each other (the matrix is not positive semi-definite).
    """
    keys = [code_key(line.correlation_group) for line in lines]
    names = list(dict.fromkeys(key for key in keys if key))
    groups = group_matrix(budget, names)
    matrix = np.eye(len(lines))
    for i, first in enumerate(keys):
        for j, second in enumerate(keys):
            if i != j and first and second:
                matrix[i, j] = groups[names.index(first), names.index(second)]
    return matrix


def group_matrix(budget: Budget, names: Sequence[str]) -> Floats:
    """Return the correlation coefficients between correlation groups, by their keys; checked to be possible."""
    matrix = np.eye(len(names))
    stated: dict[frozenset[str], float] = {}
    for one in budget.correlations:
        pair = frozenset((code_key(one.first), code_key(one.second)))
        if stated.get(pair, one.coefficient) != one.coefficient:
            raise CalculationError(
                f"the correlation of {one.first} and {one.second} is given twice, as {stated[pair]:g} and "
                f"{one.coefficient:g}",
                where=f"budget {budget.id}",
                hint="keep one of them",
            )
        stated[pair] = one.coefficient
    for i, first in enumerate(names):
        for j, second in enumerate(names):
            if i != j:
                matrix[i, j] = stated.get(frozenset((first, second)), 0.0)
    if len(names) and float(np.linalg.eigvalsh(matrix).min()) < -_SMALL:
        listed = ", ".join(
            f"{_members(budget, one.first)} and {_members(budget, one.second)} {one.coefficient:+g}"
            for one in budget.correlations
        )
        raise CalculationError(
            f"these correlations cannot hold together (the matrix is not positive semi-definite): {listed}",
            where=f"budget {budget.id}",
            hint="where two groups follow a third closely, they follow each other too; weaken a coefficient",
        )
    return matrix


def _members(budget: Budget, group: str) -> str:
    """Name a correlation group with its lines."""
    lines = [line.place for line in budget.lines if code_key(line.correlation_group) == code_key(group)]
    return f"{group} [{', '.join(lines)}]"


def check_bounds(chain: Chain) -> None:
    """Refuse limits that reach where a figure cannot be: a loss, noise figure or temperature below 0."""
    for read in chain.lines:
        name = code_key(read.line.parameter)
        is_loss = name in LOSSES or (name == "gain" and chain.positions[read.row].passive)
        is_noise = name in ("noise_figure", "noise_temperature", "antenna_noise_temperature")
        if not moves(read.line) or not (is_loss or is_noise):
            continue
        tolerance = read.line.tolerance
        if tolerance is None or tolerance.meaning is Meaning.SIGMA:
            continue
        low, high = bounds(read)
        if is_noise or name in LOSSES:
            short = float(np.min(read.convert(low)))
        else:
            short = -float(np.max(high))
        if short < -_SMALL:
            raise CalculationError(
                f"the tolerance takes {read.line.parameter} {-short:.3g} {read.role.unit} beyond 0, where no block "
                "can be",
                where=f"budget {chain.budget.id}, {read.line.place}",
                hint="give the two sides of the tolerance apart, as +0.3/-0.1",
            )


def elements(chain: Chain, read: ReadLine) -> int:
    """Return how many elements of a line move each by itself: their mean is what the position shows."""
    return chain.positions[read.row].count if read.line.shared == "per element" else 1
