"""Cells: what they say as text, number and date, and what is refused."""

from __future__ import annotations

from datetime import date, datetime, time
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.importers.readers.grid import Grid
from specflow.importers.readers.odd_cells import OddCell, OddCells, OddKind, OddRun
from specflow.importers.sheets.cells import CellFault, cell_date, cell_number, cell_text, clean


def grid(value: Any, odd: OddCell | None = None, decimal: str = ".") -> Grid:
    runs = [OddRun(1, 1, 1, odd)] if odd else []
    return Grid("Sheet", [[value]], odd=OddCells(runs), decimal=decimal)


@pytest.mark.parametrize(
    ("value", "text"),
    [
        ("  R-1\u00a0", "R-1"),
        ("10\u202fMHz", "10 MHz"),
        ("e\u0301tat", "\u00e9tat"),
        ("\ufeffR-1\u200b", "R-1"),
        ("—", ""),
        ("-", ""),
        (12.0, "12"),
        (12, "12"),
        (0.1 + 0.2, "0.3"),
        (-40.5, "-40.5"),
        (True, "yes"),
        (1e20, "1e+20"),
    ],
)
def test_text_is_cleaned_and_numbers_are_written_as_they_are_shown(value: Any, text: str) -> None:
    assert cell_text(grid(value), 1, 1) == text


@pytest.mark.parametrize(
    ("value", "odd", "text"),
    [
        (0.081, OddCell(OddKind.PERCENT, "0.0%"), "8.1 %"),
        (45, OddCell(OddKind.UNIT_FORMAT, '0" dBm"', "dBm"), "45 dBm"),
        ("12", OddCell(OddKind.TEXT_NUMBER), "12"),
    ],
)
def test_a_format_that_adds_a_sign_or_unit_is_part_of_what_the_cell_says(
    value: Any, odd: OddCell, text: str
) -> None:
    assert cell_text(grid(value, odd), 1, 1) == text


@pytest.mark.parametrize(
    ("value", "odd", "words"),
    [
        ("", OddCell(OddKind.ERROR, "#REF!"), "#REF!"),
        (0, OddCell(OddKind.NO_VALUE), "without a stored value"),
        (12000, OddCell(OddKind.SCALED, "0,"), "shows another number"),
        (datetime(2026, 3, 8), None, "2026-03-08"),
        (time(3, 8), None, "03:08"),
    ],
)
def test_a_cell_that_does_not_say_what_it_shows_is_refused(
    value: Any, odd: OddCell | None, words: str
) -> None:
    with pytest.raises(CellFault, match=words.replace("#", r"\#")) as refused:
        cell_text(grid(value, odd), 1, 1)
    assert refused.value.remedy


def test_free_text_may_hold_a_date() -> None:
    assert cell_text(grid(datetime(2026, 3, 8)), 1, 1, dates=True) == "2026-03-08"


def test_numbers_and_empty_cells() -> None:
    assert cell_number(grid(3.5), 1, 1) == 3.5
    assert cell_number(grid("−3,5", decimal=","), 1, 1) == -3.5
    assert cell_number(grid(""), 1, 1) is None


@pytest.mark.parametrize("value", ["many", "NaN", "inf", True, "1,234"])
def test_what_is_no_plain_number_is_refused(value: Any) -> None:
    with pytest.raises(CellFault):
        cell_number(grid(value), 1, 1)


def test_a_percentage_is_no_plain_number() -> None:
    with pytest.raises(CellFault, match="400 %"):
        cell_number(grid(4, OddCell(OddKind.PERCENT, "0%")), 1, 1)


def test_dates_are_cells_or_year_month_day() -> None:
    assert cell_date(grid(datetime(2026, 3, 8, 12)), 1, 1) == date(2026, 3, 8)
    assert cell_date(grid(date(2026, 3, 8)), 1, 1) == date(2026, 3, 8)
    assert cell_date(grid("2026-03-08"), 1, 1) == date(2026, 3, 8)
    assert cell_date(grid(""), 1, 1) is None


@pytest.mark.parametrize("value", ["03/08/2026", "8 March", 46089, "2026-02-30"])
def test_a_date_with_several_readings_is_refused(value: Any) -> None:
    with pytest.raises(CellFault, match="not a date"):
        cell_date(grid(value), 1, 1)


@given(st.floats(allow_nan=False, allow_infinity=False, width=32))
def test_the_text_of_a_number_is_that_number(value: float) -> None:
    assert float(cell_text(grid(value), 1, 1)) == pytest.approx(value, rel=1e-14, abs=0)


@given(st.text(max_size=30))
def test_cleaning_twice_changes_nothing_more(text: str) -> None:
    assert clean(clean(text)) == clean(text)
