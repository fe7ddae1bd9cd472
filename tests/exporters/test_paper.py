"""How many pages a table takes side by side, and how many lines a text takes."""

from __future__ import annotations

import pytest

from specflow.exporters.paper import lines_in, pages_across


@pytest.mark.parametrize(
    ("widths", "pages"),
    [
        ([], 1),
        ([20], 1),
        ([20, 40, 40], 1),
        ([16] * 15, 1),  # 18.3 inches, at 55 % 10.1
        ([16] * 17, 2),
        ([16, 300], 1),  # a column wider than a page gets smaller, there is nothing to part
        ([16, 300, 300], 2),
        ([16] * 61, 5),  # the first column again on each page: 14 others on each
    ],
)
def test_columns_stay_large_enough_to_be_read(widths: list[int], pages: int) -> None:
    assert pages_across(widths) == pages


@pytest.mark.parametrize(
    ("text", "width", "lines"), [("", 9, 1), ("short", 9, 1), ("x" * 10, 9, 2), ("a\nb", 9, 2), ("ab", 0, 2)]
)
def test_lines_of_a_text(text: str, width: int, lines: int) -> None:
    assert lines_in(text, width) == lines
