"""The grammar of values with a tolerance: 54 ± 1.5 dBm, 26 +2/-3 dBm, ± 0.1 ppm, within 3.4 dB of P_rated[dBm]."""

from __future__ import annotations

import re

from specflow.limits.conversion import is_difference
from specflow.limits.draft import Draft
from specflow.limits.expression_grammar import last_unit
from specflow.limits.expression_shape import walk
from specflow.limits.settling import settle_tolerance
from specflow.limits.value_grammar import plain, read_valued
from specflow.model.expression import Expression, Name, Negative, Number
from specflow.model.limit import Between, LimitNode, Tolerance

_ASYMMETRIC = re.compile(r"(?:\+ *(?=[\d.])[^/]{1,24}/ *[-–]|[-–] *(?=[\d.])[^/]{1,24}/ *\+)")
PLUS_MINUS = ("±", "+/-", "+-")
#: What may stand before a tolerance: 22 dB (+1/-0.5), 45 dBm, +1/-2 dB.
_BEFORE_TOLERANCE = re.compile(r"[,(] *(?=±|\+/-|\+-|[+\-–] *[\d.][^/()]{0,20}/ *[+\-–] *[\d.])")


def read_tolerance(draft: Draft, value: Expression, written: str, place: int) -> LimitNode | None:
    """Read the tolerance that follows a nominal, also in brackets or behind a comma; None where there is none."""
    reader = draft.reader
    before = reader.take_pattern(_BEFORE_TOLERANCE) or ""
    bracketed = before.startswith("(")
    if reader.take(*PLUS_MINUS) is not None:
        amount, amount_unit = read_valued(draft)
        amount_unit = amount_unit or last_unit(amount)
        if bracketed:
            reader.expect(")", "the tolerance")
            amount_unit = amount_unit or reader.take_unit() or ""
        return _tolerance(draft, value, written, amount, amount, amount_unit, place)
    if before or _ASYMMETRIC.match(reader.text, reader.place):
        return _asymmetric(draft, value, written, place, bracketed=bracketed)
    return None


def read_within(draft: Draft) -> LimitNode:
    """Read ``within 3.4 dB of P_rated[dBm]``."""
    place = draft.reader.place
    draft.reader.take(*PLUS_MINUS)
    number = draft.reader.take_number()
    if number is None:
        draft.reader.fail(
            "'within' needs an amount and what it is about", hint="within 3.4 dB of P_rated[dBm]"
        )
    unit = draft.reader.take_unit() or ""
    if draft.reader.take_words("of") is None:
        draft.reader.fail("expected 'of' after the amount", hint="within 3.4 dB of P_rated[dBm]")
    nominal, written = read_valued(draft)
    amount = Number(text=number)
    return _tolerance(draft, nominal, written, amount, amount, unit, place)


def read_about_zero(draft: Draft) -> LimitNode:
    place = draft.reader.place
    amount, written = read_valued(draft)
    return two_sided_zero(draft, amount, written, place)


def two_sided_zero(draft: Draft, amount: Expression, written: str, place: int) -> LimitNode:
    unit = draft.settle([amount], written, place)
    tolerance_unit, reading = draft.placed(place, lambda: settle_tolerance(unit, unit))
    draft.say(reading)
    amount = plain(amount, unit)
    return Tolerance(plus=amount, minus=amount, unit=unit, tolerance_unit=tolerance_unit)


def _asymmetric(
    draft: Draft, nominal: Expression, written: str, place: int, *, bracketed: bool = False
) -> LimitNode:
    """Read ``+2/-3`` or ``-3/+2`` after a nominal."""
    plus, minus, unit = _plus_and_minus(draft, bracketed=bracketed)
    return _tolerance(draft, nominal, written, plus, minus, unit, place)


def read_asymmetric_about_zero(draft: Draft) -> LimitNode | None:
    """Read ``+9/-5 ppm`` or ``-5/+9 ppm`` without a nominal as the range from -5 to 9 ppm; None where none stands."""
    place = draft.reader.place
    if not _ASYMMETRIC.match(draft.reader.text, place):
        return None
    plus, minus, written = _plus_and_minus(draft)
    unit = draft.settle([plus, minus], written, place)
    draft.say("no nominal value is written, so the tolerances are read about zero")
    lower, upper = Negative(operand=plain(minus, unit)), plain(plus, unit)
    return Between(lower=lower, upper=upper, unit=unit)


def _plus_and_minus(draft: Draft, *, bracketed: bool = False) -> tuple[Number, Number, str]:
    """Read the two amounts, as plus and minus, and their unit, which may stand after each or after both."""
    reader = draft.reader
    first_sign = reader.take("+", "-", "–")
    first, first_unit = _amount(draft)
    reader.expect("/", "the first tolerance")
    second_sign = reader.take("+", "-", "–")
    second, second_unit = _amount(draft)
    if bracketed:
        reader.expect(")", "the tolerance")
        second_unit = second_unit or reader.take_unit() or ""
    if (first_sign == "+") is (second_sign == "+"):
        reader.fail("one tolerance is '+', the other '-'", hint="26 +2/-3 dBm")
    if first_unit and second_unit and second_unit != first_unit:
        reader.fail("the two tolerances have different units", hint="write both in one unit")
    plus, minus = (first, second) if first_sign == "+" else (second, first)
    return plus, minus, second_unit or first_unit


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
    if not written and not nominal_unit(nominal):
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


def nominal_unit(node: Expression) -> str:
    units = [part.unit for part in walk(node) if isinstance(part, Name | Number) and part.unit]
    return units[0] if units else ""
