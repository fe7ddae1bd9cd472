"""Reading the text of a result cell: a number, a bound, a range, or a blank with its reason.

A reading is an interval: "-3.2" is the point [-3.2, -3.2], "<-90" is (-inf, -90]. A blank is a cell that holds no
result on purpose; anything else is refused, so that no cell is read wrongly in silence.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass

from specflow.errors import UnitError
from specflow.units.number import parse_number
from specflow.units.parse import parse_unit
from specflow.units.spelling import repaired
from specflow.units.unit import Unit


@dataclass(frozen=True, slots=True)
class Reading:
    """All values that the text allows, ends included; ``text`` is the cell as it was written."""

    lo: float
    hi: float
    text: str

    @property
    def is_point(self) -> bool:
        """Whether the text gave one value and not a bound or a range."""
        return self.lo == self.hi


@dataclass(frozen=True, slots=True)
class Blank:
    """A cell without a result, and why."""

    reason: str
    text: str


_BLANKS = {
    "nothing written": "| - | -- | --- | — | —— | ― | . | ... | … | ? | none | null | nil | blank | empty",
    "not applicable": "n/a | na | n.a. | n.a | not applicable | n/ap | #n/a | #n/a n/a",
    "not measured": "n.m. | nm | n/m | n.m | not measured | not tested | n.t. | n/t | skipped",
    "not available": "not available | n/av | missing | no data",
    "overload of the instrument": "ol | o.l. | o/l | 0l | +ol | -ol | ovl | ovld | ovf | ovr | overload | overflow "
    "| over range | overrange | over | out of range | oor | clipped | saturated",
    "invalid at the instrument": "uncal | invalid | unlock | unlocked | under range | underflow | err | error",
    "not a number": "nan | #num! | inf | -inf | +inf | infinity | -infinity | 1.#inf | -1.#ind | 1.#qnan",
    "to be determined": "tbd | tba | tbc | ffs | tbs",
    "error in the cell": "#div/0! | #value! | #ref! | #name? | #null! | #getting_data | #spill! | #calc!",
}
_REASONS = {word.strip(): reason for reason, words in _BLANKS.items() for word in words.split("|")}

_BOUND = re.compile(r"^(?P<sign><=|>=|=<|=>|≤|≥|⩽|⩾|<|>)\s*(?P<number>.+)$")
_RANGE = re.compile(r"^(?P<lo>.*\d)\s*(?:\.\.+|…| to )\s*(?P<hi>[-+]?[\d.,].*)$")
# The shortest beginning that ends in a digit and is followed by what a unit starts with; neither the "e" of an exponent
# nor the "to" of a range is one.
_WITH_UNIT = re.compile(r"^(?P<number>.*?\d\.?) ?(?P<unit>(?![eE][+-]?\d|to )(?:[^\W\d]|[%‰°√\[:]).*)$")
_SCPI_NOT_A_NUMBER = 9.9e37  # SCPI-1999 volume 1, 7.2.1: 9.9E37 is infinity, 9.91E37 is not-a-number
_UNSURE = (
    ("±", "its uncertainty belongs in a column of its own"),
    ("+/-", "its uncertainty belongs in a column of its own"),
    ("~", "an approximate value proves nothing: write the value, or a bound"),
    ("≈", "an approximate value proves nothing: write the value, or a bound"),
    ("*", "a mark beside the number: put the note in a column of its own"),
    ("(", "brackets can mean a negative value or a tentative one: write which"),
)


def parse_reading(text: str, *, decimal_comma: bool | None = None, grouped: bool = True) -> Reading | Blank:
    """Read the text of one cell: "−3,2", "1 234.5", "<-90", "> 60", "-90 … -80", "N/A", "OL", "—".

    ``decimal_comma`` and ``grouped`` are what the sheet is known to use (``parse_number``). Raises UnitError where the
    text is no reading, or where it has two and the sheet does not say which ("1,234").
    """
    plain = repaired(text)
    reason = _REASONS.get(plain.lower())
    if reason is not None:
        return Blank(reason, text)
    bound = _BOUND.match(plain)
    if bound:
        limit = parse_number(bound["number"], decimal_comma=decimal_comma, grouped=grouped)
        below = "<" in bound["sign"] or bound["sign"] in "≤⩽"
        return Reading(-math.inf, limit, text) if below else Reading(limit, math.inf, text)
    between = _RANGE.match(plain)
    if between:
        return _between(between["lo"], between["hi"], text, decimal_comma, grouped)
    return _point(plain, text, decimal_comma, grouped)


def parse_reading_with_unit(
    text: str, *, decimal_comma: bool | None = None, grouped: bool = True
) -> tuple[Reading | Blank, Unit | None]:
    """Read a cell that may carry its unit: "<-90 dBm", "> 60dB", "3.2"; the unit is None where none is written."""
    plain = repaired(text)
    found = _WITH_UNIT.match(plain)
    if plain.lower() in _REASONS or found is None:
        return parse_reading(text, decimal_comma=decimal_comma, grouped=grouped), None
    reading = parse_reading(found["number"], decimal_comma=decimal_comma, grouped=grouped)
    unit = parse_unit(found["unit"])
    return Reading(reading.lo, reading.hi, text) if isinstance(reading, Reading) else reading, unit


def _between(lo: str, hi: str, text: str, decimal_comma: bool | None, grouped: bool) -> Reading:
    ends = [parse_number(end, decimal_comma=decimal_comma, grouped=grouped) for end in (lo, hi)]
    if ends[0] > ends[1]:
        raise UnitError(f"'{text}' starts above its end", hint="write the smaller value first")
    return Reading(ends[0], ends[1], text)


def _point(plain: str, text: str, decimal_comma: bool | None, grouped: bool) -> Reading | Blank:
    for mark, hint in _UNSURE:
        if mark in plain:
            raise UnitError(f"'{text}' is not one number", hint=hint)
    value = parse_number(plain, decimal_comma=decimal_comma, grouped=grouped)
    if abs(value) >= _SCPI_NOT_A_NUMBER:
        return Blank("not a number, as SCPI instruments write it", text)
    return Reading(value, value, text)
