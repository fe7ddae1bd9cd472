"""The numbers of a Touchstone file as floats: plain ones, and the spellings that programs give them beside the format.

Decimal commas, commas or semicolons between the numbers, and exponents with D have one meaning where the whole file
keeps to them, and are read and said. Strict beyond that: what ``float`` takes further (1_0, digits of other scripts) is
refused, and what says that there is no number leaves a hole.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np

from specflow.importers.readers.touchstone_network import Floats, Hole, Places, Remark, refusal

_PLAIN = b"0123456789+-.eE "
_NO_NUMBER = re.compile(
    r"[+-]?(?:s?nan|q?nan)(?:\(\w*\))?|[+-]?(?:inf|infinity|1[.,]#\w+|#n/?a|n/?a)|#(?:num|qnan|ind)|-{2,}|\*+",
    re.IGNORECASE,
)
_FORTRAN = re.compile(r"[+-]?(?:\d+\.?\d*|\.\d+)[dD][+-]?\d+")
_DECIMAL_COMMA = re.compile(r"[+-]?\d*,\d+(?:[eEdD][+-]?\d+)?")
_WHOLE = re.compile(r"[+-]?\d+(?:[eEdD][+-]?\d+)?")
_THOUSANDS = re.compile(r"[+-]?[1-9]\d{0,2},\d{3}")
_TO_E = str.maketrans("dD", "ee")
_OVERFLOW = 9.9e36


@dataclass(frozen=True, slots=True)
class Words:
    """The words of the data lines, one number each; how many stand on each line; what was done to part them."""

    words: list[str]
    counts: list[int]
    remarks: tuple[Remark, ...] = ()


def is_number_or_none(word: str) -> bool:
    """Whether a word is a number in any spelling that is read here, or says that there is none."""
    return bool(_NO_NUMBER.fullmatch(word)) or any(_is_number(one) for one in re.split(r"[,;]", word))


def part_words(words: list[str], counts: list[int], numbers: list[int], name: str) -> Words:
    """Part the words of a file with commas or semicolons: decimal commas become points, others stand between numbers.

    FileError where a number could be both, or where nothing stands between two commas.
    """
    joined = " ".join(words)
    if "," not in joined and ";" not in joined:
        return Words(words, counts)
    lines = _by_line(words, counts)
    remarks = []
    if all(any(";" in word for word in line) for line in lines):
        lines = [_split(line, ";", number, name) for line, number in zip(lines, numbers, strict=True)]
        remarks.append(Remark(numbers[0], "semicolons stand between the numbers"))
    every = [word for line in lines for word in line]
    if not all(any("," in word for word in line) for line in lines):
        pass  # a comma here and there is a slip, which is refused with its place
    elif all(
        _DECIMAL_COMMA.fullmatch(one) or _WHOLE.fullmatch(one) or _NO_NUMBER.fullmatch(one) for one in every
    ):
        _refuse_thousands(lines, numbers, name)
        lines = [[word.replace(",", ".") for word in line] for line in lines]
        remarks.append(Remark(numbers[0], "the numbers have decimal commas"))
    else:
        lines = [_split(line, ",", number, name) for line, number in zip(lines, numbers, strict=True)]
        remarks.append(Remark(numbers[0], "commas stand between the numbers"))
    return Words([word for line in lines for word in line], [len(line) for line in lines], tuple(remarks))


def _by_line(words: list[str], counts: list[int]) -> list[list[str]]:
    lines, start = [], 0
    for count in counts:
        lines.append(words[start : start + count])
        start += count
    return lines


def _split(line: list[str], mark: str, number: int, name: str) -> list[str]:
    """The numbers of a line between marks; a mark may end the line."""
    joined = re.sub(rf"\s*{mark}\s*", mark, " ".join(line)).removesuffix(mark)
    parts = re.split(rf"[{mark} ]", joined)
    if "" in parts:
        what = f"number {parts.index('') + 1} of the line is missing: nothing stands before a {mark!r}"
        raise refusal(name, number, what, "put nan there, which leaves the entry out, or export again")
    return parts


def _refuse_thousands(lines: list[list[str]], numbers: list[int], name: str) -> None:
    """1,250 alone is 1.25 or 1250; one number that cannot be thousands shows that none is."""
    commas = [
        (word, number) for line, number in zip(lines, numbers, strict=True) for word in line if "," in word
    ]
    if all(_THOUSANDS.fullmatch(word) for word, _ in commas):
        word, number = commas[0]
        what = f"{word!r} has a decimal comma, or one between thousands"
        raise refusal(name, number, what, "export the file with decimal points")


def read_values(words: list[str], places: Places, name: str) -> tuple[Floats, dict[int, Hole]]:
    """The numbers, NaN where a word says that there is none; the fast way is taken where all are plain."""
    joined = " ".join(words)
    if joined.isascii() and not joined.encode().translate(None, _PLAIN + b"dD"):
        plain = joined.translate(_TO_E).split() if "d" in joined or "D" in joined else words
        try:
            values = np.fromiter(map(float, plain), np.float64, len(words))
        except ValueError:
            return _one_by_one(words, places, name)
        if not len(values) or bool((np.abs(values) < _OVERFLOW).all()):
            return values, {}
    return _one_by_one(words, places, name)


def _one_by_one(words: list[str], places: Places, name: str) -> tuple[Floats, dict[int, Hole]]:
    values = np.empty(len(words))
    holes: dict[int, Hole] = {}
    for offset, word in enumerate(words):
        values[offset] = value = _number(word, offset, places, name)
        if not abs(value) < _OVERFLOW:
            values[offset] = np.nan
            holes[offset] = Hole(*places.of(offset), word[:40])
    return values, holes


def _is_number(word: str) -> bool:
    if _FORTRAN.fullmatch(word):
        return True
    if not word.isascii() or word.encode().translate(None, _PLAIN):
        return False
    try:
        float(word)
    except ValueError:
        return False
    return True


def _number(word: str, offset: int, places: Places, name: str) -> float:
    if _is_number(word):
        return float(word.translate(_TO_E))
    if _NO_NUMBER.fullmatch(word):
        return float("nan")
    line, place = places.of(offset)
    remedy = "numbers have a decimal point and no unit; comments begin with !"
    if _DECIMAL_COMMA.fullmatch(word):
        remedy = "it has a decimal comma, other numbers of the file have points: export the file with decimal points"
    raise refusal(name, line, f"{word[:40]!r} (number {place} of the line) is no number", remedy)
