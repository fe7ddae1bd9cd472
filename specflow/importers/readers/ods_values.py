"""One cell of an OpenDocument sheet: what it holds and what is odd about it (OpenDocument 1.3 part 3, 19.387)."""

from __future__ import annotations

import re
from datetime import date, datetime, time, timedelta

from specflow.importers.readers.odd_cells import OddCell, OddKind
from specflow.importers.readers.ods_styles import OdsStyles
from specflow.importers.readers.stores import Value

Attributes = dict[str, str]
Found = tuple[Value, OddCell | None]

_NUMBERS = frozenset({"float", "percentage", "currency"})
_NUMBER = re.compile(r"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")
_DURATION = re.compile(r"(-?)P(?:(\d+)D)?T(?:(\d+)H)?(?:(\d+)M)?(?:(\d+)(?:[.,](\d+))?S)?")
_ERROR = re.compile(r"#[A-Z/0!?]+[!?A-Z0]?|Err:[0-9]{3}|#N/A")


class Unreadable(Exception):
    """A cell contradicts its own type."""


def read_cell(attributes: Attributes, shown: str | None, style: str, styles: OdsStyles) -> Found:
    """The value of a cell with its oddity; ``shown`` is the text that it shows, None where it has none, as a formula
    that was never calculated. Raises Unreadable."""
    text = shown or ""
    kind = attributes.get("office:value-type", "")
    formula = "table:formula" in attributes
    if attributes.get("calcext:value-type") == "error" or (formula and _ERROR.fullmatch(text.strip())):
        return "", OddCell(OddKind.ERROR, text.strip() or "error")
    if not kind:
        return ("", OddCell(OddKind.NO_VALUE)) if formula and shown is None else (text, None)
    if kind == "string":
        return attributes.get("office:string-value", text), None
    written = _written(kind, attributes)
    if written is None:
        if formula:
            return "", OddCell(OddKind.NO_VALUE)
        raise Unreadable(f"a cell of the type {kind} without a value")
    if kind == "float" and formula and text in ("TRUE", "FALSE"):
        return text == "TRUE", None
    if kind in _NUMBERS:
        return _number(written), _odd_number(kind, attributes, styles.odd(style))
    if kind == "boolean":
        if written not in ("true", "false"):
            raise Unreadable(f"{written[:20]!r} is no truth value")
        return written == "true", None
    return (_date(written) if kind == "date" else _time(written)), OddCell(OddKind.DATE, "ISO 8601")


def _written(kind: str, attributes: Attributes) -> str | None:
    if kind in _NUMBERS:
        return attributes.get("office:value")
    if kind in ("boolean", "date", "time"):
        return attributes.get(f"office:{kind}-value")
    raise Unreadable(f"a cell of the unknown type {kind[:20]!r}")


def _number(text: str) -> float:
    if not _NUMBER.fullmatch(text):
        raise Unreadable(f"{text[:20]!r} is no number")
    return float(text)


def _odd_number(kind: str, attributes: Attributes, odd: OddCell | None) -> OddCell | None:
    """The type of the cell says percent and currency, too, whatever its style."""
    if kind == "percentage" and (odd is None or odd.kind is not OddKind.PERCENT):
        return OddCell(OddKind.PERCENT, "percentage")
    if kind == "currency" and odd is None:
        return OddCell(OddKind.UNIT_FORMAT, "currency", attributes.get("office:currency", "currency"))
    return odd


def _date(text: str) -> Value:
    try:
        if "T" not in text:
            return date.fromisoformat(text)
        moment = datetime.fromisoformat(text)
    except ValueError:
        raise Unreadable(f"{text[:30]!r} is no date") from None
    return moment.date() if moment.time() == time(0) else moment


def _time(text: str) -> Value:
    match = _DURATION.fullmatch(text)
    if match is None or len(text) > 40:
        raise Unreadable(f"{text[:20]!r} is no time")
    sign, days, hours, minutes, seconds, fraction = match.groups()
    try:
        span = timedelta(
            days=int(days or 0),
            hours=int(hours or 0),
            minutes=int(minutes or 0),
            seconds=int(seconds or 0),
            microseconds=int(((fraction or "") + "000000")[:6]),
        )
        if sign or span >= timedelta(days=1):
            return -span if sign else span
        return (datetime.min + span).time()
    except OverflowError:
        raise Unreadable(f"{text[:20]!r} is no time") from None
