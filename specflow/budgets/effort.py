"""Least total effort: allotments that meet all limits of a budget at all places and ask least of all blocks together.

Effort is counted so (our choice, no source): a block at its estimate takes effort 1 (times its weight), ten decibels
harder takes ten times as much, ten decibels easier a tenth. Harder is less excess noise, a higher intercept, a smaller
part of an error, more gain where gain is asked for; a gain that is free to move costs the same upwards and downwards.
In these terms noise, distortion and errors are convex, so that with gains kept there is one best answer.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Collection, Mapping, Sequence
from dataclasses import dataclass
from typing import Any, NoReturn

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.allotment import (
    Allotment,
    BlockParameter,
    ends_of,
    joined,
    kept_first,
    rounded_safely,
    rounded_widely,
    taken_first,
)
from specflow.budgets.allowed import Ends, worst_corner
from specflow.budgets.apportion import plan_shares
from specflow.budgets.chain import Overrides, ReadLine
from specflow.budgets.closure import Closure, closure_test
from specflow.budgets.contribution import contribution
from specflow.budgets.inverse_figures import PORTS, image_factor, line_value
from specflow.budgets.probe import Probe, line_name
from specflow.calculators.decibel import decibels, ratio
from specflow.errors import CalculationError, InfeasibleError
from specflow.model.base import code_key
from specflow.model.budget import Budget, Law
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary
from specflow.units import parse_unit

Floats = NDArray[np.float64]
HARDEST, EASIEST = 30.0, -15.0
_GAIN_STEP = 0.5
_PER_DB = math.log(10.0) / 10.0
_ROUNDS = 25
_BINDS = 1e-4
_HOLDS = 1e-6
_AMPLE = 1e3  # an optimiser takes no infinity


@dataclass(frozen=True, slots=True)
class Strain:
    """How much harder (dB, negative: easier) one line becomes than its estimate, and the effort that takes."""

    line: str
    harder_db: float
    effort: float


@dataclass(frozen=True, slots=True)
class Binding:
    """A limit that leaves nothing over at one place: what keeps the effort from being less."""

    requirement: str
    words: str


@dataclass(frozen=True, slots=True, eq=False)
class LeastEffort:
    """The allotments of least total effort, what limits them, and what they ask of each line."""

    budget: Budget
    allotments: tuple[Allotment, ...]
    closure: Closure
    binding: tuple[Binding, ...]
    strains: tuple[Strain, ...]
    effort: float
    notes: tuple[str, ...] = ()


def least_effort(
    budget: Budget,
    snapshot: Snapshot,
    dictionary: Dictionary,
    *,
    fixed: Collection[str] = (),
    free_gains: Collection[str] = (),
    weights: Mapping[str, float] | None = None,
    agreed: Mapping[BlockParameter, Allotment] | None = None,
    values: Overrides | None = None,
) -> LeastEffort:
    """Return the allotments of least total effort that meet all limits at all places together.

    ``fixed`` names blocks that keep their figures, ``free_gains`` blocks whose gain may move too, ``weights`` the
    effort of blocks at their estimate (1 unless said), ``agreed`` bounds that stand already for what is not shared.
    Raises InfeasibleError when even parts 30 dB harder everywhere
    do not do, with by how much and where; SpecflowError as ``evaluate_budget``.
    """
    probe = Probe.of(budget, snapshot, dictionary, values=values)
    by_block = {code_key(name): one for name, one in (weights or {}).items()}
    task = _task(probe, fixed, free_gains, by_block, agreed or {})
    harder = _minimised(task, _start(task))
    shares = [_allotment(task, number, amount) for number, amount in zip(task.numbers, harder, strict=True)]
    rounded = map(rounded_safely, joined(shares, f"budget {budget.id}"))
    known = dict(task.first) | {one.key: one for one in rounded}
    efforts = task.efforts(harder)
    strains = tuple(
        Strain(line_name(probe.chain.lines[number]), float(amount), float(effort))
        for number, amount, effort in zip(task.numbers, harder, efforts, strict=True)
    )
    return LeastEffort(
        budget,
        tuple(known.values()),
        closure_test(probe, known),
        _binding(task, harder),
        strains,
        float(efforts.sum()),
        task.notes,
    )


@dataclass(frozen=True, slots=True, eq=False)
class _Task:
    """What is to be minimised: the lines that may move, their weights, and what the others take first."""

    probe: Probe
    numbers: tuple[int, ...]
    weights: Floats
    is_free: NDArray[np.bool_]
    first: Mapping[BlockParameter, Allotment]
    ends: Sequence[Ends | None]
    notes: tuple[str, ...]

    @property
    def is_gain(self) -> NDArray[np.bool_]:
        """Which of them are gains that carry a share, not free ones."""
        lines = self.probe.chain.lines
        return np.array([lines[number].role.figure == "gain" for number in self.numbers]) & ~self.is_free

    def together(self, amount: float, gain: float) -> Floats:
        """Return all parts harder by the same amount, gains by their own; free ones stay."""
        return np.where(self.is_free, 0.0, np.where(self.is_gain, gain, amount))

    def efforts(self, harder: Floats) -> Floats:
        """Return the effort of every line."""
        one_way = np.exp(harder * _PER_DB)
        return self.weights * np.where(self.is_free, np.cosh(harder * _PER_DB), one_way)

    def efforts_slope(self, harder: Floats) -> Floats:
        """Return its derivative."""
        one_way = np.exp(harder * _PER_DB)
        return self.weights * _PER_DB * np.where(self.is_free, np.sinh(harder * _PER_DB), one_way)

    def margins(self, harder: Floats) -> Floats:
        """Return the margins (targets, n) at the worst corner, +inf where nothing is required."""
        ends = list(self.ends)
        changes: dict[int, Floats] = {}
        for number, amount in zip(self.numbers, harder, strict=True):
            read = self.probe.chain.lines[number]
            changes[number] = _moved(self.probe, read, float(amount))
            window = read.line.tolerance
            if read.role.figure == "gain" and window is not None:
                value = np.broadcast_to(changes[number], (self.probe.size,))
                ends[number] = value - window.minus, value + window.plus
        found = np.array(
            [worst_corner(self.probe, target, ends, changes).margin for target in self.probe.targets]
        )
        return np.where(np.isnan(found), np.inf, found)


def _task(
    probe: Probe,
    fixed: Collection[str],
    free_gains: Collection[str],
    weights: Mapping[str, float],
    agreed: Mapping[BlockParameter, Allotment],
) -> _Task:
    plan = plan_shares(probe, fixed)
    shared = {number for _, numbers in plan.shared for number in numbers}
    free = _free(probe, free_gains) - shared
    numbers = tuple(sorted(shared | free))
    lines = probe.chain.lines
    known, notes = taken_first(probe, [one for one in plan.first if one not in free])
    first = {one.key: one for one in map(rounded_widely, joined(known, f"budget {probe.budget.id}"))}
    first |= kept_first(probe, [one for one in plan.first if one not in free], agreed)
    ends = ends_of(probe, first, with_tolerances=True)
    for number in numbers:
        ends[number] = None
    return _Task(
        probe,
        numbers,
        np.array([weights.get(code_key(lines[number].line.block), 1.0) for number in numbers]),
        np.array([number in free for number in numbers]),
        first,
        ends,
        tuple(notes),
    )


def _free(probe: Probe, names: Collection[str]) -> set[int]:
    found = set()
    for name in names:
        own = [
            number
            for number, read in enumerate(probe.chain.lines)
            if read.role.figure == "gain" and code_key(read.line.block) == code_key(name)
        ]
        if not own:
            raise CalculationError(
                f"{name} has no gain in the budget",
                where=f"budget {probe.budget.id}",
                hint="name another block",
            )
        found.update(own)
    return found


def _moved(probe: Probe, read: ReadLine, harder: float) -> Floats:
    """Return the value of a line that is so many dB harder than its estimate.

    A share is one number for all conditions, so it starts from the estimate at the worst of them; a gain keeps its
    course over conditions.
    """
    figure, kind = read.figure(read.values), read.role.figure
    if kind != "gain":
        figure = np.atleast_1d(figure.min() if kind in PORTS or _wants_more(probe, kind) else figure.max())
    if kind == "noise_figure":
        least = 1.0 + image_factor(probe.chain, read)
        moved = decibels(least + (ratio(figure) - least) * ratio(np.array([-harder])))
    elif kind in PORTS or kind == "gain":
        moved = figure + harder
    elif probe.budget.law is Law.ROOT_SUM_OF_SQUARES:
        moved = figure * ratio(np.array([-harder / 2.0]))
    elif parse_unit(read.role.unit).is_log and probe.budget.law is not Law.SUM:
        moved = figure - harder
    else:
        moved = _of_plain(probe, read, figure, harder)
    return line_value(read, np.asarray(moved), probe.dictionary)


def _of_plain(probe: Probe, read: ReadLine, figure: Floats, harder: float) -> Floats:
    """A term of a plain sum: decibels move as they are, towards the limit's good side; amounts are divided."""
    wants_more = _wants_more(probe, read.role.figure)
    if parse_unit(read.role.unit).is_log:
        return figure + (harder if wants_more else -harder)
    return np.asarray(figure * ratio(np.array([harder if wants_more else -harder])))


