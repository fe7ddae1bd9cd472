"""Reading a project workbook: finding sheets and headers, references, defaults, loading again."""

from __future__ import annotations

import time
from datetime import date
from pathlib import Path
from typing import Any

import pytest
from openpyxl import Workbook

from specflow.errors import FileError
from specflow.importers.workbook import read_workbook
from specflow.model.block import Block, HardwareType
from specflow.model.conditions import ConditionsSet
from specflow.model.declared import UncertaintyEntry
from specflow.model.draft import Draft
from specflow.model.finding import Severity
from specflow.model.requirement import Activity, Method, Requirement, Stage
from specflow.parameters import load_dictionary
from tests.builders import a_block, a_snapshot, project_workbook, read_sheets

BLOCKS = [{"ID": "UT", "Name": "Invented terminal"}]
REQUIREMENT = {"ID": "R-1", "Block": "UT", "Parameter": "eirp", "Limit": ">= 45 dBm"}


def found(draft: Draft, kind: type[Any]) -> dict[str, Any]:
    """The documents of one class, by id."""
    return {document.id: document for document in draft.documents if isinstance(document, kind)}


def errors(draft: Draft) -> list[str]:
    return [one.message for one in draft.findings if one.severity is Severity.ERROR]


def test_headers_are_found_by_name_below_titles_in_any_order(tmp_path: Path) -> None:
    book = Workbook()
    sheet = book.active
    assert sheet is not None
    sheet.title = " requirements "
    sheet.append(["Terminal specification (invented)"])
    sheet.append([])
    sheet.append(["issue", 2, "date", date(2026, 3, 31)])
    sheet.append([None, "LIMIT", "quantity", "Req. ID", "Applies to block"])
    sheet.append([None, ">= 45 dBm", "EIRP", "R-1", "ut"])
    book.save(tmp_path / "own.xlsx")

    draft = read_workbook(tmp_path / "own.xlsx", a_snapshot(a_block("UT")), load_dictionary())

    assert not draft.findings
    requirement = found(draft, Requirement)["R-1"]
    assert requirement.block == "UT"
    assert requirement.quantity.parameter == "eirp"
    assert requirement.limit.unit == "dBm"


def test_the_origin_of_a_requirement_is_the_cell_of_its_limit(tmp_path: Path) -> None:
    draft = read_sheets(tmp_path, blocks=BLOCKS, requirements=[REQUIREMENT])
    origin = found(draft, Requirement)["R-1"].origin
    assert (origin.file, origin.sheet, origin.cell) == ("project.xlsx", "Requirements", "D2")
    assert len(origin.sha256) == 64


def test_unknown_columns_are_reported_and_left_out(tmp_path: Path) -> None:
    draft = read_sheets(tmp_path, blocks=BLOCKS, requirements=[REQUIREMENT | {"Colour": "red"}])
    assert [(one.severity, one.rule) for one in draft.findings] == [
        (Severity.INFO, "workbook-unknown-column")
    ]
    assert "'Colour'" in draft.findings[0].message
    assert "R-1" in found(draft, Requirement)


def test_a_unit_may_stand_in_the_header_of_the_limit(tmp_path: Path) -> None:
    row = {"ID": "R-1", "Block": "UT", "Parameter": "noise_figure", "Limit [dB]": 3.2}
    draft = read_sheets(tmp_path, blocks=BLOCKS, requirements=[row])
    assert not errors(draft)
    assert found(draft, Requirement)["R-1"].limit.unit == "dB"


def test_sheets_and_rows_may_refer_to_what_comes_later(tmp_path: Path) -> None:
    draft = read_sheets(
        tmp_path,
        activities=[{"Requirement": "R-2", "Method": "analysis"}],
        requirements=[REQUIREMENT | {"ID": "R-2", "Parents": "R-1", "Conditions": "CS-1"}, REQUIREMENT],
        conditions=[{"ID": "CS-1", "Dimension": "frequency", "Required": "28, 29 GHz"}],
        blocks=[{"ID": "TX", "Parent": "UT"}, *BLOCKS],
    )
    assert not draft.findings
    assert found(draft, Requirement)["R-2"].parents == ("R-1",)
    assert found(draft, Block)["TX"].parent == "UT"


