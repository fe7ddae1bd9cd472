"""The points that are not proved yet and that a bench can prove: of each, on which item, at which conditions.

A point that fails is not missing: a retest of it is asked for by name, because its successor has to say what became of
the fail. Who must prove a requirement decides for how many items a point is missing (see ``verification.activity``).
"""

from __future__ import annotations

import math
import shlex
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np

from specflow.conditions import Points
from specflow.derive import LAW_BY_NAME
from specflow.limits import LimitContext, evaluate_limit, limit_words
from specflow.limits.tree import tree_names
from specflow.model.base import code_key
from specflow.model.bench_sheet import BenchCondition, BenchPoint
from specflow.model.conditions import ConditionMap, ConditionsSet
from specflow.model.requirement import Activity, Method, Requirement
from specflow.model.snapshot import Snapshot
from specflow.model.verdict import ActivityResult, CloseOut, Label, PointResults, RequirementStatus, Verdict
from specflow.parameters import suits
from specflow.reports.points import absent_provers, is_prover, points_of, points_per_item
from specflow.units import Quantity, format_unit, parse_unit, tolerance_unit
from specflow.verification.limit_inputs import limit_columns
from specflow.verification.map_choice import MapChoice
from specflow.workflows.bench_rows import (
    at_block_words,
    bounds_words,
    conditions_at,
    inputs_to_note,
    recorded_columns,
)
from specflow.workflows.evaluate_project import Evaluation

ON_A_BENCH = (Method.TEST, Method.DEMONSTRATION, Method.INSPECTION)
MOST_OF_A_RANGE = (
    101  # rows; a range with more values is measured as a trace and attached as a file of its own
)
FAILS = "fails"
FAILING = (Verdict.FAIL, Verdict.CONDITIONAL_FAIL)


@dataclass(frozen=True, slots=True)
class Scope:
    """Which points are wanted: of these requirements, blocks and items, and of activities of a gate and a stage.

    Empty: of all. ``retest``: failing points, too.
    """

    requirements: Sequence[str] = ()
    blocks: Sequence[str] = ()
    items: Sequence[str] = ()
    gate: str = ""
    stage: str = ""
    retest: bool = False


@dataclass
class Missing:
    """The points found, and what is left out: the reason, and the requirements of which it is so."""

    points: list[BenchPoint] = field(default_factory=list)
    left_out: dict[str, list[str]] = field(default_factory=dict)

    def leave_out(self, requirement: Requirement, reason: str) -> None:
        """Note that a requirement, or a part of it, is left out."""
        known = self.left_out.setdefault(reason, [])
        if requirement.id not in known:
            known.append(requirement.id)

    @property
    def notes(self) -> list[str]:
        """The same in sentences."""
        return [f"{', '.join(codes)}: {reason}" for reason, codes in self.left_out.items()]


@dataclass(frozen=True, slots=True)
class Place:
    """One missing point of one requirement: ``item`` "" is any item of the block."""

    point: int
    item: str
    must_be_item: bool
    why: str


def missing_points(evaluation: Evaluation, scope: Scope, declared: Mapping[str, Quantity]) -> Missing:
    """Return the missing points of a project, requirement by requirement."""
    snapshot, missing = evaluation.snapshot, Missing()
    blocks = set(map(code_key, scope.blocks))
    wanted = set(map(code_key, scope.requirements))
    choice = MapChoice.of(snapshot)
    for requirement in snapshot.requirements:
        if wanted and code_key(requirement.id) not in wanted:
            continue
        if blocks and code_key(requirement.block) not in blocks:
            continue
        own_map = choice.of_requirement(requirement)
        _Requirement(requirement, evaluation, scope, declared, own_map).collect(missing)
    return missing


