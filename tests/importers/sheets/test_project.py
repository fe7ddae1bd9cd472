"""The sheet of the project itself: settings by name, said back, refused with the nearest spelling."""

from __future__ import annotations

from collections.abc import Mapping
from datetime import date
from pathlib import Path
from typing import Any

import pytest

from specflow.model.draft import Draft
from specflow.model.finding import Finding, Severity
from specflow.model.project import Policy, Project
from specflow.store import create_project
from specflow.workflows.evaluate_project import evaluate_project
from specflow.workflows.load_workbook import accept_load, preview_load
from tests.builders import a_project, a_snapshot, project_workbook, read_sheets

STORED = a_project(policy=Policy(marginal_db=0.3, severities={"failing": "warning", "Marginal": "off"}))


def loaded(tmp_path: Path, settings: Mapping[str, Any]) -> Draft:
    rows = [{"Name": name, "Value": value} for name, value in settings.items()]
    return read_sheets(tmp_path, a_snapshot(STORED), project=rows)


def project(tmp_path: Path, settings: Mapping[str, Any]) -> Project:
    draft = loaded(tmp_path, settings)
    assert not draft.findings, draft.findings
    (document,) = draft.documents
    assert isinstance(document, Project)
    return document


def refused(tmp_path: Path, settings: Mapping[str, Any]) -> Finding:
    (finding,) = loaded(tmp_path, settings).findings
    assert finding.severity is Severity.ERROR and finding.origin is not None
    return finding


def test_every_setting_is_read_and_said_back(tmp_path: Path) -> None:
    draft = loaded(
        tmp_path,
        {
            "Name": "Harbour terminal",
            "description": "Ka-band, invented",
            "Invented": "yes",
            "second_review": True,
            "Marginal threshold in dB": "0.4 dB",
            "Marginal threshold, relative": "3 %",
            "Severity of no-credit": "info",
            "severity of Open Value Overdue": "OFF",
        },
    )
    assert not draft.findings
    (found,) = draft.documents
    assert isinstance(found, Project)
    assert (found.id, found.name, found.description, found.invented) == (
        STORED.id,
        "Harbour terminal",
        "Ka-band, invented",
        True,
    )
    assert found.policy == Policy(
        second_review=True,
        marginal_db=0.4,
        marginal_relative=0.03,
        severities={
            "failing": "warning",
            "Marginal": "off",
            "no-credit": "info",
            "open-value-overdue": "off",
        },
    )
    assert draft.echoes[STORED.id] == (
        "called Harbour terminal; described as 'Ka-band, invented'; its data are invented; "
        "evidence needs a second review; marginal within 0.4 dB of the limit; "
        "marginal within 3 % of the limit, where it is not in dB; no-credit is of severity info; "
        "open-value-overdue is switched off"
    )


def test_what_is_in_no_row_stays_as_the_project_has_it(tmp_path: Path) -> None:
    assert project(tmp_path, {"Name": "Other"}) == STORED.model_copy(update={"name": "Other"})
    assert project(tmp_path, {"Name": STORED.name}) == STORED


def test_a_severity_replaces_the_one_before_and_default_takes_it_back(tmp_path: Path) -> None:
    found = project(tmp_path, {"Severity of marginal": "error", "Severity of failing": "default"})
    assert found.policy.severities == {"marginal": "error"}


def test_a_severity_at_a_gate_stands_beside_the_general_one_and_default_takes_it_back(tmp_path: Path) -> None:
    rows = {"Severity of tbd-left at CDR": "error", "severity of TBD left at cdr ": "off"}
    assert "is set already in A2" in refused(tmp_path, rows).message
    found = project(tmp_path, {"Severity of TBD left at CDR": "error", "Severity of failing at PDR": "info"})
    assert found.policy.gates == {"CDR": {"tbd-left": "error"}, "PDR": {"failing": "info"}}
    assert found.policy.severities == STORED.policy.severities
    said = loaded(tmp_path, {"Severity of tbd-left at CDR": "error"})
    assert "tbd-left is of severity error at CDR" in str(said)
    gated = a_project(policy=Policy(gates={"CDR": {"tbd-left": "error"}}))
    rows_back = [{"Name": "Severity of tbd-left at cdr", "Value": "default"}]
    (back,) = read_sheets(tmp_path, a_snapshot(gated), project=rows_back).documents
    assert isinstance(back, Project) and back.policy.gates == {}


