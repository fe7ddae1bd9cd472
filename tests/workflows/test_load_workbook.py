"""Loading a workbook again after edits: what follows, what goes, what stays."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from datetime import date
from pathlib import Path
from typing import Any

import pytest

from specflow.model.change import Change
from specflow.model.requirement import Activity, Method, Requirement
from specflow.store import ProjectStore, create_project
from specflow.workflows.evaluate_project import evaluate_project
from specflow.workflows.load_workbook import accept_load, preview_load
from tests.builders import a_project, project_workbook

AS_OF = date(2026, 6, 1)
BLOCKS = [{"ID": "UT", "Name": "Invented terminal"}]
ME = "Ann Invented"
Rows = Sequence[Mapping[str, Any]]


@pytest.fixture
def store(tmp_path: Path) -> Iterator[ProjectStore]:
    with create_project(tmp_path / "harbour.specflow", a_project()) as opened:
        yield opened


def row(method: str | None = "test", *, limit: str = ">= 45 dBm", **more: Any) -> dict[str, Any]:
    """A row of the sheet Requirements."""
    return {"ID": "R-1", "Block": "UT", "Parameter": "eirp", "Limit": limit, "Method": method} | more


def load(
    store: ProjectStore, tmp_path: Path, *requirements: Mapping[str, Any], **sheets: Rows
) -> list[Change]:
    """Load a workbook of these rows; return what it changed."""
    if requirements:
        sheets = {"blocks": BLOCKS, "requirements": requirements} | sheets
    preview = preview_load(store, project_workbook(tmp_path / "reqs.xlsx", **sheets))
    accept_load(store, preview, by=ME)
    return list(preview.changes)


def plan(store: ProjectStore) -> dict[str, tuple[Method, int]]:
    """The planned activities by id, with their method and the revision they are planned for."""
    return {
        one.id: (one.method, one.requirement_revision) for one in store.load().all(Activity) if one.planned
    }


def outdated(store: ProjectStore) -> list[str]:
    findings = evaluate_project(store, AS_OF).findings
    return [finding.subject for finding in findings if finding.rule == "outdated-activity"]


def test_what_a_row_plans_follows_the_revision_of_the_row(store: ProjectStore, tmp_path: Path) -> None:
    load(store, tmp_path, row("test, analysis"))
    load(store, tmp_path, row("test, analysis", limit=">= 46 dBm"))
    requirement = store.load().find(Requirement, "R-1")
    assert requirement is not None and requirement.revision == 2
    assert plan(store) == {"R-1/A1": (Method.TEST, 2), "R-1/A2": (Method.ANALYSIS, 2)}
    assert outdated(store) == []
    assert load(store, tmp_path, row("test, analysis", limit=">= 46 dBm")) == []


def test_it_follows_too_where_the_sheet_has_no_method_any_more(store: ProjectStore, tmp_path: Path) -> None:
    load(store, tmp_path, row("test"))
    bare = {key: value for key, value in row(limit=">= 46 dBm").items() if key != "Method"}
    load(store, tmp_path, bare)
    assert plan(store) == {"R-1/A1": (Method.TEST, 2)}
    assert outdated(store) == []


def test_an_edit_that_means_the_same_leaves_the_plan_alone(store: ProjectStore, tmp_path: Path) -> None:
    load(store, tmp_path, row("test"))
    changes = load(store, tmp_path, row("test", limit="45 dBm min", Title="EIRP"))
    assert [change.noun for change in changes] == ["requirement"]
    assert plan(store) == {"R-1/A1": (Method.TEST, 1)}


def test_a_row_of_activities_is_outdated_until_it_is_loaded_again(
    store: ProjectStore, tmp_path: Path
) -> None:
    rows = [{"ID": "VT-1", "Requirement": "R-1", "Method": "test"}]
    load(store, tmp_path, row(None), activities=rows)
    more = [*rows, {"ID": "VT-2", "Requirement": "R-1", "Method": "analysis"}]
    load(store, tmp_path, row(None, limit=">= 46 dBm"), activities=more)
    assert plan(store) == {"VT-1": (Method.TEST, 1), "VT-2": (Method.ANALYSIS, 2)}
    assert outdated(store) == ["VT-1"]
    load(store, tmp_path, activities=rows)
    assert plan(store)["VT-1"] == (Method.TEST, 2)
    assert outdated(store) == []


def test_a_method_that_left_the_row_takes_its_activity_with_it(store: ProjectStore, tmp_path: Path) -> None:
    load(store, tmp_path, row("test, analysis"))
    preview = preview_load(
        store, project_workbook(tmp_path / "reqs.xlsx", blocks=BLOCKS, requirements=[row("test")])
    )
    assert [(change.action, change.id) for change in preview.changes] == [("remove", "R-1/A2")]
    assert preview.unchanged == 3
    accept_load(store, preview, by=ME)
    assert plan(store) == {"R-1/A1": (Method.TEST, 1)}
    assert load(store, tmp_path, row("test")) == []


def test_the_method_that_stays_keeps_its_activity(store: ProjectStore, tmp_path: Path) -> None:
    load(store, tmp_path, row("test, analysis"))
    changes = load(store, tmp_path, row("analysis"))
    assert [(change.action, change.id) for change in changes] == [("remove", "R-1/A1")]
    assert plan(store) == {"R-1/A2": (Method.ANALYSIS, 1)}


def test_a_method_that_comes_back_gets_an_id_that_was_never_used(store: ProjectStore, tmp_path: Path) -> None:
    for methods in ("test, analysis", "test", "test, analysis"):
        load(store, tmp_path, row(methods))
    assert plan(store) == {"R-1/A1": (Method.TEST, 1), "R-1/A3": (Method.ANALYSIS, 1)}
    load(store, tmp_path, row(None))
    load(store, tmp_path, activities=[{"Requirement": "R-1", "Method": "test"}])
    assert "R-1/A2" not in plan(store)


def test_another_method_takes_the_place_of_the_one_before(store: ProjectStore, tmp_path: Path) -> None:
    load(store, tmp_path, row("test"))
    changes = load(store, tmp_path, row("analysis"))
    assert [(change.action, change.id) for change in changes] == [("edit", "R-1/A1")]
    assert plan(store) == {"R-1/A1": (Method.ANALYSIS, 1)}


def test_an_emptied_method_leaves_one_activity_that_is_not_planned(
    store: ProjectStore, tmp_path: Path
) -> None:
    load(store, tmp_path, row("test, analysis"))
    load(store, tmp_path, row(None))
    assert [(one.id, one.planned) for one in store.load().all(Activity)] == [("R-1/A1", False)]
    assert load(store, tmp_path, row(None)) == []
    load(store, tmp_path, row("inspection"))
    assert plan(store) == {"R-1/A1": (Method.INSPECTION, 1)}


def test_rows_of_activities_are_never_touched_by_the_row_of_their_requirement(
    store: ProjectStore, tmp_path: Path
) -> None:
    rows = [
        {"Requirement": "R-1", "Method": "test", "Success criteria": "No spur"},
        {"Requirement": "R-1", "Method": "analysis", "Planned": "no"},
    ]
    load(store, tmp_path, row("test"), activities=rows)
    before = store.load().all(Activity)
    assert [one.id for one in before] == ["R-1/A1", "R-1/A2"]
    for methods in ("inspection", "test", None):
        load(store, tmp_path, row(methods))
        assert list(store.load().all(Activity)) == list(before)


def test_rows_of_activities_take_over_what_the_row_had_planned(store: ProjectStore, tmp_path: Path) -> None:
    load(store, tmp_path, row("test, analysis"))
    changes = load(
        store,
        tmp_path,
        row("test, analysis"),
        activities=[{"Requirement": "R-1", "Method": "test", "Success criteria": "No spur"}],
    )
    assert [(change.action, change.id) for change in changes] == [("edit", "R-1/A1"), ("remove", "R-1/A2")]
    (activity,) = store.load().all(Activity)
    assert (activity.criteria, activity.shorthand, activity.planned) == ("No spur", False, True)


def test_a_default_that_a_row_of_activities_takes_over_is_planned(
    store: ProjectStore, tmp_path: Path
) -> None:
    load(store, tmp_path, row(None))
    load(store, tmp_path, activities=[{"Requirement": "R-1", "Method": "test"}])
    assert plan(store) == {"R-1/A1": (Method.TEST, 1)}


def test_a_row_that_is_not_in_the_workbook_keeps_its_activities(store: ProjectStore, tmp_path: Path) -> None:
    load(store, tmp_path, row("test, analysis"), row("test", ID="R-2"))
    load(store, tmp_path, row("test", ID="R-2"))
    assert set(plan(store)) == {"R-1/A1", "R-1/A2", "R-2/A1"}
