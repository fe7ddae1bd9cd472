from __future__ import annotations

import math
from datetime import datetime

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.errors import FileError
from specflow.importers.readers import (
    CellRange,
    Grid,
    OddCell,
    OddCells,
    OddKind,
    OddRun,
    address,
    column_letter,
    column_number,
    looks_numeric,
    sheet,
)


def test_addresses_are_those_of_the_sheet() -> None:
    assert (address(17, 3), address(1, 26), address(2, 27), address(1_048_576, 16_384)) == (
        "C17", "Z1", "AA2", "XFD1048576"
    )  # fmt: skip


@given(st.integers(1, 16_384))
def test_column_letters_and_numbers_are_inverse(column: int) -> None:
    assert column_number(column_letter(column)) == column


def test_value_is_found_by_sheet_coordinates_and_empty_outside() -> None:
    grid = Grid("data", [["a", 1.0], ["b"]], first_row=3, first_column=2)
    assert grid.value(3, 2) == "a"
    assert grid.value(3, 3) == 1.0
    assert [grid.value(*cell) for cell in ((4, 3), (2, 2), (3, 1), (5, 2), (3, 9))] == [""] * 5
    assert grid.row(3) == ["", "a", 1.0]
    assert (grid.last_row, grid.last_column) == (4, 3)


def test_column_covers_exactly_the_rows_asked_for() -> None:
    grid = Grid("data", [[1.0], [2.0]], first_row=3, first_column=2)
    assert grid.column(2, 1, 7) == ["", "", 1.0, 2.0, "", ""]
    assert grid.column(2, 1, 3) == ["", ""]
    assert grid.column(2, 5, 7) == ["", ""]
    assert grid.column(1, 3, 5) == ["", ""]
    assert grid.column(2, 5, 5) == []


def test_column_floats_lists_what_is_no_plain_number() -> None:
    cells: list[object] = [1.5, "", "3.1", True, datetime(2026, 1, 1), math.nan, math.inf, 7, "  "]
    grid = Grid("data", [[cell] for cell in cells], first_row=2)  # type: ignore[list-item]
    numbers, bad = grid.column_floats(1, 2, 11)
    assert bad == [4, 5, 6, 7, 8]
    assert np.flatnonzero(~np.isnan(numbers)).tolist() == [0, 7]
    assert (numbers[0], numbers[7]) == (1.5, 7.0)


def test_column_floats_lists_error_cells_and_formulas_without_value() -> None:
    odd = OddCells(
        [OddRun(1, 2, 2, OddCell(OddKind.ERROR, "#N/A")), OddRun(1, 4, 5, OddCell(OddKind.NO_VALUE))]
    )
    grid = Grid("data", [[1.0], [""], [2.0], [""], [0.0]], odd=odd)
    numbers, bad = grid.column_floats(1, 1, 6)
    assert bad == [2, 4, 5]
    assert np.isnan(numbers).tolist() == [False, True, False, True, True]
    assert grid.column_floats(1, 3, 4)[1] == []


@pytest.mark.parametrize(
    "text", ["1_000", "٣", "nan", "inf", "Infinity", "0x10", "1,5", "−3", "<-90", "1e", "."]
)
def test_text_that_python_might_take_for_a_number_is_listed(text: str) -> None:
    grid = Grid("t.csv", [["1.5"], [text], [" -2e3 "]], is_text=True)
    numbers, bad = grid.column_floats(1, 1, 4)
    assert bad == [2]
    assert numbers[[0, 2]].tolist() == [1.5, -2000.0]


def test_decimal_comma_is_applied_where_the_file_has_it() -> None:
    grid = Grid("t.csv", [["1,5"], ["-0,25"], ["7"], ["1.5"]], is_text=True, decimal=",")
    numbers, bad = grid.column_floats(1, 1, 5)
    assert numbers[:3].tolist() == [1.5, -0.25, 7.0]
    assert bad == [4]


def test_ambiguous_decimal_mark_leaves_whole_numbers_only() -> None:
    numbers, bad = Grid("t.csv", [["1,234"], ["7"]], is_text=True, decimal="").column_floats(1, 1, 3)
    assert bad == [1]
    assert numbers[1] == 7.0


def test_oddities_name_value_visibility_and_merged_range() -> None:
    grid = Grid(
        "data",
        [["3,1 ", 0.031]],
        odd=OddCells([OddRun(2, 1, 1, OddCell(OddKind.PERCENT, "0.0%"))]),
        hidden_rows=frozenset({1}),
        hidden_columns=frozenset({2}),
        merged=(CellRange(1, 1, 2, 1),),
    )
    assert [odd.kind for odd in grid.oddities(1, 1)] == [OddKind.TEXT_NUMBER, OddKind.HIDDEN, OddKind.MERGED]
    assert [odd.kind for odd in grid.oddities(1, 2)] == [OddKind.PERCENT, OddKind.HIDDEN, OddKind.HIDDEN]
    assert grid.oddities(1, 1)[-1].detail == "A1:A2"
    assert [odd.kind for odd in grid.oddities(2, 1)] == [OddKind.MERGED]


@pytest.mark.parametrize("text", ["3", "-3.1", "−3,1", "1e-3", " 45 % ", "1 000,5", "1'000"])
def test_numbers_as_people_write_them_look_numeric(text: str) -> None:
    assert looks_numeric(text)


@pytest.mark.parametrize("text", ["", "dBm", "3 dB", "n/a", "-", "1.2.2026 10:00", "T12"])
def test_other_text_does_not_look_numeric(text: str) -> None:
    assert not looks_numeric(text)


def test_odd_cells_are_found_by_row_and_column() -> None:
    percent, error = OddCell(OddKind.PERCENT), OddCell(OddKind.ERROR, "#N/A")
    odd = OddCells([OddRun(3, 10, 12, percent), OddRun(3, 2, 4, error), OddRun(1, 1, 1, error)])
    assert [odd.at(row, 3) for row in (1, 2, 4, 5, 10, 12, 13)] == [
        None,
        error,
        error,
        None,
        percent,
        percent,
        None,
    ]
    assert odd.at(2, 2) is None
    assert len(odd) == 7
    assert [run.first for run in odd.in_column(3, 4, 10)] == [2]
    assert [run.first for run in odd.in_column(3, 4, 11)] == [2, 10]


def test_a_missing_sheet_is_refused_with_the_names_there_are() -> None:
    grids = [Grid("Summary", [], "bench.xlsx"), Grid(" Gain vs T", [], "bench.xlsx")]
    assert sheet(grids, "gain VS t ").name == " Gain vs T"
    with pytest.raises(FileError, match=r"bench\.xlsx: there is no sheet 'NF' .*'Summary', ' Gain vs T'"):
        sheet(grids, "NF")


def test_where_names_file_sheet_and_cell() -> None:
    assert Grid("data", [], "a.xlsx").where(17, 3) == "a.xlsx, data, C17"
    assert Grid("a.csv", [], "a.csv").where(17) == "a.csv, row 17"
