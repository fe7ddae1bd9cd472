"""Share what a limit leaves over the blocks: equally, or in proportion to what they are estimated at.

Positions that are passive, losses in a chain, and blocks said to be fixed take their share first. Gains that are not
shared stand at the worst end of their tolerance, so that the shares hold for every block that keeps its own window.
"""

from __future__ import annotations

import math
from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.allotment import (
    Allotment,
    BlockParameter,
    ends_of,
    joined,
    kept_first,
    open_allotment,
    rounded_safely,
    rounded_widely,
    taken_first,
)
from specflow.budgets.allowed import Ends, worst_corner
from specflow.budgets.bracketing import edge
from specflow.budgets.chain import Overrides
from specflow.budgets.closure import Closure, closure_test
from specflow.budgets.contribution import Contribution, contribution
from specflow.budgets.forms import LOSS
from specflow.budgets.growth import Growth, fronts_of, one_number
from specflow.budgets.inverse_figures import image_factor
from specflow.budgets.plain_shares import share_plainly
from specflow.budgets.probe import Probe, Target
from specflow.errors import CalculationError, InfeasibleError
from specflow.model.base import code_key
from specflow.model.budget import Budget
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary

Floats = NDArray[np.float64]
Way = Literal["equal", "proportional"]
_RANGE = 30.0  # decades in which a scale is looked for
_PASSES = 3
_NOT_SHARED = ("desensitisation", "blocking_level")


@dataclass(frozen=True, slots=True, eq=False)
class Apportionment:
    """Allotments for the blocks of a budget, and whether the system closes with them."""

    budget: Budget
    way: str
    allotments: tuple[Allotment, ...]
    closure: Closure
    binding: tuple[str, ...]
    notes: tuple[str, ...] = ()


def apportion(
    budget: Budget,
    snapshot: Snapshot,
    dictionary: Dictionary,
    *,
    way: Way = "equal",
    fixed: Collection[str] = (),
    at_nominal: bool = False,
    by_conditions: bool = False,
    agreed: Mapping[BlockParameter, Allotment] | None = None,
    values: Overrides | None = None,
) -> Apportionment:
    """Return what each block may have so that all limits of a budget hold at all places, reserves kept back.

    ``fixed`` names blocks that keep their figures besides the passive ones. Every share is in the terms in which its
    law adds: excess noise at the input, distortion, power, squared error; gains and losses share the margin in dB.

    ``agreed`` are bounds that stand already for what is not shared; they are kept instead of figure and tolerance.
    ``at_nominal`` shares at nominal figures instead of the worst ends of what is taken first: the textbook's shares,
    with which the system need not close. ``by_conditions`` gives shares place by place instead of the one number that
    holds at all of them. Raises InfeasibleError where what is taken first leaves nothing to share, with
    by how much; SpecflowError as ``evaluate_budget``.
    """
    probe = Probe.of(budget, snapshot, dictionary, values=values)
    plan = plan_shares(probe, fixed)
    first, notes = taken_first(probe, plan.first, by_conditions=by_conditions)
    known = {one.key: one for one in map(rounded_widely, joined(first, f"budget {budget.id}"))}
    known |= kept_first(probe, plan.first, agreed or {})
    shares: list[Allotment] = []
    binding: list[str] = []
    for target, numbers in sorted(
        plan.shared, key=lambda pair: contribution(pair[0].output, budget) is not None
    ):
        law = contribution(target.output, budget)
        if law is None:
            found, said = share_plainly(
                probe, target, numbers, _ends(probe, known, at_nominal), way, by_conditions=by_conditions
            )
        else:
            ends = _ends(probe, known, at_nominal)
            found, said = _shared(probe, target, law, numbers, ends, way, by_conditions=by_conditions)
        shares += found
        binding += said
        known |= {one.key: one for one in map(rounded_safely, joined(shares, f"budget {budget.id}"))}
    closure = closure_test(probe, known)
    return Apportionment(budget, way, tuple(known.values()), closure, tuple(binding), (*notes, *plan.notes))


def _ends(probe: Probe, known: Mapping[BlockParameter, Allotment], at_nominal: bool) -> list[Ends | None]:
    """Return where the lines that are not shared stand: at the ends of what they take, or at their figures."""
    if at_nominal:
        return [None] * len(probe.chain.lines)
    return ends_of(probe, known, with_tolerances=True)


@dataclass(frozen=True, slots=True)
class SharePlan:
    """Which lines each limit is shared over, and which lines take what they need first."""

    shared: tuple[tuple[Target, tuple[int, ...]], ...]
    first: tuple[int, ...]
    notes: tuple[str, ...]


def plan_shares(probe: Probe, fixed: Collection[str] = ()) -> SharePlan:
    """Return which lines are shared for which limit. CalculationError where no line is left to share a limit."""
    kept = {code_key(name) for name in fixed}
    unknown = kept - {code_key(position.block) for position in probe.chain.positions}
    if unknown:
        raise CalculationError(
            f"no block {sorted(unknown)[0]} stands in the budget", where=f"budget {probe.budget.id}",
            hint=f"its blocks are {', '.join(position.block for position in probe.chain.positions)}",
        )  # fmt: skip
    shared: list[tuple[Target, tuple[int, ...]]] = []
    taken: set[int] = set()
    for target in probe.targets:
        numbers = _sharing(probe, target, kept)
        if not numbers:
            raise CalculationError(
                f"nothing is left to share {target.name} ({target.output.parameter}) over",
                where=f"budget {probe.budget.id}",
                hint="every position is passive or fixed; free one of them",
            )
        shared.append((target, numbers))
        taken.update(numbers)
    first = tuple(number for number in range(len(probe.chain.lines)) if number not in taken)
    return SharePlan(tuple(shared), first, ())


