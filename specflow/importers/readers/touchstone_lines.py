"""The lines of a Touchstone file: numbers with their places, comments, keywords, option lines; nothing is understood.

Two things of other programs are let pass: a mark of the end of the file (0x1A), and, which is said, a line of column
names that is not marked as a comment.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from specflow.importers.readers.touchstone_network import Comment, Floats, Hole, Places, Remark, refusal
from specflow.importers.readers.touchstone_numbers import is_number_or_none, part_words, read_values

_DOS_END = "\x1a"
_NAMES_COLUMNS = re.compile(r"freq|(?:^|[^a-z])[SYZGH][ _]?[(\[]?\d", re.IGNORECASE)


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
    remarks: tuple[Remark, ...] = ()

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
    remarks: list[Remark] = []
    informing = False
    number = 0
    for number, line in enumerate(text.rstrip(f"\n\t {_DOS_END}").split("\n"), start=1):
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
        elif not counts and _names_columns(line, words):
            comments.append(Comment(number, line.strip()))
            remarks.append(Remark(number, f"the line {line.strip()[:60]!r} was read as a comment"))
        else:
            numbers.append(number)
            counts.append(len(words))
            tokens += words
    if informing:
        raise refusal(name, number, "[Begin Information] has no [End Information]", "add it, or export again")
    parted = part_words(tokens, counts, numbers, name)
    counted = np.asarray(parted.counts, np.int64)
    places = Places(np.asarray(numbers, np.int64), np.cumsum(counted) - counted)
    values, holes = read_values(parted.words, places, name)
    return FileLines(
        values,
        counted,
        places,
        tuple(comments),
        tuple(keywords),
        tuple(options),
        holes,
        number,
        (*remarks, *parted.remarks),
    )


def _names_columns(line: str, words: list[str]) -> bool:
    """Whether a line above the numbers names columns, without the mark of a comment: freq magS11 angS11 ..."""
    return _NAMES_COLUMNS.search(line) is not None and not any(is_number_or_none(word) for word in words)


def _keyword(line: str, number: int, at: int, name: str) -> Keyword:
    match = re.fullmatch(r"\s*\[([^\]]*)\]\s*(.*?)\s*", line)
    if match is None:
        raise refusal(name, number, f"{line.strip()[:40]!r} is no keyword", "a keyword stands in [ and ]")
    return Keyword(number, " ".join(match[1].split()).casefold(), match[2], at)
