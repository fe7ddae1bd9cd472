"""The conditions cell of a table of published limits: ``bw_MHz=50|100;band=n257;f=30 MHz-1 GHz;note=...``.

A condition is parsed when its value is numbers, a range, or plain words; anything else is kept as it was written.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

from specflow.errors import UnitError
from specflow.units import format_unit, parse_unit

_ENDINGS = ["Hz", "kHz", "MHz", "GHz", "dBm", "dBW", "dB", "W", "ms", "us", "ns", "ppm", "deg", "K"]
_NUMBER = r"[+-]?\d+(?:\.\d+)?"
_UNIT = r"[A-Za-zµ°%]+(?:/[A-Za-z]+)?"
_NUMBERS = re.compile(rf"{_NUMBER}(?:\|{_NUMBER})*")
_QUANTITY = re.compile(rf"({_NUMBER}) ?({_UNIT})")
_RANGE = re.compile(rf"([(\[])?({_NUMBER})(?: ?({_UNIT}))?(?:-|\.\.)({_NUMBER})(?: ?({_UNIT}))?([)\]])?")
_ONE_END = re.compile(rf"(<=|>=|<|>) ?({_NUMBER})(?: ?({_UNIT}))?")
_WORDS = re.compile(r"[\w./+\-]+(?:\|[\w./+\-]+)*")
_REMARK = re.compile(r"(.+?) (\(.*\))")


@dataclass(frozen=True, slots=True)
class PublishedCondition:
    """One condition: either ``numbers`` (as written), or a range with open ends as None, or ``words``."""

    name: str
    verbatim: str
    unit: str = ""
    numbers: tuple[str, ...] = ()
    words: tuple[str, ...] = ()
    low: str | None = None
    high: str | None = None
    low_open: bool = False
    high_open: bool = False

    @property
    def is_range(self) -> bool:
        """True when the condition is a range with at least one end."""
        return self.low is not None or self.high is not None

    def value_text(self) -> str:
        """Return the value as the grammar of limits writes it, for a table of cases."""
        if self.is_range:
            ends = (
                self.low or "",
                "<" if self.low_open else "",
                "<" if self.high_open else "",
                self.high or "",
            )
            return f"{ends[0]}{ends[1]}..{ends[2]}{ends[3]}"
        return " | ".join(self.numbers or (f"'{word}'" for word in self.words))


@dataclass(frozen=True, slots=True)
class WrittenCondition:
    """A condition as it stands in the cell: its key, its value, and the two together."""

    key: str
    value: str

    @property
    def verbatim(self) -> str:
        """The condition as written."""
        return f"{self.key}={self.value}" if self.value else self.key


def split_conditions(cell: str) -> tuple[WrittenCondition, ...]:
    """Take a conditions cell apart at its semicolons; the first '=' parts key and value."""
    parts = [part.strip() for part in cell.split(";")]
    pairs = [part.partition("=") for part in parts if part]
    return tuple(WrittenCondition(key.strip(), value.strip()) for key, _, value in pairs)


def name_and_unit(key: str) -> tuple[str, str]:
    """Take the unit off a key: bw_MHz is bw in MHz."""
    base, _, ending = key.rpartition("_")
    return (base, ending) if base and ending in _ENDINGS else (key, "")


def parse_condition_value(written: WrittenCondition) -> tuple[PublishedCondition | None, bool]:
    """Return the parsed condition, None when it cannot be parsed, and whether something of it was left over."""
    parsed = _parsed(written, written.value)
    if parsed is not None:
        return parsed, False
    remark = _REMARK.fullmatch(written.value)
    if remark is None:
        return None, True
    return _parsed(written, remark.group(1)), True


def _parsed(written: WrittenCondition, value: str) -> PublishedCondition | None:
    name, unit = name_and_unit(written.key)
    if _NUMBERS.fullmatch(value):
        return PublishedCondition(name, written.verbatim, unit, numbers=tuple(value.split("|")))
    quantity = _QUANTITY.fullmatch(value)
    if quantity is not None and _is_unit(quantity.group(2)):
        return PublishedCondition(name, written.verbatim, quantity.group(2), numbers=(quantity.group(1),))
    one = _ONE_END.fullmatch(value)
    if one is not None and (one.group(3) is None or _is_unit(one.group(3))):
        return _one_ended(name, written, one, unit)
    both = _RANGE.fullmatch(value)
    if both is not None and all(text is None or _is_unit(text) for text in both.group(3, 5)):
        return _ranged(name, written, both, unit)
    if _WORDS.fullmatch(value):
        return PublishedCondition(name, written.verbatim, words=tuple(value.split("|")))
    return None


def _one_ended(name: str, written: WrittenCondition, match: re.Match[str], unit: str) -> PublishedCondition:
    sign, number, own = match.groups()
    is_open = sign in "<>"
    if sign.startswith("<"):
        return PublishedCondition(name, written.verbatim, own or unit, high=number, high_open=is_open)
    return PublishedCondition(name, written.verbatim, own or unit, low=number, low_open=is_open)


def _ranged(name: str, written: WrittenCondition, match: re.Match[str], unit: str) -> PublishedCondition:
    left, low, low_unit, high, high_unit, right = match.groups()
    if low_unit and high_unit and low_unit != high_unit:
        return PublishedCondition(
            name, written.verbatim, high_unit, low=_in_unit(low, low_unit, high_unit), high=high
        )
    return PublishedCondition(
        name,
        written.verbatim,
        high_unit or low_unit or unit,
        low=low,
        high=high,
        low_open=left == "(",
        high_open=right == ")",
    )


def _in_unit(number: str, source: str, target: str) -> str:
    """Write a number in another unit of the same linear quantity, exactly for powers of ten: 30 MHz is 0.03 GHz."""
    value = float(number) * parse_unit(source).scale / parse_unit(target).scale
    return f"{value:.12g}"


def _is_unit(text: str) -> bool:
    try:
        return bool(format_unit(parse_unit(text)))
    except UnitError:
        return False
