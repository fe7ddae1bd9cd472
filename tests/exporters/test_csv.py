"""csv as RFC 4180 has it, and harmless in a spreadsheet program."""

from __future__ import annotations

import csv
import io

import pytest

from specflow.exporters import writer
from specflow.exporters.csv import guarded
from specflow.model.report import ReportCell
from tests.exporters.reporting import harbour_report, small_report


def test_the_first_table_reads_back_as_it_was() -> None:
    whole = harbour_report()
    report = whole.model_copy(update={"tables": whole.tables[1:]})
    content = writer("csv").render(report)
    rows = list(csv.reader(io.StringIO(content.decode("utf-8"), newline="")))
    table = report.tables[0]
    assert rows[0] == [column.title for column in table.columns]
    plain = [[cell.removeprefix("'") for cell in row] for row in rows[1:]]
    assert plain == [[cell.text for cell in row.cells] for row in table.rows]
    assert [cell for row in rows[1:] for cell in row if cell.startswith("'")] == [
        "'=lna.csv · B5",
        "'=lna.csv · C5",
    ]


def test_lines_end_as_the_rfc_says_and_awkward_text_is_quoted() -> None:
    cells = (ReportCell(text='a "quoted" word'), ReportCell(text="two\nlines"), ReportCell(text="a,b"))
    content = writer("csv").render(small_report(*cells))
    assert content == b'C0,C1,C2\r\n"a ""quoted"" word","two\nlines","a,b"\r\n'


@pytest.mark.parametrize("text", ["=1+1", "@SUM(A1)", "+cmd", "-cmd", "\t=1", "\r=1", "\n=1", "＝1", "－cmd"])
def test_text_that_would_run_as_a_formula_is_marked_as_text(text: str) -> None:
    assert guarded(text, is_number=False) == "'" + text


def test_signed_numbers_are_left_alone() -> None:
    assert guarded("-1.19 dB", is_number=True) == "-1.19 dB"
    assert guarded("plain", is_number=False) == "plain"
