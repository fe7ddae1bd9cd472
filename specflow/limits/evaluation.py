"""Evaluation of a limit: the bounds it sets for each record.

Constant limits take a short way (arrays of one value); everything else is walked once with numpy arrays.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from specflow.errors import ExpressionError
from specflow.limits.bounds import ALL_FLAG, NO_FLAG, Bounds, LimitContext
from specflow.limits.combination import alternatives_of, in_unit, power_sum_of
from specflow.limits.conversion import Floats, convert_to, difference_unit, same_unit_spelling, unit_of
from specflow.limits.expression_shape import plain_number
from specflow.limits.expression_value import number_in, truth
from specflow.limits.inputs import Flags, Inputs
from specflow.limits.mask import mask_bounds
from specflow.limits.tree import tree_units
from specflow.model.expression import Call, Choice, Expression, Name, Number, Operation
from specflow.model.limit import (
    Allowed,
    Alternatives,
    Between,
    Bound,
    Cases,
    Gate,
    Limit,
    LimitNode,
    Mask,
    MeasuredIn,
    NoLimit,
    OfQuantity,
    Population,
    PowerSum,
    Rounding,
    Side,
    TestTolerance,
    Tolerance,
    Undefined,
)

_NAN = np.array([np.nan])
_HERTZ = "Hz"


def evaluate_limit(limit: Limit, context: LimitContext, *, with_test_tolerance: bool = False) -> Bounds:
    """Return the bounds a limit sets for each record of the context, in ``Bounds.unit``.

    The core limit, unless ``with_test_tolerance`` asks for the limit relaxed by the test tolerance (lower bounds go
    down, upper bounds go up; a tolerance on the stimulus moves nothing). Never raises for what the context lacks or
    has in a unit that does not fit: such records are ``unknown`` and ``why`` tells the reason. Alternatives on
    different quantities have no common bound and are unknown here: see ``alternatives``.
    """
    bounds = _constant(limit.tree)
    if bounds is None:
        bounds = _evaluated(limit.tree, context)
    if limit.rounding is not None:
        bounds = round_bounds(bounds, limit.rounding)
    if with_test_tolerance and limit.test_tolerance is not None:
        bounds = _relaxed(bounds, limit.test_tolerance)
    return bounds


def _constant(tree: LimitNode) -> Bounds | None:
    """Evaluate a bound that is one number without looking at any record; None for everything else."""
    if type(tree) is not Bound:
        return None
    value = plain_number(tree.value)
    if value is None:
        return None
    number = np.array((value,))
    strict = ALL_FLAG if tree.strict else NO_FLAG
    if tree.side is Side.LOWER:
        return Bounds(number, None, tree.unit, lower_strict=strict)
    return Bounds(None, number, tree.unit, upper_strict=strict)


def _evaluated(tree: LimitNode, context: LimitContext) -> Bounds:
    inputs = Inputs(context.columns, context.declared)
    try:
        with np.errstate(all="ignore"):
            bounds = evaluate_node(tree, inputs)
    except ExpressionError as error:
        return _unknown("", f"{error.message} ({error.hint})" if error.hint else error.message)
    return _settled(bounds, inputs)


def _settled(bounds: Bounds, inputs: Inputs) -> Bounds:
    """Mark what has no value as unknown, and say why."""
    unknown = bounds.unknown
    for side in (bounds.lower, bounds.upper):
        if side is not None:
            unknown = unknown | (np.isnan(side) & bounds.applies)
    if not unknown.any():
        return replace(bounds, unknown=unknown, why=bounds.why)
    parts = [bounds.why, inputs.why_unknown()]
    why = "; ".join(part for part in parts if part) or "the formula has no value there"
    return replace(bounds, unknown=unknown, why=why)


def _unknown(unit: str, why: str) -> Bounds:
    return Bounds(_NAN, _NAN, unit, unknown=ALL_FLAG, why=why)


def evaluate_node(node: LimitNode, inputs: Inputs) -> Bounds:
    """Return the bounds of one node of the tree."""
    match node:
        case Bound(side=side, value=value, unit=unit, strict=strict):
            if isinstance(value, Operation | Call | Choice):
                # Most limits are plain numbers: what looks into formulas is loaded with the first one.
                from specflow.limits.settling import refuse_level_sums

                refuse_level_sums(value, unit, lambda leaf: _unit_found(leaf, inputs))
            number, flag = number_in(value, unit, inputs), ALL_FLAG if strict else NO_FLAG
            if side is Side.LOWER:
                return Bounds(number, None, unit, lower_strict=flag)
            return Bounds(None, number, unit, upper_strict=flag)
        case Between(lower=lower, upper=upper, unit=unit):
            return Bounds(number_in(lower, unit, inputs), number_in(upper, unit, inputs), unit)
        case Tolerance():
            return _tolerance(node, inputs)
        case Cases():
            return _cases(node, inputs)
        case Mask():
            return mask_bounds(node, inputs)
        case Gate(when=when, limit=limit):
            return _gated(evaluate_node(limit, inputs), truth(when, inputs).true, truth(when, inputs).known)
        case Alternatives(rule=rule, members=members):
            return alternatives_of(rule, [evaluate_node(member, inputs) for member in members], members)
        case PowerSum(members=members, bandwidth=bandwidth):
            return power_sum_of([evaluate_node(member, inputs) for member in members], _hertz(bandwidth))
        case MeasuredIn(limit=limit, bandwidth=width):
            return replace(evaluate_node(limit, inputs), bandwidth_hz=np.array([_hertz(width) or np.nan]))
        case Allowed(limit=limit) | Population(limit=limit) | OfQuantity(limit=limit):
            return evaluate_node(limit, inputs)
        case Undefined(label=label, unit=unit):
            return _unknown(unit, f"the limit is {label}")
        case NoLimit():
            return Bounds(None, None, "", applies=NO_FLAG)


def _unit_found(leaf: Expression, inputs: Inputs) -> str | None:
    """Return the unit a number or name turns out to have, None when that is open."""
    if isinstance(leaf, Name):
        return inputs.numbers(leaf.name)[1] or None if inputs.supplied(leaf.name) else leaf.unit or None
    return leaf.unit or None if isinstance(leaf, Number) else None


def _hertz(bandwidth: Number | None) -> float | None:
    if bandwidth is None:
        return None
    return float(convert_to(np.array([bandwidth.value]), bandwidth.unit, _HERTZ)[0])


def _tolerance(node: Tolerance, inputs: Inputs) -> Bounds:
    unit = node.unit
    nominal = np.zeros(1) if node.nominal is None else number_in(node.nominal, unit, inputs)
    sides = []
    for amount in (node.minus, node.plus):
        values = number_in(amount, node.tolerance_unit, inputs)
        sides.append(_difference(values, node, np.abs(nominal)))
    return Bounds(nominal - sides[0], nominal + sides[1], unit)


def _difference(values: Floats, node: Tolerance, size: Floats) -> Floats:
    """Return an amount of tolerance in the unit of the limit; a share (%, ppm) is taken of the nominal."""
    target = difference_unit(node.unit)
    if same_unit_spelling(node.tolerance_unit, target) or node.nominal is None:
        return values
    tolerance = unit_of(node.tolerance_unit)
    if tolerance.dimension == "ratio" and not tolerance.is_log:
        return values * tolerance.scale * size
    return convert_to(values, node.tolerance_unit, target)


def _cases(node: Cases, inputs: Inputs) -> Bounds:
    """The first case whose condition holds; rows where an earlier condition is unknown are unknown.

    A case that holds nowhere is not evaluated: what it needs may well be missing.
    """
    open_rows, undecided = ALL_FLAG, NO_FLAG
    parts: list[tuple[Flags, Bounds]] = []
    for case in node.cases:
        found = truth(case.when, inputs)
        undecided = undecided | (open_rows & ~found.known)
        chosen = open_rows & found.true & ~undecided
        if chosen.any():
            parts.append((chosen, evaluate_node(case.limit, inputs)))
        open_rows = open_rows & ~found.true & found.known
    if node.otherwise is not None:
        if open_rows.any():
            parts.append((open_rows, evaluate_node(node.otherwise, inputs)))
        open_rows = open_rows & NO_FLAG
    units = [part.unit for _, part in parts if part.unit] or list(tree_units(node)[:1])
    return _gathered(parts, open_rows, undecided, units[0] if units else "")


def _gathered(parts: list[tuple[Flags, Bounds]], nothing: Flags, undecided: Flags, unit: str) -> Bounds:
    parts = [(rows, in_unit(part, unit)) for rows, part in parts]
    has_lower = any(part.lower is not None for _, part in parts)
    has_upper = any(part.upper is not None for _, part in parts)
    widths = any(part.bandwidth_hz is not None for _, part in parts)

    def pick(values: list[Floats], rest: float) -> Floats:
        picked = np.full(1, rest)
        for (rows, _), value in zip(parts, values, strict=True):
            picked = np.where(rows, value, picked)
        return picked

    def pick_flags(values: list[Flags]) -> Flags:
        picked = NO_FLAG
        for (rows, _), value in zip(parts, values, strict=True):
            picked = picked | (rows & value)
        return picked

    no_upper, no_lower, no_width = np.array([np.inf]), np.array([-np.inf]), _NAN
    lower = pick([no_lower if part.lower is None else part.lower for _, part in parts], -np.inf)
    upper = pick([no_upper if part.upper is None else part.upper for _, part in parts], np.inf)
    width = pick([no_width if part.bandwidth_hz is None else part.bandwidth_hz for _, part in parts], np.nan)
    whys = dict.fromkeys(part.why for rows, part in parts if part.why and rows.any())
    return Bounds(
        np.where(undecided, np.nan, lower) if has_lower else None,
        np.where(undecided, np.nan, upper) if has_upper else None,
        unit,
        pick_flags([part.lower_strict for _, part in parts]),
        pick_flags([part.upper_strict for _, part in parts]),
        pick_flags([part.applies for _, part in parts]) | undecided,
        (nothing & ~undecided) | pick_flags([part.outside for _, part in parts]),
        undecided | pick_flags([part.unknown for _, part in parts]),
        "; ".join(whys),
        width if widths else None,
    )


def _gated(bounds: Bounds, open_: Flags, known: Flags) -> Bounds:
    """Close the bounds where the gate is shut; where the gate is unknown, so is the limit."""
    return replace(
        bounds,
        applies=bounds.applies & (open_ | ~known),
        outside=bounds.outside & (open_ | ~known),
        unknown=(bounds.unknown & open_) | (~known & bounds.applies),
    )


def round_bounds(bounds: Bounds, rounding: Rounding) -> Bounds:
    """Round the numbers of the bounds to multiples of the step; ties to even as in ASTM E29."""
    step = rounding.step.value
    turn = {"nearest": np.rint, "up": np.ceil, "down": np.floor}[rounding.method]

    def to_step(values: Floats | None) -> Floats | None:
        # Nine decimals of the quotient take off the binary noise of 0.1 before the tie is decided.
        return None if values is None else np.round(turn(np.round(values / step, 9)) * step, 12)

    return replace(bounds, lower=to_step(bounds.lower), upper=to_step(bounds.upper))


def _relaxed(bounds: Bounds, tolerance: TestTolerance) -> Bounds:
    """Relax the bounds by a test tolerance: lower bounds go down, upper bounds go up."""
    if tolerance.place == "stimulus" or not bounds.unit:
        return bounds
    own = tolerance.amount
    try:
        amount = float(convert_to(np.array([own.value]), own.unit, difference_unit(bounds.unit))[0])
    except ExpressionError as error:
        return _unknown(bounds.unit, f"test tolerance: {error.message}")
    lower = None if bounds.lower is None else bounds.lower - amount
    upper = None if bounds.upper is None else bounds.upper + amount
    return replace(bounds, lower=lower, upper=upper)
