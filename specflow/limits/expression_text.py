"""Expressions as text: the canonical spelling, which reads back to the same tree, and plain words for people."""

from __future__ import annotations

from collections.abc import Sequence

from specflow.limits.expression_shape import walk
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

_BINDING = {"+": 5, "-": 5, "*": 6, "/": 6, "^": 8}
_COMPARE_WORDS = {
    "<": "is less than",
    "<=": "is at most",
    ">": "is more than",
    ">=": "is at least",
    "==": "is",
    "!=": "is not",
}


def _binding(node: Expression) -> int:
    match node:
        case Choice():
            return 0
        case Logic(sign=sign):
            return 1 if sign == "or" else 2
        case Not():
            return 3
        case Compare() | Member():
            return 4
        case Operation(sign=sign):
            return _BINDING[sign]
        case Negative():
            return 7
    return 9


def _inside(node: Expression, binding: int) -> str:
    text = expression_text(node)
    return text if _binding(node) >= binding else f"({text})"


def expression_text(node: Expression) -> str:
    """Return the canonical spelling of an expression."""
    match node:
        case Number(text=text, unit=unit):
            return f"{text} {unit}" if unit else text
        case Name(name=name, unit=unit):
            return f"{name}[{unit}]" if unit else name
        case Word(text=text):
            return f'"{text}"' if "'" in text else f"'{text}'"
        case Negative(operand=operand):
            return f"-{_inside(operand, 7)}"
        case Operation():
            return _operation_text(node)
        case Call(function=function, arguments=arguments):
            return f"{function}({', '.join(expression_text(part) for part in arguments)})"
        case Share(share=share, of=of):
            return f"{expression_text(share)} of {expression_text(of)}"
        case Interval():
            return interval_text(node)
        case Compare(sign=sign, left=left, right=right):
            compared = value_text(right) if sign in ("==", "!=") else _inside(right, 5)
            return f"{_inside(left, 5)} {sign} {compared}"
        case Member(operand=operand, values=values):
            listed = ", ".join(value_text(value) for value in values)
            return f"{_inside(operand, 9)} in ({listed})"
        case Logic(sign=sign, terms=terms):
            return f" {sign} ".join(_inside(term, 2 if sign == "or" else 3) for term in terms)
        case Not(operand=operand):
            return f"not {_inside(operand, 3)}"
        case Choice(when=when, then=then, otherwise=otherwise):
            return f"{_inside(then, 1)} if {_inside(when, 1)} else {_inside(otherwise, 0)}"


def _operation_text(node: Operation) -> str:
    binding = _BINDING[node.sign]
    if node.sign == "^":
        return f"{_inside(node.left, 9)} ^ {_inside(node.right, 7)}"
    left = _inside(node.left, binding)
    if node.sign == "/" and isinstance(node.left, Number | Share):
        left = f"({left})"
    return f"{left} {node.sign} {_inside(node.right, binding + 1)}"


def value_text(node: Expression) -> str:
    """Return the spelling of a value in a list or after ==: anything but words and numbers in parentheses."""
    match node:
        case Word() | Interval() | Number() | Negative(operand=Number()):
            return expression_text(node)
    return f"({expression_text(node)})"


def interval_text(node: Interval) -> str:
    """Return ``low..high`` with ``<`` beside an end that is left out."""
    low = "" if node.low is None else value_text(node.low)
    high = "" if node.high is None else _inside(node.high, 5)
    return f"{low}{'<' if node.low_open else ''}..{'<' if node.high_open else ''}{high}"


def expression_words(node: Expression, unit: str = "") -> str:
    """Say an expression for people; ``unit`` is what its plain numbers are read in, said once after the whole."""
    text = _words(node)
    if not unit:
        return text
    if isinstance(node, Operation):
        return f"({text})" if text.endswith(f" {unit}") else f"({text}) {unit}"
    return text if text.endswith(f" {unit}") else f"{text} {unit}"


def _words(node: Expression) -> str:
    match node:
        case Name(name=name):
            return name
        case Word(text=text):
            return text
        case Share(share=share, of=of):
            return f"{expression_text(share)} of {of.name}"
        case Negative(operand=operand):
            return f"-{_grouped(operand, 7)}"
        case Operation(sign=sign, left=left, right=right):
            binding = _BINDING[sign]
            right_binding = binding if sign in "+*" else binding + 1
            return f"{_grouped(left, binding)} {sign} {_grouped(right, right_binding)}"
        case Call(function="min" | "max" | "powersum" as function, arguments=arguments):
            which = {"min": "the smaller of", "max": "the larger of", "powersum": "the power sum of"}[
                function
            ]
            return f"{which} ({_listed([_words(part) for part in arguments], 'and')})"
        case Call(function=function, arguments=arguments):
            return f"{function}({_words(arguments[0])})"
        case Interval():
            return _interval_words(node)
        case Compare(sign=sign, left=left, right=right):
            return f"{_words(left)} {_COMPARE_WORDS[sign]} {_words(right)}{_declared_unit(left, right)}"
        case Member(operand=operand, values=values):
            listed = _listed([_words(value) for value in values], "or")
            return f"{_words(operand)} is {listed}{_unit_of_members(operand, values)}"
        case Logic(sign=sign, terms=terms):
            return f" {sign} ".join(_grouped(term, 2 if sign == "or" else 3) for term in terms)
        case Not(operand=operand):
            return f"not ({_words(operand)})"
        case Choice(when=when, then=then, otherwise=otherwise):
            return f"{_words(then)} where {_words(when)}, else {_words(otherwise)}"
    return expression_text(node)


def _unit_of_members(operand: Expression, values: Sequence[Expression]) -> str:
    """The unit that the name declares, where the values are numbers without one of their own."""
    if not isinstance(operand, Name) or not operand.unit:
        return ""
    plain = not any(
        isinstance(part, Word) or getattr(part, "unit", "") for value in values for part in walk(value)
    )
    return f" {operand.unit}" if plain else ""


def _declared_unit(left: Expression, right: Expression) -> str:
    plain = not isinstance(right, Word) and not getattr(right, "unit", "")
    return f" {left.unit}" if isinstance(left, Name) and left.unit and plain else ""


def _grouped(node: Expression, binding: int) -> str:
    text = _words(node)
    return text if _binding(node) >= binding else f"({text})"


def _interval_words(node: Interval) -> str:
    if node.low is None:
        return (
            f"{'below' if node.high_open else 'up to'} {_words(node.high)}"
            if node.high is not None
            else "anything"
        )
    if node.high is None:
        return f"{'above' if node.low_open else 'from'} {_words(node.low)}"
    low, high = _words(node.low), _words(node.high)
    return f"{'above ' if node.low_open else ''}{low} to {'below ' if node.high_open else ''}{high}"


def _listed(words: list[str], joint: str) -> str:
    return words[0] if len(words) == 1 else f"{', '.join(words[:-1])} {joint} {words[-1]}"
