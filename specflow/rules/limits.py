"""Rules about the limit of a requirement: is there a number, is it settled, does another one contradict it."""

from __future__ import annotations

from bisect import insort
from collections import defaultdict
from collections.abc import Hashable, Iterator, Sequence

from specflow.errors import ExpressionError, UnitError
from specflow.limits import LimitContext, evaluate_limit, limit_inputs
from specflow.limits.tree import side_of
from specflow.model.base import code_key
from specflow.model.columns import Columns
from specflow.model.conditions import ConditionsSet
from specflow.model.limit import Between, Bound, Limit, LimitState, Side, Tolerance
from specflow.model.requirement import Requirement
from specflow.rules.base import Found
from specflow.rules.facts import Facts, is_undefined
from specflow.rules.words import counted
from specflow.units import converter, parse_unit


def tbd_left(facts: Facts) -> Iterator[Found]:
    """The limit has no number yet.

    Why: nothing can be designed to it, allocated from it or verified against it.
    Fails: the limit reads "TBD".
    Passes: the limit is a number, also one that is to be reviewed.
    Do: settle the number, or put in a best estimate marked TBR, with owner and date.
    """
    for requirement, _ in facts.judged:
        if is_undefined(requirement):
            message = f"the limit is to be defined{_plan(requirement)}"
            yield Found(requirement.id, message, origin=requirement.origin)


def tbr_left(facts: Facts) -> Iterator[Found]:
    """The limit is a number that is still to be reviewed.

    Why: it is judged like any other, but nothing can be closed on it.
    Fails: the limit reads "TBR 3.2 dB".
    Passes: the limit is firm.
    Do: have the number confirmed by its owner and take the mark off.
    """
    for requirement, _ in facts.judged:
        if requirement.limit.state is LimitState.TBR:
            message = f"{requirement.limit.text} is to be reviewed{_plan(requirement)}"
            yield Found(requirement.id, message, origin=requirement.origin)


def _plan(requirement: Requirement) -> str:
    plan = requirement.open_value
    if plan is None:
        return ""
    parts = [plan.owner and f"owner {plan.owner}", plan.due and f"due {plan.due}", plan.action]
    said = ", ".join(str(part) for part in parts if part)
    return f" ({said})" if said else ""


def open_value_without_plan(facts: Facts) -> Iterator[Found]:
    """A limit that is not settled has no owner or no date.

    Why: a TBD that nobody owns is found again at the review.
    Fails: the limit reads "TBR 3.2 dB" and names nobody who settles it.
    Passes: owner and date stand beside it.
    Do: name the owner and the date by which the number is settled.
    """
    for requirement, _ in facts.judged:
        if requirement.limit.state is LimitState.FIRM and not is_undefined(requirement):
            continue
        plan = requirement.open_value
        lacking = [
            word
            for word, present in (("owner", plan and plan.owner), ("date", plan and plan.due))
            if not present
        ]
        if lacking:
            message = (
                f"{requirement.limit.text} has no {' and no '.join(lacking)} by whom or when it is settled"
            )
            yield Found(requirement.id, message, origin=requirement.origin)


def open_value_overdue(facts: Facts) -> Iterator[Found]:
    """A limit should have been settled by now.

    Why: work below waits for it, or goes on with a number that may move.
    Fails: "TBD", due on 1 May; it is judged on 1 June.
    Passes: the date is still to come, or the limit is firm.
    Do: settle the number, or agree another date with its owner.
    """
    for requirement, _ in facts.judged:
        plan = requirement.open_value
        settled = requirement.limit.state is LimitState.FIRM and not is_undefined(requirement)
        if plan is None or plan.due is None or settled or plan.due >= facts.as_of:
            continue
        owner = f" (owner {plan.owner})" if plan.owner else ""
        days = counted((facts.as_of - plan.due).days, "day")
        message = f"{requirement.limit.text} was to be settled by {plan.due}{owner}, {days} ago"
        yield Found(requirement.id, message, origin=requirement.origin)


def duplicate_limit(facts: Facts) -> Iterator[Found]:
    """Two requirements state the same limit on the same quantity over the same conditions.

    Why: one is changed and the other forgotten; every total counts the work twice.
    Fails: R-1 and R-2 both ask for a gain of at least 20 dB of the same block over the same set.
    Passes: they differ in block, plane, statistic, bandwidth, conditions or limit, or one is the parent of the other.
    Do: keep one of them and let its parents be those of both.
    """
    for group in _alike(facts):
        same: dict[Hashable, list[Requirement]] = defaultdict(list)
        for second in group:
            earlier = same[_said(second.limit)]
            first = next((one for one in earlier if not _related(one, second)), None)
            if first is not None:
                message = f"states the same as {first.id}: {second.limit.text}, same quantity and conditions"
                yield Found(second.id, message, origin=second.origin, related=(first.id,))
            earlier.append(second)