def _wants_more(probe: Probe, kind: str) -> bool:
    """Whether the limit on a plain sum is a lower one."""
    return kind == "amount" and any(np.isfinite(target.bar.lower).any() for target in probe.targets)


def _start(task: _Task) -> Floats:
    """Return a start that meets all limits: shared gains moved together, all other parts harder by the same amount.

    Gains are apart: more of it meets a limit on gain and breaks one on distortion. Free gains stay where they are.
    """
    gain = _suiting_gain(task)
    low, high = EASIEST, HARDEST
    if task.margins(task.together(low, gain)).min() >= 0:
        return task.together(low, gain)
    left = task.margins(task.together(high, gain))
    if left.min() < 0 and not task.is_free.any():
        moved = f" and their gains moved by {gain:+g} dB" if task.is_gain.any() else ""
        _refuse(task, left, f"with every shared block {HARDEST:g} dB harder than its estimate{moved}")
    for _ in range(50):
        middle = (low + high) / 2.0
        is_met = task.margins(task.together(middle, gain)).min() >= 0
        low, high = (low, middle) if is_met else (middle, high)
    return task.together(high, gain)


def _suiting_gain(task: _Task) -> float:
    """Return the smallest step of all shared gains with which hard parts meet all limits, else the best one."""
    if not task.is_gain.any():
        return 0.0
    steps = sorted(np.arange(EASIEST, HARDEST + _GAIN_STEP, _GAIN_STEP), key=abs)
    best, most = 0.0, -math.inf
    for step in steps:
        least = float(task.margins(task.together(HARDEST, float(step))).min())
        if least > most:
            best, most = float(step), least
        if most >= 0:
            break
    return best


