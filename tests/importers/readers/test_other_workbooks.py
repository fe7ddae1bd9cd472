"""Old binary workbooks and OpenDocument spreadsheets: the three siblings of one invented workbook, and hostile ones."""

from __future__ import annotations

import io
import shutil
import subprocess
import zipfile
from datetime import date, datetime, time, timedelta
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from python_calamine import CalamineWorkbook

from specflow.errors import FileError
from specflow.importers.readers import Grid, OddKind, open_grids
from tests.importers.readers.workbooks import refused

DATA = Path(__file__).parents[2] / "data" / "readers"
SIBLINGS = [DATA / f"bench{ending}" for ending in (".xlsx", ".xls", ".ods")]
NAMESPACES = " ".join(
    f'xmlns:{prefix}="urn:oasis:names:tc:opendocument:xmlns:{name}:1.0"'
    for prefix, name in (
        ("office", "office"), ("table", "table"), ("text", "text"), ("style", "style"), ("number", "datastyle"),
        ("draw", "drawing"),
    )
)  # fmt: skip


def by_hand(path: Path, rows: str, styles: str = "", parts: dict[str, str] | None = None) -> Path:
    """An OpenDocument spreadsheet with one sheet ``data`` of these rows."""
    content = (
        f"<office:document-content {NAMESPACES}><office:automatic-styles>{styles}</office:automatic-styles>"
        f'<office:body><office:spreadsheet><table:table table:name="data">{rows}</table:table>'
        "</office:spreadsheet></office:body></office:document-content>"
    )
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("mimetype", "application/vnd.oasis.opendocument.spreadsheet")
        for name, part in {"content.xml": content, **(parts or {})}.items():
            archive.writestr(name, part)
    return path


def number(value: str, more: str = "", text: str = "x") -> str:
    return (
        f'<table:table-cell office:value-type="float" office:value="{value}" {more}><text:p>{text}</text:p>'
        "</table:table-cell>"
    )


def row(*cells: str, more: str = "") -> str:
    return f"<table:table-row {more}>{''.join(cells)}</table:table-row>"


def cells_of(grid: Grid) -> dict[tuple[int, int], Any]:
    return {
        (row, column): value
        for row in range(1, grid.last_row + 1)
        for column in range(1, grid.last_column + 1)
        if (value := grid.value(row, column)) != ""
    }


@pytest.mark.parametrize("path", SIBLINGS, ids=lambda path: path.name)
def test_every_cell_is_that_which_openpyxl_reads_of_the_workbook(path: Path) -> None:
    expected = openpyxl.load_workbook(SIBLINGS[0], data_only=True)
    grids = open_grids(path)
    assert [grid.name for grid in grids] == ["Gain", "Hidden", "Empty"]
    assert [grid.hidden for grid in grids] == [False, True, False]
    for grid in grids:
        cells = {
            (cell.row, cell.column): cell.value
            for cells in expected[grid.name].iter_rows()
            for cell in cells
            if cell.value is not None and cell.data_type != "e"
        }
        found = cells_of(grid)
        assert found.keys() == cells.keys()
        for place, value in found.items():
            if isinstance(value, str):
                assert " ".join(value.split()) == " ".join(cells[place].split())
            elif not isinstance(value, date | datetime | time | timedelta):
                assert value == cells[place]
                assert isinstance(value, bool) == isinstance(cells[place], bool)
    assert grids[0].value(5, 8) == datetime(2026, 3, 1, 12, 0)
    assert grids[0].value(16, 4) == time(6, 30)
    assert grids[0].value(16, 5) == timedelta(days=1, hours=12)
    assert grids[0].value(5, 7) is True


