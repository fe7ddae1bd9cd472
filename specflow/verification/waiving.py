"""Waivers and deviations: which failing points they cover, and whether one has lapsed or is exceeded.

A waiver covers a failing point when it is approved, by somebody who is named, and in date, was written against this
revision of the requirement, and *every* failing reading that stands there is of an item it names (or it names none),
lies where its conditions hold, and meets what it permits under the same decision rule. The readings are looked at one
by one: along a range, or on both sides of a limit, the one that governs need not be the one that goes beyond. A
permitted value that is not settled (TBR, TBD) permits nothing. A waiver closes; it never makes compliant.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date

import numpy as np
from numpy.typing import NDArray

from specflow.errors import ExpressionError, UnitError
from specflow.limits import parse_condition, parse_limit
from specflow.limits.conversion import same_unit_spelling
from specflow.limits.tree import undefined_in
from specflow.model.base import code_key
from specflow.model.decision import Waiver
from specflow.model.expression import Expression
from specflow.model.limit import Limit, LimitState
from specflow.model.requirement import Requirement
from specflow.model.verdict import Verdict
from specflow.verification.alternatives import Member, members_of
from specflow.verification.points import Failing, Fails, ItemPoints
from specflow.verification.workspace import Workspace

Flags = NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class Waiving:
    """What the waivers of a requirement come to.

    ``covering`` are ids of waivers that cover failing points; ``all_covered``: nothing that fails is left uncovered.
    ``exceeded`` says why a waiver that was approved does not help (any more); ``requested`` are waiting for a decision.
    """

    covering: tuple[str, ...] = ()
    all_covered: bool = False
    exceeded: tuple[str, ...] = ()
    requested: tuple[str, ...] = ()


NO_WAIVER = Waiving()


def waiving(
    requirement: Requirement,
    waivers: Sequence[Waiver],
    failing: Failing,
    workspace: Workspace,
) -> Waiving:
    """Return how far the waivers cover what fails; nothing to cover, nothing exceeded."""
    if not waivers or not failing:
        return NO_WAIVER
    open_flags = [flags.copy() for _, flags in failing]
    covering: list[str] = []
    exceeded: list[str] = []
    for waiver in waivers:
        if waiver.state not in ("approved", "lapsed"):
            continue
        reason = _lapsed(waiver, requirement, workspace.as_of)
        if not reason:
            covered, reason = _cover(waiver, requirement, failing, open_flags, workspace)
            if covered:
                covering.append(waiver.id)
        if reason:
            exceeded.append(f"{waiver.kind} {waiver.id} {reason}")
    all_covered = not any(bool(flags.any()) for flags in open_flags)
    requested = tuple(waiver.id for waiver in waivers if waiver.state == "requested")
    return Waiving(tuple(covering), all_covered, () if all_covered else tuple(exceeded), requested)


def _lapsed(waiver: Waiver, requirement: Requirement, as_of: date) -> str:
    if waiver.state == "lapsed":
        return "has lapsed"
    if not waiver.approver:
        return "is said to be approved and names nobody who approved it"
    if waiver.expires_on is not None and waiver.expires_on < as_of:
        return f"expired on {waiver.expires_on}"
    if waiver.requirement_revision != requirement.revision:
        return (
            f"was written against revision {waiver.requirement_revision} of the requirement, "
            f"now it is {requirement.revision}"
        )
    return ""


@dataclass(frozen=True, slots=True)
class _Bound:
    """A waiver ready to be applied: its items (ids), its scope and the limits it still asks for."""

    items: frozenset[str]
    scope: Expression | None
    permitted: Sequence[Member]

    def within(self, fails: Fails, item: str) -> Flags:
        """Return which failing readings the waiver speaks of."""
        held = np.ones(len(fails.pair), bool)
        if self._limit(fails) is None:
            return ~held
        bench = fails.bench
        if self.items:
            names = bench.records.items
            own = [code_key(names[code]) for code in bench.records.item[fails.record].tolist()]
            held &= np.array([(one or code_key(item)) in self.items for one in own], bool)
        if self.scope is not None:
            held &= bench.judging.holds(self.scope, bench.readings, fails.pair)
        return held

    def permits(self, fails: Fails) -> Flags:
        """Return which failing readings meet what is permitted."""
        limit = self._limit(fails)
        if limit is None:
            return np.zeros(len(fails.pair), bool)
        verdict = fails.bench.judging.against(limit, fails.bench.readings, fails.pair)
        return np.asarray((verdict == Verdict.PASS) | (verdict == Verdict.CONDITIONAL_PASS))

    def _limit(self, fails: Fails) -> Limit | None:
        """Return what is permitted of the quantity that fails; None where the waiver is on another."""
        judging = fails.bench.judging
        for member in self.permitted:
            if member.want.quantity == judging.want.quantity and same_unit_spelling(
                member.limit.unit, judging.limit.unit
            ):
                return member.limit
        return None


def _bound(waiver: Waiver, requirement: Requirement, workspace: Workspace) -> _Bound | str:
    """Return the waiver ready to be applied, or why it cannot be."""
    try:
        scope = parse_condition(waiver.conditions) if waiver.conditions else None
    except ExpressionError as error:
        return f"names conditions that cannot be read: {error.message}"
    parameter = workspace.dictionary.get(requirement.quantity.parameter)
    try:
        limit = parse_limit(waiver.permitted, unit_hint=requirement.limit.unit, parameter=parameter)
    except (ExpressionError, UnitError) as error:
        return f"permits {waiver.permitted!r}, which cannot be read: {error.message}"
    if limit.state is not LimitState.FIRM or undefined_in(limit.tree):
        return f"permits {waiver.permitted}, which is not settled"
    permitted = members_of(requirement.model_copy(update={"limit": limit}), workspace.dictionary)
    own = members_of(requirement, workspace.dictionary)
    if not any(same_unit_spelling(one.limit.unit, other.limit.unit) for one in permitted for other in own):
        units = " and ".join(dict.fromkeys(member.limit.unit or "no unit" for member in own))
        return f"permits {waiver.permitted!r} in {limit.unit or 'no unit'}, the requirement is in {units}"
    items = frozenset(code_key(getattr(workspace.item(name), "id", name)) for name in waiver.items)
    return _Bound(items, scope, permitted)


def _cover(
    waiver: Waiver,
    requirement: Requirement,
    failing: Failing,
    open_flags: list[Flags],
    workspace: Workspace,
) -> tuple[bool, str]:
    """Take the points that the waiver covers off ``open_flags``; say why it is exceeded where it is."""
    bound = _bound(waiver, requirement, workspace)
    if isinstance(bound, str):
        return False, bound
    covered, beyond = False, 0
    try:
        for (one, flags), still_open in zip(failing, open_flags, strict=True):
            accepted, exceeded = _covered(bound, one, flags)
            still_open &= ~accepted
            covered |= bool(accepted.any())
            beyond += int(np.count_nonzero(exceeded & ~accepted))
    except ExpressionError as error:
        return False, f"cannot be applied: {error.message}"
    if beyond:
        return (
            covered,
            f"permits {waiver.permitted}, and {beyond} point{'s' * (beyond != 1)} miss{'es' * (beyond == 1)} that",
        )
    return covered, "" if covered else "does not cover the items or conditions that fail"


def _covered(bound: _Bound, one: ItemPoints, at: Flags) -> tuple[Flags, Flags]:
    """Return the points at which all that fails is permitted, and those at which some of it goes beyond."""
    beyond = np.zeros(len(at), bool)

    def accepts(fails: Fails, item: str) -> Flags:
        within = bound.within(fails, item)
        permitted = bound.permits(fails)
        beyond[fails.point[within & ~permitted]] = True
        return within & permitted

    return one.where_fails(at, accepts), beyond
