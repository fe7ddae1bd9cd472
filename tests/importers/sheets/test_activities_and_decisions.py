"""The sheets of activities, allocations, change records and of what people decide."""

from __future__ import annotations

from datetime import date, datetime
from pathlib import Path
from typing import Any

import pytest

from specflow.model.block import HardwareType, Tier
from specflow.model.budget import Allocation
from specflow.model.decision import Approval, DeclaredSplit, Disposition, Nonconformance, Waiver
from specflow.model.draft import Draft
from specflow.model.evidence import ItemChange
from specflow.model.finding import Finding, Severity
from specflow.model.requirement import Activity, Method, Requirement, Stage
from specflow.model.snapshot import Snapshot
from tests.builders import a_snapshot, read_sheets

BLOCKS = [{"ID": "UT", "Name": "Invented terminal"}, {"ID": "PA", "Parent": "UT"}]
REQUIREMENTS = [
    {"ID": "R-1", "Block": "UT", "Parameter": "eirp", "Limit": ">= 45 dBm"},
    {"ID": "R-2", "Block": "PA", "Parameter": "saturated_power", "Limit": ">= 26 dBm"},
]
WAIVER = {"ID": "W-1", "Requirement": "r-1", "Permitted limit": ">= 44.5 dBm", "Reason": "First build"}
CHANGE = {"ID": "C-1", "Block": "PA", "Effective": "2026-03-31", "Description": "New bias table"}
BY = {"By": "A. Reviewer (invented)", "On": "2026-03-31"}


@pytest.fixture
def project(tmp_path: Path) -> Snapshot:
    """A project with two requirements and two items."""
    draft = read_sheets(
        tmp_path,
        blocks=BLOCKS,
        requirements=REQUIREMENTS,
        items=[{"ID": "PA-7", "Block": "PA", "Serial": "SN-PA-7"}, {"ID": "PA-8", "Block": "PA"}],
    )
    assert not draft.findings
    return a_snapshot(*draft.documents)


def only(draft: Draft) -> Any:
    assert not draft.findings, draft.findings
    (document,) = draft.documents
    return document


def rejected(draft: Draft) -> Finding:
    (finding,) = [one for one in draft.findings if one.severity is Severity.ERROR]
    assert not draft.documents
    return finding


def test_an_activity_with_everything(tmp_path: Path, project: Snapshot) -> None:
    row = {
        "Activity ID": "T-1",
        "Req ID": "r-2",
        "Method": "Review of design",
        "Stage": "acceptance",
        "Success criteria": "No spur",
        "Hardware": "production",
        "Owner": "Test",
        "Review": "CDR",
        "Procedure": 17,
        "Planned": "no",
    }
    activity = only(read_sheets(tmp_path, project, activities=[row]))
    assert isinstance(activity, Activity)
    assert (activity.id, activity.requirement, activity.method) == ("T-1", "R-2", Method.REVIEW_OF_DESIGN)
    assert (activity.stage, activity.credit_from, activity.tier) == (
        Stage.ACCEPTANCE,
        HardwareType.PRODUCTION,
        Tier.BLOCK,
    )
    assert (activity.responsible, activity.gate, activity.procedure, activity.planned) == (
        "Test",
        "CDR",
        "17",
        False,
    )


def test_activities_without_ids_are_numbered_by_requirement(tmp_path: Path, project: Snapshot) -> None:
    rows = [
        {"Requirement": "R-1", "Method": "test"},
        {"Requirement": "R-2", "Method": "test"},
        {"Requirement": "R-1", "Method": "analysis"},
    ]
    draft = read_sheets(tmp_path, project, activities=rows)
    assert [one.id for one in draft.documents] == ["R-1/A1", "R-2/A1", "R-1/A2"]  # type: ignore[attr-defined]


@pytest.mark.parametrize(
    ("cells", "words"),
    [
        ({"Requirement": "R-9"}, "no requirement R-9"),
        ({"Method": None}, "Method is empty"),
        ({"Stage": "late"}, "none of"),
    ],
)
def test_an_activity_that_cannot_be_read_is_one_finding(
    tmp_path: Path, project: Snapshot, cells: dict[str, Any], words: str
) -> None:
    row = {"Requirement": "R-1", "Method": "test"} | cells
    assert words in rejected(read_sheets(tmp_path, project, activities=[row])).message