def test_references_reach_into_the_project_and_take_its_spelling(tmp_path: Path) -> None:
    first = read_sheets(tmp_path, blocks=BLOCKS, requirements=[REQUIREMENT])
    project = a_snapshot(*first.documents)
    more = [REQUIREMENT | {"ID": "R-2", "Parents": "r-1", "Block": "ut"}]
    path = project_workbook(tmp_path / "more.xlsx", requirements=more)
    draft = read_workbook(path, project, load_dictionary())
    assert not draft.findings
    assert found(draft, Requirement)["R-2"].parents == ("R-1",)
    assert found(draft, Requirement)["R-2"].block == "UT"


def test_loading_again_gives_equal_documents(tmp_path: Path) -> None:
    sheets: dict[str, Any] = {
        "blocks": BLOCKS,
        "requirements": [REQUIREMENT | {"Method": "test", "Owner": "RF"}],
    }
    first = read_sheets(tmp_path, **sheets)
    second = read_sheets(tmp_path, a_snapshot(*first.documents), **sheets)
    assert [one.model_dump(exclude={"origin"}) for one in second.documents] == [
        one.model_dump(exclude={"origin"}) for one in first.documents
    ]


def test_what_a_workbook_has_no_column_for_stays_as_the_project_has_it(tmp_path: Path) -> None:
    stated = REQUIREMENT | {"Owner": "RF", "Rationale": "Link budget"}
    first = read_sheets(tmp_path, blocks=BLOCKS, requirements=[stated])
    kept = [
        one.model_copy(update={"revision": 3}) if isinstance(one, Requirement) else one
        for one in first.documents
    ]
    edited = REQUIREMENT | {"Limit": ">= 45.5 dBm", "Rationale": None}
    draft = read_sheets(tmp_path, a_snapshot(*kept), requirements=[edited])
    requirement = found(draft, Requirement)["R-1"]
    assert requirement.owner == "RF"
    assert requirement.rationale == ""
    assert requirement.revision == 3
    assert requirement.limit.text == ">= 45.5 dBm"


def test_a_new_requirement_gets_one_activity_that_is_not_planned(tmp_path: Path) -> None:
    draft = read_sheets(tmp_path, blocks=BLOCKS, requirements=[REQUIREMENT])
    activities = found(draft, Activity)
    assert list(activities) == ["R-1/A1"]
    assert activities["R-1/A1"].planned is False
    assert activities["R-1/A1"].tier == "system"


def test_the_method_column_plans_one_activity_a_method(tmp_path: Path) -> None:
    row = REQUIREMENT | {"Method": "test, Analysis", "Stage": "acceptance", "Hardware": "production"}
    draft = read_sheets(tmp_path, blocks=BLOCKS, requirements=[row])
    activities = found(draft, Activity)
    assert {code: one.method for code, one in activities.items()} == {
        "R-1/A1": Method.TEST,
        "R-1/A2": Method.ANALYSIS,
    }
    assert {(one.planned, one.stage, one.credit_from) for one in activities.values()} == {
        (True, Stage.ACCEPTANCE, HardwareType.PRODUCTION)
    }


def test_rows_of_the_activities_sheet_count_before_the_method_column(tmp_path: Path) -> None:
    draft = read_sheets(
        tmp_path,
        blocks=BLOCKS,
        requirements=[REQUIREMENT | {"Method": "test"}],
        activities=[
            {"Requirement": "R-1", "Method": "analysis"},
            {"Requirement": "R-1", "Method": "inspection"},
        ],
    )
    assert {code: one.method for code, one in found(draft, Activity).items()} == {
        "R-1/A1": Method.ANALYSIS,
        "R-1/A2": Method.INSPECTION,
    }
    assert [one.rule for one in draft.findings] == ["workbook-plans-differ"]


