"""Waivers and deviations: which failing points they cover, and whether one has lapsed or is exceeded.

A waiver covers a failing point when it is approved and in date, was written against this revision of the requirement,
names the item (or none), holds at the conditions of the point, and the reading still meets what it permits under the
same decision rule. It closes; it never makes compliant.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from datetime import date

import numpy as np
from numpy.typing import NDArray

from specflow.errors import ExpressionError
from specflow.limits import evaluate_condition, parse_condition
from specflow.model.base import code_key
from specflow.model.columns import Columns
from specflow.model.decision import Waiver
from specflow.model.requirement import Requirement
from specflow.model.verdict import Verdict
from specflow.verification.points import ItemPoints

Flags = NDArray[np.bool_]
#: Judges the governing readings of an item against another limit: the verdict at every point (codes of Verdict).
Judge = Callable[[ItemPoints, str], NDArray[np.int8]]
Failing = Sequence[tuple[ItemPoints, Flags]]
#: Brings an item's id or serial to its id.
Identify = Callable[[str], str]


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
    points: Columns,
    judge: Judge,
    identify: Identify,
    as_of: date,
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
        reason = _lapsed(waiver, requirement, as_of)
        if not reason:
            covered, reason = _cover(waiver, failing, open_flags, points, judge, identify)
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
    if waiver.expires_on is not None and waiver.expires_on < as_of:
        return f"expired on {waiver.expires_on}"
    if waiver.requirement_revision != requirement.revision:
        return (
            f"was written against revision {waiver.requirement_revision} of the requirement, "
            f"now it is {requirement.revision}"
        )
    return ""


def _cover(
    waiver: Waiver,
    failing: Failing,
    open_flags: list[Flags],
    points: Columns,
    judge: Judge,
    identify: Identify,
) -> tuple[bool, str]:
    """Take the points that the waiver covers off ``open_flags``; say why it is exceeded where it is."""
    items = {code_key(identify(item)) for item in waiver.items}
    try:
        scope = _scope(waiver, points)
    except ExpressionError as error:
        return False, f"names conditions that cannot be read: {error.message}"
    covered, beyond = False, 0
    for (one, flags), still_open in zip(failing, open_flags, strict=True):
        within = flags & scope
        if (items and code_key(one.item) not in items) or not within.any():
            continue
        try:
            permitted = judge(one, waiver.permitted) <= Verdict.CONDITIONAL_PASS
        except ExpressionError as error:
            return False, f"permits {waiver.permitted!r}, which cannot be read: {error.message}"
        still_open &= ~(within & permitted)
        covered |= bool((within & permitted).any())
        beyond += int(np.count_nonzero(within & ~permitted))
    if beyond:
        return (
            covered,
            f"permits {waiver.permitted}, and {beyond} point{'s' * (beyond != 1)} miss{'es' * (beyond == 1)} that",
        )
    return covered, "" if covered else "does not cover the items or conditions that fail"


def _scope(waiver: Waiver, points: Columns) -> Flags:
    if not waiver.conditions:
        return np.ones(points.size, bool)
    holds, _ = evaluate_condition(parse_condition(waiver.conditions), points)
    return holds
