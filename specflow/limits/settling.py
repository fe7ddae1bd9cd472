"""Settling the unit of a limit: which unit the numbers of a value are in, and what does not go together.

Only the additive spine of a formula carries the unit of its result: sums, negatives, min, max, choices. Inside
products and logarithms numbers are plain.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence

from specflow.errors import ExpressionError
from specflow.limits.conversion import (
    PLAIN,
    conversion,
    difference_unit,
    is_difference,
    same_unit_spelling,
    unit_of,
)
from specflow.limits.expression_shape import walk
from specflow.model.expression import Call, Choice, Expression, Name, Negative, Number, Operation, Share
from specflow.units import Kind

_NO_UNIT = "the limit has no unit"
_NO_UNIT_HINT = "write it after the number, or plain for a number without a unit"


def spine(node: Expression) -> Iterator[Expression]:
    """Yield the parts of a value that carry its unit."""
    match node:
        case Negative(operand=operand):
            yield from spine(operand)
        case Operation(sign="+" | "-", left=left, right=right):
            yield from spine(left)
            yield from spine(right)
        case Call(function="min" | "max" | "powersum" | "abs", arguments=arguments):
            for part in arguments:
                yield from spine(part)
        case Choice(then=then, otherwise=otherwise):
            yield from spine(then)
            yield from spine(otherwise)
        case Operation(sign="*" | "/", left=left, right=right):
            yield from (part for side in (left, right) for part in spine(side) if _has_unit(part))
        case _:
            yield node


def _has_unit(node: Expression) -> bool:
    return isinstance(node, Number) and node.unit not in PLAIN


def settle(values: Sequence[Expression], written: str, hint: str = "") -> str:
    """Return the unit of a limit whose values are these; ``written`` is the unit after the whole, "" if none.

    ``hint`` is the unit the requirement's parameter has. Raises ExpressionError when there is no unit, or when
    parts of different kinds meet.
    """
    unit = written or _from_parts(values, hint) or hint
    if not unit:
        raise ExpressionError(_NO_UNIT, hint=_NO_UNIT_HINT)
    for value in values:
        for part in spine(value):
            if isinstance(part, Number) and part.unit:
                _check(part, unit)
        refuse_level_sums(value, unit, _written_unit)
    return unit


def _written_unit(node: Expression) -> str | None:
    """Return the unit a leaf states in the text, None when it states none."""
    return (node.unit or None) if isinstance(node, Number | Name) else None


def refuse_level_sums(value: Expression, unit: str, unit_of_leaf: Callable[[Expression], str | None]) -> None:
    """Refuse sums of two levels: 45 dBm + 3 dBm is 48 dBm only if the second is meant as dB.

    A level minus a level is a ratio, and a ratio is no limit in dBm.
    """
    if not is_level(unit):
        return
    levels, open_ends = _levels(value, unit_of_leaf)
    if levels > 1:
        raise ExpressionError(
            "two levels do not add",
            hint="write a difference in dB; a power sum is asked for as powersum(a, b)",
        )
    if (levels == 0 or levels < -1) and not open_ends:
        raise ExpressionError(
            f"a level minus a level is a ratio, not {unit}", hint="write a difference in dB"
        )


def trailing_level_unit(value: Expression) -> tuple[Expression, str]:
    """Take a level's unit off the end of a sum whose other numbers have none: P_rated - 35 dBm is all in dBm."""
    if not isinstance(value, Operation) or value.sign not in "+-" or not isinstance(value.right, Number):
        return value, ""
    unit = value.right.unit
    others = [part for part in spine(value.left) if isinstance(part, Number) and part.unit]
    if not is_level(unit) or others:
        return value, ""
    return value.model_copy(update={"right": Number(text=value.right.text)}), unit


def is_level(unit: str) -> bool:
    """Tell whether values of the unit are logarithmic levels, whose differences are in dB."""
    if unit in PLAIN or unit_of(unit).kind is Kind.RATIO:
        return False
    return unit_of(unit).is_log and not same_unit_spelling(difference_unit(unit), unit)


def _levels(node: Expression, unit_of_leaf: Callable[[Expression], str | None]) -> tuple[int, bool]:
    """Return how many levels a sum has more than it takes off, and whether a part may be a level or a ratio."""
    match node:
        case Negative(operand=Number() as number):
            return _levels(number, unit_of_leaf)  # the sign of a level, not a level taken off
        case Negative(operand=operand):
            levels, open_ends = _levels(operand, unit_of_leaf)
            return -levels, open_ends
        case Operation(sign="+" | "-" as sign, left=left, right=right):
            one, other = _levels(left, unit_of_leaf), _levels(right, unit_of_leaf)
            return one[0] + (other[0] if sign == "+" else -other[0]), one[1] or other[1]
        case Call(function="min" | "max" | "powersum" | "abs", arguments=arguments):
            found = [_levels(part, unit_of_leaf) for part in arguments]
            return max(levels for levels, _ in found), any(open_ends for _, open_ends in found)
        case Choice(then=then, otherwise=otherwise):
            one, other = _levels(then, unit_of_leaf), _levels(otherwise, unit_of_leaf)
            return max(one[0], other[0]), one[1] or other[1]
    unit = unit_of_leaf(node)
    if unit is None:
        return 0, True
    return (1, False) if is_level(unit) or _is_linear_level(unit) else (0, False)


