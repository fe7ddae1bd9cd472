"""The lines of a Touchstone file: numbers with their places, comments, keywords, option lines; nothing is understood.

Numbers are read strictly: what ``float`` takes beyond the format (1_0, digits of other scripts) is refused.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from specflow.errors import FileError
from specflow.importers.readers.touchstone_network import Comment, Floats, Hole, Places

_PLAIN = b"0123456789+-.eE "
_NO_NUMBER = re.compile(r"[+-]?(?:nan|inf|infinity|1\.#\w+|1,#\w+|#n/?a|n/?a|-{2,})", re.IGNORECASE)
_OVERFLOW = 9.9e36


@dataclass(frozen=True, slots=True)
class Keyword:
    """A line ``[Name] value`` of version 2; ``at`` counts the data lines before it."""

    line: int
    name: str
    value: str
    at: int


@dataclass(frozen=True, slots=True)
class OptionText:
    """An option line as written, without the ``#``; ``at`` counts the data lines before it, ``keywords`` those."""

    line: int
    text: str
    at: int
    keywords: int


@dataclass(frozen=True, slots=True)
class FileLines:
    """A file taken apart.

    ``values`` float64 are all numbers in order; data line k has the ``counts[k]`` numbers from ``offsets[k]`` on and is
    line ``numbers[k]`` of the file. ``holes`` are numbers that are none (NaN in ``values``), by offset.
    """

    values: Floats
    counts: NDArray[np.int64]
    places: Places
    comments: tuple[Comment, ...]
    keywords: tuple[Keyword, ...]
    options: tuple[OptionText, ...]
    holes: dict[int, Hole] = field(default_factory=dict)
    last_line: int = 0

    @property
    def offsets(self) -> NDArray[np.int64]:
        """The offset of the first number of each data line."""
        return self.places.line_offsets

    @property
    def numbers(self) -> NDArray[np.int64]:
        """The line numbers of the data lines."""
        return self.places.line_numbers


def read_lines(text: str, name: str) -> FileLines:
    """Take the text of a file apart. Raises FileError with the line for what is no number."""
    tokens: list[str] = []
    numbers: list[int] = []
    counts: list[int] = []
    comments: list[Comment] = []
    keywords: list[Keyword] = []
    options: list[OptionText] = []
    informing = False
    number = 0
    for number, line in enumerate(text.split("\n"), start=1):
        if "!" in line:
            line, _, comment = line.partition("!")
            comments.append(Comment(number, comment.strip(), bool(line.strip())))
        words = line.split()
        if not words:
            continue
        mark = words[0][0]
        if mark == "[":
            keyword = _keyword(line, number, len(counts), name)
            informing = keyword.name == "begin information" or (
                informing and keyword.name != "end information"
            )
            if keyword.name not in ("begin information", "end information") and not informing:
                keywords.append(keyword)
        elif informing:
            comments.append(Comment(number, line.strip()))
        elif mark == "#":
            options.append(OptionText(number, line.strip()[1:], len(counts), len(keywords)))
        else:
            numbers.append(number)
            counts.append(len(words))
            tokens += words
    if informing:
        raise refusal(name, number, "[Begin Information] has no [End Information]", "add it, or export again")
    counted = np.asarray(counts, np.int64)
    places = Places(np.asarray(numbers, np.int64), np.cumsum(counted) - counted)
    values, holes = _values(tokens, places, name)
    return FileLines(values, counted, places, tuple(comments), tuple(keywords), tuple(options), holes, number)


def refusal(name: str, line: int, what: str, remedy: str) -> FileError:
    """Return the error that refuses a file for what stands in one of its lines."""
    return FileError(f"not readable as a Touchstone file: {what}", where=f"{name}, line {line}", hint=remedy)


def _keyword(line: str, number: int, at: int, name: str) -> Keyword:
    match = re.fullmatch(r"\s*\[([^\]]*)\]\s*(.*?)\s*", line)
    if match is None:
        raise refusal(name, number, f"{line.strip()[:40]!r} is no keyword", "a keyword stands in [ and ]")
    return Keyword(number, " ".join(match[1].split()).casefold(), match[2], at)


def _values(tokens: list[str], places: Places, name: str) -> tuple[Floats, dict[int, Hole]]:
    """The numbers, NaN where a token says that there is none; the fast way is taken where all are plain."""
    joined = " ".join(tokens)
    if joined.isascii() and not joined.encode().translate(None, _PLAIN):
        try:
            values = np.fromiter(map(float, tokens), np.float64, len(tokens))
        except ValueError:
            return _one_by_one(tokens, places, name)
        if not len(values) or bool((np.abs(values) < _OVERFLOW).all()):
            return values, {}
    return _one_by_one(tokens, places, name)


def _one_by_one(tokens: list[str], places: Places, name: str) -> tuple[Floats, dict[int, Hole]]:
    values = np.empty(len(tokens))
    holes: dict[int, Hole] = {}
    for offset, token in enumerate(tokens):
        values[offset] = value = _number(token, offset, places, name)
        if not abs(value) < _OVERFLOW:
            values[offset] = np.nan
            holes[offset] = Hole(*places.of(offset), token[:40])
    return values, holes


def _number(token: str, offset: int, places: Places, name: str) -> float:
    if token.isascii() and not token.encode().translate(None, _PLAIN):
        try:
            return float(token)
        except ValueError:
            pass
    if _NO_NUMBER.fullmatch(token):
        return float("nan")
    line, place = places.of(offset)
    remedy = "numbers have a decimal point and no unit; comments begin with !"
    if re.fullmatch(r"[+-]?\d*,\d+(?:[eE][+-]?\d+)?", token):
        remedy = "it has a decimal comma: export the file with decimal points"
    raise refusal(name, line, f"{token[:40]!r} (number {place} of the line) is no number", remedy)
