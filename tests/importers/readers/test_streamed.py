"""Sheets read into typed columns, against the same sheets read in the ordinary way, and against openpyxl."""

from __future__ import annotations

import tempfile
from datetime import date, datetime, time, timedelta
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import xlsxwriter
from hypothesis import given, settings
from hypothesis import strategies as st

from specflow.importers.readers import CellRange, Grid, open_grids, xlsx
from specflow.importers.readers.stores import CellStore, TypedColumns
from tests.importers.readers.test_published import WORKBOOKS
from tests.importers.readers.workbooks import MAIN, by_hand, refused

TEXTS = (
    f'<sst xmlns="{MAIN}"><si><t>Gain (dB)</t></si><si><t> blanks </t></si><si><t>a_x000D_b _x0041_</t></si>'
    '<si><r><t>rich </t></r><r><t xml:space="preserve"> text</t></r><rPh sb="0" eb="1"><t>ph</t></rPh></si>'
    '<si><t/></si><si><t xml:space="preserve"> kept &#176;C &amp; </t></si></sst>'
)
KINDS = [
    '<c r="{}{}"><v>1.5</v></c>',
    '<c r="{}{}"><v>-0.1</v></c>',
    '<c r="{}{}"><v>1E-3</v></c>',
    '<c r="{}{}"><v>30000000.000000000000000000001</v></c>',
    '<c r="{}{}" s="1"><v>0.031</v></c>',
    '<c r="{}{}" s="3"><v>45000</v></c>',
    '<c r="{}{}" s="3"><v>0.75</v></c>',
    '<c r="{}{}" t="s"><v>0</v></c>',
    '<c r="{}{}" t="s"><v>1</v></c>',
    '<c r="{}{}" t="s"><v>2</v></c>',
    '<c r="{}{}" t="s"><v>3</v></c>',
    '<c r="{}{}" t="s"><v>4</v></c>',
    '<c r="{}{}" t="s"><v>5</v></c>',
    '<c r="{}{}" t="b"><v>1</v></c>',
    '<c r="{}{}" t="b"><v>0</v></c>',
    '<c r="{}{}" t="e"><v>#N/A</v></c>',
    '<c r="{}{}" t="inlineStr"><is><t> a  b </t></is></c>',
    '<c r="{}{}" t="inlineStr"><is><t xml:space="preserve"> &lt;-90 &#xB5; </t></is></c>',
    '<c r="{}{}" t="inlineStr"><is><t></t></is></c>',
    '<c r="{}{}" t="str"><f>A1</f><v>7.2V ---&gt; 3.3V</v></c>',
    '<c r="{}{}" t="str"><f>A1</f><v></v></c>',
    '<c r="{}{}"><f>A1*2</f><v>3</v></c>',
    '<c r="{}{}"><f>A1*2</f></c>',
    '<c r="{}{}" s="2"/>',
    "",
]


def streamed(path: Path, monkeypatch: pytest.MonkeyPatch) -> list[Grid]:
    with monkeypatch.context() as patch:
        patch.setattr(xlsx, "STREAMED_BYTES", 0)
        return list(open_grids(path))


def cells_of(grid: Grid) -> dict[tuple[int, int], tuple[type, Any]]:
    return {
        (row, column): (type(value), value)
        for row in range(grid.first_row, grid.last_row + 1)
        for column in range(grid.first_column, grid.last_column + 1)
        if (value := grid.value(row, column)) != ""
    }


def assert_same(one: Grid, other: Grid) -> None:
    assert cells_of(one) == cells_of(other)
    assert (one.name, one.hidden, one.merged, one.hidden_rows) == (
        other.name,
        other.hidden,
        other.merged,
        other.hidden_rows,
    )
    assert list(one.odd) == list(other.odd)
    first, stop = other.first_row - 2, other.last_row + 3
    for column in range(max(other.first_column - 1, 1), other.last_column + 2):
        assert one.column(column, first, stop) == other.column(column, first, stop)
        assert one.has_numbers(column, first, stop) == other.has_numbers(column, first, stop)
        (numbers, bad), (expected, known_bad) = (
            grid.column_floats(column, first, stop) for grid in (one, other)
        )
        assert np.array_equal(numbers, expected, equal_nan=True)
        assert bad == known_bad
    for row in range(first, stop):
        assert "".join(map(str, one.row(row))) == "".join(map(str, other.row(row)))


def test_a_cut_and_a_turn_show_the_same_cells(monkeypatch: pytest.MonkeyPatch) -> None:
    path = next(path for path in WORKBOOKS if path.name == "rx_noise_temp_chain.xlsx")
    area = CellRange(9, 2, 22, 7)
    for one, other in zip(streamed(path, monkeypatch), open_grids(path), strict=True):
        assert isinstance(one.cut(area).rows, CellStore)
        assert_same(one.cut(area), other.cut(area))
        assert_same(one.turn(), other.turn())
        assert one.cut(area).rows[1:3] == other.cut(area).rows[1:3]
        assert one.cut(area).rows[-1] == other.cut(area).rows[-1]