def _is_linear_level(unit: str) -> bool:
    return unit not in PLAIN and not unit_of(unit).is_log and unit_of(unit).kind is Kind.LEVEL


def _from_parts(values: Sequence[Expression], hint: str) -> str:
    parts = [part for value in values for part in spine(value)]
    numbers = [part.unit for part in parts if isinstance(part, Number) and part.unit]
    names = [part.unit for part in parts if isinstance(part, Name) and part.unit]
    shares = [part.of.unit for part in parts if isinstance(part, Share) and part.of.unit]
    units = numbers + shares or names
    open_names = any(isinstance(part, Name) and not part.unit for part in parts)
    if names and numbers and all(is_difference(unit, names[-1]) for unit in numbers):
        return names[-1]
    if hint and open_names and units and all(is_difference(unit, hint) for unit in units):
        return hint
    return _leading(units)


def _leading(units: Sequence[str]) -> str:
    """Return the unit that the others are differences of or convert to: the last such one."""
    for unit in reversed(units):
        if all(_fits(other, unit) for other in units):
            return unit
    if units:
        raise mixed_units(units)
    return ""


def _fits(other: str, unit: str) -> bool:
    return is_difference(other, unit) or (
        not is_difference(unit, other) and conversion(other, unit) is not None and _same_sort(other, unit)
    )


def _same_sort(left: str, right: str) -> bool:
    """Tell whether two units may add: a ratio does not add to a quantity, dBi not to dBc."""
    if left in PLAIN or right in PLAIN:
        return left in PLAIN and right in PLAIN
    one, other = unit_of(left), unit_of(right)
    return one.kind is other.kind


def mixed_units(units: Sequence[str]) -> ExpressionError:
    """Return the error for units that do not add, naming what is missing."""
    different = list(dict.fromkeys(units))
    relative = [unit for unit in different if unit not in PLAIN and _is_share(unit)]
    others = [unit for unit in different if unit not in relative]
    message = f"{' and '.join(different)} do not add"
    if relative and others and others[0].endswith("Hz"):
        return ExpressionError(
            f"{message} without the carrier frequency",
            hint=f"write it as in '± (0.1 {relative[0]} of carrier + 12 {others[0]})' and declare the value of carrier",
        )
    if relative and others:
        amount = f"1 {difference_unit(others[0])}" if unit_of(others[0]).is_log else f"10 {relative[0]}"
        return ExpressionError(
            f"{message} without the value in {others[0]} it is a share of",
            hint=f"write a tolerance as in '28 {others[0]} ± {amount}'",
        )
    return ExpressionError(message, hint="write both parts in one unit")


def _is_share(unit: str) -> bool:
    found = unit_of(unit)
    return found.kind is Kind.RATIO and not found.is_log


def _check(part: Number, unit: str) -> None:
    if same_unit_spelling(part.unit, unit) or is_difference(part.unit, unit):
        return
    if part.unit not in PLAIN and conversion(part.unit, unit) is not None and _same_sort(part.unit, unit):
        return
    raise mixed_units([part.unit, unit])


def settle_tolerance(written: str, unit: str) -> tuple[str, str]:
    """Return the unit of a tolerance about a nominal in ``unit``, and the sentence to echo, "" when none is needed.

    A tolerance written in the unit of a level is read as its difference: 54 ± 1.5 dBm is ± 1.5 dB.
    """
    difference = difference_unit(unit)
    if not written:
        return difference, "" if same_unit_spelling(
            difference, unit
        ) else f"the tolerance is read in {difference}"
    if same_unit_spelling(written, unit):
        if same_unit_spelling(difference, unit):
            return unit, ""
        return difference, f"the tolerance written in {written} is read as {difference}"
    if is_difference(written, unit):
        return written, ""
    if written not in PLAIN and _is_share(written):
        if unit_of(unit).is_log:
            raise ExpressionError(
                f"{written} of a value in {unit} means nothing", hint="give the tolerance in dB"
            )
        return written, ""
    if conversion(written, difference) is not None and _same_sort(written, difference):
        return written, ""
    raise mixed_units([unit, written])


def is_bare_arithmetic(node: Expression) -> bool:
    """Tell whether a value adds or divides numbers alone: 3-5 V may be meant as a range, 20/23 dB as two values."""
    parts = list(walk(node))
    plain = all(isinstance(part, Number | Negative | Operation) for part in parts)
    return plain and any(isinstance(part, Operation) and part.sign in ("+", "-", "/") for part in parts)