@pytest.mark.parametrize("path", SIBLINGS, ids=lambda path: path.name)
def test_what_bare_values_do_not_show(path: Path) -> None:
    grid = open_grids(path)[0]
    kinds = {(run.column, run.first, run.last): (run.cell.kind, run.cell.unit) for run in grid.odd}
    assert kinds == {
        (3, 5, 10): (OddKind.UNIT_FORMAT, "dB"),
        (4, 5, 10): (OddKind.PERCENT, ""),
        (4, 16, 16): (OddKind.DATE, ""),
        (5, 5, 10): (OddKind.SCALED, ""),
        (5, 16, 16): (OddKind.DATE, ""),
        (6, 12, 12): (OddKind.ERROR, ""),
        (8, 5, 10): (OddKind.DATE, ""),
        (10, 5, 10): (OddKind.UNIT_FORMAT, "€"),
    } | ({(4, 12, 12): (OddKind.NO_VALUE, "")} if path.suffix == ".xlsx" else {})
    assert (grid.hidden_rows, grid.hidden_columns) == ({7}, {6})
    assert [str(area) for area in grid.merged] == ["B2:F2"]
    assert [odd.kind for odd in grid.oddities(5, 9)] == [OddKind.TEXT_NUMBER]
    odd = grid.odd.at(12, 6)
    assert odd is not None
    assert odd.detail == "#DIV/0!"


@pytest.mark.parametrize("path", SIBLINGS[1:], ids=lambda path: path.name)
def test_numbers_are_those_of_bulk_reading_at_their_true_places(path: Path) -> None:
    with CalamineWorkbook.from_path(path) as book:
        for grid in open_grids(path):
            other = book.get_sheet_by_name(grid.name)
            top, left = other.start or (0, 0)
            theirs = {
                (row + top + 1, column + left + 1): value
                for row, cells in enumerate(other.to_python())
                for column, value in enumerate(cells)
                if isinstance(value, float | int) and not isinstance(value, bool)
            }
            ours = {place: value for place, value in cells_of(grid).items() if isinstance(value, float)}
            truths = {place for place, value in cells_of(grid).items() if isinstance(value, bool)}
            assert ours == {place: value for place, value in theirs.items() if place not in truths}


def test_formulas_that_nobody_calculated_have_no_value() -> None:
    grid = open_grids(DATA / "uncalculated.xls")[0]
    assert [(run.column, run.first, run.last, run.cell.kind) for run in grid.odd] == [
        (3, 2, 4, OddKind.NO_VALUE)
    ]
    assert grid.column_floats(3, 2, 5)[1] == [2, 3, 4]


def test_protected_workbooks_are_refused(tmp_path: Path) -> None:
    content = SIBLINGS[1].read_bytes()
    start = content.index(b"\x09\x08\x10\x00") + 20  # the record after the first BOF becomes FILEPASS
    (tmp_path / "a.xls").write_bytes(content[:start] + b"\x2f\x00" + content[start + 2 :])
    assert "protected by a password" in refused(lambda: open_grids(tmp_path / "a.xls"))
    manifest = {"META-INF/manifest.xml": "<manifest:encryption-data/>"}
    assert "protected by a password" in refused(
        lambda: open_grids(by_hand(tmp_path / "a.ods", "", parts=manifest))
    )


@pytest.mark.parametrize("path", SIBLINGS[1:], ids=lambda path: path.name)
@pytest.mark.parametrize("share", [0.1, 0.5, 0.9, 0.99])
def test_truncated_workbooks_are_refused(tmp_path: Path, path: Path, share: float) -> None:
    content = path.read_bytes()
    (tmp_path / path.name).write_bytes(content[: int(len(content) * share)])
    assert "damaged" in refused(lambda: open_grids(tmp_path / path.name))


def test_repeated_rows_and_cells_stand_at_their_true_places(tmp_path: Path) -> None:
    rows = row(more='table:number-rows-repeated="4"') + row(
        '<table:table-cell table:number-columns-repeated="2"/>',
        number("1.5", 'table:number-columns-repeated="3"'),
        more='table:number-rows-repeated="2"',
    )
    grid = open_grids(by_hand(tmp_path / "a.ods", rows))[0]
    assert cells_of(grid) == {(line, column): 1.5 for line in (5, 6) for column in (3, 4, 5)}


