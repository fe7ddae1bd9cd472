"""What changed between two limits, in meaning: tightened or relaxed by how much, or of another shape."""

from __future__ import annotations

from decimal import Decimal

import numpy as np

from specflow.limits.conversion import PLAIN, conversion, difference_unit, same_unit_spelling, unit_of
from specflow.limits.expression_shape import plain_number
from specflow.limits.expression_text import expression_text, expression_words
from specflow.limits.text import limit_text, node_text, statistic_text
from specflow.limits.words import node_words
from specflow.model.expression import Expression
from specflow.model.limit import (
    Alternatives,
    Between,
    Bound,
    Cases,
    Gate,
    Limit,
    LimitNode,
    Mask,
    MeasuredIn,
    OfQuantity,
    Population,
    Segment,
    Side,
    Tolerance,
    Undefined,
)

_SAME = ", the same in meaning"
_THEN = ": "


def limit_difference(before: Limit, after: Limit) -> str:
    """Return what changed, in words ("tightened by 0.5 dB (-28 -> -28.5 dBc)"); "" when the meaning is the same."""
    changes = node_differences(before.tree, after.tree)
    number_came_or_went = isinstance(before.tree, Undefined) is not isinstance(after.tree, Undefined)
    if before.state is not after.state and not number_came_or_went:
        changes.append(f"state changed from {before.state.value} to {after.state.value}")
    if before.rounding != after.rounding:
        changes.append("rounding changed")
    if before.test_tolerance != after.test_tolerance:
        changes.append("test tolerance changed")
    if not changes and limit_text(before) != limit_text(after):
        changes.append(f"changed from {limit_text(before)} to {limit_text(after)}")
    return "; ".join(changes)


def node_differences(before: LimitNode, after: LimitNode) -> list[str]:
    """Return the changes between two nodes; a node of another shape is told in words."""
    if before == after:
        return []
    match before, after:
        case Undefined(), Undefined():
            return [f"changed from {node_text(before)} to {node_text(after)}"]
        case Undefined(label=label), _:
            return [f"no longer {label}: {node_words(after)}"]
        case _, Undefined(label=label):
            return [f"changed from {node_words(before)} to {label}"]
        case Bound(), Bound():
            return _bounds(before, after)
        case Between(), Between():
            return _ranges_in_other_units(before, after) or [
                *_named("lower limit", _moved(before.lower, after.lower, before.unit, Side.LOWER)),
                *_named("upper limit", _moved(before.upper, after.upper, before.unit, Side.UPPER)),
            ]
        case (Between(), Bound()) | (Bound(), Between()):
            return _ends(before, after) or [f"changed from {node_words(before)} to {node_words(after)}"]
        case Tolerance(), Tolerance():
            return _tolerances(before, after)
        case Mask(), Mask():
            return _masks(before, after)
        case Cases(), Cases() if len(before.cases) == len(after.cases):
            return _cases(before, after)
        case Alternatives(), Alternatives() if len(before.members) == len(after.members):
            pairs = zip(before.members, after.members, strict=True)
            changes = [] if before.rule is after.rule else [f"the {after.rule} now governs"]
            for at, (was, now) in enumerate(pairs, start=1):
                changes += _named(f"alternative {at}", node_differences(was, now))
            return changes
        case Gate(), Gate():
            gate = [] if before.when == after.when else [f"gate changed to {expression_words(after.when)}"]
            return gate + node_differences(before.limit, after.limit)
        case MeasuredIn(), MeasuredIn():
            old, new = expression_text(before.bandwidth), expression_text(after.bandwidth)
            width = [] if old == new else [f"measurement bandwidth changed from {old} to {new}"]
            return width + node_differences(before.limit, after.limit)
        case Population(), Population():
            return _populations(before, after) + node_differences(before.limit, after.limit)
        case OfQuantity(), OfQuantity() if before.quantity == after.quantity:
            return node_differences(before.limit, after.limit)
    return [f"changed from {node_words(before)} to {node_words(after)}"]


def _named(what: str, changes: list[str]) -> list[str]:
    return [f"{what} {change}" for change in changes]


def _units(before: str, after: str) -> list[str]:
    same = same_unit_spelling(before, after)
    return [] if same else [f"unit changed from {before or 'none'} to {after or 'none'}"]


