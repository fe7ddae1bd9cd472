"""The worksheet that calculates: formulas as formulas with cached values, and an office program agrees with them."""

from __future__ import annotations

import io
import shutil
import subprocess
from pathlib import Path
from typing import Any

import pytest
from openpyxl import load_workbook

from specflow.exporters import xlsx
from specflow.model.formula_sheet import CellLook, FormulaCell, FormulaSheet
from specflow.model.report import Report
from specflow.reports.budget import titles
from specflow.reports.calculation_sheet import calculation_sheet
from specflow.workflows.budget_outcome import HowToCompute
from tests import receiver

NAMED = titles(receiver.DICTIONARY)
ALL = tuple(receiver.UNITS)
ALWAYS = """<?xml version="1.0" encoding="UTF-8"?>
<oor:items xmlns:oor="http://openoffice.org/2001/registry" xmlns:xs="http://www.w3.org/2001/XMLSchema"
 xmlns:xsi="http://www.w3.org/2001/XMLSchema-instance">
<item oor:path="/org.openoffice.Office.Calc/Formula/Load"><prop oor:name="OOXMLRecalcMode" oor:op="fuse">
<value>0</value></prop></item></oor:items>"""


def sheet(intermodulation: str, *, with_image: bool = False) -> FormulaSheet:
    budget = receiver.a_receiver(*ALL, intermodulation=intermodulation)
    budget = receiver.with_image(budget) if with_image else budget
    made = receiver.outcome(budget, HowToCompute(ways=()), ALL)
    return calculation_sheet(made, made.place, NAMED)


SHEETS = (sheet("coherent"), sheet("non-coherent"), sheet("coherent", with_image=True))


def render(*sheets: FormulaSheet) -> bytes:
    return xlsx.render(Report(title="Invented", tables=(), sheets=sheets))


def one(cell: FormulaCell) -> FormulaSheet:
    return FormulaSheet(title="S", rows=((cell,),))


def test_formulas_are_written_with_the_value_they_have() -> None:
    content = render(one(FormulaCell(formula="=1+2", number=3.0, look=CellLook.FORMULA)))
    assert load_workbook(io.BytesIO(content))["S"]["A1"].value == "=1+2"
    assert load_workbook(io.BytesIO(content), data_only=True)["S"]["A1"].value == 3


def test_text_is_text_whatever_it_begins_with() -> None:
    cell = load_workbook(io.BytesIO(render(one(FormulaCell(text="=1+2")))))["S"]["A1"]
    assert (cell.value, cell.data_type) == ("=1+2", "s")


def test_sheets_of_one_title_are_told_apart_and_the_bytes_are_the_same_each_time() -> None:
    content = render(*SHEETS)
    assert load_workbook(io.BytesIO(content)).sheetnames == [
        "Budget B-RX",
        "Budget B-RX (2)",
        "Budget B-RX (3)",
    ]
    assert render(*SHEETS) == content


@pytest.mark.desktop
def test_an_office_program_calculates_the_same(tmp_path: Path) -> None:
    """All cached values are set to 0 first, so that whatever is read afterwards was calculated by the program."""
    office = shutil.which("libreoffice") or shutil.which("soffice")
    if office is None:
        pytest.skip("LibreOffice is not installed")
    profile = tmp_path / "profile"
    (profile / "user").mkdir(parents=True)
    (profile / "user" / "registrymodifications.xcu").write_text(ALWAYS, "utf-8")
    (tmp_path / "budget.xlsx").write_bytes(render(*(emptied(made) for made in SHEETS)))
    subprocess.run(
        [office, f"-env:UserInstallation={profile.as_uri()}", "--headless", "--convert-to",
         "xlsx:Calc MS Excel 2007 XML", "--outdir", "calculated", "budget.xlsx"],
        cwd=tmp_path, check=True, timeout=180, capture_output=True,
    )  # fmt: skip
    book = load_workbook(tmp_path / "calculated" / "budget.xlsx", data_only=True)
    compared = 0
    for made, found in zip(SHEETS, book.worksheets, strict=True):
        for row, line in enumerate(made.rows, start=1):
            for column, cell in enumerate(line, start=1):
                if cell is not None and cell.formula:
                    assert same(found.cell(row, column).value, cell), (
                        cell.formula,
                        found.cell(row, column).value,
                    )
                    compared += 1
    assert compared > 500


def emptied(made: FormulaSheet) -> FormulaSheet:
    """Return the sheet with a wrong value behind every formula."""
    rows = tuple(
        tuple(
            cell.model_copy(update={"number": 0.0, "text": ""}) if cell is not None and cell.formula else cell
            for cell in row
        )
        for row in made.rows
    )
    return made.model_copy(update={"rows": rows})


def same(value: Any, cell: FormulaCell) -> bool:
    if cell.number is None:
        return bool(value == cell.text)
    return isinstance(value, int | float) and value == pytest.approx(cell.number, rel=1e-9, abs=1e-9)