def contradicting_limits(facts: Facts) -> Iterator[Found]:
    """Two requirements state different limits on the same quantity over the same conditions.

    Why: nobody knows which one holds, and evidence for one is taken for the other.
    Fails: R-1 asks for at least 20 dB and R-2 for at least 22 dB; or R-2 for at most 18 dB.
    Passes: one is a lower and the other an upper limit with room between, or one is the parent of the other.
    Do: find out which one holds and strike the other, or state in what their quantities or conditions differ.
    """
    for group in _alike(facts):
        unit = group[0].limit.unit
        plain = _PlainLimits()
        for second in group:
            ends = _ends(second.limit, unit)
            if ends is None:
                continue
            first, what = plain.against(second, ends)
            if first is not None:
                message = f"{second.limit.text} here, {first.limit.text} in {first.id}: {what}"
                yield Found(second.id, message, origin=second.origin, related=(first.id,))
            plain.add(second, ends)


def _alike(facts: Facts) -> Iterator[Sequence[Requirement]]:
    """Yield the requirements of one block, quantity and conditions, where there are several."""
    groups: dict[Hashable, list[Requirement]] = defaultdict(list)
    for requirement, _ in facts.defined:
        groups[_scope(requirement, facts)].append(requirement)
    yield from (group for group in groups.values() if len(group) > 1)


class _PlainLimits:
    """Limits of one or two numbers on one quantity, kept so that one more need not be compared with every other.

    A mask beside a flat limit, or a percentile beside a mean, are no contradiction: both may be meant to hold.
    """

    def __init__(self) -> None:
        self._by_side: dict[Side | None, dict[Hashable, list[Requirement]]] = defaultdict(dict)
        self._lower: list[tuple[float, int, Requirement]] = []  # by their negative: the tightest first
        self._upper: list[tuple[float, int, Requirement]] = []
        self._size = 0

    def against(self, second: Requirement, ends: tuple[float, float]) -> tuple[Requirement | None, str]:
        """Return an earlier requirement that contradicts this one, and how; None where none does."""
        first = self._without_room(second, ends)
        if first is not None:
            return first, "no value meets both"
        side = side_of(second.limit.tree)
        said = "two limits for both sides" if side is None else f"two {side.value} limits"
        own = _said(second.limit)
        others = (one for key, known in self._by_side[side].items() if key != own for one in known)
        return next((one for one in others if not _related(one, second)), None), said

    def _without_room(self, second: Requirement, ends: tuple[float, float]) -> Requirement | None:
        lower, upper = ends
        own = _said(second.limit)
        for tightest, beyond in ((self._lower, -upper), (self._upper, lower)):
            for end, _, one in tightest:
                if end >= beyond:
                    break
                if not _related(one, second) and _said(one.limit) != own:
                    return one
        return None

    def add(self, requirement: Requirement, ends: tuple[float, float]) -> None:
        """Keep one more; ``ends`` are its bounds in the unit of all."""
        self._size += 1
        insort(self._lower, (-ends[0], self._size, requirement), key=_place)
        insort(self._upper, (ends[1], self._size, requirement), key=_place)
        side = self._by_side[side_of(requirement.limit.tree)]
        side.setdefault(_said(requirement.limit), []).append(requirement)


def _place(kept: tuple[float, int, Requirement]) -> tuple[float, int]:
    return kept[:2]


def _said(limit: Limit) -> Hashable:
    """Return what a limit says, however it is written."""
    return limit.tree, limit.test_tolerance


def _related(first: Requirement, second: Requirement) -> bool:
    return _is_parent(first, second) or _is_parent(second, first)


def _is_parent(parent: Requirement, child: Requirement) -> bool:
    return code_key(parent.id) in map(code_key, child.parents)


def _scope(requirement: Requirement, facts: Facts) -> Hashable:
    quantity = requirement.quantity
    return (
        code_key(requirement.block),
        code_key(quantity.parameter),
        quantity.plane.casefold(),
        quantity.statistic.casefold(),
        quantity.bandwidth_hz,
        quantity.polarisation.casefold(),
        requirement.applicability,
        requirement.provers,
        _conditions(facts.snapshot.find(ConditionsSet, requirement.conditions)),
    )


def _conditions(conditions: ConditionsSet | None) -> Hashable:
    """Return what a set requires, however it is called and typed."""
    if conditions is None:
        return None
    dimensions = [one.model_copy(update={"text": ""}) for one in conditions.dimensions]
    exclusions = [one.model_copy(update={"text": "", "reason": ""}) for one in conditions.exclusions]
    return frozenset(dimensions), conditions.combination, conditions.listed, frozenset(exclusions)


def _ends(limit: Limit, unit: str) -> tuple[float, float] | None:
    """Return the two bounds of a limit that is one or two numbers, in ``unit``; None for any other limit."""
    if not isinstance(limit.tree, Bound | Between | Tolerance) or limit_inputs(limit):
        return None
    try:
        convert = converter(parse_unit(limit.unit or "1"), parse_unit(unit or "1"))
        bounds = evaluate_limit(limit, LimitContext(Columns(1), {}, 1))
    except (ExpressionError, UnitError):
        return None
    if bounds.unknown.any() or not bounds.applies.all():
        return None
    lower = float("-inf") if bounds.lower is None else float(convert(float(bounds.lower[0])))
    upper = float("inf") if bounds.upper is None else float(convert(float(bounds.upper[0])))
    return lower, upper
