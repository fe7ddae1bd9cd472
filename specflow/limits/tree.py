"""What a limit tree is made of: its parts, units, side, and the names it needs."""

from __future__ import annotations

from collections.abc import Iterator

from specflow.limits.expression_shape import expression_names
from specflow.model.expression import Expression
from specflow.model.limit import (
    Allowed,
    Alternatives,
    Between,
    Bound,
    Cases,
    Exceptions,
    Gate,
    Limit,
    LimitNode,
    Mask,
    MeasuredIn,
    OfQuantity,
    Population,
    PowerSum,
    Side,
    Tolerance,
    Undefined,
)
from specflow.units import parse_unit


def nodes_below(node: LimitNode) -> tuple[LimitNode, ...]:
    """Return the limits directly below this one, relaxed ones of exceptions left out."""
    match node:
        case Cases(cases=cases, otherwise=otherwise):
            found = tuple(case.limit for case in cases)
            return found if otherwise is None else (*found, otherwise)
        case Alternatives(members=members) | PowerSum(members=members):
            return members
        case OfQuantity() | Gate() | MeasuredIn() | Allowed() | Population():
            return (node.limit,)
    return ()


def walk_limit(node: LimitNode) -> Iterator[LimitNode]:
    """Yield the limit and everything below it."""
    yield node
    for part in nodes_below(node):
        yield from walk_limit(part)


def tree_units(node: LimitNode) -> tuple[str, ...]:
    """Return the different units of the bounds in the tree, in order."""
    units = [
        part.unit
        for part in walk_limit(node)
        if isinstance(part, Bound | Between | Tolerance | Mask | Undefined)
    ]
    return tuple(dict.fromkeys(unit for unit in units if unit))


def states_bandwidth(node: LimitNode) -> bool:
    """Tell whether every bound of the limit says in which bandwidth it holds; of alternatives one is enough."""
    match node:
        case MeasuredIn():
            return True
        case PowerSum(bandwidth=bandwidth) if bandwidth is not None:
            return True
        case Mask(unit=unit, segments=segments):
            return _is_density(unit) or all(segment.bandwidth is not None for segment in segments)
        case Bound(unit=unit) | Between(unit=unit) | Tolerance(unit=unit):
            return _is_density(unit)
        case Alternatives(members=members):
            return any(states_bandwidth(member) for member in members)
    return all(states_bandwidth(part) for part in nodes_below(node))


def _is_density(unit: str) -> bool:
    return bool(unit) and parse_unit(unit).bandwidth_hz is not None


def undefined_in(node: LimitNode) -> bool:
    """Tell whether any part has no number yet."""
    return any(isinstance(part, Undefined) for part in walk_limit(node))


def side_of(node: LimitNode) -> Side | None:
    """Return the side a limit bounds, None when it bounds both or none."""
    sides: set[Side | None] = set()
    for part in walk_limit(node):
        if isinstance(part, Bound | Mask):
            sides.add(part.side)
        elif isinstance(part, Between | Tolerance):
            sides.update((Side.LOWER, Side.UPPER))
    return sides.pop() if len(sides) == 1 else None


def expressions_in(node: LimitNode) -> Iterator[Expression]:
    """Yield every expression of the tree that is needed to evaluate it."""
    for part in walk_limit(node):
        match part:
            case Bound(value=value):
                yield value
            case Between(lower=lower, upper=upper):
                yield from (lower, upper)
            case Tolerance(nominal=nominal, plus=plus, minus=minus):
                yield from (value for value in (nominal, plus, minus) if value is not None)
            case Cases(cases=cases):
                yield from (case.when for case in cases)
            case Gate(when=when):
                yield when
            case Mask():
                yield from _of_mask(part)
            case Population(statistic=Exceptions(relaxed=relaxed)) if relaxed is not None:
                yield from expressions_in(relaxed)


def _of_mask(mask: Mask) -> Iterator[Expression]:
    for segment in mask.segments:
        ends = (segment.start, segment.stop, segment.value, segment.end_value)
        yield from (value for value in ends if value is not None)
    yield from mask.exclusions


def limit_inputs(limit: Limit) -> frozenset[str]:
    """Return the names of the conditions, axes and declared values that the evaluation of a limit needs."""
    return tree_names(limit.tree)


def tree_names(node: LimitNode) -> frozenset[str]:
    """Return the names that the evaluation of a tree needs."""
    names = {part.axis for part in walk_limit(node) if isinstance(part, Mask)}
    return frozenset(names).union(*(expression_names(value) for value in expressions_in(node)))


def varying_names(node: LimitNode) -> frozenset[str]:
    """Return the names by which a table of limits or a mask tells its parts apart."""
    names: set[str] = set()
    for part in walk_limit(node):
        if isinstance(part, Mask):
            names.add(part.axis)
        elif isinstance(part, Cases):
            names.update(*(expression_names(case.when) for case in part.cases))
    return frozenset(names)
