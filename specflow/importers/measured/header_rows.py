"""Which row of a sheet is a row of headers: a row of words with numbers below, and with words that are known."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass

from specflow.importers.measured.header_cells import find_units_row, read_headers
from specflow.importers.measured.statements import is_reading
from specflow.importers.readers import Grid, is_blank, looks_numeric

Recognises = Callable[[str], bool]

_NUMBER = r"[<>≤≥~±+\-−]*\s*[0-9][0-9.,]*(?:[eE][+\-]?[0-9]+)?"
_ONE_READING = re.compile(rf"^{_NUMBER}(?:\s*(?:±|\+/-|to|\.\.+|…)\s*{_NUMBER})?\s*[^\s0-9]{{0,6}}$")
_LOOK_AHEAD = 5


@dataclass(frozen=True, slots=True)
class HeaderRow:
    """A row of headers; ``is_known``: its words are known, and it is not merely the best row of words."""

    row: int
    is_known: bool
    texts: tuple[str, ...]


def find_header(grid: Grid, top: int, recognises: Recognises) -> HeaderRow | None:
    """The first row of headers that are known; without one the row of words with the most known and the most cells."""
    best: tuple[tuple[int, int], int] | None = None
    for row in range(top, grid.last_row + 1):
        texts = words_of(grid, row)
        if len(texts) < 2 or not has_numbers_below(grid, row, texts):
            continue
        known = sum(map(recognises, texts.values()))
        if _are_headers(texts, recognises):
            if _is_above_headers(grid, row, recognises):
                continue  # a pair of key and value, both of which happen to be known words
            return HeaderRow(row, True, tuple(texts.values()))
        if best is None or (known, len(texts)) > best[0]:
            best = (known, len(texts)), row
    return None if best is None else HeaderRow(best[1], False, tuple(words_of(grid, best[1]).values()))


def _are_headers(texts: dict[int, str], recognises: Recognises) -> bool:
    known = sum(map(recognises, texts.values()))
    return len(texts) >= 2 and (known == len(texts) or known >= max(2, (len(texts) + 1) // 2))


def _is_above_headers(grid: Grid, row: int, recognises: Recognises) -> bool:
    """Whether the next row is a row of headers, too, and no units row."""
    below = words_of(grid, row + 1) if row < grid.last_row else {}
    return (
        _are_headers(below, recognises) and find_units_row(grid, row + 1, read_headers(grid, row, 1)) is None
    )


def words_of(grid: Grid, row: int) -> dict[int, str]:
    """The cells of a row by column when all of them are words; empty when one is a number, a date or an error."""
    texts: dict[int, str] = {}
    for column, value in enumerate(grid.row(row), start=1):
        if isinstance(value, str):
            if value and not value.isspace():
                if looks_numeric(value) or _ONE_READING.match(value.strip()):
                    return {}
                texts[column] = " ".join(value.split())
        else:
            return {}
    if len(texts) >= 2 and next(iter(texts.values())).endswith(":"):
        return {}
    return texts


def has_numbers_below(grid: Grid, row: int, texts: dict[int, str]) -> bool:
    seen = 0
    for below in range(row + 1, grid.last_row + 1):
        cells = grid.row(below)
        if below in grid.comment_rows or all(is_blank(value) for value in cells):
            continue
        filled = [column for column in texts if is_reading(grid.value(below, column))]
        if filled and sum(not is_blank(value) for value in cells) >= min(2, len(texts)):
            return True
        seen += 1
        if seen >= _LOOK_AHEAD:
            return False
    return False
