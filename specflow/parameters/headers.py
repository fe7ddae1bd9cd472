"""A header of a sheet taken apart: its words, its unit, and words that qualify but do not name.

Everything here is about spelling: no unit is resolved, so that a header costs microseconds.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import combinations

_TOKEN = re.compile(r"[^\W_]+|%|°")
_BRACKET = re.compile(r"\(([^()]*)\)|\[([^\[\]]*)\]|\{([^{}]*)\}")
_TAIL = re.compile(r"^(?P<name>.*\w.*?)\s*(?:,|/|\bin\b)\s*(?P<unit>[^,]+)$")
_LONG_UNITS = (
    "db dbm dbw dbc dbi dbic dbil dbd dbr dbfs dbv dbuv dbmv dbua dbhz dbk dbpp dbsm kw mw uw kv mv uv ma ua na degc "
    "degf deg degrees rad mrad hz khz mhz ghz thz ms us ns ps fs sec cm mm um nm m2 cm2 mm2 ppm ppb pct percent ohm "
    "ohms kelvin celsius watt watts volt volts amp amps % ° °c"
)
_SHORT_UNITS = "w v a k c f h m s 1 lin linear ratio"
_COMPANIONS = "rms pk pp p per"
_QUALIFYING = (
    "rms peak pk max maximum min minimum mean avg average averaged median worst typ typical nom nominal burst pp std "
    "measured meas measurement value values result results reading limit spec requirement basic ota tx rx ue bs dut "
    "hpol vpol rhcp lhcp horizontal vertical pol simulated sim"
)
_UNIT_WORDS = frozenset(_LONG_UNITS.split())
_BRACKETED_UNIT_WORDS = _UNIT_WORDS | frozenset(_SHORT_UNITS.split())
_UNIT_COMPANIONS = frozenset(_COMPANIONS.split())
_QUALIFIERS = frozenset(_QUALIFYING.split())
_MOST_QUALIFIERS = 5


@dataclass(frozen=True, slots=True)
class Header:
    """The parts of a header.

    ``words`` stand outside brackets and unit, ``bracketed`` words are no unit, ``unit`` is as written; ``every`` word.
    """

    words: tuple[str, ...]
    bracketed: tuple[str, ...]
    unit: str
    every: tuple[str, ...]


def tokens(text: str) -> tuple[str, ...]:
    """Return the words of a text: case, blanks, dots, dashes, underscores and bars do not matter."""
    plain = unicodedata.normalize("NFKC", text).casefold().replace("μ", "u").replace("ω", "ohm")
    return tuple(_TOKEN.findall(plain))


def spelling_key(words: Sequence[str]) -> str:
    """Return what two spellings are compared by: "Noise Figure", "noise_figure" and "NoiseFigure" are one."""
    return "".join(words)


def split_header(text: str) -> Header:
    """Take a header apart: "EVM rms [%]" has the words evm, rms and the unit "%"."""
    unit = ""
    bracketed: list[str] = []
    for match in _BRACKET.finditer(text):
        inside = next(group for group in match.groups() if group is not None)
        if not unit and looks_like_unit(inside):
            unit = inside.strip()
        else:
            bracketed += tokens(inside)
    name = _BRACKET.sub(" ", text)
    if not unit:
        name, unit = _without_tail(name)
    return Header(tokens(name), tuple(bracketed), unit, tokens(text))


def looks_like_unit(text: str) -> bool:
    """Say whether a text in brackets, or after a comma or a slash, is spelled like a unit."""
    words = tokens(text)
    if not words or words[0] not in _BRACKETED_UNIT_WORDS:
        return False
    return all(
        word in _BRACKETED_UNIT_WORDS or word in _UNIT_COMPANIONS or word.isdecimal() for word in words
    )


def qualifier_choices(words: Sequence[str]) -> Iterator[tuple[tuple[str, ...], tuple[str, ...]]]:
    """Yield (words that remain, words left out), leaving out as few qualifying words as possible first."""
    places = [place for place, word in enumerate(words) if word in _QUALIFIERS][:_MOST_QUALIFIERS]
    for count in range(len(places) + 1):
        for chosen in combinations(places, count):
            kept = tuple(word for place, word in enumerate(words) if place not in chosen)
            if kept:
                yield kept, tuple(words[place] for place in chosen)


def _without_tail(name: str) -> tuple[str, str]:
    """Cut a unit off the end: "Gain dBm/MHz", "gain_db", "Gain, dB", "Gain / dB", "Gain in dB"."""
    before, blank, last = name.rstrip().rpartition(" ")
    if blank and "/" in last.strip("/") and looks_like_unit(last):
        return before, last
    start = _start_of_unit_words(name)
    if start:
        return re.sub(r"\bin\s*$", "", name[:start]), name[start:].strip()
    tail = _TAIL.match(name)
    if tail and looks_like_unit(tail["unit"]):
        return tail["name"], tail["unit"].strip()
    return name, ""


def _start_of_unit_words(name: str) -> int:
    """Return where the units (and bandwidths in figures) at the end begin, 0 where the end is no unit."""
    words = [(match.start(), match.group().casefold()) for match in _TOKEN.finditer(name)]
    start = len(words)
    while start > 1 and (words[start - 1][1] in _UNIT_WORDS or words[start - 1][1].isdecimal()):
        start -= 1
    while start < len(words) and words[start][1].isdecimal():
        start += 1
    return words[start][0] if 0 < start < len(words) else 0