def _refuse(task: _Task, margins: Floats, when: str) -> NoReturn:
    row, place = np.unravel_index(int(np.argmin(margins)), margins.shape)
    bar = task.probe.targets[int(row)].bar
    raise InfeasibleError(
        f"{bar.requirement.id}: infeasible, and short by {-float(margins[row, place]):.3g} {bar.margin_unit} at "
        f"{task.probe.words(int(place))}, {when}",
        where=f"budget {task.probe.budget.id}",
        hint="relax the limit or the reserve, or change the gains or what is fixed",
    )


def _minimised(task: _Task, start: Floats) -> Floats:
    """Minimise over the limits at the places that matter; add the places where others are broken until none is."""
    from scipy import optimize

    minimize: Any = optimize.minimize  # its stubs know only one shape of arguments at a time
    margins = task.margins(start)
    watched = {(row, int(np.argmin(part))) for row, part in enumerate(margins)}
    for _ in range(_ROUNDS):
        settings: dict[str, Any] = {
            "jac": task.efforts_slope,
            "bounds": [(EASIEST, HARDEST)] * len(start),
            "constraints": {"type": "ineq", "fun": _margins_at(task, watched)},
            "options": {"maxiter": 300, "ftol": 1e-12},
        }
        found = minimize(
            lambda amounts: float(task.efforts(amounts).sum()), start, method="SLSQP", **settings
        )
        harder = np.asarray(found.x, np.float64)
        margins = task.margins(harder)
        broken = {(row, int(np.argmin(part))) for row, part in enumerate(margins) if part.min() < -_HOLDS}
        if not broken:
            return harder
        if broken <= watched:
            break
        watched |= broken
    _refuse(task, margins, "with the best split that was found")


def _margins_at(task: _Task, watched: set[tuple[int, int]]) -> Callable[[Floats], Floats]:
    rows, places = np.array(sorted(watched)).T

    def margins(harder: Floats) -> Floats:
        return np.asarray(np.minimum(task.margins(harder)[rows, places], _AMPLE))

    return margins


def _binding(task: _Task, harder: Floats) -> tuple[Binding, ...]:
    margins = task.margins(harder)
    found = []
    for target, part in zip(task.probe.targets, margins, strict=True):
        place = int(np.argmin(part))
        if part[place] < _BINDS * max(1.0, abs(float(target.bar.reserve))):
            found.append(Binding(target.name, task.probe.words(place)))
    return tuple(found)


def _allotment(task: _Task, number: int, harder: float) -> Allotment:
    read = task.probe.chain.lines[number]
    value = _moved(task.probe, read, harder)
    low, high = _sides(task, read, float(value.min()), float(value.max()))
    now, line = read.values, read.line
    words = f"least total effort: {abs(harder):.2f} dB {'harder' if harder >= 0 else 'easier'} than estimated"
    return Allotment(
        line.block, line.parameter, line.unit, low, high, True, float(now.min()), float(now.max()), words
    )


def _sides(task: _Task, read: ReadLine, least: float, most: float) -> tuple[float, float]:
    """Return which side of a value is the limit; a gain with a tolerance keeps its window."""
    tolerance = read.line.tolerance
    if read.role.figure == "gain" and tolerance is not None:
        return least - tolerance.minus, most + tolerance.plus
    budget = task.probe.budget
    law = next(
        (one for target in task.probe.targets if (one := contribution(target.output, budget)) is not None
         and one.figure == read.role.figure), None,
    )  # fmt: skip
    if law is not None:
        at_most = law.at_most
    else:
        at_most = not any(np.isfinite(target.bar.lower).any() for target in task.probe.targets)
    is_upper = at_most == (read.role.form.rises > 0)
    return (-math.inf, least) if is_upper else (most, math.inf)
