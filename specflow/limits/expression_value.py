"""Evaluation of expressions on arrays.

Three ways to read a node: ``number_in`` (a value in the unit of the limit it stands in), ``operand`` (a value with
whatever unit its parts have) and ``truth`` (a condition, three-valued). Arrays have the size of the columns, or 1
where nothing varies.
"""

from __future__ import annotations

import operator
from collections.abc import Callable
from dataclasses import dataclass
from functools import reduce

import numpy as np

from specflow.errors import ExpressionError
from specflow.limits.conversion import PLAIN, Floats, conversion, convert_to, same_unit_spelling, unit_of
from specflow.limits.inputs import Flags, Inputs
from specflow.model.columns import UNSTATED, TextColumn
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
    Word,
)
from specflow.units import Kind

_SIGNS: dict[str, Callable[[Floats, Floats], Flags]] = {
    "<": operator.lt,
    "<=": operator.le,
    ">": operator.gt,
    ">=": operator.ge,
    "==": operator.eq,
    "!=": operator.ne,
}
_ONE_ARGUMENT: dict[str, Callable[[Floats], Floats]] = {
    "abs": np.abs,
    "sqrt": np.sqrt,
    "exp": np.exp,
    "ln": np.log,
    "log10": np.log10,
    "log2": np.log2,
    "floor": np.floor,
    "ceil": np.ceil,
    "round": np.rint,
}
#: Comparing after a conversion: 1e-9 dB for logarithmic units, 1e-9 relative otherwise (rounding of the conversion).
_CLOSE = 1e-9


@dataclass(frozen=True, slots=True)
class Operand:
    """Values with a unit. ``soft``: a name that declared its unit, plain beside plain numbers (f_MHz - 0.215)."""

    values: Floats
    unit: str = ""
    soft: bool = False

    @property
    def plain(self) -> bool:
        """True when the values may stand beside plain numbers."""
        return self.soft or self.unit in PLAIN


@dataclass(frozen=True, slots=True)
class Truth:
    """A condition: ``true`` where it holds, ``known`` where the inputs decide it."""

    true: Flags
    known: Flags


def number_in(node: Expression, unit: str, inputs: Inputs) -> Floats:
    """Return the values of an expression in ``unit``; a plain number is already in it. NaN where unknown.

    Raises ExpressionError when a part has a unit that cannot be read in ``unit``.
    """
    match node:
        case Number(unit=own):
            values = np.array([node.value])
            return values if not own else convert_to(values, own, unit)
        case Negative(operand=inner):
            return -number_in(inner, unit, inputs)
        case Operation(sign="+" | "-" as sign, left=left, right=right):
            a, b = number_in(left, unit, inputs), number_in(right, unit, inputs)
            return a + b if sign == "+" else a - b
        case Call(function="min" | "max" | "powersum" | "abs" as function, arguments=arguments):
            return _combine(function, [number_in(part, unit, inputs) for part in arguments])
        case Choice():
            return _choose(node, inputs, lambda part: number_in(part, unit, inputs))
    found = operand(node, inputs)
    if found.plain and not (found.soft and conversion(found.unit, unit) is not None):
        return found.values
    return convert_to(found.values, found.unit, unit)


def _combine(function: str, values: list[Floats]) -> Floats:
    if function == "abs":
        return np.abs(values[0])
    if function == "powersum":
        with np.errstate(over="ignore"):
            return 10 * np.log10(sum(10 ** (value / 10) for value in values))
    return reduce(np.minimum if function == "min" else np.maximum, values)


def _choose(node: Choice, inputs: Inputs, read: Callable[[Expression], Floats]) -> Floats:
    when = truth(node.when, inputs)
    chosen = np.where(when.true, read(node.then), read(node.otherwise))
    return np.where(when.known, chosen, np.nan)


def operand(node: Expression, inputs: Inputs) -> Operand:
    """Return the values of an expression with the unit its parts give it. NaN where unknown."""
    match node:
        case Number():
            return Operand(np.array([node.value]), node.unit)
        case Name():
            return _named(node, inputs)
        case Negative(operand=inner):
            found = operand(inner, inputs)
            return Operand(-found.values, found.unit, found.soft)
        case Operation():
            return _operation(node, inputs)
        case Call():
            return _called(node, inputs)
        case Share(share=share, of=of):
            whole = operand(of, inputs)
            return Operand(whole.values * share.value * unit_of(share.unit).scale, whole.unit, False)
        case Choice():
            then, otherwise = together(operand(node.then, inputs), operand(node.otherwise, inputs))
            when = truth(node.when, inputs)
            chosen = np.where(when.true, then.values, otherwise.values)
            return Operand(np.where(when.known, chosen, np.nan), then.unit, then.soft)
    raise ExpressionError("a condition or word stands where a value belongs")


