"""The grammar of bounds, as engineers write them.

>= 45 dBm | 45 dBm min | at least 45 dBm | < -36 dBm/MHz | 3..5 V | -6 to +4 dB | between 3 and 5 V
54 ± 1.5 dBm | 26 +2/-3 dBm | ± 0.1 ppm | within 3.4 dB of P_rated[dBm] | gain >= 20 dB | 3.2 dB
"""

from __future__ import annotations

import re

from specflow.limits.conversion import is_difference
from specflow.limits.draft import Bare, Draft
from specflow.limits.expression_grammar import last_unit, read_sum
from specflow.limits.expression_shape import plain_number, walk
from specflow.limits.expression_text import expression_text
from specflow.limits.settling import is_bare_arithmetic, settle_tolerance, trailing_level_unit
from specflow.model.expression import Expression, Name, Negative, Number
from specflow.model.limit import (
    Alternatives,
    Between,
    Bound,
    LimitNode,
    OfQuantity,
    Rule,
    Side,
    Tolerance,
    Undefined,
)
from specflow.model.parameter import Better

_COMPARED = {
    ">=": (Side.LOWER, False), "≥": (Side.LOWER, False), "=>": (Side.LOWER, False), "⩾": (Side.LOWER, False),
    "<=": (Side.UPPER, False), "≤": (Side.UPPER, False), "=<": (Side.UPPER, False), "⩽": (Side.UPPER, False),
    ">": (Side.LOWER, True), "<": (Side.UPPER, True),
}  # fmt: skip
_LED = {
    "at least": (Side.LOWER, False),
    "not less than": (Side.LOWER, False),
    "no less than": (Side.LOWER, False),
    "not below": (Side.LOWER, False),
    "at most": (Side.UPPER, False),
    "up to": (Side.UPPER, False),
    "not more than": (Side.UPPER, False),
    "no more than": (Side.UPPER, False),
    "not greater than": (Side.UPPER, False),
    "no greater than": (Side.UPPER, False),
    "not to exceed": (Side.UPPER, False),
    "shall not exceed": (Side.UPPER, False),
    "not above": (Side.UPPER, False),
    "more than": (Side.LOWER, True),
    "greater than": (Side.LOWER, True),
    "above": (Side.LOWER, True),
    "less than": (Side.UPPER, True),
    "below": (Side.UPPER, True),
    "minimum": (Side.LOWER, False),
    "maximum": (Side.UPPER, False),
    "min": (Side.LOWER, False),
    "max": (Side.UPPER, False),
}
_FOLLOWED = {
    "(minimum)": Side.LOWER,
    "(maximum)": Side.UPPER,
    "(min)": Side.LOWER,
    "(max)": Side.UPPER,
    "minimum": Side.LOWER,
    "maximum": Side.UPPER,
    "min.": Side.LOWER,
    "max.": Side.UPPER,
    "min": Side.LOWER,
    "max": Side.UPPER,
    "or more": Side.LOWER,
    "or higher": Side.LOWER,
    "or less": Side.UPPER,
    "or lower": Side.UPPER,
}
_ASYMMETRIC = re.compile(r"(?:\+ *(?=[\d.])[^/]{1,24}/ *[-–]|[-–] *(?=[\d.])[^/]{1,24}/ *\+)")
_PLUS_MINUS = ("±", "+/-", "+-")
_RATIO_TO_ONE = re.compile(r": *1(?![\w.])")


def read_bound(draft: Draft) -> LimitNode | Bare:
    """Read one bound, or a value that still lacks its direction."""
    reader = draft.reader
    reader.take_words("shall be")
    sign = None if reader.sees("=", "==") and not reader.sees("=<", "=>") else reader.take(*_COMPARED)
    if sign is not None:
        side, strict = _COMPARED[sign]
        return _sided(draft, side, strict)
    if not reader.sees_call():
        led = reader.take_words(*_LED)
        if led is not None:
            side, strict = _LED[led]
            reader.take(".")
            return _sided(draft, side, strict)
    if reader.take_words("between") is not None:
        return _between(draft, "and")
    if reader.take_words("from") is not None:
        return _between(draft, "to")
    if reader.take_words("within") is not None:
        return _within(draft)
    if reader.take(*_PLUS_MINUS) is not None:
        return _about_zero(draft)
    if reader.sees("=", "!", "≠"):
        reader.fail("an exact value cannot be proved by measurement", hint="give a tolerance: 54 ± 1.5 dBm")
    return _valued(draft)


def _value(draft: Draft) -> tuple[Expression, str]:
    """Read a value and the unit written after the whole of it; a single number keeps its own."""
    value = read_sum(draft.reader)
    unit = draft.reader.take_unit() or ""
    if not unit:
        value, unit = trailing_level_unit(value)
    if not unit and not last_unit(value) and not draft.inner:
        unit = "1" if draft.reader.take_pattern(_RATIO_TO_ONE) else ""
    return value, unit


