"""Alternatives on different quantities: each judged by itself, the outcomes put together point by point.

The looser of alternatives is met where any is met and failed only where all are failed; in between it is
inconclusive. The stricter is met where all are met. Shown at each point is the member that decides it; margins are in
the unit of the one that decides most points.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any, TypeVar

import numpy as np
from numpy.typing import NDArray

from specflow.limits import alternatives, rule_of
from specflow.limits.conversion import same_unit_spelling
from specflow.model.evidence import EvidenceTable
from specflow.model.limit import Limit, Stringency
from specflow.model.requirement import Requirement
from specflow.model.verdict import Verdict
from specflow.parameters import Dictionary
from specflow.verification.bandwidths import states_bandwidth
from specflow.verification.comparable import Wanted
from specflow.verification.credit import is_about_design
from specflow.verification.limit_inputs import is_plain
from specflow.verification.points import ItemPoints, absent

T = TypeVar("T", bound=np.generic)
Codes = NDArray[np.int8]
Flags = NDArray[np.bool_]

_MARGINS = ("margin", "guarded_margin", "u")
_FIGURES = (*_MARGINS, "value_low", "value_high", "lower", "upper", "column", "row")


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
    quantity = requirement.quantity.model_copy(update={"parameter": name if known is None else known.key})
    return Member(limit, Wanted(quantity, limit.unit, by_name=True))


def put_together(
    limit: Limit, members: Sequence[Sequence[ItemPoints]], n: int, units: Sequence[str]
) -> tuple[list[ItemPoints], int]:
    """Return the items with the outcome of the limit as a whole, and which member most points are shown by.

    At each point stands the record of the member that decides there. ``units`` are those of the members' margins: a
    margin in another unit than that of the member returned is left out.
    """
    looser = rule_of(limit) is Stringency.LOOSER
    found = [_combined(own, looser) for own in _by_item(members, n)]
    shown = np.concatenate([decider for _, decider in found]) if found else np.zeros(0, np.intp)
    most = int(np.bincount(shown, minlength=len(members)).argmax()) if len(shown) else 0
    return [_in_unit(one, decider, units, most) for one, decider in found], most


def _by_item(members: Sequence[Sequence[ItemPoints]], n: int) -> list[list[ItemPoints]]:
    """Return for each item its points under each member; evidence about the design holds for every item."""
    names = list(dict.fromkeys(one.item for items in members for one in items))
    of_design = [
        next((one for one in items if not one.item and _is_about_design(one)), None) for items in members
    ]
    nameless = [one for items in members for one in items if not one.item]
    if len(names) > 1 and nameless and all(map(_is_about_design, nameless)):
        names.remove("")

    def under(items: Sequence[ItemPoints], place: int, name: str) -> ItemPoints:
        own = next((one for one in items if one.item == name), None)
        return own or of_design[place] or absent(name, n)

    return [
        [_named(under(items, place, name), name) for place, items in enumerate(members)] for name in names
    ]


def _named(one: ItemPoints, name: str) -> ItemPoints:
    return one if one.item == name else replace(one, item=name, results=replace(one.results, item=name))


def _is_about_design(one: ItemPoints) -> bool:
    used = np.unique(one.results.table[one.results.table >= 0]).tolist()
    return bool(used) and all(is_about_design(one.tables[table]) for table in used)


def _combined(members: Sequence[ItemPoints], looser: bool) -> tuple[ItemPoints, NDArray[np.intp]]:
    """Return one item under the whole limit, and the member that decides each point."""
    effective = np.stack([one.effective for one in members])
    proved = np.stack([one.results.proved for one in members])
    counts = np.logical_or.reduce([one.counts for one in members])
    whole = np.asarray(proved.any(axis=0) if looser else proved.all(axis=0))
    verdict = _looser(effective, proved) if looser else _stricter(effective)
    decider = _decider(members, effective, proved, looser)
    first = members[0]

    def of(values: Sequence[NDArray[T]]) -> NDArray[T]:
        return np.asarray(np.stack(values)[decider, np.arange(len(decider))])

    tables, offset = _tables(members)
    table = of([one.results.table + start for one, start in zip(members, offset, strict=True)])
    there = of([one.results.table for one in members]) >= 0
    figures: dict[str, Any] = {name: of([getattr(one.results, name) for one in members]) for name in _FIGURES}
    shown = of([one.results.verdict for one in members])
    results = replace(
        first.results,
        verdict=np.where(counts, verdict, shown),
        proved=whole,
        counted=counts,
        table=np.where(there, table, np.int32(-1)),
        tables=tuple(one.id for one in tables),
        **figures,
    )
    return (
        ItemPoints(
            first.item,
            results,
            tables,
            verdict.astype(np.int8),
            of([one.rank for one in members]),
            np.logical_or.reduce([one.stale for one in members]),
            of([one.marginal for one in members]),
            members=tuple(members),
            looser=looser,
        ),
        decider,
    )


def _decider(
    members: Sequence[ItemPoints], effective: Codes, proved: Flags, looser: bool
) -> NDArray[np.intp]:
    """Return which member decides each point: of the looser the best, of the stricter the worst one.

    Of equals the one that is nearest to its limit (farthest from it, where the looser passes) decides. Where nothing
    counts any member with a reading is shown.
    """
    margin = np.stack([_margin(one) for one in members])
    missing = np.stack([one.results.table < 0 for one in members])
    grade = effective.astype(np.float64)
    if looser:
        grade = np.where(proved, grade - len(Verdict), grade)
        margin = -margin
    else:
        grade = -np.where(proved, grade - len(Verdict), grade)
    # Margins order members of one grade only: squeezed between 0 and 1 they never outweigh a grade.
    order = grade + np.where(missing, 2.0 * len(Verdict), 0.0) + (np.arctan(margin) / np.pi + 0.5) / 2
    return np.asarray(order.argmin(axis=0))


def _margin(one: ItemPoints) -> NDArray[np.float64]:
    guarded = one.results.guarded_margin
    margin = np.where(np.isnan(guarded), one.results.margin, guarded)
    return np.where(np.isnan(margin), 0.0, margin)


def _tables(members: Sequence[ItemPoints]) -> tuple[tuple[EvidenceTable, ...], list[int]]:
    """Return the tables of all members, and where those of each start."""
    starts = [0]
    for one in members:
        starts.append(starts[-1] + len(one.tables))
    return tuple(table for one in members for table in one.tables), starts[:-1]


def _in_unit(one: ItemPoints, decider: NDArray[np.intp], units: Sequence[str], shown: int) -> ItemPoints:
    """Leave out the margins that are in another unit than those of the member shown."""
    other = np.array([unit != units[shown] for unit in units], bool)[decider]
    if not other.any():
        return one
    margins: dict[str, Any] = {name: np.where(other, np.nan, getattr(one.results, name)) for name in _MARGINS}
    return replace(one, results=replace(one.results, **margins))


def _stricter(effective: Codes) -> Codes:
    """Return the worst verdict; nothing where a member has nothing and none fails."""
    worst = effective.max(axis=0)
    lacking = (worst < Verdict.CONDITIONAL_FAIL) & (effective == Verdict.NONE).any(axis=0)
    return np.where(lacking, np.int8(Verdict.NONE), worst)


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