def _named(node: Name, inputs: Inputs) -> Operand:
    if inputs.words(node.name) is not None:
        raise ExpressionError(f"{node.name} is a word here, not a number")
    if not node.unit:
        return Operand(*inputs.numbers(node.name))
    with_ending = f"{node.name}_{node.unit}"
    as_written = not inputs.supplied(node.name) and inputs.supplied(with_ending)
    values, unit = inputs.numbers(with_ending if as_written else node.name)
    if node.name in inputs.missing:
        return Operand(values, node.unit, True)
    if unit in PLAIN and node.unit not in PLAIN:
        raise ExpressionError(
            f"{node.name} has no unit where {node.unit} is expected", hint="declare its unit"
        )
    return Operand(convert_to(values, unit, node.unit), node.unit, True)


def together(left: Operand, right: Operand) -> tuple[Operand, Operand]:
    """Bring two operands to one unit; raises ExpressionError when one has none or the units are of other kinds."""
    if left.plain and right.plain and not (left.soft and right.soft):
        return Operand(left.values), Operand(right.values)
    if same_unit_spelling(left.unit, right.unit):
        return left, right
    if left.unit in PLAIN or right.unit in PLAIN:
        plain, other = (left, right) if left.unit in PLAIN else (right, left)
        if np.isnan(plain.values).all():
            return Operand(left.values, other.unit), Operand(right.values, other.unit)
        raise ExpressionError(
            f"a plain number meets a value in {other.unit}",
            hint=f"write the unit of the number, or the unit of the name in brackets: name[{other.unit}]",
        )
    if left.soft and not right.soft:
        return Operand(convert_to(left.values, left.unit, right.unit), right.unit), right
    return left, Operand(convert_to(right.values, right.unit, left.unit), left.unit, left.soft and right.soft)


def _operation(node: Operation, inputs: Inputs) -> Operand:
    left, right = operand(node.left, inputs), operand(node.right, inputs)
    if node.sign in "+-":
        a, b = together(left, right)
        values = a.values + b.values if node.sign == "+" else a.values - b.values
        return Operand(values, a.unit if not a.plain else "")
    with np.errstate(all="ignore"):
        if node.sign == "*":
            return Operand(left.values * right.values, _product_unit(left, right))
        if node.sign == "/":
            return _quotient(left, right)
        if not (left.plain and right.plain):
            raise ExpressionError(
                "a power is taken of plain numbers only", hint="say units in brackets: P[W]"
            )
        return Operand(np.power(left.values, right.values))


def _product_unit(left: Operand, right: Operand) -> str:
    units = [side.unit for side in (left, right) if not side.plain]
    if len(units) > 1:
        raise ExpressionError(f"{units[0]} times {units[1]} has no unit that a limit could have")
    return _scalable(units[0]) if units else ""


def _scalable(unit: str) -> str:
    """Return the unit if a multiple of it means anything: a level in dBm has none."""
    found = unit_of(unit)
    if found.is_log and found.kind is not Kind.RATIO:
        raise ExpressionError(
            f"a multiple of a level in {unit} means nothing", hint="add dB, or use a linear unit"
        )
    return unit


def _quotient(left: Operand, right: Operand) -> Operand:
    if right.plain:
        return Operand(left.values / right.values, "" if left.plain else _scalable(left.unit))
    if left.plain:
        raise ExpressionError(f"a plain number divided by {right.unit} has no unit that a limit could have")
    _scalable(right.unit)
    a, b = together(left, right)
    return Operand(a.values / b.values)


def _called(node: Call, inputs: Inputs) -> Operand:
    arguments = [operand(part, inputs) for part in node.arguments]
    if node.function in ("min", "max", "abs", "powersum"):
        first = arguments[0]
        values = [first.values]
        for other in arguments[1:]:
            first, other = together(first, other)
            values.append(other.values)
        return Operand(_combine(node.function, values), "" if first.plain else first.unit)
    only = arguments[0]
    if not only.plain:
        raise ExpressionError(
            f"{node.function} takes a plain number, not a value in {only.unit}",
            hint=f"say the unit the formula means in brackets: name[{only.unit}]",
        )
    with np.errstate(all="ignore"):
        return Operand(_ONE_ARGUMENT[node.function](only.values))


