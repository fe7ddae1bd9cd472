"""Text of a measurement file that a spreadsheet would run is still text in everything that is exported."""

from __future__ import annotations

import csv
import html
import io
import json
from datetime import date
from pathlib import Path

import openpyxl
import pytest

from specflow.store import create_project
from specflow.workflows.attach import AttachOptions, Decision, accept_attach, preview_attach
from specflow.workflows.export import export_report
from tests.builders import a_block, a_conditions_set, a_project, a_requirement, adding

TEXTS = (
    "=cmd|' /C calc'!A0",
    "@SUM(1+1)",
    "+1+cmd",
    "-2+cmd",
    '=HYPERLINK("http://x","y")',
    "<script>alert(1)</script>",
)


@pytest.mark.parametrize("text", TEXTS)
@pytest.mark.parametrize("ending", ["csv", "jsonl", "html"])
def test_formula_text_of_a_file_is_text_in_every_export(tmp_path: Path, text: str, ending: str) -> None:
    path = tmp_path / f"evil.{ending}"
    if ending == "csv":
        cells = io.StringIO()
        csv.writer(cells).writerows(
            [["Item", "f (GHz)", "Gain (dB)", "Remark"], [text, 27.5, 20, text], [text, 28, 21, text]]
        )
        path.write_text(cells.getvalue(), encoding="utf-8")
    elif ending == "jsonl":
        record = {"Item": text, "f (GHz)": 27.5, "Gain (dB)": 20, "Remark": text}
        path.write_text(f"{json.dumps(record)}\n{json.dumps({**record, 'f (GHz)': 28})}\n", encoding="utf-8")
    else:
        row = f"<tr><td>{html.escape(text)}</td><td>27.5</td><td>20</td><td>{html.escape(text)}</td></tr>"
        head = "<tr><th>Item</th><th>f (GHz)</th><th>Gain (dB)</th><th>Remark</th></tr>"
        path.write_text(f"<table>{head}{row}{row.replace('27.5', '28')}</table>", encoding="utf-8")
    with create_project(tmp_path / "p.specflow", a_project()) as store:
        store.apply(adding(a_block(), a_conditions_set(), a_requirement()), by="test")
        preview = preview_attach(store, path, AttachOptions({"block": "LNA"}))
        accept_attach(store, preview, Decision("test", take_rest=True))
        exported = {
            format: export_report(store, date(2026, 3, 1), format).content
            for format in ("xlsx", "csv", "html")
        }
    book = openpyxl.load_workbook(io.BytesIO(exported["xlsx"]))
    cells_with = [
        cell
        for sheet in book
        for row in sheet.iter_rows()
        for cell in row
        if cell.value is not None and text in str(cell.value)
    ]
    assert cells_with
    assert all(cell.data_type == "s" for cell in cells_with)
    assert all(cell.data_type != "f" for sheet in book for row in sheet.iter_rows() for cell in row)
    rows = csv.reader(io.StringIO(exported["csv"].decode(), newline=""))
    assert not [cell for row in rows for cell in row if cell.startswith(("=", "@", "+cmd", "-2+"))]
    assert b"<script>alert(1)" not in exported["html"]
