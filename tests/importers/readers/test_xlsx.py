from __future__ import annotations

import zipfile
from datetime import date, datetime
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from specflow.importers.readers import Grid, OddCell, OddKind, OddRun, open_grids
from tests.importers.readers.workbooks import MAIN, PARTS, RELATIONS, by_hand, refused, written


def read_one(path: Path) -> Grid:
    return open_grids(path)[0]


def test_addresses_are_true_where_the_used_range_begins_elsewhere(tmp_path: Path) -> None:
    def fill(book: Any, sheet: Any) -> None:
        sheet.write("D7", "Gain (dB)")
        sheet.write("E9", 20.25)

    grid = read_one(written(tmp_path / "a.xlsx", fill))
    assert grid.value(7, 4) == "Gain (dB)"
    assert grid.value(9, 5) == 20.25
    assert (grid.first_row, grid.first_column, grid.last_row, grid.last_column) == (7, 4, 9, 5)
    assert grid.where(9, 5) == "a.xlsx, data, E9"


def test_formats_that_change_what_is_seen_are_odd(tmp_path: Path) -> None:
    def fill(book: Any, sheet: Any) -> None:
        for row, code in enumerate(("0.0%", '0.0" dBm"', "0.00", "yyyy-mm-dd", '0.0,"k"')):
            sheet.write_number(row, 1, 45.5, book.add_format({"num_format": code}))
        sheet.write_string(5, 1, "text", book.add_format({"num_format": "0.0%"}))
        sheet.write_blank(6, 1, None, book.add_format({"num_format": "0.0%"}))

    grid = read_one(written(tmp_path / "a.xlsx", fill))
    assert [grid.odd.at(row, 2) for row in range(1, 8)] == [
        OddCell(OddKind.PERCENT, "0.0%"),
        OddCell(OddKind.UNIT_FORMAT, '0.0" dBm"', "dBm"),
        None,
        OddCell(OddKind.DATE, "yyyy-mm-dd"),
        OddCell(OddKind.SCALED, '0.0,"k"', "k"),
        None,
        None,
    ]
    assert isinstance(grid.value(4, 2), date | datetime)
    assert grid.column_floats(2, 1, 6)[1] == [4]


def test_a_percent_column_is_one_run(tmp_path: Path) -> None:
    def fill(book: Any, sheet: Any) -> None:
        percent = book.add_format({"num_format": "0.00%"})
        for row in range(5000):
            sheet.write_number(row, 2, row / 5000, percent)

    assert list(read_one(written(tmp_path / "a.xlsx", fill)).odd) == [
        OddRun(3, 1, 5000, OddCell(OddKind.PERCENT, "0.00%"))
    ]


def test_error_cells_keep_their_text_and_address(tmp_path: Path) -> None:
    def fill(book: Any, sheet: Any) -> None:
        sheet.write("A1", 1.0)
        sheet.write_formula("B2", "=1/0", None, "#DIV/0!")
        sheet.write_formula("B3", "=NA()", None, "#N/A")

    grid = read_one(written(tmp_path / "a.xlsx", fill))
    assert [grid.odd.at(row, 2) for row in (2, 3)] == [
        OddCell(OddKind.ERROR, "#DIV/0!"),
        OddCell(OddKind.ERROR, "#N/A"),
    ]
    assert grid.column_floats(2, 1, 4)[1] == [2, 3]


def test_formula_without_a_stored_value_is_odd_and_its_column_exists(tmp_path: Path) -> None:
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    sheet["A1"], sheet["C1"], sheet["C2"] = 1.5, "=A1*2", "=A1*3"
    book.save(tmp_path / "a.xlsx")
    grid = read_one(tmp_path / "a.xlsx")
    assert list(grid.odd) == [OddRun(3, 1, 2, OddCell(OddKind.NO_VALUE))]
    assert (grid.last_row, grid.last_column) == (2, 3)
    assert grid.column_floats(3, 1, 3)[1] == [1, 2]


@pytest.mark.parametrize("value", ["", "<v/>", "<v />", "<v></v>"])
def test_every_writer_s_way_to_store_no_value_is_seen(tmp_path: Path, value: str) -> None:
    cells = f'<c r="A1"><v>1.5</v></c><c r="B1"><f>A1*2</f>{value}</c>'
    grid = read_one(by_hand(tmp_path / "a.xlsx", f'<row r="1">{cells}</row>'))
    assert list(grid.odd) == [OddRun(2, 1, 1, OddCell(OddKind.NO_VALUE))]