def test_a_requirement_with_activities_in_the_project_gets_no_default(tmp_path: Path) -> None:
    first = read_sheets(
        tmp_path,
        blocks=BLOCKS,
        requirements=[REQUIREMENT],
        activities=[{"ID": "T-9", "Requirement": "R-1", "Method": "test"}],
    )
    draft = read_sheets(tmp_path, a_snapshot(*first.documents), requirements=[REQUIREMENT])
    assert not found(draft, Activity)


def test_limits_and_conditions_are_said_back_in_words(tmp_path: Path) -> None:
    draft = read_sheets(
        tmp_path,
        blocks=BLOCKS,
        requirements=[REQUIREMENT | {"Limit": "54 ± 1.5 dBm"}],
        conditions=[
            {
                "ID": "CS-1",
                "Dimension": "frequency",
                "Required": "27.5, 28.75, 30 GHz",
                "Setting tolerance": "10 MHz",
            },
            {"ID": "CS-1", "Dimension": "temperature_ambient", "Required": "-30, 20, 55 °C"},
        ],
    )
    assert draft.echoes["R-1"] == "EIRP: 54 dBm ± 1.5 dB (the tolerance written in dBm is read as dB)"
    assert draft.echoes["CS-1"].startswith("9 required points: 27.5, 28.75, 30 GHz")


def test_the_block_may_be_left_out_where_there_is_one_system(tmp_path: Path) -> None:
    draft = read_sheets(
        tmp_path, blocks=[*BLOCKS, {"ID": "TX", "Parent": "UT"}], requirements=[REQUIREMENT | {"Block": None}]
    )
    assert found(draft, Requirement)["R-1"].block == "UT"
    assert [one.rule for one in draft.findings] == ["workbook-default-taken"]


def test_numbers_typed_as_ids_are_read_as_text(tmp_path: Path) -> None:
    draft = read_sheets(
        tmp_path, blocks=BLOCKS, requirements=[REQUIREMENT | {"ID": 12.0}, REQUIREMENT | {"ID": 4.5}]
    )
    assert set(found(draft, Requirement)) == {"12", "4.5"}


def test_a_decimal_number_as_an_id_is_doubtful_once_a_sheet(tmp_path: Path) -> None:
    rows = [REQUIREMENT | {"ID": code} for code in (3, 4.1, 4.2, "4.30")]
    draft = read_sheets(tmp_path, blocks=BLOCKS, requirements=rows)
    (finding,) = draft.findings
    assert (finding.rule, finding.severity) == ("workbook-decimal-id", Severity.WARNING)
    assert finding.message == "the id is the number 4.1, which may have been typed as 4.10"
    assert finding.origin is not None and finding.origin.cell == "A3"
    assert set(found(draft, Requirement)) == {"3", "4.1", "4.2", "4.30"}


def test_a_csv_file_named_after_a_noun_is_its_sheet(tmp_path: Path) -> None:
    path = tmp_path / "Requirements.csv"
    path.write_text("ID,Block,Parameter,Limit\nR-1,UT,eirp,>= 45 dBm\nR-2,UT,evm,8 %\n", "utf-8")
    draft = read_workbook(path, a_snapshot(a_block("UT")), load_dictionary())
    assert not errors(draft)
    origin = found(draft, Requirement)["R-2"].origin
    assert (origin.file, origin.sheet, origin.cell) == ("Requirements.csv", "", "D3")


def test_a_csv_file_of_another_name_is_judged_by_its_headers(tmp_path: Path) -> None:
    path = tmp_path / "terminal.csv"
    path.write_text("Req ID;Parameter;Limit;Block\nR-1;eirp;>= 45,5 dBm;UT\n", "utf-8")
    draft = read_workbook(path, a_snapshot(a_block("UT")), load_dictionary())
    assert not errors(draft)
    assert draft.echoes["R-1"] == "EIRP: at least 45.5 dBm"
    assert "workbook-sheet-by-headers" in {one.rule for one in draft.findings}


