"""Trial changes: what every budget comes to before and after, and several budgets of one requirement side by side."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from specflow.budgets.closure import closure_of_children
from specflow.budgets.corners import worst_case
from specflow.budgets.evaluate import nominal_result
from specflow.budgets.probe import Probe
from specflow.errors import SpecflowError
from specflow.model.base import code_key
from specflow.model.budget import Budget
from specflow.model.budget_outcome import ServedOutcome
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary

Children = Mapping[str, Sequence[Requirement]]
"""The requirements that carry the allocations of each budget, by its key."""


@dataclass(frozen=True, slots=True)
class LimitState:
    """What is left of one limit: its smallest margin in ``unit`` and where; ``closes`` as ``ServedOutcome.closes``.

    ``worst_case`` is the smallest margin with every line at the end of its tolerance that hurts.
    """

    requirement: str
    margin: float
    unit: str
    words: str
    closes: bool | None
    worst_case: float


@dataclass(frozen=True, slots=True)
class BudgetState:
    """What a budget comes to: its limits, whether it closes with its children; ``error`` where it cannot be read."""

    budget: str
    law: str
    positions: int
    limits: tuple[LimitState, ...] = ()
    closes: bool | None = None
    closure: str = ""
    error: str = ""

    def limit(self, requirement: str) -> LimitState | None:
        """Return one of the limits."""
        return next((one for one in self.limits if code_key(one.requirement) == code_key(requirement)), None)


@dataclass(frozen=True, slots=True)
class BudgetEffect:
    """A budget before and after a change; None where it is not there."""

    budget: str
    before: BudgetState | None
    after: BudgetState | None

    @property
    def limits(self) -> tuple[tuple[str, LimitState | None, LimitState | None], ...]:
        """The limits that change, each before and after."""
        names: dict[str, None] = {}
        for state in (self.before, self.after):
            names.update(dict.fromkeys(one.requirement for one in state.limits) if state is not None else {})
        pairs = [(name, _limit_of(self.before, name), _limit_of(self.after, name)) for name in names]
        return tuple(pair for pair in pairs if not _same(pair[1], pair[2]))


def _limit_of(state: BudgetState | None, name: str) -> LimitState | None:
    return None if state is None else state.limit(name)


def _same(first: LimitState | None, second: LimitState | None) -> bool:
    if first is None or second is None:
        return first is second
    margins = (first.margin, first.worst_case), (second.margin, second.worst_case)
    near = bool(np.isclose(*margins, rtol=0, atol=1e-9, equal_nan=True).all())
    return near and (first.unit, first.words, first.closes) == (second.unit, second.words, second.closes)


def budget_effects(
    before: Snapshot, after: Snapshot, dictionary: Dictionary, children: tuple[Children, Children]
) -> tuple[BudgetEffect, ...]:
    """Return the budgets that come to something else after a change, in the order of their ids.

    ``children`` are the requirements on blocks before and after. A budget that cannot be evaluated says why.
    """
    found = []
    named = {code_key(one.id): one.id for one in (*before.all(Budget), *after.all(Budget))}
    for key, name in named.items():
        states = [
            budget_state(budget, snapshot, dictionary, carried.get(key, ()))
            if (budget := snapshot.find(Budget, name)) is not None
            else None
            for snapshot, carried in zip((before, after), children, strict=True)
        ]
        if not _unchanged(*states):
            found.append(BudgetEffect(name, *states))
    return tuple(found)


def _unchanged(first: BudgetState | None, second: BudgetState | None) -> bool:
    effect = BudgetEffect("", first, second)
    if effect.limits or first is None or second is None:
        return first is second and not effect.limits
    return (first.closes, first.error, first.positions) == (second.closes, second.error, second.positions)


def budget_state(
    budget: Budget, snapshot: Snapshot, dictionary: Dictionary, children: Sequence[Requirement] = ()
) -> BudgetState:
    """Return what a budget comes to; closure is tested where it has children."""
    law = str(budget.law)
    try:
        probe = Probe.of(budget, snapshot, dictionary)
        result = nominal_result(probe.prepared)
        adverse = _adverse(budget, snapshot, dictionary)
        closure = closure_of_children(probe, children) if children else None
    except SpecflowError as error:
        return BudgetState(budget.id, law, len(budget.chain), error=str(error))
    return BudgetState(
        budget.id,
        law,
        len(budget.chain),
        tuple(_limit(one, probe, adverse.get(one.requirement.id, np.nan)) for one in result.served),
        None if closure is None else closure.closes,
        "" if closure is None else closure.sentence,
    )


def _adverse(budget: Budget, snapshot: Snapshot, dictionary: Dictionary) -> Mapping[str, float]:
    """Return the smallest margin of each limit at the worst corner of all tolerances."""
    found = worst_case(budget, snapshot, dictionary)
    served = (one.adverse for output in found.outputs for one in output.served)
    return {one.requirement.id: one.smallest_margin for one in served}


def _limit(one: ServedOutcome, probe: Probe, worst: float) -> LimitState:
    words = probe.words(one.worst) if one.worst >= 0 else ""
    return LimitState(one.requirement.id, one.smallest_margin, one.margin_unit, words, one.closes, worst)


def alternatives(
    requirement: str, snapshot: Snapshot, dictionary: Dictionary, children: Children
) -> tuple[BudgetState, ...]:
    """Return every budget that serves a requirement, the one with the most margin first."""
    serving = [
        budget
        for budget in snapshot.all(Budget)
        if code_key(requirement) in {code_key(code) for code in budget.requirements}
    ]
    states = [
        budget_state(budget, snapshot, dictionary, children.get(code_key(budget.id), ()))
        for budget in serving
    ]

    def margin(state: BudgetState) -> float:
        limit = state.limit(requirement)
        return limit.margin if limit is not None and np.isfinite(limit.margin) else -np.inf

    return tuple(sorted(states, key=margin, reverse=True))