def _sided(draft: Draft, side: Side, strict: bool) -> LimitNode:
    place = draft.reader.place
    if draft.reader.take_words("TBD") is not None:
        return Undefined(side=side, unit=draft.reader.take_unit() or "")
    value, written = _value(draft)
    return _bound(draft, side, strict, Bare(value, written, place))


def _bound(draft: Draft, side: Side, strict: bool, bare: Bare) -> Bound:
    _refuse_arithmetic(draft, bare)
    unit = draft.settle([bare.value], bare.written, bare.place)
    return Bound(side=side, value=plain(bare.value, unit), unit=unit, strict=strict)


def _refuse_arithmetic(draft: Draft, bare: Bare) -> None:
    if is_bare_arithmetic(bare.value) and not draft.reader.text.startswith("(", bare.place):
        draft.reader.fail(
            "a sum of plain numbers may be meant as a range or a tolerance",
            hint="write 3..5 V, or 26 +2/-3 dBm, or put the sum in parentheses",
            place=bare.place,
        )


def directed(draft: Draft, bare: Bare, side: Side | None = None) -> LimitNode:
    """Give a bare value its direction: its neighbour's, or the one that is better for the parameter."""
    _refuse_arithmetic(draft, bare)
    if side is not None:
        draft.say(f"{expression_text(bare.value)} has the direction of its neighbour")
        return _bound(draft, side, False, bare)
    if draft.better is Better.NEARER_ZERO:
        draft.say("no direction is written; nearer to zero is better, so it is read as ±")
        return _two_sided_zero(draft, bare.value, bare.written, bare.place)
    if draft.better in (Better.LOWER, Better.HIGHER):
        lower_is_better = draft.better is Better.LOWER
        draft.say(
            f"no direction is written; {'lower' if lower_is_better else 'higher'} is better, "
            f"so it is read as {'at most' if lower_is_better else 'at least'}"
        )
        return _bound(draft, Side.UPPER if lower_is_better else Side.LOWER, False, bare)
    raise draft.reader.error(
        "the limit has no direction", hint="write >=, <=, min, max or ±", place=bare.place
    )


def _valued(draft: Draft) -> LimitNode | Bare:
    reader = draft.reader
    place = reader.place
    if reader.take_words("TBD") is not None:
        return _undefined(draft)
    value, written = _value(draft)
    if isinstance(value, Name) and not written and reader.sees(*_COMPARED):
        return _of_quantity(draft, value)
    if reader.sees(*_COMPARED):
        return _chained(draft, value, written, place)
    if reader.take(*_PLUS_MINUS) is not None:
        amount, amount_unit = _value(draft)
        return _tolerance(draft, value, written, amount, amount, amount_unit or last_unit(amount), place)
    if _ASYMMETRIC.match(reader.text, reader.place):
        return _asymmetric(draft, value, written, place)
    if reader.take("...", "..", "…", "–") is not None or reader.take_words("to") is not None:
        return _range(draft, value, written, place)
    if draft.better is not None:
        reader.take_words("or better")
    side = reader.take_words(*_FOLLOWED)
    bare = Bare(value, written, place)
    return bare if side is None else _bound(draft, _FOLLOWED[side], False, bare)


def _undefined(draft: Draft) -> LimitNode:
    unit = draft.reader.take_unit() or ""
    side = draft.reader.take_words(*_FOLLOWED)
    return Undefined(side=_FOLLOWED[side] if side else None, unit=unit)


def _of_quantity(draft: Draft, name: Name) -> LimitNode:
    side, strict = _COMPARED[draft.reader.take(*_COMPARED) or ""]
    own = name.name.casefold() in draft.own_names
    saved = draft.hint
    draft.hint = saved if own else ""
    bound = _sided(draft, side, strict)
    draft.hint = saved
    return bound if own else OfQuantity(quantity=name.name, limit=bound)


def _chained(draft: Draft, low: Expression, written: str, place: int) -> LimitNode:
    """Read ``3 V <= supply <= 5 V`` (or with > both ways) as two bounds on one quantity."""
    reader = draft.reader
    sign = reader.take(*_COMPARED) or ""
    name = reader.take_name()
    second = reader.take(*_COMPARED)
    if name is None or second is None or _COMPARED[second][0] is not _COMPARED[sign][0]:
        reader.fail(
            "a comparison has the value on the right", hint="write 'gain >= 20 dB' or '>= 20 dB'", place=place
        )
    right_side, right_strict = _COMPARED[second]
    high, high_unit = _value(draft)
    unit = draft.settle([low, high], high_unit or written, place)
    left_side = Side.LOWER if right_side is Side.UPPER else Side.UPPER
    members: tuple[LimitNode, ...] = (
        Bound(side=left_side, value=plain(low, unit), unit=unit, strict=_COMPARED[sign][1]),
        Bound(side=right_side, value=plain(high, unit), unit=unit, strict=right_strict),
    )
    both = Alternatives(rule=Rule.STRICTER, members=members)
    return both if name.casefold() in draft.own_names else OfQuantity(quantity=name, limit=both)


