"""Budgets in the compliance report: drawn on the page, calculating in the workbook, absent where there are none."""

from __future__ import annotations

import io
import json
from pathlib import Path
from zipfile import ZipFile

import pytest
from openpyxl import load_workbook

from specflow.model.budget import Budget
from specflow.model.snapshot import Snapshot
from specflow.store import ProjectStore
from specflow.workflows.evaluate_project import evaluate_project
from specflow.workflows.export import compliance_report, export_report
from tests import harbour, receiver
from tests.builders import a_budget_line


def broken() -> Budget:
    """Return a budget whose mixer has no gain, so that it cannot be evaluated."""
    return receiver.a_receiver().model_copy(
        update={"id": "B-BAD", "positions": (), "lines": (a_budget_line(1, "LNA", "noise_figure", 1.0),)}
        | {"requirements": ("R-gain",), "quantity": receiver.requirements("gain")[0].quantity}
    )


def project(*budgets: Budget) -> Snapshot:
    names = (*receiver.SMALL, "gain")
    return receiver.receiver_project(budgets[0], *budgets[1:], names=names)


@pytest.fixture
def store(tmp_path: Path) -> ProjectStore:
    return receiver.receiver_store(tmp_path / "receiver.specflow", project(receiver.a_receiver(), broken()))


def test_the_page_draws_every_budget_that_can_be_evaluated(store: ProjectStore) -> None:
    page = export_report(store, harbour.AS_OF, "html").content.decode()
    assert 'id="budgets"' in page and 'id="budget-tolerances"' in page and 'id="budget-B-RX"' in page
    assert page.count("<svg ") == 7
    assert "budget B-BAD" in page and 'id="budget-B-BAD"' not in page
    assert "<script" not in page


def test_the_workbook_calculates_and_has_no_second_table_of_the_same(store: ProjectStore) -> None:
    content = export_report(store, harbour.AS_OF, "xlsx").content
    names = load_workbook(io.BytesIO(content)).sheetnames
    assert [name for name in names if "udget" in name] == ["Budgets", "Budget tolerances", "Budget B-RX"]
    formulas = [
        cell.value
        for row in load_workbook(io.BytesIO(content))["Budget B-RX"].iter_rows()
        for cell in row
        if isinstance(cell.value, str) and cell.value.startswith("=")
    ]
    assert len(formulas) > 50


def test_json_has_the_tables_and_the_data_of_the_pictures(store: ProjectStore) -> None:
    told = json.loads(export_report(store, harbour.AS_OF, "json", tables=["budgets"]).content)
    assert [table["key"] for table in told["tables"]] == [
        "budgets", "budget-tolerances", "budget-B-RX", "budget-B-RX-lines",
    ]  # fmt: skip
    assert {picture["table"] for picture in told["pictures"]} == {"budget-B-RX"}


def test_csv_lists_the_budgets(store: ProjectStore) -> None:
    lines = export_report(store, harbour.AS_OF, "csv", tables=["budgets"]).content.decode().splitlines()
    assert lines[0].startswith("Budget,Title,Revision")
    assert [line.split(",")[0] for line in lines[1:]] == ["B-BAD", "B-RX"]


def test_the_same_project_gives_the_same_bytes(store: ProjectStore) -> None:
    for format in ("xlsx", "html"):
        first, second = (export_report(store, harbour.AS_OF, format).content for _ in range(2))
        assert first == second


def test_a_project_without_budgets_says_nothing_of_them(tmp_path: Path) -> None:
    with harbour.make_store(tmp_path / "harbour.specflow") as store:
        evaluation = evaluate_project(store, harbour.AS_OF)
        content = export_report(store, harbour.AS_OF, "xlsx").content
    assert not evaluation.snapshot.all(Budget)
    with ZipFile(io.BytesIO(content)) as book:
        assert "Budget" not in book.read("xl/workbook.xml").decode()
    asked = compliance_report(evaluation, ["budgets"])
    assert [(table.key, len(table.rows)) for table in asked.tables] == [("budgets", 0)]
