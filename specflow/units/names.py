"""Every spelling of a single unit, generated once from the table, and the look-up that finds one.

A spelling is taken as written where the table has it. Otherwise case is forgiven, except where it decides between
milli and mega: "GHZ" and "Khz" are read, "mhz" is refused.
"""

from __future__ import annotations

import difflib
from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from functools import cache

from specflow.errors import UnitError
from specflow.units import dimension
from specflow.units.table import AMBIGUOUS, LINEAR, LOGARITHMIC, PREFIXES, LinearRow, LogRow

# Two letters say too little once their case is gone: NF is a noise figure, not a nanofarad.
_SHORTEST_FORGIVEN = 3


@dataclass(frozen=True, slots=True)
class Name:
    """A linear unit with its prefix resolved."""

    symbol: str
    scale: Fraction
    offset: Fraction
    exponents: tuple[tuple[str, Fraction], ...]

    @property
    def dimension(self) -> str:
        return dimension.name(dict(self.exponents))


def linear_name(text: str) -> Name | None:
    """The linear unit of this spelling, or None; refuses the spellings that mean several things."""
    if text in AMBIGUOUS:
        raise UnitError(f"unit '{text}' has more than one meaning", hint=AMBIGUOUS[text])
    return _linear().get(text) or _forgiving_case(text)


def log_row(text: str) -> LogRow | None:
    """The logarithmic unit of this spelling, in any case ("DBM", "dbuv"), or None."""
    if text in AMBIGUOUS:
        raise UnitError(f"unit '{text}' has more than one meaning", hint=AMBIGUOUS[text])
    return _logarithmic().get(text) or _logarithmic().get(text.casefold())


def nearest(text: str) -> list[str]:
    """Up to three canonical symbols that look like the text, for the message about an unknown unit."""
    known = {spelling.casefold(): name.symbol for spelling, name in reversed(_linear().items())}
    known |= {spelling.casefold(): row.symbol for spelling, row in _logarithmic().items()}
    close = difflib.get_close_matches(text.casefold(), known, n=6, cutoff=0.6)
    return list(dict.fromkeys(known[spelling] for spelling in close))[:3]


def _forgiving_case(text: str) -> Name | None:
    if len(text) < _SHORTEST_FORGIVEN:
        return None
    alike = _by_folded_case().get(text.casefold(), ())
    found = {name.symbol: name for name in alike if _same_mega(name, text)}
    return next(iter(found.values())) if len(found) == 1 else None


def _same_mega(name: Name, text: str) -> bool:
    """Milli and mega differ by their case only, so an "m" or "M" in front must stand as it is in the symbol."""
    return name.symbol[0] == text[0] or text[0] not in "mM"


@cache
def _linear() -> dict[str, Name]:
    names: dict[str, Name] = {}
    for row in LINEAR:
        for spelling, name in _spelled(row):
            names.setdefault(spelling, name)
    return names


def _spelled(row: LinearRow) -> Iterator[tuple[str, Name]]:
    exponents = tuple(dimension.read(row.dimension).items())
    for spelling in (row.symbol, *row.prefixed, *row.spellings):
        yield spelling, Name(row.symbol, row.scale, row.offset, exponents)
    for prefix in row.prefixes:
        name = Name(prefix + row.symbol, row.scale * PREFIXES[prefix], row.offset, exponents)
        for spelling in (row.symbol, *row.prefixed):
            yield prefix + spelling, name
            if prefix == "µ":
                yield "u" + spelling, name


@cache
def _by_folded_case() -> dict[str, tuple[Name, ...]]:
    folded: dict[str, tuple[Name, ...]] = {}
    for spelling, name in _linear().items():
        folded[spelling.casefold()] = (*folded.get(spelling.casefold(), ()), name)
    return folded


@cache
def _logarithmic() -> dict[str, LogRow]:
    rows: dict[str, LogRow] = {}
    for row in LOGARITHMIC:
        for spelling in (row.symbol, *row.spellings):
            for written in (spelling, spelling.replace("µ", "u")):
                rows[written] = rows[written.casefold()] = row
    return rows