@pytest.mark.parametrize(
    ("name", "value", "field", "read"),
    [
        ("Marginal threshold in dB", 0.25, "marginal_db", 0.25),
        ("marginal threshold dB", "0.25", "marginal_db", 0.25),
        ("Marginal threshold relative", 0.1, "marginal_relative", 0.1),
        ("Relative marginal threshold", "10 %", "marginal_relative", 0.1),
    ],
)
def test_thresholds_may_leave_out_their_unit(
    tmp_path: Path, name: str, value: Any, field: str, read: float
) -> None:
    assert getattr(project(tmp_path, {name: value}).policy, field) == pytest.approx(read, rel=1e-12)


@pytest.mark.parametrize(
    ("settings", "words"),
    [
        ({"Secnd review": "yes"}, "there is no setting 'Secnd review'; nearest: Second review"),
        ({"Marginal threshhold in dB": 1}, "nearest: Marginal threshold in dB"),
        ({"Colour": "blue"}, "there is no setting 'Colour'"),
        ({"Second review": "perhaps"}, "neither yes nor no"),
        ({"Invented": None}, "Value is empty"),
        ({"Marginal threshold in dB": "0.5 dBm"}, "dBm"),
        ({"Marginal threshold in dB": "some"}, "some"),
        ({"Marginal threshold in dB": -1}, "greater than or equal to 0"),
        ({"Severity of failing": "fatal"}, "'fatal' is none of the words known here"),
        ({"Severity of failing": "off", "severity of FAILING": "info"}, "set already in A2"),
        ({"Second review": "yes", "second-review": "no"}, "set already in A2"),
    ],
)
def test_what_cannot_be_a_setting_is_refused_with_its_cell(
    tmp_path: Path, settings: Mapping[str, Any], words: str
) -> None:
    assert words in refused(tmp_path, settings).message


def test_a_refused_row_leaves_the_others(tmp_path: Path) -> None:
    draft = loaded(tmp_path, {"Name": "Other", "Second review": "perhaps"})
    assert [one.severity for one in draft.findings] == [Severity.ERROR]
    assert draft.documents == [STORED.model_copy(update={"name": "Other"})]


def test_a_cover_called_project_is_left_aside(tmp_path: Path) -> None:
    draft = read_sheets(
        tmp_path,
        a_snapshot(STORED),
        project=[{"Title": "Terminal"}],
        blocks=[{"ID": "UT", "Name": "Terminal"}],
    )
    assert [(one.severity, one.subject) for one in draft.findings] == [(Severity.WARNING, "Project")]
    assert [type(one).__name__ for one in draft.documents] == ["Block"]


def test_loading_it_edits_the_project_and_rules_go_by_it(tmp_path: Path) -> None:
    rows = [
        {"Name": "Second review", "Value": "yes"},
        {"Name": "Severity of not-planned", "Value": "error"},
        {"Name": "Severity of failling", "Value": "off"},
    ]
    workbook = project_workbook(
        tmp_path / "reqs.xlsx",
        project=rows,
        blocks=[{"ID": "UT", "Name": "Terminal"}],
        requirements=[{"ID": "R-1", "Block": "UT", "Parameter": "gain", "Limit": ">= 20 dB"}],
    )
    with create_project(tmp_path / "harbour.specflow", a_project()) as store:
        preview = preview_load(store, workbook)
        change = next(one for one in preview.changes if one.noun == "project")
        assert change.action == "edit"
        assert {one.field for one in change.fields} == {"policy.second_review", "policy.severities"}
        accept_load(store, preview, by="Ann Invented")
        assert store.load().project.policy.second_review is True
        found = {one.rule: one for one in evaluate_project(store, date(2026, 6, 1)).findings}
        assert found["not-planned"].severity is Severity.ERROR
        assert "'failling', which is no rule" in found["unknown-rule-named"].message
        assert preview_load(store, workbook).changes == []