def truth(node: Expression, inputs: Inputs) -> Truth:
    """Return where a condition holds and where it can be decided."""
    match node:
        case Compare():
            return _compared(node, inputs)
        case Member(operand=inner, values=values):
            return _any([_member(inner, value, inputs) for value in values])
        case Not(operand=inner):
            found = truth(inner, inputs)
            return Truth(~found.true & found.known, found.known)
        case Logic(sign="and", terms=terms):
            opposite = _any([_inverse(truth(term, inputs)) for term in terms])
            return _inverse(opposite)
        case Logic(terms=terms):
            return _any([truth(term, inputs) for term in terms])
        case Choice():
            return _chosen_truth(node, inputs)
    raise ExpressionError(
        "a value stands where a condition belongs", hint="compare it: frequency >= 27.5 GHz"
    )


def _inverse(found: Truth) -> Truth:
    return Truth(found.known & ~found.true, found.known)


def _any(found: list[Truth]) -> Truth:
    true = reduce(operator.or_, (part.true for part in found))
    return Truth(true, true | reduce(operator.and_, (part.known for part in found)))


def _chosen_truth(node: Choice, inputs: Inputs) -> Truth:
    when, then, otherwise = (truth(part, inputs) for part in (node.when, node.then, node.otherwise))
    true = np.where(when.true, then.true, otherwise.true)
    known = when.known & np.where(when.true, then.known, otherwise.known)
    return Truth(true & known, known)


def _compared(node: Compare, inputs: Inputs) -> Truth:
    words = _words_of(node.left, inputs)
    if words is not None and node.sign in ("==", "!="):
        return _same_word(words, node.right, node.sign == "!=")
    if isinstance(node.right, Word):
        if isinstance(node.left, Name) and inputs.numbers(node.left.name)[0] is not None:
            return _not_words(node.left, node.right, inputs)
        raise ExpressionError(f"{node.right.text!r} is a word; only a text condition is compared with it")
    return _compare(operand(node.left, inputs), node.sign, operand(node.right, inputs))


def _words_of(node: Expression, inputs: Inputs) -> TextColumn | None:
    return inputs.words(node.name) if isinstance(node, Name) else None


def _not_words(name: Name, word: Word, inputs: Inputs) -> Truth:
    if name.name in inputs.missing:
        return Truth(np.array([False]), np.array([False]))
    raise ExpressionError(f"{name.name} is a number here; it cannot be {word.text!r}")


def _same_word(column: TextColumn, wanted: Expression, inverted: bool) -> Truth:
    """Compare words without regard to case; a number is compared with the word's digits."""
    fits = np.array([_word_fits(label, wanted) for label in column.labels] + [False])
    known = column.codes != UNSTATED
    return Truth((fits[column.codes] != inverted) & known, known)


def _word_fits(label: str, wanted: Expression) -> bool:
    if isinstance(wanted, Word):
        return label.casefold() == wanted.text.casefold()
    if isinstance(wanted, Number) and not wanted.unit:
        try:
            return float(label) == wanted.value
        except ValueError:
            return label == wanted.text
    raise ExpressionError("a text condition is compared with words or plain numbers")


def _compare(left: Operand, sign: str, right: Operand) -> Truth:
    converted = not (left.plain and right.plain) and not same_unit_spelling(left.unit, right.unit)
    a, b = together(left, right)
    known = ~(np.isnan(a.values) | np.isnan(b.values))
    true = _SIGNS[sign](a.values, b.values)
    if converted:
        scale = 1.0 if unit_of(a.unit).is_log else np.maximum(np.abs(a.values), np.abs(b.values))
        close = np.abs(a.values - b.values) <= _CLOSE * scale
        true = np.where(close, sign in ("<=", ">=", "=="), true)
    return Truth(true & known, known)


def _member(node: Expression, value: Expression, inputs: Inputs) -> Truth:
    words = _words_of(node, inputs)
    if words is not None:
        if isinstance(value, Interval):
            raise ExpressionError("a text condition has no interval")
        return _same_word(words, value, False)
    if isinstance(value, Word):
        return _compared(Compare(sign="==", left=node, right=value), inputs)
    if isinstance(value, Interval):
        return _inside(operand(node, inputs), value, inputs)
    return _compare(operand(node, inputs), "==", operand(value, inputs))


def _inside(value: Operand, interval: Interval, inputs: Inputs) -> Truth:
    ends = []
    if interval.low is not None:
        ends.append(_compare(value, ">" if interval.low_open else ">=", operand(interval.low, inputs)))
    if interval.high is not None:
        ends.append(_compare(value, "<" if interval.high_open else "<=", operand(interval.high, inputs)))
    if not ends:
        known = ~np.isnan(value.values)
        return Truth(known, known)
    return _inverse(_any([_inverse(end) for end in ends]))
