"""Reading a number as people write it: Unicode minus, grouped thousands, decimal comma where it can only be that."""

from __future__ import annotations

import math
import re

from specflow.errors import UnitError
from specflow.units.spelling import repaired

_PLAIN = re.compile(r"^(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$")
_GROUPED_BY_SPACE = re.compile(r"^(\d{1,3}(?:[ '’]\d{3})+)((?:[.,]\d+)?)$")
_GROUPED_BY_COMMA = re.compile(r"^\d{1,3}(?:,\d{3})+(?:\.\d+)?$")
_GROUPED_BY_POINT = re.compile(r"^\d{1,3}(?:\.\d{3})+(?:,\d+)?$")
_DECIMAL_COMMA = re.compile(r"^\d*,\d+(?:[eE][+-]?\d+)?$")
_EITHER = re.compile(r"^[1-9]\d{0,2}[.,]\d{3}$")  # "1,234": a decimal, or a thousand


def parse_number(text: str, *, decimal_comma: bool | None = None, grouped: bool = True) -> float:
    """Read one number: "−3,2", "1 234.5", "1.234,5", "2e-3".

    ``decimal_comma`` says what the sheet uses: True, False, or None when it is not known. ``grouped`` says whether the
    other mark may part thousands: where that is not known, one group ("1.234" among decimal commas) is refused.
    Raises UnitError where the text is no number, and, with both readings named, where a mark could be either sign.
    """
    plain = repaired(text)
    sign, magnitude = (plain[0], plain[1:].lstrip()) if plain[:1] in ("+", "-") else ("", plain)
    if not grouped and decimal_comma is ("." in magnitude) and _EITHER.match(magnitude):
        raise _ambiguous(magnitude, text, "write it with its decimals, or without a mark between thousands")
    return float(sign + _canonical(magnitude, text, decimal_comma))


def _canonical(number: str, text: str, decimal_comma: bool | None) -> str:
    spaced = _GROUPED_BY_SPACE.match(number)
    if spaced:
        number = re.sub(r"[ '’]", "", spaced[1]) + spaced[2]
        return _canonical_part(number, text, decimal_comma, grouped=True)
    return _canonical_part(number, text, decimal_comma, grouped=False)


def _canonical_part(number: str, text: str, decimal_comma: bool | None, grouped: bool) -> str:
    if decimal_comma is None and not grouped and "," in number and _EITHER.match(number):
        raise _ambiguous(number, text, "say whether the sheet uses a decimal comma")
    if decimal_comma is not True:
        if _PLAIN.match(number):
            return _finite(number, text)
        if _GROUPED_BY_COMMA.match(number) and not number.startswith("0") and not grouped:
            return number.replace(",", "")
    if decimal_comma is not False:
        if _DECIMAL_COMMA.match(number) or (decimal_comma and _PLAIN.match(number) and "." not in number):
            return _finite(number.replace(",", "."), text)
        if _GROUPED_BY_POINT.match(number) and not number.startswith("0") and not grouped:
            return number.replace(".", "").replace(",", ".")
    raise _unreadable(number, text, decimal_comma)


def _finite(number: str, text: str) -> str:
    if math.isinf(float(number)):
        raise UnitError(f"'{text}' is too large to be a number")
    return number


def _ambiguous(number: str, text: str, hint: str) -> UnitError:
    decimal, thousands = number.replace(",", "."), re.sub("[.,]", "", number)
    return UnitError(f"'{text}' can be read as {decimal} or as {thousands}", hint=hint)


def _unreadable(number: str, text: str, decimal_comma: bool | None) -> UnitError:
    if decimal_comma is True and _PLAIN.match(number):
        return UnitError(f"'{text}' has a decimal point where decimal commas are stated")
    if decimal_comma is False and _DECIMAL_COMMA.match(number):
        return UnitError(f"'{text}' has a decimal comma where decimal points are stated")
    return UnitError(f"'{text}' is not a number")