def _sharing(probe: Probe, target: Target, kept: Collection[str]) -> tuple[int, ...]:
    if target.output.parameter in _NOT_SHARED:
        raise CalculationError(
            f"{target.name} ({target.output.parameter}) has no rule by which it is shared",
            where=f"budget {probe.budget.id}",
            hint="solve the one line that it is about with --solve, or share the limits on noise and intercepts",
        )
    law = contribution(target.output, probe.budget)
    figure = law.figure if law is not None else ("amount" if "amount" in target.output.needs else "gain")
    return tuple(
        number
        for number, read in enumerate(probe.chain.lines)
        if read.role.figure == figure
        and not probe.chain.positions[read.row].passive
        and not (figure == "gain" and read.role.form is LOSS)
        and code_key(read.line.block) not in kept
    )


def _shared(
    probe: Probe,
    target: Target,
    law: Contribution,
    numbers: Sequence[int],
    ends: list[Ends | None],
    way: Way,
    *,
    by_conditions: bool,
) -> tuple[list[Allotment], list[str]]:
    """Share one limit: all contributions grow together from nothing until the margin is gone."""
    for number in numbers:
        ends[number] = None
    scale = np.zeros(probe.size)
    changes: dict[int, Floats] = {}
    for _ in range(_PASSES):
        corner = worst_corner(probe, target, ends, changes)
        start = dict(enumerate(corner.values))
        parts = _parts(probe, law, numbers, start, way, target)
        growth = Growth.of(probe, law, start, parts)
        before, scale = scale, _scale(probe, target, growth, start)
        changes = growth.values(scale)
        if np.allclose(before, scale, rtol=0, atol=1e-9):
            break
    words = f"{way} share of {target.name}"
    if not by_conditions:
        changes = one_number(probe, target, law, start, changes, is_equal=way == "equal")
    found = [_allotment(probe, number, value, law.at_most, words) for number, value in changes.items()]
    return found, [_binding(probe, number, value, target, law.at_most) for number, value in changes.items()]


def _parts(
    probe: Probe,
    law: Contribution,
    numbers: Sequence[int],
    start: dict[int, Floats],
    way: Way,
    target: Target,
) -> dict[int, Floats]:
    """Return the proportions in which contributions grow, each (n,)."""
    size = probe.size
    if way == "equal":
        return {number: np.ones(size) for number in numbers}
    estimate = {number: probe.chain.lines[number].values for number in numbers}
    figures = probe.figures({**start, **estimate})
    fronts = fronts_of(figures, law.figure)
    parts = {}
    for number in numbers:
        read = probe.chain.lines[number]
        front = np.ones(1) if fronts is None else fronts[read.row]
        # Of a mixer its own noise alone: what comes of the image is made in front of it.
        own = law.of(figures.own[law.figure][read.row], front) - image_factor(probe.chain, read) / front
        parts[number] = np.broadcast_to(own, (size,))
    if np.any(sum(parts.values()) == 0):
        raise CalculationError(
            f"no shared position contributes to {target.name} by its estimate",
            where=f"budget {probe.budget.id}",
            hint="estimate one that does, or share equally",
        )
    return parts


def _scale(probe: Probe, target: Target, growth: Growth, start: dict[int, Floats]) -> Floats:
    """Return the greatest scale (n,), in decades, at which the margin is not gone; everywhere by itself."""
    row = probe.targets.index(target)

    def margin(scale: Floats) -> Floats:
        changes = {**start, **growth.values(scale)}
        found = probe.margins(changes)[row]
        return np.where(np.isnan(found), np.inf, found)

    low, high = np.full(probe.size, -_RANGE), np.full(probe.size, _RANGE)
    nothing = margin(low)
    if np.any(nothing < 0):
        place = int(np.argmin(nothing))
        raise InfeasibleError(
            f"{target.name}: infeasible, and short by {-float(nothing[place]):.3g} {target.bar.margin_unit} at "
            f"{probe.words(place)}: what is taken first leaves nothing to share",
            where=f"budget {probe.budget.id}",
            hint="relax the limit or the reserve, or change what is passive or fixed",
        )
    return edge(margin, high, low, margin(high), nothing)


def _allotment(probe: Probe, number: int, value: Floats, at_most: bool, words: str) -> Allotment:
    """Return the share of a line, place by place."""
    read = probe.chain.lines[number]
    is_upper = at_most == (read.role.form.rises > 0)
    value, open_side = np.broadcast_to(value, (probe.size,)), np.full(probe.size, math.inf)
    blank = open_allotment(read, words, is_shared=True)
    return blank.by_place(-open_side, value) if is_upper else blank.by_place(value, open_side)


def _binding(probe: Probe, number: int, value: Floats, target: Target, at_most: bool) -> str:
    read = probe.chain.lines[number]
    is_upper = at_most == (read.role.form.rises > 0)
    place = int(np.argmin(value) if is_upper else np.argmax(value))
    return f"{read.line.block} {read.line.parameter}: {target.name} at {probe.words(place)}"