def test_sheet_of_nothing_but_uncalculated_formulas_is_not_taken_for_empty(tmp_path: Path) -> None:
    grid = read_one(
        by_hand(tmp_path / "a.xlsx", '<row r="3"><c r="B3"><f>1+1</f></c><c r="C3"><f/></c></row>')
    )
    assert (grid.first_row, grid.first_column, grid.last_row, grid.last_column) == (3, 2, 3, 3)
    assert grid.column_floats(3, 3, 4)[1] == [3]


def test_zero_that_a_writer_put_in_for_an_uncalculated_formula_is_odd(tmp_path: Path) -> None:
    def fill(book: Any, sheet: Any) -> None:
        sheet.write("A1", 0.0)
        sheet.write_formula("A2", "=A1+1")  # xlsxwriter stores 0 and asks for calculation on opening
        sheet.write_formula("A3", "=A1+1", None, 1.0)

    grid = read_one(written(tmp_path / "a.xlsx", fill))
    assert [grid.odd.at(row, 1) is not None for row in (1, 2, 3)] == [False, True, False]
    odd = grid.odd.at(2, 1)
    assert odd is not None
    assert (odd.kind, odd.detail) == (OddKind.NO_VALUE, "a stored 0 in a workbook that was never calculated")


def test_formula_that_returns_empty_text_has_a_value(tmp_path: Path) -> None:
    rows = '<row r="1"><c r="A1" t="str"><f>""</f><v></v></c><c r="B1"><v>1</v></c></row>'
    grid = read_one(by_hand(tmp_path / "a.xlsx", rows))
    assert grid.odd.at(1, 1) is None
    assert grid.value(1, 1) == ""


def test_number_stored_as_text_is_odd_and_no_number(tmp_path: Path) -> None:
    def fill(book: Any, sheet: Any) -> None:
        sheet.write_string("A1", "3.1")
        sheet.write_number("A2", 3.1)

    grid = read_one(written(tmp_path / "a.xlsx", fill))
    assert [odd.kind for odd in grid.oddities(1, 1)] == [OddKind.TEXT_NUMBER]
    assert grid.oddities(2, 1) == []
    assert grid.column_floats(1, 1, 3)[1] == [1]


def test_hidden_rows_columns_and_sheets_are_reported(tmp_path: Path) -> None:
    def fill(book: Any, sheet: Any) -> None:
        for row in range(4):
            sheet.write_row(row, 0, [1.0, 2.0, 3.0])
        sheet.set_row(2, None, None, {"hidden": True})
        sheet.set_column("B:B", None, None, {"hidden": True})
        secret = book.add_worksheet("notes")
        secret.write("A1", "x")
        secret.very_hidden()

    data, notes = open_grids(written(tmp_path / "a.xlsx", fill))
    assert (data.hidden_rows, data.hidden_columns, data.hidden) == ({3}, {2}, False)
    assert notes.hidden
    assert [odd.detail for odd in data.oddities(3, 2)] == ["row 3", "column B"]


def test_merged_ranges_are_known_by_their_members(tmp_path: Path) -> None:
    def fill(book: Any, sheet: Any) -> None:
        sheet.merge_range("B2:D3", "Transmit")
        sheet.write("A1", 1)

    grid = read_one(written(tmp_path / "a.xlsx", fill))
    assert [str(area) for area in grid.merged] == ["B2:D3"]
    area = grid.merged_range(3, 4)
    assert area is not None
    assert grid.value(area.first_row, area.first_column) == "Transmit"
    assert grid.merged_range(4, 4) is None


def test_all_sheets_are_read_in_their_order_and_charts_are_passed_over(tmp_path: Path) -> None:
    def fill(book: Any, sheet: Any) -> None:
        sheet.write("A1", 1)
        chart = book.add_chart({"type": "line"})
        chart.add_series({"values": "=data!$A$1:$A$1"})
        book.add_chartsheet("plot").set_chart(chart)
        book.add_worksheet("second & last").write("A1", 2)
        book.add_worksheet("blank")

    grids = open_grids(written(tmp_path / "a.xlsx", fill))
    assert [grid.name for grid in grids] == ["data", "second & last", "blank"]
    assert [grid.value(1, 1) for grid in grids] == [1.0, 2.0, ""]


def test_strict_and_absolute_relations_are_followed(tmp_path: Path) -> None:
    relations = PARTS["xl/_rels/workbook.xml.rels"].replace(
        "worksheets/sheet1.xml", "/xl/worksheets/sheet1.xml"
    )
    path = by_hand(
        tmp_path / "a.xlsx",
        '<row r="1"><c r="A1"><v>5</v></c></row>',
        parts={"xl/_rels/workbook.xml.rels": relations},
    )
    assert read_one(path).value(1, 1) == 5.0