@pytest.mark.parametrize("path", WORKBOOKS, ids=lambda path: path.name)
def test_published_workbooks(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    ordinary = open_grids(path)
    for one, other in zip(streamed(path, monkeypatch), ordinary, strict=True):
        assert isinstance(one.rows, TypedColumns) or not other.rows
        assert_same(one, other)


@settings(max_examples=60, deadline=timedelta(seconds=5))
@given(st.lists(st.lists(st.sampled_from(KINDS), min_size=1, max_size=7), min_size=1, max_size=7))
def test_cells_of_every_kind(rows: list[list[str]]) -> None:
    body = "".join(
        f'<row r="{row}">' + "".join(kind.format("BCDEFGH"[place], row) for place, kind in enumerate(kinds))
        + "</row>"
        for row, kinds in enumerate(rows, start=3)
    ) + '<row r="90"><c r="B90"><v>1</v></c></row>'  # fmt: skip
    with tempfile.TemporaryDirectory() as folder, pytest.MonkeyPatch.context() as monkeypatch:
        path = by_hand(Path(folder) / "a.xlsx", body, parts={"xl/sharedStrings.xml": TEXTS})
        assert_same(streamed(path, monkeypatch)[0], open_grids(path)[0])


@pytest.mark.parametrize("date_1904", [False, True])
@pytest.mark.parametrize(
    "code", ["yyyy-mm-dd", "hh:mm", "yyyy-mm-dd hh:mm:ss", "[h]:mm", "mm:ss", "[Red]yyyy", "h:mm AM/PM"]
)
def test_dates_are_those_of_bulk_reading(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, code: str, date_1904: bool
) -> None:
    draw = np.random.default_rng(7)
    serials = [
        0,
        0.5,
        1,
        1.5,
        59,
        59.25,
        60,
        60.5,
        61,
        -1,
        -0.5,
        45000,
        45000.9999999999,
        1e-9,
        300000,
        3e5 + 0.1,
    ]
    serials += draw.uniform(-3, 60000, 200).tolist() + (draw.integers(0, 60000 * 24, 200) / 24).tolist()

    path = tmp_path / "a.xlsx"
    with xlsxwriter.Workbook(str(path), {"date_1904": date_1904}) as book:
        sheet, style = book.add_worksheet("data"), book.add_format({"num_format": code})
        for row, serial in enumerate(serials):
            sheet.write_number(row, 0, serial, style)
    assert_same(streamed(path, monkeypatch)[0], open_grids(path)[0])
    kinds = {type(value) for value in open_grids(path)[0].column(1, 1, len(serials) + 1)}
    assert kinds <= {date, datetime, time, timedelta}


def test_what_is_written_in_an_unusual_way_is_read_in_the_ordinary_way(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    rows = '<row r="1"><c r="A1"><v> 1.5 </v></c><c r="B1"><v>1_0</v></c></row>'
    grid = streamed(by_hand(tmp_path / "a.xlsx", rows), monkeypatch)[0]
    assert grid.rows == [[" 1.5 ", "1_0"]]


@pytest.mark.parametrize(
    "rows",
    [
        '<row r="1"><c r="A1"><v>1</v></c><c r="A1"><v>2</v></c></row>',
        '<row r="2"><c r="A2"><v>1</v></c></row><row r="1"><c r="A1"><v>2</v></c></row>',
    ],
)
def test_a_cell_that_stands_twice_or_above_is_left_to_the_ordinary_way(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, rows: str
) -> None:
    path = by_hand(tmp_path / "a.xlsx", rows)
    grid = streamed(path, monkeypatch)[0]
    assert not isinstance(grid.rows, TypedColumns)
    assert_same(grid, open_grids(path)[0])


def test_a_shared_text_that_is_not_there_is_refused(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = by_hand(tmp_path / "a.xlsx", '<row r="1"><c r="A1" t="s"><v>99</v></c></row>')
    assert "shared text" in refused(lambda: streamed(path, monkeypatch))


def test_a_used_range_in_typed_columns_may_be_larger(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    rows = '<row r="1"><c r="A1"><v>1</v></c></row><row r="1048576"><c r="R1048576"><v>2</v></c></row>'
    path = by_hand(tmp_path / "a.xlsx", rows)
    assert "more than 16,000,000" in refused(lambda: open_grids(path))
    grid = streamed(path, monkeypatch)[0]
    assert (grid.value(1, 1), grid.value(1048576, 18), grid.last_column) == (1.0, 2.0, 18)
    far = by_hand(tmp_path / "b.xlsx", rows.replace("R1048576", "XFD1048576"))
    assert "more than 64,000,000" in refused(lambda: streamed(far, monkeypatch))