def test_a_waiver_is_bound_to_the_revision_it_was_first_loaded_against(
    tmp_path: Path, project: Snapshot
) -> None:
    first = only(read_sheets(tmp_path, project, waivers=[WAIVER]))
    assert isinstance(first, Waiver)
    assert (first.requirement, first.requirement_revision, first.state) == ("R-1", 1, "requested")
    moved = [
        one.model_copy(update={"revision": 2}) if isinstance(one, Requirement) else one
        for noun in project.documents.values()
        for one in noun.values()
    ]
    again = only(
        read_sheets(tmp_path, a_snapshot(*moved, first), waivers=[WAIVER | {"Requirement revision": None}])
    )
    assert again.requirement_revision == 1
    fresh = only(read_sheets(tmp_path, a_snapshot(*moved), waivers=[WAIVER | {"Requirement revision": None}]))
    assert fresh.requirement_revision == 2


def test_an_approved_waiver_has_dates_items_and_an_approver(tmp_path: Path, project: Snapshot) -> None:
    row = WAIVER | {
        "State": "approved",
        "Approved by": "Board",
        "Serials": "sn-pa-7; PA-8",
        "Expires on": datetime(2026, 12, 31),
    }
    waiver = only(read_sheets(tmp_path, project, waivers=[row]))
    assert (waiver.items, waiver.expires_on, waiver.approver) == (
        ("SN-PA-7", "PA-8"),
        date(2026, 12, 31),
        "Board",
    )


@pytest.mark.parametrize(
    ("cells", "words"),
    [
        ({"Permitted limit": ">= 3 GHz"}, "the limit is in GHz, but EIRP (eirp) is in dBm"),
        ({"Permitted limit": ">= 44.5"}, "no unit"),
        ({"Permitted limit": "low"}, "direction"),
        ({"Permitted limit": None}, "Permitted limit is empty"),
        ({"Reason": None}, "Reason is empty"),
        ({"State": "approved"}, "nobody who approved it"),
        ({"State": "granted"}, "none of the words"),
        ({"Expires on": "end of year"}, "not a date"),
        ({"Items": "PA-9"}, "no item or serial PA-9; nearest: PA-8, PA-7"),
        ({"Nonconformance": "NC-9"}, "no nonconformance NC-9"),
    ],
)
def test_a_waiver_that_cannot_be_read_is_one_finding(
    tmp_path: Path, project: Snapshot, cells: dict[str, Any], words: str
) -> None:
    assert words in rejected(read_sheets(tmp_path, project, waivers=[WAIVER | cells])).message


def test_a_permitted_limit_is_said_back_against_the_limit(tmp_path: Path, project: Snapshot) -> None:
    draft = read_sheets(tmp_path, project, waivers=[WAIVER])
    assert draft.echoes["W-1"] == "EIRP: at least 44.5 dBm; relaxed by 0.5 dB (45 -> 44.5 dBm)"


@pytest.mark.parametrize(
    ("permitted", "says"),
    [
        (">= 46 dBm", "is stricter than the limit (tightened by 1 dB (45 -> 46 dBm)) of R-1"),
        (">= 45 dBm", "is the limit itself of R-1"),
        (">= 15.5 dBW", "tightened by 0.5 dB"),
    ],
)
def test_a_waiver_that_waives_nothing_is_doubtful_and_taken(
    tmp_path: Path, project: Snapshot, permitted: str, says: str
) -> None:
    draft = read_sheets(tmp_path, project, waivers=[WAIVER | {"Permitted limit": permitted}])
    (finding,) = draft.findings
    assert (finding.rule, finding.severity) == ("workbook-waives-nothing", Severity.WARNING)
    assert says in finding.message
    assert finding.origin is not None and finding.origin.cell == "C2"
    assert len(draft.documents) == 1