def test_empty_repetitions_to_the_end_of_the_sheet_cost_nothing(tmp_path: Path) -> None:
    cell = '<table:table-cell table:number-columns-repeated="16384"/>'
    empty = row(cell, more='table:number-rows-repeated="1048000"')
    grid = open_grids(by_hand(tmp_path / "a.ods", row(number("1")) + empty))[0]
    assert (grid.last_row, grid.last_column) == (1, 1)


BOMB = row(number("1", 'table:number-columns-repeated="16384"'), more='table:number-rows-repeated="1048576"')


@pytest.mark.parametrize(
    ("rows", "what"),
    [
        (BOMB, "more cells than are read"),
        (row(number("1", 'table:number-columns-repeated="999999999"')), "outside the sheet"),
        (row(number("1"), more='table:number-rows-repeated="1048577"'), "outside the sheet"),
        (row(number("1"), more='table:number-rows-repeated="1e9"'), "table:number-rows-repeated is '1e9'"),
        (row(number("1,5")), "'1,5' is no number"),
        (row(number("NaN")), "'NaN' is no number"),
        (row('<table:table-cell office:value-type="float"><text:p>3</text:p></table:table-cell>'), "without a value"),
        (row('<table:table-cell office:value-type="date" office:date-value="2026-13-01"/>'), "is no date"),
        (row('<table:table-cell office:value-type="time" office:time-value="soon"/>'), "is no time"),
        (row('<table:table-cell office:value-type="void" office:value="1"/>'), "unknown type"),
        (row("<table:table-cell><table:table/></table:table-cell>"), "a table of its own"),
        ("<table:table/>", "a table of its own"),
        ("<table:table-row>", "no well-formed XML"),
        ("", "no cell of the spreadsheet holds anything"),
    ],
)  # fmt: skip
def test_content_that_no_program_writes_is_refused_with_its_place(
    tmp_path: Path, rows: str, what: str
) -> None:
    assert what in refused(lambda: open_grids(by_hand(tmp_path / "a.ods", rows)))


@pytest.mark.parametrize(
    "head",
    [
        '<!DOCTYPE a [<!ENTITY b "c">]>',
        '<!DOCTYPE a [<!ENTITY b SYSTEM "file:///etc/passwd">]>',
        "<!DOCTYPE a SYSTEM 'http://127.0.0.1/a.dtd'>",
    ],
)
def test_document_types_and_entities_are_refused(tmp_path: Path, head: str) -> None:
    with zipfile.ZipFile(tmp_path / "a.ods", "w") as archive:
        archive.writestr("content.xml", f"{head}<office:document-content {NAMESPACES}/>")
    assert "declares a document type" in refused(lambda: open_grids(tmp_path / "a.ods"))


def test_notes_and_drawings_are_no_cell_text(tmp_path: Path) -> None:
    cell = (
        '<table:table-cell office:value-type="string"><office:annotation><text:p>-99</text:p></office:annotation>'
        '<draw:frame><draw:text-box><text:p>7</text:p></draw:text-box></draw:frame><text:p>a<text:s text:c="2"/>b'
        "<text:line-break/><text:span>c</text:span></text:p><text:p>d</text:p></table:table-cell>"
    )
    grid = open_grids(by_hand(tmp_path / "a.ods", row(cell)))[0]
    assert grid.value(1, 1) == "a  b\nc\nd"


