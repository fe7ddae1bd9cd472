from __future__ import annotations

from pathlib import Path
from typing import Any

import openpyxl

from specflow.importers.readers import comments, formulas, read_source
from tests.importers.readers.workbooks import by_hand, refused, written

DATA = Path(__file__).parents[2] / "data"


def test_formulas_are_those_that_openpyxl_sees() -> None:
    path = DATA / "rx_noise_temp_chain.xlsx"
    for sheet in openpyxl.load_workbook(path):
        stored = {
            (cell.row, cell.column): cell.value
            for row in sheet.iter_rows()
            for cell in row
            if cell.data_type == "f"
        }
        assert stored
        found = formulas(read_source(path), sheet.title, stored.keys() | {(1, 1)})
        assert found.keys() == stored.keys()
        own = {cell: text for cell, text in found.items() if "(as in " not in text}
        assert own == {cell: stored[cell] for cell in own}
        assert len(own) > 10


def test_filled_formula_names_the_cell_it_is_written_for(tmp_path: Path) -> None:
    rows = (
        '<row r="1"><c r="A1"><f t="shared" ref="A1:A2" si="0">B1&lt;2</f><v>1</v></c></row>'
        '<row r="2"><c r="A2"><f t="shared" si="0"/><v>1</v></c><c><f>A1</f></c></row>'
    )
    source = read_source(by_hand(tmp_path / "a.xlsx", rows))
    assert formulas(source, "DATA", [(2, 1), (2, 2)]) == {(2, 1): "=B1<2 (as in A1)", (2, 2): "=A1"}


def test_comments_are_read_by_cell(tmp_path: Path) -> None:
    def fill(book: Any, sheet: Any) -> None:
        sheet.write("C17", 3.1)
        sheet.write_comment("C17", "cable 7 & adapter", {"author": "bench"})

    source = read_source(written(tmp_path / "a.xlsx", fill))
    assert comments(source, "data") == {(17, 3): "cable 7 & adapter"}


def test_sheet_without_comments_has_none(tmp_path: Path) -> None:
    source = read_source(by_hand(tmp_path / "a.xlsx", '<row r="1"><c r="A1"><v>1</v></c></row>'))
    assert comments(source, "data") == {}
    assert "sheets in the file: 'data'" in refused(lambda: comments(source, "other"))
