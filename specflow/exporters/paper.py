"""How a wide table goes on paper, in a size that can be read, and how high its rows are.

Spreadsheet programs end a page between two columns by themselves, and shrink a sheet until it is so many pages wide;
what they do not know is how many pages that should be. Nor do all of them make a row as high as its text.
"""

from __future__ import annotations

from collections.abc import Sequence

ROOM = 10.4  # inches across an A4 page in landscape between its margins, with a little to spare
LEAST_SCALE = 0.55  # text of 11 points is 6 points high then


def pages_across(widths: Sequence[int]) -> int:
    """Return the fewest pages side by side on which columns of so many characters can be read.

    The first column stands on every page; a column wider than a page takes one of its own.
    """
    inches = [_inches(width) * LEAST_SCALE for width in widths]
    first = inches[0] if inches else 0.0
    pages, used = 1, first
    for column in inches[1:]:
        if used > first and used + column > ROOM:
            pages, used = pages + 1, first
        used += column
    return pages


def lines_in(text: str, width: int) -> int:
    """Return how many lines a text takes in a column of so many characters."""
    return sum(max(1, -(-len(line) // max(width, 1))) for line in text.split("\n"))


def _inches(width: int) -> float:
    """A column of so many characters of the default font, at 96 pixels an inch."""
    return (7 * width + 5) / 96
