"""Alternatives on different quantities: each judged by itself, the outcomes put together point by point.

The looser of alternatives is met where any is met and failed only where all are failed; in between it is
inconclusive. The stricter is met where all are met. Shown is the member that decides most points; margins are in its
unit.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from specflow.limits import alternatives, rule_of
from specflow.limits.conversion import same_unit_spelling
from specflow.model.limit import Limit, Rule
from specflow.model.parameter import QuantityIdentity
from specflow.model.requirement import Requirement
from specflow.model.verdict import Verdict
from specflow.parameters import Dictionary
from specflow.verification.bandwidths import states_bandwidth
from specflow.verification.comparable import Wanted
from specflow.verification.limit_inputs import is_plain
from specflow.verification.points import ItemPoints, absent

Codes = NDArray[np.int8]


@dataclass(frozen=True, slots=True)
class Member:
    """One limit to be judged by itself, and the quantity it is on."""

    limit: Limit
    want: Wanted


def members_of(requirement: Requirement, dictionary: Dictionary) -> tuple[Member, ...]:
    """Return the limits that need evidence of their own; one for nearly every requirement."""
    limit = requirement.limit
    if limit.tree.kind not in ("alternatives", "of", "gate"):
        return (_own(requirement, limit),)
    found = alternatives(limit)
    units = [one.limit.unit for one in found]
    if not any(one.quantity for one in found) and all(same_unit_spelling(unit, units[0]) for unit in units):
        return (_own(requirement, limit),)
    return tuple(
        _other(requirement, one.limit, one.quantity, dictionary)
        if one.quantity
        else _own(requirement, one.limit)
        for one in found
    )


def _own(requirement: Requirement, limit: Limit) -> Member:
    by_limit = requirement.quantity.bandwidth_hz is None and not is_plain(limit) and states_bandwidth(limit)
    return Member(limit, Wanted(requirement.quantity, limit.unit, any_bandwidth=by_limit))


def _other(requirement: Requirement, limit: Limit, name: str, dictionary: Dictionary) -> Member:
    known = dictionary.get(name) or dictionary.parameter_for_title(name)
    quantity = QuantityIdentity(parameter=name if known is None else known.key)
    return Member(limit, Wanted(quantity, limit.unit, any_identity=True))


def put_together(
    limit: Limit, members: Sequence[Sequence[ItemPoints]], n: int
) -> tuple[list[ItemPoints], int]:
    """Return the items with the outcome of the limit as a whole, and which member is shown."""
    looser = rule_of(limit) is Rule.LOOSER
    deciding = [sum(one.results.k for one in items) for items in members]
    shown = deciding.index(max(deciding) if looser else min(deciding))
    names = dict.fromkeys(one.item for items in members for one in items)
    found = []
    for name in names:
        own = [next((one for one in items if one.item == name), absent(name, n)) for items in members]
        found.append(_combined(own, own[shown], looser))
    return found, shown


def _combined(members: Sequence[ItemPoints], shown: ItemPoints, looser: bool) -> ItemPoints:
    effective = np.stack([one.effective for one in members])
    proved = np.stack([one.results.proved for one in members])
    counts = np.logical_or.reduce([one.counts for one in members])
    whole = np.asarray(proved.any(axis=0) if looser else proved.all(axis=0))
    verdict = _looser(effective, proved) if looser else effective.max(axis=0)
    if not looser:
        failing = (effective >= Verdict.CONDITIONAL_FAIL).any(axis=0)
        verdict = np.where(~failing & (effective == Verdict.NONE).any(axis=0), np.int8(Verdict.NONE), verdict)
    results = replace(
        shown.results,
        verdict=np.where(counts, verdict, shown.results.verdict),
        proved=whole,
        counted=counts,
    )
    return replace(
        shown,
        results=results,
        effective=verdict.astype(np.int8),
        stale=np.logical_or.reduce([one.stale for one in members]),
    )


def _looser(effective: Codes, proved: NDArray[np.bool_]) -> Codes:
    """Return the verdict of the looser: the best pass; a fail where all fail; nothing where nothing counts."""
    failing = effective >= Verdict.CONDITIONAL_FAIL
    best = np.where(proved, effective, np.int8(Verdict.FAIL)).min(axis=0)
    verdict = np.full(effective.shape[1], Verdict.INCONCLUSIVE, np.int8)
    verdict[(effective == Verdict.NONE).all(axis=0)] = Verdict.NONE
    all_fail = failing.all(axis=0)
    verdict[all_fail] = effective.min(axis=0)[all_fail]
    any_proved = proved.any(axis=0)
    verdict[any_proved] = best[any_proved]
    return verdict