def _bounds(before: Bound, after: Bound) -> list[str]:
    if before.side is not after.side:
        return [f"changed from {node_words(before)} to {node_words(after)}"]
    units = _units(before.unit, after.unit)
    if units:
        moved = _moved_across(before.value, after.value, (before.unit, after.unit), before.side)
        if before.strict is not after.strict and moved == _SAME:
            moved = f", {_strictness(after)}"
        return [f"{units[0]}{moved} ({node_text(before)} -> {node_text(after)})"]
    changes = _moved(before.value, after.value, before.unit, before.side)
    if before.strict is not after.strict:
        changes.append(_strictness(after))
    return changes


def _strictness(after: Bound) -> str:
    return f"strictness changed: equality {'no longer ' if after.strict else ''}meets it"


def _ranges_in_other_units(before: Between, after: Between) -> list[str]:
    """Tell a range that is now in another unit; nothing when the unit stayed."""
    units = (before.unit, after.unit)
    if not _units(*units):
        return []
    lower = _moved_across(before.lower, after.lower, units, Side.LOWER)
    upper = _moved_across(before.upper, after.upper, units, Side.UPPER)
    told = lower if lower == upper == _SAME else "".join(_of_ends(lower, upper))
    return [f"{_units(*units)[0]}{told} ({node_text(before)} -> {node_text(after)})"]


def _of_ends(lower: str, upper: str) -> list[str]:
    return [
        f"{mark}{end} limit {moved.removeprefix(_THEN).removeprefix(', ')}"
        for mark, end, moved in ((_THEN, "lower", lower), (", ", "upper", upper))
        if moved
    ]


def _ends(before: LimitNode, after: LimitNode) -> list[str]:
    """Tell which end of a range went or came, and how the other moved; nothing where the units differ."""
    went = isinstance(before, Between)
    between, bound = (before, after) if went else (after, before)
    if not isinstance(between, Between) or not isinstance(bound, Bound) or _units(between.unit, bound.unit):
        return []
    lower_stays = bound.side is Side.LOWER
    other = between.upper if lower_stays else between.lower
    name, stays = ("upper limit", "lower limit") if lower_stays else ("lower limit", "upper limit")
    own = between.lower if lower_stays else between.upper
    old, new = (own, bound.value) if went else (bound.value, own)
    changes = [f"{name} {expression_words(other, between.unit)} {'removed' if went else 'added'}"]
    changes += _named(stays, _moved(old, new, between.unit, bound.side))
    if bound.strict:
        changes.append(
            f"strictness changed: equality with the {stays} {'no longer ' if went else ''}meets it"
        )
    return changes


def _moved_across(before: Expression, after: Expression, units: tuple[str, str], side: Side) -> str:
    """Tell by how much a value moved that is now in another unit; "" where the two cannot be compared.

    A density in another reference bandwidth is not compared: what a signal between the two holds is not known.
    """
    old, new, (source, target) = plain_number(before), plain_number(after), units
    convert = None if old is None or new is None else conversion(source, target)
    if convert is None or old is None or new is None or _bandwidth(source) != _bandwidth(target):
        return ""
    amount = new - float(convert(np.asarray([old]))[0])
    if abs(amount) <= 1e-9 * max(abs(new), 1.0 if difference_unit(target) != target else 0.0):
        return _SAME
    word = "tightened" if (amount > 0) == (side is Side.LOWER) else "relaxed"
    return f"{_THEN}{word} by {abs(amount):.6g} {'' if target in PLAIN else difference_unit(target)}".rstrip()


def _bandwidth(unit: str) -> float | None:
    return None if unit in PLAIN else unit_of(unit).bandwidth_hz


def _moved(before: Expression, after: Expression, unit: str, side: Side) -> list[str]:
    """Tell by how much a value moved, exactly in decimal; a formula is quoted."""
    if before == after:
        return []
    old, new = plain_number(before), plain_number(after)
    if old is None or new is None:
        return [f"formula changed from {expression_words(before, unit)} to {expression_words(after, unit)}"]
    arrow = f"({expression_text(before)} -> {expression_text(after)} {unit})"
    amount = Decimal(expression_text(after)) - Decimal(expression_text(before))
    if amount == 0:
        return [f"written with other digits {arrow}"]
    tighter = (amount > 0) == (side is Side.LOWER)
    by = (
        f"{abs(amount).normalize():f} {difference_unit(unit)}"
        if unit != "1"
        else f"{abs(amount).normalize():f}"
    )
    return [f"{'tightened' if tighter else 'relaxed'} by {by} {arrow}"]