def test_a_single_sheet_of_another_name_is_judged_by_its_headers(tmp_path: Path) -> None:
    path = project_workbook(tmp_path / "own.xlsx", Sheet1=[REQUIREMENT])
    draft = read_workbook(path, a_snapshot(a_block("UT")), load_dictionary())
    assert "R-1" in found(draft, Requirement)


def test_unknown_sheets_beside_known_ones_are_reported(tmp_path: Path) -> None:
    draft = read_sheets(tmp_path, blocks=BLOCKS, history=[{"Who": "somebody", "What": "something"}])
    assert [(one.severity, one.rule) for one in draft.findings] == [(Severity.INFO, "workbook-unknown-sheet")]


@pytest.mark.parametrize(("kept", "severity"), [((), Severity.WARNING), (("R-2",), Severity.INFO)])
def test_a_sheet_of_another_name_with_the_headers_of_requirements_is_pointed_out(
    tmp_path: Path, kept: tuple[str, ...], severity: Severity
) -> None:
    sheets: dict[str, Any] = {"requirements": [REQUIREMENT | {"ID": code} for code in kept]} if kept else {}
    draft = read_sheets(tmp_path, blocks=BLOCKS, spec_limits=[REQUIREMENT], **sheets)
    (finding,) = draft.findings
    assert (finding.rule, finding.severity) == ("workbook-unknown-sheet", severity)
    assert "its headers are those of Requirements" in finding.message
    assert finding.remedy == "call it Requirements if it should be read"


def test_an_unknown_column_names_the_headers_that_it_may_mean(tmp_path: Path) -> None:
    line = {"ID": "D-1", "Name": "P_rated", "Value": "38 dBm", "Aplies to": "M", "Colour": "red"}
    near, far = (one.remedy for one in read_sheets(tmp_path, declared_values=[line]).findings)
    assert near.endswith("; nearest: Applies to")
    assert far.endswith("; this sheet has none of: Unit, Declared on, Declared by, Applies to, Note")


def test_headers_of_other_houses_are_read(tmp_path: Path) -> None:
    draft = read_sheets(
        tmp_path,
        blocks=[{"ID": "UT", "Designation": "Terminal", "Responsible": "SYS"}],
        requirements=[REQUIREMENT | {"Parameter": "spurious_emission", "Measurement BW": "1 MHz"}],
        activities=[{"Requirement": "R-1", "Method": "test", "Phase": "acceptance"}],
        uncertainty=[
            {
                "ID": "U",
                "Set-up": "A",
                "Parameter": "eirp",
                "U": "1 dB",
                "k": 2,
                "From": "27 GHz",
                "To": "30 GHz",
            }
        ],
    )
    assert not draft.findings
    block, requirement = found(draft, Block)["UT"], found(draft, Requirement)["R-1"]
    assert (block.name, block.owner) == ("Terminal", "SYS")
    assert requirement.quantity.bandwidth_hz == 1e6
    assert found(draft, Activity)["R-1/A1"].stage is Stage.ACCEPTANCE
    line = found(draft, UncertaintyEntry)["U"]
    assert (line.frequency_from_hz, line.frequency_to_hz) == (27e9, 30e9)


def test_a_file_without_any_known_sheet_is_refused_with_the_names_looked_for(tmp_path: Path) -> None:
    path = project_workbook(tmp_path / "other.xlsx", history=[{"Who": "somebody", "What": "something"}])
    with pytest.raises(FileError) as refused:
        read_workbook(path, a_snapshot(), load_dictionary())
    assert "'History'" in refused.value.message
    assert "Requirements" in refused.value.hint
    assert refused.value.where == "other.xlsx"


def test_a_set_is_found_whole_in_the_project_when_only_requirements_are_loaded(tmp_path: Path) -> None:
    first = read_sheets(
        tmp_path,
        blocks=BLOCKS,
        conditions=[{"ID": "CS-1", "Dimension": "frequency", "Required": "28, 29 GHz"}],
    )
    draft = read_sheets(
        tmp_path, a_snapshot(*first.documents), requirements=[REQUIREMENT | {"Conditions": "cs-1"}]
    )
    assert not draft.findings
    assert found(draft, Requirement)["R-1"].conditions == "CS-1"
    assert not found(draft, ConditionsSet)