def test_a_nonconformance_and_its_waiver_in_one_workbook(tmp_path: Path, project: Snapshot) -> None:
    nonconformance = {
        "ID": "NC-1",
        "Requirement": "R-1",
        "Description": "0.3 dB low",
        "Disposition": "use as is",
    }
    draft = read_sheets(
        tmp_path, project, waivers=[WAIVER | {"NCR": "nc-1"}], nonconformances=[nonconformance]
    )
    assert not draft.findings
    found = {type(one): one for one in draft.documents}
    assert found[Nonconformance].disposition == "use as is"  # type: ignore[attr-defined]
    assert found[Waiver].nonconformance == "NC-1"  # type: ignore[attr-defined]


def test_a_change_record_names_parameters_by_any_of_their_names(tmp_path: Path, project: Snapshot) -> None:
    change = only(
        read_sheets(
            tmp_path, project, change_records=[CHANGE | {"Parameters": "Psat; EVM", "Aspect": "firmware"}]
        )
    )
    assert isinstance(change, ItemChange)
    assert (change.parameters, change.aspect, change.effective) == (
        ("saturated_power", "evm"),
        "firmware",
        date(2026, 3, 31),
    )


def test_a_change_of_one_item_is_one_of_its_block(tmp_path: Path, project: Snapshot) -> None:
    change = only(read_sheets(tmp_path, project, change_records=[CHANGE | {"Block": None, "Item": "pa-7"}]))
    assert (change.block, change.item) == ("PA", "PA-7")


@pytest.mark.parametrize(
    ("cells", "words"),
    [
        ({"Block": None}, "neither block nor item"),
        ({"Effective": None}, "Effective is empty"),
        ({"Parameters": "eirpp"}, "no known parameter"),
        ({"Aspect": "mood"}, "none of the words"),
    ],
)
def test_a_change_record_that_cannot_be_read_is_one_finding(
    tmp_path: Path, project: Snapshot, cells: dict[str, Any], words: str
) -> None:
    assert words in rejected(read_sheets(tmp_path, project, change_records=[CHANGE | cells])).message


def test_an_allocation_without_a_budget_gives_its_reason(tmp_path: Path, project: Snapshot) -> None:
    row = {"Parent": "R-1", "Child": "R-2"}
    assert "no budget and no reason" in rejected(read_sheets(tmp_path, project, allocations=[row])).message
    allocation = only(read_sheets(tmp_path, project, allocations=[row | {"Manual: reason": "First split"}]))
    assert isinstance(allocation, Allocation)
    assert (allocation.id, allocation.parent, allocation.child) == ("R-1 > R-2", "R-1", "R-2")


def test_approvals_dispositions_and_declared_splits(tmp_path: Path, project: Snapshot) -> None:
    draft = read_sheets(
        tmp_path,
        project,
        approvals=[{"ID": "AP-1", "Requirement": "R-1", "Decision": "kept open", "Role": "Chair"} | BY],
        dispositions=[
            {"ID": "D-1", "Rule": "conflicting-evidence", "Subject": "R-1", "Reason": "Same set-up"} | BY
        ],
        declared_splits=[
            {"ID": "S-1", "Requirement": "R-1", "Scope not met": "frequency > 29 GHz", "Reason": "Known"} | BY
        ],
    )
    assert not draft.findings
    found: dict[type[Any], Any] = {type(one): one for one in draft.documents}
    assert (found[Approval].decision, found[Approval].on) == ("kept open", date(2026, 3, 31))
    assert found[Disposition].subject == "R-1"
    assert found[DeclaredSplit].scope_not_met == "frequency > 29 GHz"


@pytest.mark.parametrize("lacking", ["Decision", "By", "On"])
def test_an_approval_needs_decision_name_and_date(tmp_path: Path, project: Snapshot, lacking: str) -> None:
    row = {"ID": "AP-1", "Requirement": "R-1", "Decision": "closed"} | BY | {lacking: None}
    assert f"{lacking} is empty" in rejected(read_sheets(tmp_path, project, approvals=[row])).message
