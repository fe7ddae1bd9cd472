"""The workbook, opened again with two readers: every cell says what the report says."""

from __future__ import annotations

import io
import shutil
import subprocess
import zipfile
from collections.abc import Iterator
from pathlib import Path

import pytest
from openpyxl import load_workbook
from openpyxl.cell.cell import Cell
from python_calamine import CalamineWorkbook

from specflow.exporters import writer, xlsx
from specflow.model.report import Report, ReportCell
from tests.exporters.reporting import HOSTILE, harbour_report, small_report

REPORT = harbour_report()
CONTENT = writer("xlsx").render(REPORT)


def shown(cell: Cell) -> str:
    """Return what a spreadsheet program shows of a cell whose number format is ``0.00" dB"`` or the like."""
    if not isinstance(cell.value, int | float):
        return str(cell.value or "")
    positive, negative = cell.number_format.split(";")
    pattern = negative if cell.value < 0 else positive
    body, _, rest = pattern.partition('"')
    sign, digits = (body[0], body[1:]) if body[0] in "+-" else ("", body)
    decimals = len(digits.partition(".")[2])
    return f"{sign}{xlsx_rounded(abs(cell.value), decimals)}{rest.removesuffix(chr(34))}"


def xlsx_rounded(value: float, decimals: int) -> str:
    """Round as spreadsheet programs do: the shortest decimal of the number, halves away from zero."""
    from decimal import ROUND_HALF_UP, Decimal

    return str(Decimal(repr(value)).quantize(Decimal(1).scaleb(-decimals), ROUND_HALF_UP))


def pairs() -> Iterator[tuple[str, ReportCell, Cell]]:
    """Give every cell of the report with the cell of the workbook, and where it is."""
    book = load_workbook(io.BytesIO(CONTENT))
    for table in REPORT.tables:
        sheet = book[table.title]
        for offset, row in enumerate(table.rows):
            for place, cell in enumerate(row.cells):
                there = sheet.cell(5 + offset, 1 + place)
                assert isinstance(there, Cell)
                yield f"{table.key} {there.coordinate}", cell, there


def test_every_cell_shows_what_the_report_shows() -> None:
    for where, ours, theirs in pairs():
        assert shown(theirs) == ours.text, where


def test_numbers_are_numbers_unrounded() -> None:
    numbers = 0
    for where, ours, theirs in pairs():
        if isinstance(theirs.value, int | float):
            numbers += 1
            assert theirs.value == pytest.approx(ours.number, rel=1e-14), where
    assert numbers > 200


def test_another_reader_sees_the_same_values() -> None:
    book = CalamineWorkbook.from_filelike(io.BytesIO(CONTENT))
    assert book.sheet_names == [table.title for table in REPORT.tables]
    for table in REPORT.tables:
        rows = book.get_sheet_by_name(table.title).to_python(skip_empty_area=False)[4:]
        for row, values in zip(table.rows, rows, strict=True):
            for cell, value in zip(row.cells, values, strict=False):
                is_number = cell.number is not None and xlsx.figure_format(cell)
                assert value == (pytest.approx(cell.number, rel=1e-14) if is_number else cell.text)


def test_figures_keep_a_distance_from_the_words_of_the_next_column() -> None:
    right = [cell for _, _, cell in pairs() if cell.alignment.horizontal == "right"]
    assert right and all(cell.alignment.indent == 1 for cell in right)


def test_text_that_looks_like_a_formula_stays_text() -> None:
    cells = [theirs for _, ours, theirs in pairs() if ours.text in (HOSTILE, "=lna.csv", "+49 is no number")]
    assert len(cells) >= 4 and {cell.data_type for cell in cells} == {"s"}
    with zipfile.ZipFile(io.BytesIO(CONTENT)) as parts:
        sheets = [parts.read(name) for name in parts.namelist() if name.startswith("xl/worksheets/sheet")]
    assert sheets and not any(b"<f>" in sheet for sheet in sheets)


def test_the_same_report_gives_the_same_bytes() -> None:
    assert writer("xlsx").render(harbour_report()) == CONTENT


def test_ids_lead_to_the_points_and_back() -> None:
    book = load_workbook(io.BytesIO(CONTENT))
    link = book["Compliance matrix"]["A6"].hyperlink
    assert book["Compliance matrix"]["A6"].value == "PA-1"
    place = link.location.rpartition("!")[2]
    assert book["Required points"][place].value == "PA-1"
    back = book["Required points"][place].hyperlink.location
    assert back == "'Compliance matrix'!A6"


def test_headers_stay_in_view_and_rows_can_be_filtered() -> None:
    sheet = load_workbook(io.BytesIO(CONTENT))["Compliance matrix"]
    assert sheet.freeze_panes == "B5"
    assert sheet.auto_filter.ref == f"A4:AB{4 + len(REPORT.table('matrix').rows)}"
    assert sheet["A4"].value == "Requirement" and sheet["A6"].alignment.indent == 1