def test_macros_are_noted_and_the_data_are_read(tmp_path: Path) -> None:
    path = by_hand(
        tmp_path / "a.xlsm",
        '<row r="1"><c r="A1"><v>5</v></c></row>',
        parts={"xl/vbaProject.bin": b"\xd0\xcf\x11"},
    )
    grid = read_one(path)
    assert grid.value(1, 1) == 5.0
    assert grid.notes == ("the file holds macros: they were not run",)


def test_rich_and_inline_text_is_read(tmp_path: Path) -> None:
    texts = f'<sst xmlns="{MAIN}"><si><r><rPr><color rgb="1"/></rPr><t>Ga</t></r><r><t>in</t></r></si></sst>'
    rows = (
        '<row r="1"><c r="A1" t="s"><v>0</v></c><c r="B1" t="inlineStr"><is><r><rPr><color rgb="FF0000"/></rPr>'
        '<t>a</t></r><r><t xml:space="preserve"> b</t></r></is></c></row>'
    )
    grid = read_one(by_hand(tmp_path / "a.xlsx", rows, parts={"xl/sharedStrings.xml": texts}))
    assert grid.rows == [["Gain", "a b"]]
    assert len(grid.odd) == 0


def test_iso_dates_are_odd(tmp_path: Path) -> None:
    grid = read_one(by_hand(tmp_path / "a.xlsx", '<row r="1"><c r="A1" t="d"><v>2026-03-31</v></c></row>'))
    assert grid.value(1, 1) == date(2026, 3, 31)
    assert grid.odd.at(1, 1) == OddCell(OddKind.DATE, "ISO 8601")


def test_nan_written_as_a_number_is_no_number(tmp_path: Path) -> None:
    rows = '<row r="1"><c r="A1"><v>NaN</v></c></row><row r="2"><c r="A2"><v>inf</v></c></row>'
    assert read_one(by_hand(tmp_path / "a.xlsx", rows)).column_floats(1, 1, 3)[1] == [1, 2]


def test_workbook_without_any_filled_cell_is_refused(tmp_path: Path) -> None:
    path = written(tmp_path / "a.xlsx", lambda book, sheet: sheet.set_column("A:A", 20))
    assert "no cell of the workbook holds anything" in refused(lambda: open_grids(path))


def test_workbook_of_charts_alone_is_refused(tmp_path: Path) -> None:
    book = PARTS["xl/_rels/workbook.xml.rels"].replace('/worksheet"', '/chartsheet"')
    path = by_hand(tmp_path / "a.xlsx", "", parts={"xl/_rels/workbook.xml.rels": book})
    assert "has no worksheet" in refused(lambda: open_grids(path))


def test_unknown_error_code_is_refused_with_its_cell(tmp_path: Path) -> None:
    rows = '<row r="4"><c r="C4" t="e"><v>#SPILL!</v></c></row>'
    path = by_hand(tmp_path / "a.xlsx", rows)
    message = refused(lambda: open_grids(path))
    assert message.startswith("a.xlsx, data, C4: the error #SPILL! is none that can be read")


def test_numbers_are_exactly_those_in_the_file(tmp_path: Path) -> None:
    texts = ["0.1", "1e-300", "17.700000000000003", "123456789012345680", "-2.2250738585072014E-308", "5"]
    rows = "".join(
        f'<row r="{row}"><c r="A{row}"><v>{text}</v></c></row>' for row, text in enumerate(texts, 1)
    )
    numbers, bad = read_one(by_hand(tmp_path / "a.xlsx", rows)).column_floats(1, 1, len(texts) + 1)
    assert numbers.tolist() == [float(text) for text in texts]
    assert bad == []


@pytest.mark.parametrize("part", ["xl/sharedStrings.xml", "xl/styles.xml"])
def test_parts_that_a_workbook_may_leave_out_may_be_missing(tmp_path: Path, part: str) -> None:
    path = by_hand(tmp_path / "a.xlsx", '<row r="1"><c r="A1" s="1"><v>5</v></c></row>', parts={part: None})
    assert read_one(path).value(1, 1) == 5.0


def test_the_sheet_state_comes_from_the_workbook(tmp_path: Path) -> None:
    book = (
        f'<workbook xmlns="{MAIN}" xmlns:r="{RELATIONS}"><sheets>'
        '<sheet name="data" sheetId="1" state="hidden" r:id="rId1"/></sheets></workbook>'
    )
    path = by_hand(
        tmp_path / "a.xlsx", '<row r="1"><c r="A1"><v>5</v></c></row>', parts={"xl/workbook.xml": book}
    )
    assert zipfile.is_zipfile(path)
    assert read_one(path).hidden
