"""The worksheet that calculates: formulas as formulas with cached values, and an office program agrees with them."""

from __future__ import annotations

import io
import shutil
import subprocess
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import pytest
from openpyxl import load_workbook

from specflow.exporters import xlsx
from specflow.limits import parse_limit
from specflow.model.budget_outcome import BudgetOutcome
from specflow.model.formula_sheet import CellLook, FormulaCell, FormulaSheet
from specflow.model.report import Report
from specflow.reports.budget import titles
from specflow.reports.calculation_sheet import calculation_sheet
from specflow.workflows.budget_outcome import HowToCompute, budget_outcome
from tests import receiver
from tests.budgets.chains import project_of

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


def outcome_with_gaps() -> BudgetOutcome:
    """Return a receiver whose limits differ between points, and are none at some."""
    names = ("noise_figure", "gain")
    budget = receiver.a_receiver(*names)
    limits = (
        parse_limit("by frequency[GHz] (17.7: <= 4 dB)"),
        parse_limit("by temperature_ambient[°C] (-25: 30..60 dB; 55: >= 40 dB)"),
    )
    served = [
        one.model_copy(update={"limit": limit})
        for one, limit in zip(receiver.requirements(*names), limits, strict=True)
    ]
    snapshot = project_of(budget, receiver.AIR, requirements=served)
    return budget_outcome(budget, snapshot, receiver.DICTIONARY, HowToCompute(ways=()))


@pytest.mark.desktop
def test_an_office_program_follows_the_point_that_is_chosen(tmp_path: Path) -> None:
    """A sheet made at one point, with another chosen in its cell, shows what a sheet made at that other point holds."""
    with_image = receiver.with_image(receiver.a_receiver(*ALL))
    found = (receiver.outcome(with_image, HowToCompute(ways=()), ALL), outcome_with_gaps())
    made = [
        chosen(calculation_sheet(one, 0, NAMED), one.places[place])
        for one in found
        for place in range(len(one.places))
    ]
    expected = [calculation_sheet(one, place, NAMED) for one in found for place in range(len(one.places))]
    calculated(tmp_path, made, expected)


def chosen(made: FormulaSheet, words: str) -> FormulaSheet:
    """Return the sheet with another condition point chosen."""
    (choice,) = made.choices
    rows = [list(row) for row in made.rows]
    cell = rows[choice.row][choice.column]
    assert cell is not None and cell.text != ""
    rows[choice.row][choice.column] = cell.model_copy(update={"text": words})
    return made.model_copy(update={"rows": tuple(tuple(row) for row in rows)})


@pytest.mark.desktop
def test_an_office_program_calculates_the_same(tmp_path: Path) -> None:
    calculated(tmp_path, SHEETS, SHEETS)


def calculated(tmp_path: Path, sheets: Sequence[FormulaSheet], expected: Sequence[FormulaSheet]) -> None:
    """All cached values are set to 0 first, so that whatever is read afterwards was calculated by the program."""
    office = shutil.which("libreoffice") or shutil.which("soffice")
    if office is None:
        pytest.skip("LibreOffice is not installed")
    profile = tmp_path / "profile"
    (profile / "user").mkdir(parents=True)
    (profile / "user" / "registrymodifications.xcu").write_text(ALWAYS, "utf-8")
    (tmp_path / "budget.xlsx").write_bytes(render(*(emptied(made) for made in sheets)))
    subprocess.run(
        [office, f"-env:UserInstallation={profile.as_uri()}", "--headless", "--convert-to",
         "xlsx:Calc MS Excel 2007 XML", "--outdir", "calculated", "budget.xlsx"],
        cwd=tmp_path, check=True, timeout=180, capture_output=True,
    )  # fmt: skip
    book = load_workbook(tmp_path / "calculated" / "budget.xlsx", data_only=True)
    compared = 0
    for made, found in zip(expected, book.worksheets, strict=True):
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
