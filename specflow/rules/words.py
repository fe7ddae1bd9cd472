"""Words that several rules use: counts, places and lists that do not run on."""

from __future__ import annotations

import math
from collections.abc import Sequence

from specflow.units import format_value

#: How many things of a list are named before "and 5 more".
MOST_LISTED = 3


def counted(number: int, noun: str) -> str:
    """Return ``1 point``, ``2 points``."""
    return f"{number:,} {noun}{'' if number == 1 else 's'}"


def listed(words: Sequence[str], most: int = MOST_LISTED) -> str:
    """Return ``a, b, c and 5 more``."""
    head = ", ".join(words[:most])
    rest = len(words) - most
    return f"{head} and {rest} more" if rest > 0 else head


def amount(value: float, unit: str, *, signed: bool = False) -> str:
    """Return a difference to two decimals with its unit: ``0.35 dB``."""
    number = format_value(value, decimals=2)
    sign = "+" if signed and value >= 0 else ""
    return f"{sign}{number} {unit}" if unit not in ("", "1") else f"{sign}{number}"


def interval(low: float, high: float, unit: str) -> str:
    """Return a reading: ``at least 40 dB``, ``1 to 2 dB``, ``3 dB``."""
    tail = f" {unit}" if unit not in ("", "1") else ""
    if low == high:
        return f"{format_value(low)}{tail}"
    if math.isinf(low):
        return f"at most {format_value(high)}{tail}"
    if math.isinf(high):
        return f"at least {format_value(low)}{tail}"
    return f"{format_value(low)} to {format_value(high)}{tail}"


def shortened(text: str, most: int = 40) -> str:
    """Return a text cut to ``most`` characters, with the dots that say so."""
    return text if len(text) <= most else f"{text[: most - 1]}…"


def at_point(words: str, item: str = "") -> str:
    """Return `` at 29.5 GHz, item 7``, or nothing where neither is known."""
    parts = [part for part in (words, f"item {item}" if item else "") if part]
    return f" at {', '.join(parts)}" if parts else ""
