"""What an expression is made of: its parts, its depth, the names it needs."""

from __future__ import annotations

from collections.abc import Iterator

from specflow.model.expression import (
    Call,
    Choice,
    Compare,
    Expression,
    Interval,
    Logic,
    Member,
    Name,
    Negative,
    Not,
    Number,
    Operation,
    Share,
)


def is_condition(node: Expression) -> bool:
    """Tell whether the expression is true or false rather than a value."""
    if isinstance(node, Choice):
        return is_condition(node.then)
    return isinstance(node, Compare | Member | Logic | Not)


def parts_of(node: Expression) -> tuple[Expression, ...]:
    """Return the expressions directly below this one."""
    match node:
        case Negative(operand=operand) | Not(operand=operand):
            return (operand,)
        case Operation(left=left, right=right) | Compare(left=left, right=right):
            return (left, right)
        case Call(arguments=arguments):
            return arguments
        case Share(share=share, of=of):
            return (share, of)
        case Interval(low=low, high=high):
            return tuple(end for end in (low, high) if end is not None)
        case Member(operand=operand, values=values):
            return (operand, *values)
        case Logic(terms=terms):
            return terms
        case Choice(when=when, then=then, otherwise=otherwise):
            return (when, then, otherwise)
    return ()


def walk(node: Expression) -> Iterator[Expression]:
    """Yield the expression and everything below it."""
    yield node
    for part in parts_of(node):
        yield from walk(part)


def expression_names(node: Expression) -> frozenset[str]:
    """Return the names of the inputs the expression reads."""
    return frozenset(part.name for part in walk(node) if isinstance(part, Name))


def expression_depth(node: Expression) -> int:
    """Return how deep the expression is nested."""
    return 1 + max((expression_depth(part) for part in parts_of(node)), default=0)


def plain_number(node: Expression) -> float | None:
    """Return the value of a signed number without a unit of its own; None for anything else."""
    sign = 1.0
    if type(node) is Negative:
        node, sign = node.operand, -1.0
    return sign * float(node.text) if type(node) is Number and not node.unit else None