class _Requirement:
    """Collects the missing points of one requirement."""

    def __init__(
        self,
        requirement: Requirement,
        evaluation: Evaluation,
        scope: Scope,
        declared: Mapping[str, Quantity],
        own_map: ConditionMap | None,
    ) -> None:
        self._requirement = requirement
        self._map = own_map
        self._snapshot = evaluation.snapshot
        self._status = evaluation.results.of(requirement.id)
        self._scope = scope
        self._declared = declared
        self._dictionary = evaluation.dictionary
        self._points = points_of(evaluation.snapshot, requirement)

    def collect(self, missing: Missing) -> None:
        """Add the points, and say what of the requirement is left out."""
        reason = _why_left_out(self._requirement, self._status, self._points) or self._made_of_a_sweep()
        if reason:
            missing.leave_out(self._requirement, reason)
            return
        for result in self._status.activities:
            activity = self._activity(result)
            if not self._is_asked(activity):
                continue
            if activity.method not in ON_A_BENCH:
                missing.leave_out(self._requirement, f"by {activity.method.value}, not on a bench")
                continue
            for place in self._places(result):
                if place.why != FAILS or self._scope.retest:
                    self._add(place, activity, missing)
                else:
                    missing.leave_out(self._requirement, "has failing points, which --retest adds")

    def _made_of_a_sweep(self) -> str:
        """Say why the quantity cannot be filled in value by value: a ripple is one value of a whole sweep."""
        requirement = self._requirement
        conditions = self._snapshot.find(ConditionsSet, requirement.conditions)
        ranges = [] if conditions is None else [one.name for one in conditions.dimensions if one.span]
        for law in LAW_BY_NAME.values():
            swept = next((name for name in law.along if name in ranges), "")
            whole = law.over == "range" and not law.in_parts
            if swept and whole and requirement.quantity.parameter in law.gives:
                return (
                    f"one value of the whole sweep over {swept.replace('_', ' ')}: attach the sweep and derive it "
                    f"(specflow derive {shlex.quote(law.name)})"
                )
        return ""

    def _activity(self, result: ActivityResult) -> Activity:
        known = self._snapshot.activities_of.get(code_key(self._requirement.id), ())
        found = next((one for one in known if code_key(one.id) == code_key(result.activity)), None)
        return found or Activity(id=result.activity, requirement=self._requirement.id, planned=False)

    def _is_asked(self, activity: Activity) -> bool:
        gate, stage = self._scope.gate, self._scope.stage
        right_gate = not gate or (activity.planned and activity.gate.casefold() == gate.casefold())
        return right_gate and (not stage or activity.stage.value == stage.casefold())

    def _places(self, result: ActivityResult) -> Iterator[Place]:
        """The missing points item by item."""
        if result.k >= result.n:
            return
        requirement, snapshot = self._requirement, self._snapshot
        every = points_per_item(requirement, result, snapshot)
        wished = [_item_id(name, snapshot) for name in self._scope.items]
        if wished and not (wished := [item for item in wished if self._is_of_block(item)]):
            return
        if requirement.provers.rule == "each of":
            for name, found in result.items.items():
                if is_prover(requirement, name, snapshot):
                    yield from _of_item(found, every, _item_id(name, snapshot), True, wished)
            for name in absent_provers(requirement, result, snapshot):
                yield from _of_item(None, every, _item_id(name, snapshot), True, wished)
            return
        number = requirement.provers.number if requirement.provers.rule == "number of" else 1
        if wished:
            for item in wished:
                named = (one for name, one in result.items.items() if _item_id(name, snapshot) == item)
                yield from _of_item(next(named, None), every, item, True, wished)
            return
        ranked = sorted(result.items.values(), key=lambda one: (one is not _shown(result), -one.k))[:number]
        for found in ranked:
            yield from _of_item(found, every, self._proposed(found), False, wished)
        for _ in range(number - len(ranked)):
            yield from _of_item(None, every, "" if number > 1 else self._only_item(), False, wished)

    def _is_of_block(self, name: str) -> bool:
        item = self._snapshot.items_by_name.get(code_key(name))
        return item is not None and code_key(item.block) == code_key(self._requirement.block)

    def _proposed(self, found: PointResults) -> str:
        """The item to go on with: the one that has points already, unless what it has may not prove any."""
        if not found.item or found.without_credit or self._requirement.provers.may_complete_each_other:
            return ""
        return _item_id(found.item, self._snapshot)

    def _only_item(self) -> str:
        items = [
            one for one in self._snapshot.items if code_key(one.block) == code_key(self._requirement.block)
        ]
        return items[0].id if len(items) == 1 else ""

    def _add(self, place: Place, activity: Activity, missing: Missing) -> None:
        requirement = self._requirement
        unit = self._unit()
        expanded = conditions_at(self._points, place.point)
        if isinstance(expanded, str):
            missing.leave_out(requirement, f"{expanded}; attach a trace over it")
            return
        for required in expanded:
            conditions = (*required, *inputs_to_note(requirement.limit, required, self._declared))
            missing.points.append(
                BenchPoint(
                    block=requirement.block,
                    quantity=requirement.quantity,
                    method=activity.method,
                    stage=activity.stage,
                    unit=unit,
                    u_unit=format_unit(tolerance_unit(parse_unit(unit))),
                    item=place.item,
                    must_be_item=place.must_be_item,
                    conditions=conditions,
                    requirements=(requirement.id,),
                    limits=(self._limit(place.point, conditions),),
                    why=(place.why,),
                    at_block=at_block_words(self._map, conditions),
                )
            )

    def _unit(self) -> str:
        """The unit of the limit; that of the parameter where it has none of its own (alternatives in several)."""
        unit = self._requirement.limit.unit
        parameter = self._dictionary.get(self._requirement.quantity.parameter)
        if parameter is not None and not suits(parameter, unit or "1"):
            unit = parameter.unit
        return format_unit(parse_unit(unit or "1"))

    def _limit(self, point: int, conditions: Sequence[BenchCondition]) -> str:
        """The limit at one point in words: its bounds there, or the whole of it where it has none by itself."""
        limit, points = self._requirement.limit, self._points
        if points is None:
            return limit_words(limit)
        here = np.array([0]), np.array([point])
        columns = limit_columns(limit, points, recorded_columns(conditions), *here, self._declared)
        if set(tree_names(limit.tree)) - {*columns.numeric, *columns.text, *self._declared}:
            return limit_words(limit)
        bounds = evaluate_limit(limit, LimitContext(columns, self._declared, 1)).spread(1)
        if bounds.unknown[0] or not bounds.applies[0]:
            return limit_words(limit)
        low = float(bounds.lower[0]) if bounds.lower is not None else -math.inf
        high = float(bounds.upper[0]) if bounds.upper is not None else math.inf
        if not (math.isfinite(low) or math.isfinite(high)):
            return limit_words(limit)
        strict = bool(bounds.lower_strict[0]), bool(bounds.upper_strict[0])
        return bounds_words(low, high, strict, bounds.unit)


