"""Solve one unknown of a budget so that all its limits hold at all its places at once."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.bracketing import MarginAt, edge
from specflow.budgets.chain import LineKey, Overrides, ReadLine
from specflow.budgets.closed_form import closed_form
from specflow.budgets.inverse_figures import domain, figure_of_line, line_value
from specflow.budgets.probe import Probe, Target, line_name
from specflow.errors import InfeasibleError
from specflow.model.budget import Budget, BudgetLine
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary

Floats = NDArray[np.float64]
_STEPS = 120
_GOLDEN = (5.0**0.5 - 1.0) / 2.0
_CLOSE = 1e-9


@dataclass(frozen=True, slots=True)
class Edge:
    """One end of what an unknown may be: ``value`` in the unit of the line; the requirement and place that set it.

    ``is_closed_form``: found by formula, else by bracketing the root.
    """

    value: float
    requirement: str
    place: int
    words: str
    is_closed_form: bool


@dataclass(frozen=True, slots=True, eq=False)
class Solution:
    """What one line may be so that every limit of the budget holds everywhere, the other lines as they stand.

    ``at_least`` and ``at_most`` are None where no limit asks for that end. ``low``, ``high`` (n,) are the same place by
    place, ±inf where that end is open.
    """

    line: BudgetLine
    unit: str
    at_least: Edge | None
    at_most: Edge | None
    low: Floats
    high: Floats

    @property
    def sentence(self) -> str:
        """The solution in words."""
        name = f"{self.line.block} {self.line.parameter}"
        parts = [
            f"{word} {edge.value:.4g} {self.unit} ({edge.requirement} at {edge.words}; "
            f"{'closed form' if edge.is_closed_form else 'root bracketed'})"
            for word, edge in (("at least", self.at_least), ("at most", self.at_most))
            if edge is not None
        ]
        return f"{name}: {' and '.join(parts) or 'may be anything: no limit depends on it'}"


def solve_line(
    budget: Budget,
    snapshot: Snapshot,
    dictionary: Dictionary,
    unknown: LineKey,
    *,
    values: Overrides | None = None,
) -> Solution:
    """Return what one line may be, the same at all places, so that all limits hold with their reserves.

    Closed form where ``calculators.inverse`` has it, else the root is bracketed. Raises InfeasibleError that says by
    how much even the best value misses, of which requirement and where; SpecflowError as ``evaluate_budget``.
    """
    probe = Probe.of(budget, snapshot, dictionary, values=values)
    number = probe.number(unknown)
    ends = [_of_target(probe, number, target, row) for row, target in enumerate(probe.targets)]
    return _joined(probe, number, ends)


@dataclass(frozen=True, slots=True, eq=False)
class _Ends:
    """What one limit asks of the figure: low and high (n,), ±inf where open."""

    target: Target
    low: Floats
    high: Floats
    is_closed_form: bool


def _of_target(probe: Probe, number: int, target: Target, row: int) -> _Ends:
    read = probe.chain.lines[number]
    bottom, top = domain(probe.chain, read)
    margin_at = _margin_at(probe, number, row)
    exact = closed_form(probe, number, target)
    figure = None if exact is None else figure_of_line(probe.chain, read, exact.value, _gain_of(probe, read))
    if exact is None or figure is None or np.isnan(figure).any():
        low, high, peak = _bracketed(margin_at, bottom, top, probe.size)
        if np.any(peak < -_CLOSE):
            _refuse(probe, read, target, peak)
        return _Ends(target, low, high, False)
    at_low, at_high = (margin_at(np.full(probe.size, end)) for end in (bottom, top))
    peak = np.maximum(at_low, at_high)
    if np.any(peak < -_CLOSE):
        _refuse(probe, read, target, peak)
    nothing = np.full(probe.size, np.inf)
    if exact.at_most:
        return _Ends(target, -nothing, np.where(at_high >= 0, nothing, figure), True)
    return _Ends(target, np.where(at_low >= 0, -nothing, figure), nothing, True)


def _gain_of(probe: Probe, read: ReadLine) -> Floats:
    figures = probe.figures({})
    return figures.arrays["gain"][read.row] if "gain" in figures.arrays else np.zeros(probe.size)


def _margin_at(probe: Probe, number: int, row: int) -> MarginAt:
    read = probe.chain.lines[number]

    def margin_at(figure: Floats) -> Floats:
        value = line_value(read, figure, probe.dictionary)
        margin = probe.margins({number: value})[row]
        return np.where(np.isnan(margin), np.inf, margin)

    return margin_at


def _bracketed(margin_at: MarginAt, bottom: float, top: float, size: int) -> tuple[Floats, Floats, Floats]:
    """Return the ends (n,) between which a margin is not negative, and the best margin where there is no such part.

    A margin to a limit rises, falls, or rises and falls (two-sided): what it allows is one stretch.
    """
    low, high = np.full(size, bottom), np.full(size, top)
    at_low, at_high = margin_at(low), margin_at(high)
    inside = np.where(at_low >= at_high, low, high)
    peak = np.maximum(at_low, at_high)
    if np.any(peak < 0):
        found, best = _highest(margin_at, low, high)
        inside, peak = np.where(peak < best, found, inside), np.maximum(peak, best)
    ends = []
    for end, at_end, is_open in ((low, at_low, -np.inf), (high, at_high, np.inf)):
        if (at_end >= 0).all():
            ends.append(np.full(size, is_open))
        else:
            ends.append(np.where(at_end >= 0, is_open, edge(margin_at, end, inside, at_end, peak)))
    return ends[0], ends[1], peak


def _highest(margin_at: MarginAt, low: Floats, high: Floats) -> tuple[Floats, Floats]:
    """Return where a margin that rises and then falls is highest, and how high, by golden section."""
    one, two = high - _GOLDEN * (high - low), low + _GOLDEN * (high - low)
    at_one, at_two = margin_at(one), margin_at(two)
    for _ in range(_STEPS):
        left = at_one > at_two
        high, low = np.where(left, two, high), np.where(left, low, one)
        one, two = high - _GOLDEN * (high - low), low + _GOLDEN * (high - low)
        at_one, at_two = margin_at(one), margin_at(two)
    return np.where(at_one >= at_two, one, two), np.maximum(at_one, at_two)


def _refuse(probe: Probe, read: ReadLine, target: Target, peak: Floats) -> None:
    place = int(np.argmin(peak))
    raise InfeasibleError(
        f"{line_name(read)}: infeasible, and short by {-float(peak[place]):.3g} {target.bar.margin_unit} of "
        f"{target.name} at {probe.words(place)}",
        where=f"budget {probe.budget.id}",
        hint="no value of it is good enough: change another position, or the limit",
    )


def _joined(probe: Probe, number: int, ends: list[_Ends]) -> Solution:
    read = probe.chain.lines[number]
    low = np.max([one.low for one in ends], axis=0)
    high = np.min([one.high for one in ends], axis=0)
    lowest = _set_by(ends, [one.low for one in ends], np.argmax)
    highest = _set_by(ends, [one.high for one in ends], np.argmin)
    at_least, at_most = (_edge_of(probe, read, *one) for one in (lowest, highest))
    if lowest[2] > highest[2] + _CLOSE:
        _refuse_conflict(probe, number, lowest, highest)
    low, high = (line_value(read, one, probe.dictionary) for one in (low, high))
    if read.role.form.rises < 0:
        low, high, at_least, at_most = high, low, at_most, at_least
    return Solution(read.line, read.line.unit, at_least, at_most, low, high)


_SetBy = tuple[_Ends, int, float]


def _set_by(ends: list[_Ends], parts: list[Floats], choose: Callable[[Floats], np.intp]) -> _SetBy:
    table = np.array(parts)
    row, place = np.unravel_index(int(choose(table)), table.shape)
    return ends[int(row)], int(place), float(table[row, place])


def _edge_of(probe: Probe, read: ReadLine, ends: _Ends, place: int, figure: float) -> Edge | None:
    if not np.isfinite(figure):
        return None
    value = float(line_value(read, np.array([figure]), probe.dictionary)[0])
    return Edge(value, ends.target.name, place, probe.words(place), ends.is_closed_form)


def _refuse_conflict(probe: Probe, number: int, lowest: _SetBy, highest: _SetBy) -> None:
    """Two limits pull apart: say both, and by how much the best compromise misses."""
    read = probe.chain.lines[number]

    def smallest(figure: Floats) -> Floats:
        value = line_value(read, figure, probe.dictionary)
        margins = probe.margins({number: value})
        return np.full(1, np.nanmin(margins))

    _, best = _highest(smallest, np.array([highest[2]]), np.array([lowest[2]]))
    first, second = (
        float(line_value(read, np.array([one[2]]), probe.dictionary)[0]) for one in (lowest, highest)
    )
    words = ("at least", "at most") if read.role.form.rises > 0 else ("at most", "at least")
    unit = read.line.unit
    asked = [
        f"{one[0].target.name} at {probe.words(one[1])} needs {word} {value:.4g} {unit}"
        for one, word, value in zip((lowest, highest), words, (first, second), strict=True)
    ]
    raise InfeasibleError(
        f"{line_name(read)}: infeasible, and short by {-float(best[0]):.3g} {lowest[0].target.bar.margin_unit}: "
        f"{', '.join(asked)}",
        where=f"budget {probe.budget.id}",
        hint="the two limits pull apart: change another position, or one of the limits",
    )