def test_styles_of_columns_rows_and_parents_count(tmp_path: Path) -> None:
    styles = (
        '<number:percentage-style style:name="P"><number:number/><number:text>%</number:text></number:percentage-style>'
        '<number:number-style style:name="U"><number:number/><number:text> dBm</number:text></number:number-style>'
        '<number:number-style style:name="M"><style:map style:condition="value()&gt;0" style:apply-style-name="U"/>'
        "</number:number-style>"
        '<style:style style:name="p" style:family="table-cell" style:data-style-name="P"/>'
        '<style:style style:name="c" style:family="table-cell" style:parent-style-name="p"/>'
        '<style:style style:name="m" style:family="table-cell" style:data-style-name="M"/>'
        '<style:style style:name="r" style:family="table-cell" style:parent-style-name="r"/>'
    )
    rows = (
        '<table:table-column table:default-cell-style-name="c"/><table:table-column/>'
        + row(number("0.5"), number("2", 'table:style-name="m"'), number("3", 'table:style-name="r"'))
        + row(number("0.5", 'table:style-name="m"'), number("2"), more='table:default-cell-style-name="m"')
        + row('<table:table-cell office:value-type="percentage" office:value="0.1"/>')
        + row("<table:table-cell/>", '<table:table-cell office:value-type="currency" office:value="1"/>')
    )
    grid = open_grids(by_hand(tmp_path / "a.ods", rows, styles))[0]
    assert [(line, column) for line in range(1, 5) for column in (1, 2, 3) if grid.odd.at(line, column)] == [
        (1, 1), (1, 2), (2, 1), (2, 2), (3, 1), (4, 2)
    ]  # fmt: skip
    assert [grid.odd.at(line, 1).kind for line in (1, 2, 3)] == [  # type: ignore[union-attr]
        OddKind.PERCENT, OddKind.UNIT_FORMAT, OddKind.PERCENT
    ]  # fmt: skip


def test_formulas_without_a_value_and_errors(tmp_path: Path) -> None:
    formula = '<table:table-cell table:formula="of:=A1"'
    rows = row(
        number("1"),
        f"{formula}/>",
        f'{formula} office:value-type="float"/>',
        f"{formula}><text:p/></table:table-cell>",
        f'{formula} office:value-type="string"><text:p>Err:502</text:p></table:table-cell>',
        f'{formula} office:value-type="float" office:value="1"><text:p>TRUE</text:p></table:table-cell>',
    )
    grid = open_grids(by_hand(tmp_path / "a.ods", rows))[0]
    kinds = [odd.kind if (odd := grid.odd.at(1, column)) else None for column in range(1, 7)]
    assert kinds == [None, OddKind.NO_VALUE, OddKind.NO_VALUE, None, OddKind.ERROR, None]
    assert grid.row(1) == [1.0, "", "", "", "", True]


@pytest.mark.parametrize(
    ("name", "content", "note"),
    [
        ("a.xls", b"f (GHz)\tGain (dB)\n27,5\t20,1\n28,0\t20,3\n", "the file is text"),
        ("a.xls", b"<html><table><tr><th>f<th>G</tr><tr><td>27.5<td>20.1</table>", "a web page with tables"),
        ("a.xlsx", "f\tG\n1\t2\n".encode("utf-16"), "the file is text"),
        ("a.csv", SIBLINGS[0].read_bytes(), "a workbook (.xlsx)"),
        ("a.xls", SIBLINGS[0].read_bytes(), "a workbook (.xlsx)"),
        ("a.xlsx", SIBLINGS[1].read_bytes(), "old binary format (.xls)"),
        ("a.xlsx", SIBLINGS[2].read_bytes(), "OpenDocument spreadsheet"),
    ],
)
def test_a_file_whose_ending_lies_is_read_as_what_it_is(
    tmp_path: Path, name: str, content: bytes, note: str
) -> None:
    (tmp_path / name).write_bytes(content)
    grids = open_grids(tmp_path / name)
    assert all(note in grid.notes[0] and "its ending is" in grid.notes[0] for grid in grids)
    assert any(cells_of(grid) for grid in grids)


@pytest.mark.parametrize(
    "content",
    [b"Just a line\n", b"caf\xe9,1\n2\0,3\n", b"Report of Monday\nall was well\n", b"\x00\x01\x02\x03" * 40],
)
def test_text_that_is_no_table_is_not_read_for_a_workbook(tmp_path: Path, content: bytes) -> None:
    (tmp_path / "a.xlsx").write_bytes(content)
    refused(lambda: open_grids(tmp_path / "a.xlsx"))


