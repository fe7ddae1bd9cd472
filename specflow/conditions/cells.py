"""The pieces of what people type into a values cell: lists, ranges, numbers with units.

Lists are separated by semicolons, or by commas where a comma cannot be a decimal sign. A decimal comma is
read where semicolons separate, and a cell that has two readings is refused with both of them.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass

from specflow.errors import ConditionsError, UnitError
from specflow.units import parse_number, parse_unit, split_quantity

_RANGE_WORDS = re.compile(
    r"^(?:from\s+)?(?P<low>.+?)\s*(?:\bto\b|\.\.+|…|–|—)\s*(?P<high>.+)$", re.IGNORECASE
)
_RANGE_HYPHEN = re.compile(r"^(?P<low>[+-]?[\d.,]*\d\s*[^\d\s,;-]*)\s*-\s*(?P<high>[+-]?\d.*)$")
_SURELY_DECIMAL = re.compile(r"^[+-]?(?:0,\d+|\d*,(?:\d{1,2}|\d{4,}))(?!\d)")
_ANY_COMMA = re.compile(r"^[+-]?\d*,\d+(?![\d,.])")
_ONE_COMMA = re.compile(r"^\s*[+-]?\d+,\d+\D*$")


@dataclass(frozen=True, slots=True)
class Number:
    """A number as typed, with the unit written beside it ("" where none is)."""

    value: float
    unit: str


def plain(text: str) -> str:
    """Return the text with one kind of minus sign, space and comparison sign."""
    for odd, usual in (
        ("−", "-"),
        ("\u00a0", " "),
        ("\u202f", " "),
        ("≥", ">="),
        ("≤", "<="),
        ("+/-", "±"),
        ("+-", "±"),
    ):
        text = text.replace(odd, usual)
    return " ".join(text.split())


def read_number(text: str, *, decimal_comma: bool | None = None) -> Number:
    """Read "30 GHz", "-40", "27,5GHz". ConditionsError where it is no number, or the unit is not known."""
    try:
        number, unit = split_quantity(text)
        if unit:
            parse_unit(unit)
        return Number(parse_number(number, decimal_comma=decimal_comma), unit)
    except UnitError as error:
        raise ConditionsError(error.message, hint=error.hint) from error


def read_numbers(entries: Sequence[str]) -> list[Number]:
    """Read the numbers of one list: where one of them shows a decimal comma, all commas are decimal."""
    shown = any(_SURELY_DECIMAL.match(entry) for entry in entries)
    return [
        read_number(entry, decimal_comma=True if shown and "." not in entry else None) for entry in entries
    ]


def is_number(text: str) -> bool:
    """Whether the text is a number, with or without a known unit (and perhaps with a comma of unclear meaning)."""
    try:
        read_number(text, decimal_comma=True if _ANY_COMMA.match(text) else None)
    except ConditionsError:
        return False
    return True


def split_list(text: str) -> tuple[str, ...]:
    """Return the entries of a list. ConditionsError where a comma could be a decimal sign or a separator."""
    if ";" in text or "\n" in text:
        parts = re.split(r"[;\n]", text)
    elif _ONE_COMMA.match(text):
        one, other = text.strip(), re.sub(r"\s*,\s*", "; ", text.strip())
        raise ConditionsError(
            f"'{text}' is either the number {one.replace(',', '.')} or the two values {other}",
            hint=f"write {one.replace(',', '.')} or {other}",
        )
    else:
        parts = text.split(",")
    return tuple(part.strip() for part in parts if part.strip())


def split_range(text: str) -> tuple[str, str] | None:
    """Return the two ends of "-40 to 85 °C", "27.5..30", "27.5 – 30 GHz", "27.5-30"; None where it is no
    range.
    """
    for pattern in (_RANGE_WORDS, _RANGE_HYPHEN):
        match = pattern.match(text)
        if match and ";" not in text and is_number(match["low"]) and is_number(match["high"]):
            return match["low"], match["high"]
    return None