def _shown(result: ActivityResult) -> PointResults | None:
    return result.items.get(result.shown_item)


def _item_id(name: str, snapshot: Snapshot) -> str:
    item = snapshot.items_by_name.get(code_key(name))
    return item.id if item is not None else name


def _why_left_out(requirement: Requirement, status: RequirementStatus, points: Points | None) -> str:
    if status.label is Label.NOT_APPLICABLE:
        return "not applicable"
    if status.close_out is CloseOut.CLOSED:
        return f"closed ({status.close_out_reason or status.label.value})"
    if requirement.met_by_lower_level:
        return "met by the requirements below it"
    if status.label is Label.TBD:
        return "its limit is to be determined"
    if requirement.conditions is not None and points is None:
        return "its conditions set cannot be expanded"
    return ""


def _of_item(
    found: PointResults | None, every: int, item: str, must_be: bool, wished: Sequence[str]
) -> Iterator[Place]:
    if wished and item not in wished:
        return
    for place in range(every):
        if found is None or found.table[place] < 0:
            yield Place(place, item, must_be, "no evidence")
        elif Verdict(int(found.verdict[place])) in FAILING:
            yield Place(place, item, must_be, FAILS)
        elif not found.proved[place]:
            words = Verdict(int(found.verdict[place])).words
            yield Place(place, item, must_be, f"{words}, does not prove")