def test_sheets_print_in_landscape_and_no_smaller_than_can_be_read() -> None:
    book = load_workbook(io.BytesIO(CONTENT))
    across = {}
    for sheet in book:
        assert sheet.page_setup.orientation == "landscape" and sheet.page_setup.paperSize == 9
        assert sheet.sheet_properties.pageSetUpPr.fitToPage and sheet.page_setup.fitToHeight == 0
        assert sheet.print_title_rows == "$4:$4" and sheet.print_title_cols == "$A:$A"
        across[sheet.title] = int(sheet.page_setup.fitToWidth or 1)
    assert across["Summary"] == 1 and across["Compliance matrix"] == 3


def test_rows_are_as_high_as_their_text() -> None:
    words = "x" * 70  # five lines in a column of fourteen
    sheet = load_workbook(io.BytesIO(xlsx.render(small_report(ReportCell(text=words))))).worksheets[0]
    assert sheet.row_dimensions[5].height == 15 * 5
    assert sheet.row_dimensions[4].height in (None, 15)
    endless = load_workbook(io.BytesIO(xlsx.render(small_report(ReportCell(text=words * 20))))).worksheets[0]
    assert endless.row_dimensions[5].height == 15 * xlsx.MOST_LINES


def test_more_rows_than_a_sheet_holds_go_on_the_next(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(xlsx, "MOST_ROWS", 25)
    points = REPORT.table("points")
    book = load_workbook(io.BytesIO(xlsx.render(Report(title="R", tables=(points,)))))
    assert book.sheetnames == ["Required points (1)", "Required points (2)", "Required points (3)"]
    ids = [sheet.cell(row, 1).value for sheet in book for row in range(5, sheet.max_row + 1)]
    assert ids == [row.id for row in points.rows]


@pytest.mark.parametrize(
    ("cell", "expected"),
    [
        (ReportCell(text="+0.40 dB", number=0.4), '+0.00" dB";-0.00" dB"'),
        (ReportCell(text="31 of 48", number=31.0), '0" of 48";-0" of 48"'),
        (ReportCell(text="1.23e-05", number=0.0000123), ""),
        (ReportCell(text="≤ -90 dBm"), ""),
        (ReportCell(text="12 in", number=12.0), '0" in";-0" in"'),
    ],
)
def test_number_formats_show_the_text(cell: ReportCell, expected: str) -> None:
    assert xlsx.figure_format(cell) == expected


def test_a_number_whose_text_fits_no_format_is_written_as_that_text() -> None:
    cell = ReportCell(text="1.23e-05 W", number=0.0000123)
    sheet = load_workbook(io.BytesIO(xlsx.render(small_report(cell)))).worksheets[0]
    assert sheet["A5"].value == "1.23e-05 W"


def test_sheet_names_are_short_allowed_and_told_apart() -> None:
    assert xlsx.sheet_name("a/b: [c]*?") == "a b   c"
    assert len(xlsx.sheet_name("x" * 50)) == 31
    assert xlsx.sheet_name("points", ["Points"]) == "points (2)"
    assert xlsx.sheet_name("'") == "Sheet"


@pytest.mark.desktop
def test_an_office_program_opens_it_and_shows_the_same(tmp_path: Path) -> None:
    office = shutil.which("libreoffice") or shutil.which("soffice")
    if office is None:
        pytest.skip("LibreOffice is not installed")
    (tmp_path / "report.xlsx").write_bytes(CONTENT)
    as_shown = "csv:Text - txt - csv (StarCalc):44,34,76,1,,0,false,true"
    profile = f"-env:UserInstallation=file://{tmp_path / 'profile'}"
    subprocess.run(
        [office, profile, "--headless", "--convert-to", as_shown, "report.xlsx"],
        cwd=tmp_path, check=True, timeout=180, capture_output=True,
    )  # fmt: skip
    lines = (tmp_path / "report.csv").read_text("utf-8")
    for row in REPORT.tables[0].rows:
        for cell in row.cells:
            assert cell.text.split("\n")[0] in lines, cell.text


@pytest.mark.desktop
def test_an_office_program_prints_what_a_board_asks_first_on_one_page(tmp_path: Path) -> None:
    office = shutil.which("libreoffice") or shutil.which("soffice")
    if office is None or shutil.which("pdftotext") is None:
        pytest.skip("LibreOffice or pdftotext (poppler) is not installed")
    (tmp_path / "report.xlsx").write_bytes(xlsx.render(Report(title="R", tables=(REPORT.table("matrix"),))))
    profile = f"-env:UserInstallation=file://{tmp_path / 'profile'}"
    subprocess.run(
        [office, profile, "--headless", "--convert-to", "pdf", "report.xlsx"],
        cwd=tmp_path, check=True, timeout=180, capture_output=True,
    )  # fmt: skip
    said = subprocess.run(
        ["pdftotext", "-layout", "report.pdf", "-"],
        cwd=tmp_path, check=True, timeout=60, capture_output=True, text=True,
    ).stdout  # fmt: skip
    pages = said.rstrip("\f").split("\f")
    assert len(pages) == 3 and "Page 1 of 3" in pages[0]
    row = next(line for line in pages[0].splitlines() if "pa_bench.xlsx · Bench 1 · D9" in line)
    assert "PA-1" in row and "failing" in row and "non-compliant" in row and "8 of 9" in row
    assert all("PA-1" in page for page in pages), "what a row is about stands on every page"