def _tolerances(before: Tolerance, after: Tolerance) -> list[str]:
    told = _tolerances_in_other_units(before, after)
    if told:
        return told
    changes: list[str] = []
    if before.nominal != after.nominal:
        old = "zero" if before.nominal is None else expression_text(before.nominal)
        new = "zero" if after.nominal is None else expression_text(after.nominal)
        changes.append(f"nominal moved from {old} to {new} {before.unit}")
    if before.plus == before.minus and after.plus == after.minus:
        return changes + _named(
            "tolerance", _moved(before.plus, after.plus, before.tolerance_unit, Side.UPPER)
        )
    changes += _named("upper tolerance", _moved(before.plus, after.plus, before.tolerance_unit, Side.UPPER))
    return changes + _named(
        "lower tolerance", _moved(before.minus, after.minus, before.tolerance_unit, Side.UPPER)
    )


def _tolerances_in_other_units(before: Tolerance, after: Tolerance) -> list[str]:
    """Tell a tolerance that is now in other units; nothing when both units stayed."""
    own, spread = (before.unit, after.unit), (before.tolerance_unit, after.tolerance_unit)
    changed = list(dict.fromkeys(_units(*own) + _units(*spread)))
    if not changed:
        return []
    nominals = (before.nominal, after.nominal)
    stays = nominals == (None, None)
    if before.nominal is not None and after.nominal is not None:
        stays = _moved_across(before.nominal, after.nominal, own, Side.UPPER) == _SAME
    upper = _moved_across(before.plus, after.plus, spread, Side.UPPER)
    lower = _moved_across(before.minus, after.minus, spread, Side.UPPER)
    same = stays and upper == lower == _SAME
    return [f"{'; '.join(changed)}{_SAME * same} ({node_text(before)} -> {node_text(after)})"]


def _masks(before: Mask, after: Mask) -> list[str]:
    head = (before.axis, before.axis_unit, before.side) == (after.axis, after.axis_unit, after.side)
    if not head or len(before.segments) != len(after.segments):
        return [f"mask redrawn: {node_text(before)} -> {node_text(after)}"]
    changes = _units(before.unit, after.unit)
    if before.strict is not after.strict:
        changes.append("strictness changed")
    for at, (old, new) in enumerate(zip(before.segments, after.segments, strict=True), start=1):
        changes += _named(f"mask segment {at}", _segments(old, new, before))
    if before.exclusions != after.exclusions:
        changes.append("exclusions changed")
    if before.allowances != after.allowances:
        changes.append("allowances changed")
    return changes


def _segments(before: Segment, after: Segment, mask: Mask) -> list[str]:
    changes: list[str] = []
    ends = ("start", "stop", "start_open", "stop_open")
    if any(getattr(before, end) != getattr(after, end) for end in ends):
        changes.append("moved along the axis")
    if before.slope is not after.slope:
        changes.append(f"slope changed to {after.slope.value}")
    if before.bandwidth != after.bandwidth:
        changes.append("measurement bandwidth changed")
    if before.end_value is None and after.end_value is None:
        return changes + _moved(before.value, after.value, mask.unit, mask.side)
    changes += _named("at its start", _moved(before.value, after.value, mask.unit, mask.side))
    old, new = before.end_value or before.value, after.end_value or after.value
    return changes + _named("at its end", _moved(old, new, mask.unit, mask.side))


def _cases(before: Cases, after: Cases) -> list[str]:
    changes: list[str] = []
    for at, (old, new) in enumerate(zip(before.cases, after.cases, strict=True), start=1):
        if old.when != new.when:
            changes.append(f"case {at} now holds where {expression_words(new.when)}")
        changes += _named(f"case {at} ({expression_words(new.when)})", node_differences(old.limit, new.limit))
    if before.otherwise != after.otherwise:
        if before.otherwise is not None and after.otherwise is not None:
            changes += _named("otherwise", node_differences(before.otherwise, after.otherwise))
        else:
            changes.append(
                "the case for all the rest " + ("was removed" if after.otherwise is None else "was added")
            )
    return changes


def _populations(before: Population, after: Population) -> list[str]:
    changes: list[str] = []
    if before.statistic != after.statistic:
        old, new = statistic_text(before.statistic), statistic_text(after.statistic)
        changes.append(f"statistic changed from '{old}' to '{new}'")
    rest = ("of", "over", "where", "least")
    if any(getattr(before, part) != getattr(after, part) for part in rest):
        changes.append("population changed")
    return changes