def test_binary_workbooks_of_today_are_refused_with_a_remedy(tmp_path: Path) -> None:
    content = io.BytesIO()
    with zipfile.ZipFile(content, "w") as archive:
        archive.writestr("xl/workbook.bin", b"\0")
    (tmp_path / "a.xlsx").write_bytes(content.getvalue())
    assert "binary workbook (.xlsb) (save it as .xlsx)" in refused(lambda: open_grids(tmp_path / "a.xlsx"))


def test_tables_of_a_web_page(tmp_path: Path) -> None:
    page = """<html><head><title>3</title></head><body><p>7</p><table><tr><th colspan=2>Gain &amp; NF</th></tr>
    <tr><td rowspan="2">a</td><td>1,5<br>dB</td></tr><tr><td>&minus;2,25</td></tr></table><table></table>
    <table><td>x</td></table></body></html>"""
    (tmp_path / "a.html").write_text(page, encoding="utf-8")
    first, second = open_grids(tmp_path / "a.html")
    assert first.rows == [["Gain & NF"], ["a", "1,5 dB"], ["", "−2,25"]]
    assert [str(area) for area in first.merged] == ["A1:B1", "A2:A3"]
    assert (second.name, second.rows) == ("table 2", [["x"]])
    (tmp_path / "b.html").write_text("<table><tr><td><table></table></td></tr></table>")
    assert "inside another" in refused(lambda: open_grids(tmp_path / "b.html"))
    (tmp_path / "d.html").write_text("<html><table><tr><td>1<![\u00d4\u00d8<td>2</table>", encoding="utf-8")
    assert "the web page is damaged" in refused(lambda: open_grids(tmp_path / "d.html"))
    (tmp_path / "c.html").write_text('<table><tr><td rowspan="16000" colspan="16000">1</td></tr></table>')
    assert "more than 2,000,000 cells" in refused(lambda: open_grids(tmp_path / "c.html"))


@pytest.mark.desktop
@pytest.mark.parametrize("kind", ["ods", "xls"])
def test_published_workbooks_converted_by_an_office_program(tmp_path: Path, kind: str) -> None:
    office = shutil.which("libreoffice") or shutil.which("soffice")
    if office is None:
        pytest.skip("LibreOffice is not installed")
    originals = sorted(DATA.parent.glob("*.xlsx"))
    profile = f"-env:UserInstallation=file://{tmp_path}/profile"
    command = [
        office,
        profile,
        "--headless",
        "--convert-to",
        kind,
        "--outdir",
        str(tmp_path),
        *map(str, originals),
    ]
    subprocess.run(command, check=True, capture_output=True, timeout=180)
    compared = 0
    for original in originals:
        grids = {grid.name: grid for grid in open_grids(tmp_path / f"{original.stem}.{kind}")}
        for sheet in openpyxl.load_workbook(original, data_only=True).worksheets:
            grid = grids[sheet.title]
            for cell in (cell for cells in sheet.iter_rows() for cell in cells):
                if isinstance(cell.value, float | int) and not isinstance(cell.value, bool):
                    assert grid.value(cell.row, cell.column) == pytest.approx(cell.value, rel=1e-12), (
                        cell.coordinate
                    )
                    odd = grid.odd.at(cell.row, cell.column)
                    assert ("%" in cell.number_format) == (odd is not None and odd.kind is OddKind.PERCENT)
                    compared += 1
            assert sorted(map(str, grid.merged)) == sorted(map(str, sheet.merged_cells.ranges))
    assert compared > 200


def test_text_of_an_old_code_page_saved_as_a_workbook_is_read_and_bytes_that_are_no_text_are_not(
    tmp_path: Path,
) -> None:
    path = tmp_path / "export.xls"
    path.write_bytes("T (°C)\tGain (dB)\n-30\t20.1\n25\t20.3\n".encode("latin-1"))
    (grid,) = open_grids(path)
    assert grid.value(1, 1) == "T (°C)" and grid.value(3, 2) == "20.3"
    path.write_bytes(b"T\tGain\n\0\1\2\x99\t1\n")
    with pytest.raises(FileError, match="no old binary workbook, and no text either"):
        open_grids(path)
