"""What parts the fields of a text table, and which mark stands before decimals: judged from a sample of its lines."""

from __future__ import annotations

import csv
import re
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass

BLANKS = " "
"""Stands for runs of blanks and tabs."""

DELIMITERS = ("\t", ";", ",", "|", BLANKS)
"""In order of preference where two part the lines equally well."""

SAMPLE_LINES = 400

_MOST_SETTINGS = 6
_MOST_WORDS = 4
_MOST_TITLES = 3

_NUMBER = re.compile(r"[<>≤≥]?\s*[+\-−]?(?:[0-9]+(?:[.,][0-9]*)?|[.,][0-9]+)(?:[eE][+\-−]?[0-9]+)?\s*%?")
_BOUNDS = "<>≤≥"
_FIELD_OR_BOUND = re.compile(r"(?:<=?|>=?|≤|≥)\s+[+\-−]?[.,]?[0-9]\S*|\S+")
_SETTING = re.compile(r"[^0-9:=,][^:=,]*[:=]\s*[+\-−]?[0-9]+")
_IN_SQUARE = re.compile(r"[^\[\]]+\[[^\[\]]*\]")
_IN_ROUND = re.compile(r"[^()]+\([^()]*\)")
_COMMA_IN_NUMBER = re.compile(r"[0-9],[0-9]")
_WITH_THOUSANDS = re.compile(r"[+\-−]?[0-9]{1,3}(?:[ \u00a0\u202f'][0-9]{3})+[.,][0-9]+")
_LIKE_THOUSANDS = re.compile(r"[+\-−]?[0-9]{1,3}[.,][0-9]{3}")
_GROUPED = {
    ".": re.compile(r"[+\-−]?[1-9][0-9]{0,2}(?:(?:,[0-9]{3})+\.[0-9]+|(?:,[0-9]{3}){2,})"),
    ",": re.compile(r"[+\-−]?[1-9][0-9]{0,2}(?:(?:\.[0-9]{3})+,[0-9]+|(?:\.[0-9]{3}){2,})"),
}
"""Numbers that can only have this decimal mark, and the other one between thousands."""


@dataclass(frozen=True, slots=True)
class Layout:
    """How the lines are parted. ``width`` is the usual number of fields; ``decimal`` is ``""`` when every number with
    a comma could as well have it between thousands; ``grouped``: the other mark was seen between thousands."""

    delimiter: str
    width: int
    decimal: str
    grouped: bool = False


class AmbiguousComma(Exception):
    """The comma may part fields or decimals, and nothing tells which."""


def find_layout(lines: Sequence[str]) -> Layout:
    """Judge the layout from lines that are neither blank nor comments; raises AmbiguousComma."""
    sample = _sample(lines)
    best, best_score, best_width = ",", 0.0, 1
    for delimiter in DELIMITERS:
        score, width = _score(sample, delimiter)
        if score > best_score * 1.001:
            best, best_score, best_width = delimiter, score, width
    if best == BLANKS and (sure := _parts_every_line(sample)):
        best, best_width = sure
    fields = [field for line in sample for field in split(line, best)]
    if best == ",":
        _refuse_decimal_comma(sample, best_width)
    mark = decimal_mark(fields)
    return Layout(best, best_width, mark, is_grouped(fields, mark))


def _parts_every_line(sample: Sequence[str]) -> tuple[str, int] | None:
    """The mark that parts all lines below a title into as many fields, and their number: blanks are inside them then,
    as in ``27.5 GHz<tab>-0.35``."""
    for delimiter in ("\t", ";", "|"):
        parted = [len(split(line, delimiter)) for line in sample]
        start = next((place for place, width in enumerate(parted) if width > 1), len(parted))
        if start <= _MOST_TITLES and len(parted) - start > 1 and len(set(parted[start:])) == 1:
            return delimiter, parted[start]
    return None


def split_blanks(line: str) -> list[str]:
    """The fields of a line that blanks part; a bound stays whole ("17.7  < -60" has two)."""
    if any(sign in line for sign in _BOUNDS):
        return _FIELD_OR_BOUND.findall(line)
    return line.split()


def split(line: str, delimiter: str) -> list[str]:
    """The fields of one line, without the blanks around them."""
    if delimiter == BLANKS:
        return split_blanks(line)
    if '"' not in line:
        return [field.strip() for field in line.split(delimiter)]
    try:
        return [
            field.strip() for field in next(csv.reader([line], delimiter=delimiter, skipinitialspace=True))
        ]
    except csv.Error:
        return [field.strip() for field in line.split(delimiter)]


def split_preamble(line: str) -> list[str]:
    """The fields of a line of settings that is parted otherwise than the body: ``Start,10,MHz``.

    A comma between digits ("23,5") may be a decimal mark there: such a line stays whole. So does prose.
    """
    for delimiter in ("\t", ";", "|", ","):
        fields = split(line, delimiter)
        if 1 < len(fields) <= _MOST_SETTINGS and not (delimiter == "," and _COMMA_IN_NUMBER.search(line)):
            return fields if delimiter == "\t" or _are_settings(fields) else [line]
    return [line]


