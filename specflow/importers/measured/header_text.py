"""A header taken apart: name, unit, what stands after "@", coverage factor. Spelling only; nothing is judged here."""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import lru_cache

from specflow.errors import UnitError
from specflow.importers.measured.scale_text import ScaleText, of_unit, without_factor
from specflow.parameters.headers import looks_like_unit, split_header
from specflow.units import Unit, parse_unit

_BRACKET = re.compile(r"\(([^()]*)\)|\[([^\[\]]*)\]|\{([^{}]*)\}")
_FACTOR = r"k\s*=\s*(?:[0-9]+(?:[.,][0-9]+)?)"
_FOOTNOTE_MARK = re.compile(r"(?<=[)\]])\s*[¹²³⁴⁵⁶⁷⁸⁹*†‡]+$")
_COVERAGE = re.compile(rf"[(\[]\s*{_FACTOR}\s*[)\]]|[,;]?\s*\b{_FACTOR}", re.IGNORECASE)
_PLUS_MINUS = re.compile(r"^(?:±|\+/-)\s*(?=\w)")
_PLACE = re.compile(r"\s*@\s*(?P<place>.+)$")
_TAIL = re.compile(r"^(?P<name>.*\S)\s+(?P<unit>°\s?[CFK]|[^\s\w]*d[Bb]\S*|\S*Hz|\S*[WVA]|%|deg\w*|K|ppm)$")
#: Nouns of which a single letter behind them is the name: "Channel A" is no current.
_LETTERED = re.compile(
    r"(?:channel|chan|ch|trace|marker|mkr|port|sensor|path|antenna|beam|run|side|group|set|receiver|input|output|site|"
    r"class|type|variant|version|option)\s+[A-Z]",
    re.IGNORECASE,
)
#: What a record calls the part that holds the rest: "conditions.frequency (GHz)", "results.gain".
_PART_OF_RECORD = re.compile(
    r"^(?:conditions?|results?|settings?|set_?up|environment|data|measurements?|measured|values?|readings?|parameters?)"
    r"\.(?=[^\W\d])",
    re.IGNORECASE,
)
_WORDS_NOT_UNITS = frozenset(
    [
        "min",
        "in",
        "day",
        "year",
        "sample",
        "samples",
        "symbol",
        "symbols",
        "oct",
        "dec",
        "number",
        "none",
        "mil",
        "g",
        "t",
    ]
)


@dataclass(frozen=True, slots=True)
class HeaderText:
    """``unit`` as written ("" without one); ``odd_unit`` stands where a unit would but is none that is known.

    ``place`` is what follows "@"; ``k`` a coverage factor; ``bracketed`` other words in brackets; ``scale`` a factor
    beside the unit.
    """

    text: str
    name: str
    unit: str = ""
    odd_unit: str = ""
    place: str = ""
    k: float | None = None
    bracketed: tuple[str, ...] = ()
    scale: ScaleText | None = None


@lru_cache(maxsize=4096)
def read_header(text: str) -> HeaderText:
    """Take a header apart: "Gain @ antenna face (dB)", "EIRP / dBm", "f, GHz", "U (dB), k=2", "Temp °C"."""
    whole = " ".join(text.split())
    rest, k = without_coverage(_FOOTNOTE_MARK.sub("", whole))
    rest, scale = _without_scale(_PART_OF_RECORD.sub("", rest))
    rest, unit, odd, bracketed = _without_brackets(rest)
    place = _PLACE.search(rest)
    found = place["place"].strip() if place else ""
    rest = _PLACE.sub("", rest).strip() if place else rest
    if not unit and found:
        found, unit = _without_tail(found) if not _starts_with_number(found) else (found, "")
    if not unit and not odd:
        rest, unit = _without_tail(_PLUS_MINUS.sub("± ", rest))
    if scale is not None and not unit:
        scale = ScaleText(scale.text)  # of which unit it is a part is not said
    return HeaderText(whole, rest.strip(" ,;:/-."), unit, odd, found, k, bracketed, scale)


def _without_scale(text: str) -> tuple[str, ScaleText | None]:
    """Cut a factor beside the unit out: "V (10^-3 V)" is "V (V)"; the unit alone is left in its brackets."""
    for match in _BRACKET.finditer(text):
        inside = next(group for group in match.groups() if group is not None)
        found = of_unit(inside)
        if found is not None and (not found[0] or _is_unit(found[0])):
            unit = f"({found[0]})" if found[0] else ""
            return f"{text[: match.start()]}{unit}{text[match.end() :]}".strip(), found[1]
    return without_factor(text)


def without_coverage(text: str) -> tuple[str, float | None]:
    """Cut the coverage factor off: "dB (k=2)", "dB, k = 1,96"; None where there is none."""
    coverage = _COVERAGE.search(text)
    if coverage is None:
        return text, None
    k = float(re.sub(r"[^0-9.,]", "", coverage[0].split("=")[1]).replace(",", "."))
    return _COVERAGE.sub(" ", text).strip(), k


@lru_cache(maxsize=4096)
def known_unit(text: str) -> Unit | None:
    """Return the unit that a text spells, None when it spells none."""
    try:
        return parse_unit(text)
    except UnitError:
        return None


@lru_cache(maxsize=4096)
def header_key(text: str) -> str:
    """Return what two headers are compared by: case, blanks and punctuation do not matter, the unit does."""
    return re.sub(r"[\s_.,;:*]+", "", text.casefold().replace("[", "(").replace("]", ")"))


def _without_brackets(text: str) -> tuple[str, str, str, tuple[str, ...]]:
    """Return (text outside brackets, unit, what looks like a unit and is none, other words in brackets)."""
    unit, odd, others = "", "", []
    for match in _BRACKET.finditer(text):
        inside = next(group for group in match.groups() if group is not None).strip()
        if not unit and _is_unit(inside):
            unit = inside
        elif inside:
            others.append(inside)
    if not unit:
        odd = next((one for one in others if _resembles_unit(one)), "")
        others = [one for one in others if one != odd]
    return " ".join(_BRACKET.sub(" ", text).split()), unit, odd, tuple(others)


def _is_unit(text: str) -> bool:
    if text.casefold() in _WORDS_NOT_UNITS or not text:
        return False
    return known_unit(text) is not None or (looks_like_unit(text) and not _resembles_unit(text))


def _resembles_unit(text: str) -> bool:
    """Whether a text was meant as a unit: decibels of something unheard of, or a unit with two meanings."""
    if known_unit(text) is not None or " " in text:
        return False
    return text[:2].casefold() == "db" or looks_like_unit(text)


def _without_tail(text: str) -> tuple[str, str]:
    """Cut a unit off the end: "EIRP / dBm", "f, GHz", "Gain in dB", "gain_db", "Temp °C"."""
    if _LETTERED.fullmatch(text.strip()):
        return text, ""
    unit = split_header(text).unit
    if unit and text.casefold().endswith(unit.casefold()) and unit.casefold() not in _WORDS_NOT_UNITS:
        name = re.sub(r"(\bin|[,/_])\s*$", "", text[: -len(unit)].rstrip())
        return name, unit
    tail = _TAIL.match(text)
    if tail and known_unit(tail["unit"]) is not None:
        return re.sub(r"(\bin|[,/_])\s*$", "", tail["name"].rstrip()), tail["unit"]
    return text, ""


def _starts_with_number(text: str) -> bool:
    return re.match(r"[+\-−]?[0-9]", text) is not None