def _range(draft: Draft, low: Expression, low_unit: str, place: int) -> LimitNode:
    high, high_unit = _value(draft)
    unit = draft.settle([low, high], high_unit or low_unit, place)
    low, high = plain(low, unit), plain(high, unit)
    ends = plain_number(low), plain_number(high)
    if ends[0] is not None and ends[1] is not None and ends[0] > ends[1]:
        draft.reader.fail("the lower end of the range is above the upper one", place=place)
    return Between(lower=low, upper=high, unit=unit)


def _between(draft: Draft, joint: str) -> LimitNode:
    place = draft.reader.place
    low, unit = _value(draft)
    if draft.reader.take_words(joint) is None:
        draft.reader.fail(f"expected {joint!r} between the two ends of the range", hint="between 3 and 5 V")
    return _range(draft, low, unit, place)


def _within(draft: Draft) -> LimitNode:
    """Read ``within 3.4 dB of P_rated[dBm]``."""
    place = draft.reader.place
    draft.reader.take(*_PLUS_MINUS)
    number = draft.reader.take_number()
    if number is None:
        draft.reader.fail(
            "'within' needs an amount and what it is about", hint="within 3.4 dB of P_rated[dBm]"
        )
    unit = draft.reader.take_unit() or ""
    if draft.reader.take_words("of") is None:
        draft.reader.fail("expected 'of' after the amount", hint="within 3.4 dB of P_rated[dBm]")
    nominal, written = _value(draft)
    amount = Number(text=number)
    return _tolerance(draft, nominal, written, amount, amount, unit, place)


def _about_zero(draft: Draft) -> LimitNode:
    place = draft.reader.place
    amount, written = _value(draft)
    return _two_sided_zero(draft, amount, written, place)


def _two_sided_zero(draft: Draft, amount: Expression, written: str, place: int) -> LimitNode:
    unit = draft.settle([amount], written, place)
    tolerance_unit, reading = draft.placed(place, lambda: settle_tolerance(unit, unit))
    draft.say(reading)
    amount = plain(amount, unit)
    return Tolerance(plus=amount, minus=amount, unit=unit, tolerance_unit=tolerance_unit)


def _asymmetric(draft: Draft, nominal: Expression, written: str, place: int) -> LimitNode:
    """Read ``+2/-3`` or ``-3/+2`` after a nominal; the unit may stand after each or after both."""
    reader = draft.reader
    first_sign = reader.take("+", "-", "–")
    first, first_unit = _amount(draft)
    reader.expect("/", "the first tolerance")
    second_sign = reader.take("+", "-", "–")
    second, second_unit = _amount(draft)
    if (first_sign == "+") is (second_sign == "+"):
        reader.fail("one tolerance is '+', the other '-'", hint="26 +2/-3 dBm")
    if first_unit and second_unit and second_unit != first_unit:
        reader.fail("the two tolerances have different units", hint="write both in one unit")
    plus, minus = (first, second) if first_sign == "+" else (second, first)
    return _tolerance(draft, nominal, written, plus, minus, second_unit or first_unit, place)


def _amount(draft: Draft) -> tuple[Number, str]:
    text = draft.reader.take_number()
    if text is None:
        draft.reader.fail("the tolerance has no number", hint="26 +2/-3 dBm")
    return Number(text=text), draft.reader.take_unit() or ""


def _tolerance(
    draft: Draft,
    nominal: Expression,
    written: str,
    plus: Expression,
    minus: Expression,
    amount_unit: str,
    place: int,
) -> LimitNode:
    if not written and not _nominal_unit(nominal):
        written = _unit_of_nominal(draft, nominal, amount_unit)
    unit = draft.settle([nominal], written, place)
    tolerance_unit, reading = draft.placed(place, lambda: settle_tolerance(amount_unit, unit))
    draft.say(reading)
    return Tolerance(
        nominal=plain(nominal, unit),
        plus=plain(plus, tolerance_unit, amount_unit),
        minus=plain(minus, tolerance_unit, amount_unit),
        unit=unit,
        tolerance_unit=tolerance_unit,
    )


def _unit_of_nominal(draft: Draft, nominal: Expression, amount_unit: str) -> str:
    """Return the unit of a nominal written without one: that of the tolerance, unless it only counts differences."""
    relative = amount_unit in ("%", "ppm") or (
        bool(draft.hint) and is_difference(amount_unit or "dB", draft.hint)
    )
    if draft.hint and relative:
        return draft.hint
    named = any(isinstance(part, Name) for part in walk(nominal))
    return "" if named and amount_unit == "dB" else amount_unit


def _nominal_unit(node: Expression) -> str:
    units = [part.unit for part in walk(node) if isinstance(part, Name | Number) and part.unit]
    return units[0] if units else ""


def plain(node: Expression, *units: str) -> Expression:
    """Drop the unit of a single number that is said by the limit itself."""
    if isinstance(node, Negative):
        return Negative(operand=plain(node.operand, *units))
    return Number(text=node.text) if isinstance(node, Number) and node.unit in units else node