def test_three_hundred_rows_load_in_moments(tmp_path: Path) -> None:
    rows = [
        REQUIREMENT | {"ID": f"R-{number}", "Limit": f">= {number} dBm", "Owner": "RF"}
        for number in range(300)
    ]
    path = project_workbook(tmp_path / "many.xlsx", blocks=BLOCKS, requirements=rows)
    load_dictionary()
    started = time.perf_counter()
    draft = read_workbook(path, a_snapshot(), load_dictionary())
    assert time.perf_counter() - started < 3.0
    assert len(found(draft, Requirement)) == 300


def loaded_again(tmp_path: Path, *, before: dict[str, Any], now: dict[str, Any], name: str = "") -> Draft:
    """Load a workbook, and then another state of it (under another file name where one is given)."""
    project = a_snapshot(*read_sheets(tmp_path, **before).documents)
    path = project_workbook(tmp_path / (name or "project.xlsx"), **now)
    return read_workbook(path, project, load_dictionary())


REQUIREMENTS = [REQUIREMENT | {"ID": code} for code in ("R-1", "R-2", "R-3")]


@pytest.mark.parametrize("name", ["project.xlsx", "project rev B.xlsx"])
def test_a_row_that_was_deleted_is_missed_though_nothing_is_removed(tmp_path: Path, name: str) -> None:
    draft = loaded_again(
        tmp_path,
        before={"blocks": BLOCKS, "requirements": REQUIREMENTS},
        now={"blocks": BLOCKS, "requirements": REQUIREMENTS[:2]},
        name=name,
    )
    (finding,) = draft.findings
    assert (finding.rule, finding.severity, finding.subject) == (
        "workbook-row-gone",
        Severity.WARNING,
        "R-3",
    )
    assert finding.message == (
        "R-3 (requirement) came from this workbook and is not in it any more; it stays in the project"
    )
    assert finding.origin is not None and finding.origin.sheet == "Requirements"
    assert not draft.removals


def test_an_id_that_was_changed_leaves_the_old_one_behind_and_says_so(tmp_path: Path) -> None:
    renamed = [REQUIREMENT | {"ID": code} for code in ("R-1", "R-2", "R-3b")]
    draft = loaded_again(
        tmp_path,
        before={"blocks": BLOCKS, "requirements": REQUIREMENTS},
        now={"blocks": BLOCKS, "requirements": renamed},
    )
    assert [(one.rule, one.subject) for one in draft.findings] == [("workbook-row-gone", "R-3")]


def test_what_another_workbook_gave_is_not_missed(tmp_path: Path) -> None:
    draft = loaded_again(
        tmp_path,
        before={"blocks": BLOCKS, "requirements": REQUIREMENTS},
        now={"requirements": [REQUIREMENT | {"ID": "R-1"}, REQUIREMENT | {"ID": "R-9"}]},
        name="changes.xlsx",
    )
    assert not draft.findings


def test_ids_in_another_case_and_refused_rows_are_not_missed(tmp_path: Path) -> None:
    now = [
        REQUIREMENT | {"ID": "r-1"},
        REQUIREMENT | {"ID": "R-2", "Limit": "nonsense 5"},
        REQUIREMENT | {"ID": "R-3"},
    ]
    draft = loaded_again(
        tmp_path,
        before={"blocks": BLOCKS, "requirements": REQUIREMENTS},
        now={"blocks": BLOCKS, "requirements": now},
    )
    assert [one.rule for one in draft.findings] == ["workbook-cell"]


def test_the_rows_of_a_sheet_that_could_not_be_read_are_not_missed(tmp_path: Path) -> None:
    draft = loaded_again(
        tmp_path,
        before={"blocks": BLOCKS, "requirements": REQUIREMENTS},
        now={"blocks": BLOCKS, "requirements": [{"ID": "R-1", "Block": "UT"}]},
    )
    assert [one.rule for one in draft.findings] == ["workbook-missing-column"]