def _are_settings(fields: Sequence[str]) -> bool:
    """A key of few words and short values, of which the first is a number, or one word."""
    first = fields[1]
    is_value = first[:1] in "+-−.0123456789" or len(first.split()) <= 1
    return is_value and all(len(field.split()) <= _MOST_WORDS for field in fields)


def is_setting(line: str, field: str) -> bool:
    """Whether a comma of the line may stand inside the number of a setting: ``Temp: 23,5 C`` parted at its comma."""
    return (
        _SETTING.fullmatch(field) is not None
        and line.lstrip()[len(field) : len(field) + 2].strip(",").isdigit()
    )


def split_to_width(line: str, width: int, single_blanks: bool = False) -> list[str] | None:
    """The fields of a header line that is parted otherwise than the body: by whatever gives ``width`` fields.

    Single blanks part words, too, and count only where the body itself is parted by blanks. A comma between digits
    ("T: 23,5 °C") is no separator there.
    """
    others = [delimiter for delimiter in DELIMITERS if delimiter != BLANKS]
    ways = [split(line, one) for one in others if one != "," or not _COMMA_IN_NUMBER.search(line)]
    ways.append(re.split(r"\t+| {2,}", line.strip()))
    ways += [_with_their_units(line, unit) for unit in (_IN_SQUARE, _IN_ROUND)]
    if single_blanks:
        ways.append(line.split())
    return next((fields for fields in ways if len(fields) == width), None)


def _with_their_units(line: str, unit: re.Pattern[str]) -> list[str]:
    """The titles of a line in which each has its unit in brackets: ``Theta [deg.]  Phi   [deg.]``."""
    found = [" ".join(match[0].split()) for match in unit.finditer(line)]
    return found if "".join(found).replace(" ", "") == re.sub(r"\s+", "", line) else []


def is_number(text: str) -> bool:
    """The field is one number with either decimal mark."""
    return _NUMBER.fullmatch(text) is not None


def _sample(lines: Sequence[str]) -> Sequence[str]:
    """Lines from the beginning, where the headers are, and from the middle, where the table is."""
    if len(lines) <= SAMPLE_LINES:
        return lines
    half, middle = SAMPLE_LINES // 2, len(lines) // 2
    return [*lines[:half], *lines[max(middle, half) : max(middle, half) + half]]


def _score(sample: Sequence[str], delimiter: str) -> tuple[float, int]:
    """How well a delimiter parts the lines: share of lines of the usual width, more if the fields are numbers."""
    rows = [split(line, delimiter) for line in sample]
    widths = Counter(len(row) for row in rows if len(row) > 1)
    if not widths:
        return 0.0, 1
    width, count = max(widths.items(), key=lambda item: (item[1], item[0]))
    fields = [field for row in rows if len(row) == width for field in row if field]
    numbers = sum(map(is_number, fields)) / len(fields) if fields else 0.0
    if delimiter == BLANKS and numbers < 0.5:
        return 0.0, 1  # words, not columns
    return sum(widths.values()) / len(rows) * (0.2 + count / len(rows)) * (1 + numbers), width


def decimal_mark(fields: Sequence[str]) -> str:
    """The mark before decimals in these fields, the commoner where both occur (numbers with the other one are refused
    one by one then); ``""`` when each comma could as well stand between thousands."""
    numbers = [field for field in fields if is_number(field) or _WITH_THOUSANDS.fullmatch(field)]
    commas = [number for number in numbers if "," in number]
    certain = sum(not _LIKE_THOUSANDS.fullmatch(number) for number in commas)
    certain += sum(_GROUPED[","].fullmatch(field) is not None for field in fields)
    points = [number for number in numbers if "." in number]
    certain_points = sum(not _LIKE_THOUSANDS.fullmatch(number) for number in points)
    certain_points += sum(_GROUPED["."].fullmatch(field) is not None for field in fields)
    if certain != certain_points:
        return "," if certain > certain_points else "."
    return "" if commas and not points else "."


def is_grouped(fields: Sequence[str], decimal: str) -> bool:
    """Whether the other mark stands between thousands, in a number that says so itself."""
    return bool(decimal) and any(_GROUPED[decimal].fullmatch(field) for field in fields)


def _refuse_decimal_comma(sample: Sequence[str], width: int) -> None:
    """``1,5,2,7`` or ``27,5,45`` under two titles: whole numbers, more of them than there are titles."""
    rows = [split(line, ",") for line in sample if not any(mark in line for mark in ";\t|")]
    body = [row for row in rows if len(row) == width and all(map(is_number, row))]
    if len(body) < max(2, len(rows) // 2):
        return
    titles = [row for row in rows if not any(map(is_number, row))]
    whole = all(re.fullmatch(r"[+\-−]?[0-9]+", field) for row in body for field in row)
    if whole and width == 2 and not titles and len(rows) < len(sample):
        raise AmbiguousComma  # headers parted by another mark, and "1,5" below: two fields, or a decimal
    if whole and titles and (len(titles[-1]) == width / 2 or 2 <= len(titles[-1]) < width):
        raise AmbiguousComma
