"""Bad project workbooks: every mistake is one finding with sheet, cell, what, and what to do."""

from __future__ import annotations

import time
from collections.abc import Callable, Mapping
from datetime import datetime
from pathlib import Path
from typing import Any

import pytest
from openpyxl import load_workbook
from openpyxl.worksheet.worksheet import Worksheet

from specflow.errors import FileError
from specflow.importers.workbook import read_workbook
from specflow.model.draft import Draft
from specflow.model.finding import Finding, Severity
from specflow.model.requirement import Requirement
from specflow.parameters import load_dictionary
from tests.builders import a_block, a_snapshot, project_workbook, read_sheets

BLOCKS = [{"ID": "UT", "Name": "Invented terminal"}]
REQUIREMENT = {"ID": "R-1", "Block": "UT", "Parameter": "eirp", "Limit": ">= 45 dBm"}


def rejected(draft: Draft) -> list[Finding]:
    return [one for one in draft.findings if one.severity is Severity.ERROR]


def edited(path: Path, sheet: str, edit: Callable[[Worksheet], None]) -> Path:
    """Change a sheet of a workbook that was written."""
    book = load_workbook(path)
    edit(book[sheet])
    book.save(path)
    return path


def read(path: Path) -> Draft:
    return read_workbook(path, a_snapshot(), load_dictionary())


def one_row(tmp_path: Path, **cells: Any) -> Draft:
    return read_sheets(tmp_path, blocks=BLOCKS, requirements=[REQUIREMENT | cells])


def test_forty_rows_with_twelve_mistakes_give_twelve_findings(tmp_path: Path) -> None:
    mistakes: Mapping[int, tuple[str, Any, str]] = {
        2: ("Limit", ">= 45", "no unit"),
        5: ("Limit", ">= 3 GHz", "GHz"),
        8: ("Limit", "at most dBm", "needs a number"),
        11: ("Parameter", "eirpp", "no known parameter"),
        14: ("Block", "UTX", "no block UTX; nearest: UT"),
        17: ("Conditions", "CS-9", "no conditions set CS-9"),
        20: ("Tier", "sytem", "none of the words"),
        23: ("TBR due", "03/04/2026", "not a date"),
        26: ("Decision rule", "about U", "no decision rule"),
        29: ("Parents", "R-77", "no requirement R-77"),
        32: ("Met by lower level", "perhaps", "neither yes nor no"),
        35: ("Reference bandwidth", "wide", "does not begin with a number"),
    }
    headers = list(dict.fromkeys([*REQUIREMENT, *(column for column, _, _ in mistakes.values())]))
    rows = [dict.fromkeys(headers) | REQUIREMENT | {"ID": f"R-{number}"} for number in range(2, 42)]
    for number, (column, value, _) in mistakes.items():
        rows[number - 2][column] = value

    draft = read_sheets(tmp_path, blocks=BLOCKS, requirements=rows)

    findings = {one.origin.row or 0: one for one in draft.findings if one.origin}
    assert sorted(findings) == sorted(mistakes)
    assert len(draft.findings) == 12
    for number, (column, _, words) in mistakes.items():
        one = findings[number]
        assert one.origin is not None
        assert one.origin.sheet == "Requirements"
        assert one.origin.column == headers.index(column) + 1
        assert words in one.message
        assert one.remedy
        assert one.subject == f"R-{number}"
    assert sum(isinstance(one, Requirement) for one in draft.documents) == 28


def test_all_mistakes_of_one_row_are_found(tmp_path: Path) -> None:
    others = {"Owner": "#REF!", "Test tolerance": "some", "Method": "tst"}
    draft = one_row(tmp_path, Parameter="eirpp", Limit=">= 45 dBmm", Block="UTX", **others)
    assert [one.origin.cell for one in rejected(draft) if one.origin] == ["B2", "C2", "D2", "E2", "F2", "G2"]


@pytest.mark.parametrize(
    ("cells", "words"),
    [
        ({"Limit": None}, "Limit is empty"),
        ({"Limit": "—"}, "Limit is empty"),
        ({"Limit": 45}, "no direction"),
        ({"Limit": ">= 45 dBmm"}, "dBmm"),
        ({"Limit": ">= NaN dBm"}, "NaN stands where the limit '>= NaN dBm' needs a number"),
        ({"Limit": ">= dBm"}, "needs a number"),
        ({"Limit": ">= 45 dBm", "Unit": "dBmm"}, "dBmm"),
        (
            {"Parameter": "eirp_density", "Limit": "-13 dBm/MHz max", "Reference bandwidth": "4 kHz"},
            "per 1 MHz",
        ),
        ({"Reference bandwidth": "0 Hz"}, "a bandwidth of 0 Hz cannot be"),
        ({"ID": "x" * 90}, "too long"),
        ({"ID": datetime(2026, 3, 8)}, "date or time (2026-03-08)"),
        ({"Limit": datetime(2026, 3, 8)}, "date or time (2026-03-08)"),
        ({"Proved by": "each of: SN9"}, "no item or serial SN9"),
        ({"Proved by": "number of: many"}, "no number of items"),
        ({"Not applicable: reason": "No such port"}, "nobody is named who approved"),
        ({"Parents": "derived"}, "needs its reason"),
        ({"Applicability": "variant maritime"}, "maritime"),
        ({"Test tolerance": "some"}, "some"),
        ({"Greatest uncertainty": "-1 dB"}, "cannot be"),
        ({"Method": "tst"}, "none of the words"),
    ],
)
def test_a_cell_that_cannot_be_taken_is_one_finding(
    tmp_path: Path, cells: dict[str, Any], words: str
) -> None:
    draft = one_row(tmp_path, **cells)
    (finding,) = rejected(draft)
    assert words in finding.message
    assert finding.remedy
    assert not any(isinstance(one, Requirement) for one in draft.documents)


def test_ids_that_differ_in_case_only_are_refused_naming_both_cells(tmp_path: Path) -> None:
    draft = read_sheets(tmp_path, blocks=BLOCKS, requirements=[REQUIREMENT, REQUIREMENT | {"ID": "r-1"}])
    (finding,) = rejected(draft)
    assert finding.origin is not None
    assert finding.origin.cell == "A3"
    assert "Requirements A2, written R-1" in finding.message


def test_a_missing_header_is_one_finding_that_names_what_is_looked_for(tmp_path: Path) -> None:
    rows = [{"ID": "R-1", "Parameter": "eirp", "Bound": ">= 45 dBm"}] * 5
    draft = read_sheets(tmp_path, blocks=BLOCKS, requirements=rows)
    (finding,) = rejected(draft)
    assert finding.rule == "workbook-missing-column"
    assert "the sheet Requirements has no column 'Limit' (or 'Limits'" in finding.message
    assert "row 1" in finding.why


def test_one_header_twice_is_refused(tmp_path: Path) -> None:
    rows = [
        {"ID": "R-1", "Block": "UT", "Parameter": "eirp", "Limits": ">= 45 dBm", "Limit value": "<= 3 dB"}
    ]
    (finding,) = rejected(read_sheets(tmp_path, blocks=BLOCKS, requirements=rows))
    assert "says the same as the one in D1" in finding.message


def test_a_running_number_beside_the_id_is_reported_and_left_out(tmp_path: Path) -> None:
    draft = one_row(tmp_path, **{"No.": 1})
    assert [(one.rule, one.severity) for one in draft.findings] == [
        ("workbook-doubled-column", Severity.WARNING)
    ]
    assert "says the same as the one in A1, which was read" in draft.findings[0].message
    assert [one.id for one in draft.documents if isinstance(one, Requirement)] == ["R-1"]


def test_merged_cells_are_refused_with_their_address(tmp_path: Path) -> None:
    path = project_workbook(
        tmp_path / "a.xlsx", blocks=BLOCKS, requirements=[REQUIREMENT | {"ID": f"R-{n}"} for n in range(3)]
    )
    edited(path, "Requirements", lambda sheet: sheet.merge_cells("B2:B3"))
    draft = read(path)
    (finding,) = rejected(draft)
    assert "B2:B3 are merged" in finding.message
    assert [one.id for one in draft.documents if isinstance(one, Requirement)] == ["R-2"]


def test_merged_titles_above_the_header_do_no_harm(tmp_path: Path) -> None:
    path = project_workbook(tmp_path / "a.xlsx", blocks=BLOCKS, requirements=[REQUIREMENT])

    def title(sheet: Worksheet) -> None:
        sheet.insert_rows(1, 2)
        sheet["A1"] = "Invented specification"
        sheet.merge_cells("A1:D1")

    assert not read(edited(path, "Requirements", title)).findings


def test_hidden_rows_are_refused_and_a_hidden_sheet_is_not_read(tmp_path: Path) -> None:
    path = project_workbook(tmp_path / "a.xlsx", blocks=BLOCKS, requirements=[REQUIREMENT])

    def hide(sheet: Worksheet) -> None:
        sheet.row_dimensions[2].hidden = True

    (finding,) = rejected(read(edited(path, "Requirements", hide)))
    assert "row 2 is hidden" in finding.message

    def show_row_hide_sheet(sheet: Worksheet) -> None:
        sheet.row_dimensions[2].hidden = False
        sheet.sheet_state = "hidden"

    (finding,) = rejected(read(edited(path, "Requirements", show_row_hide_sheet)))
    assert "the sheet Requirements is hidden" in finding.message


@pytest.mark.parametrize(
    ("value", "words"),
    [("#REF!", "#REF!"), ("#DIV/0!", "#DIV/0!"), ("=1+44", "without a stored value")],
)
def test_error_cells_and_formulas_without_value_are_refused(tmp_path: Path, value: str, words: str) -> None:
    path = project_workbook(tmp_path / "a.xlsx", blocks=BLOCKS, requirements=[REQUIREMENT])

    def put(sheet: Worksheet) -> None:
        sheet["D2"] = value

    (finding,) = rejected(read(edited(path, "Requirements", put)))
    assert finding.origin is not None
    assert finding.origin.cell == "D2"
    assert words in finding.message


def test_a_percent_formatted_limit_is_read_as_it_is_shown(tmp_path: Path) -> None:
    path = project_workbook(
        tmp_path / "a.xlsx", blocks=BLOCKS, requirements=[REQUIREMENT | {"Parameter": "evm", "Limit": 0.08}]
    )

    def percent(sheet: Worksheet) -> None:
        sheet["D2"].number_format = "0%"

    draft = read(edited(path, "Requirements", percent))
    assert not rejected(draft)
    assert draft.echoes["R-1"].startswith("EVM: at most 8 %")


def test_a_percent_formatted_count_is_refused(tmp_path: Path) -> None:
    path = project_workbook(tmp_path / "a.xlsx", blocks=[{"ID": "UT", "Quantity": 4}])

    def percent(sheet: Worksheet) -> None:
        sheet["B2"].number_format = "0%"

    (finding,) = rejected(read(edited(path, "Blocks", percent)))
    assert "400 %" in finding.message


def test_circles_of_blocks_and_of_requirements_are_named(tmp_path: Path) -> None:
    draft = read_sheets(
        tmp_path,
        blocks=[*BLOCKS, {"ID": "A", "Parent": "B"}, {"ID": "B", "Parent": "C"}, {"ID": "C", "Parent": "A"}],
        requirements=[
            REQUIREMENT | {"Parents": "R-2"},
            REQUIREMENT | {"ID": "R-2", "Parents": "R-1"},
            REQUIREMENT | {"ID": "R-3", "Parents": "R-3"},
        ],
    )
    assert [one.message.partition(": ")[2] for one in rejected(draft)] == [
        "A -> B -> C -> A",
        "R-1 -> R-2 -> R-1",
        "R-3 -> R-3",
    ]
    assert not any(isinstance(one, Requirement) for one in draft.documents)


def test_a_circle_that_closes_through_the_project_is_found(tmp_path: Path) -> None:
    first = read_sheets(tmp_path, blocks=[*BLOCKS, {"ID": "A", "Parent": "UT"}, {"ID": "B", "Parent": "A"}])
    draft = read_sheets(tmp_path, a_snapshot(*first.documents), blocks=[{"ID": "A", "Parent": "B"}])
    (finding,) = rejected(draft)
    assert "A -> B -> A" in finding.message
    assert not draft.documents


def test_conditions_with_a_billion_points_are_refused_before_they_are_made(tmp_path: Path) -> None:
    rows = [
        {"ID": "CS-1", "Dimension": f"axis_{axis}", "Required": ", ".join(str(n) for n in range(1, 1001))}
        for axis in "abc"
    ]
    (finding,) = rejected(read_sheets(tmp_path, conditions=rows))
    assert "1000" in finding.message.replace(",", "").replace(" ", "")
    assert finding.subject == "CS-1"


def test_what_hangs_on_a_refused_document_is_left_out_with_it(tmp_path: Path) -> None:
    draft = read_sheets(
        tmp_path,
        blocks=[*BLOCKS, {"ID": "TX", "Parent": "UT", "Tier": "nonsense"}],
        requirements=[
            REQUIREMENT | {"Block": "TX", "Method": "test"},
            REQUIREMENT | {"ID": "R-2", "Parents": "R-1"},
        ],
        activities=[{"Requirement": "R-2", "Method": "test"}],
    )
    assert len(rejected(draft)) == 1
    assert [one.rule for one in draft.findings if one.severity is Severity.WARNING] == [
        "workbook-left-out"
    ] * 3
    assert "because the block TX was refused" in draft.findings[1].message
    assert [one.id for one in draft.documents] == ["UT"]  # type: ignore[attr-defined]
    assert not draft.echoes


def test_a_row_with_an_id_only_is_one_finding(tmp_path: Path) -> None:
    draft = read_sheets(tmp_path, blocks=BLOCKS, requirements=[{"ID": "Transmitter"}, REQUIREMENT])
    (finding,) = rejected(draft)
    assert "only the column ID" in finding.message


def test_a_note_below_the_blocks_is_one_finding_and_a_lone_id_is_a_block(tmp_path: Path) -> None:
    rows = [{"ID": "UT", "Parent": None}, {"ID": "TX", "Parent": "UT"}, {"Parent": "Note: per hop end."}]
    draft = read_sheets(tmp_path, blocks=rows)
    (finding,) = rejected(draft)
    assert finding.message == "only the column Parent of this row is filled in"
    assert "a heading or a note" in finding.remedy
    assert [one.id for one in draft.documents] == ["UT", "TX"]  # type: ignore[attr-defined]


def test_a_workbook_with_headers_only_says_that_nothing_was_found(tmp_path: Path) -> None:
    path = project_workbook(tmp_path / "a.xlsx", requirements=[REQUIREMENT])
    draft = read(edited(path, "Requirements", lambda sheet: sheet.delete_rows(2)))
    assert [(one.rule, one.severity) for one in draft.findings] == [
        ("workbook-nothing-to-load", Severity.WARNING)
    ]


@pytest.mark.parametrize(
    "content",
    [b"", b"PK\x03\x04 cut off", b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + b"\0" * 600],
    ids=["empty", "cut", "old"],
)
def test_a_file_that_is_no_workbook_is_refused_by_name(tmp_path: Path, content: bytes) -> None:
    path = tmp_path / "broken.xlsx"
    path.write_bytes(content)
    with pytest.raises(FileError) as refused:
        read(path)
    assert "broken.xlsx" in str(refused.value)
    assert refused.value.hint


def test_a_missing_file_is_refused_by_name(tmp_path: Path) -> None:
    with pytest.raises(FileError, match=r"nowhere\.xlsx"):
        read(tmp_path / "nowhere.xlsx")


def test_a_sheet_that_is_only_called_much_like_one_is_left_aside_if_another_is_read(tmp_path: Path) -> None:
    prose = [{"Chapter": 1, "Text": "This specification is invented."}]
    beside = read_sheets(tmp_path, blocks=BLOCKS, specification=prose)
    assert [(one.rule, one.severity) for one in beside.findings] == [
        ("workbook-missing-column", Severity.WARNING)
    ]
    alone = read_sheets(tmp_path, specification=prose)
    assert [(one.rule, one.severity) for one in alone.findings] == [
        ("workbook-missing-column", Severity.ERROR)
    ]


def test_a_hidden_column_is_read_and_reported(tmp_path: Path) -> None:
    path = project_workbook(tmp_path / "a.xlsx", blocks=BLOCKS, requirements=[REQUIREMENT])

    def hide(sheet: Worksheet) -> None:
        sheet.column_dimensions["D"].hidden = True

    draft = read(edited(path, "Requirements", hide))
    assert [(one.rule, one.severity) for one in draft.findings] == [
        ("workbook-hidden-column", Severity.WARNING)
    ]
    assert any(isinstance(one, Requirement) for one in draft.documents)


def test_comment_lines_of_a_csv_file_are_no_rows(tmp_path: Path) -> None:
    path = tmp_path / "requirements.csv"
    path.write_text("# invented\nID,Block,Parameter,Limit\nR-1,UT,eirp,>= 45 dBm\n# the end\n", "utf-8")
    draft = read_workbook(path, a_snapshot(a_block("UT")), load_dictionary())
    assert not rejected(draft)
    assert sum(isinstance(one, Requirement) for one in draft.documents) == 1


def test_one_mistake_repeated_a_thousand_times_is_reported_in_moments(tmp_path: Path) -> None:
    rows = [REQUIREMENT | {"ID": f"R-{number}", "Parents": f"Q-{number}"} for number in range(1000)]
    path = project_workbook(tmp_path / "a.xlsx", blocks=BLOCKS, requirements=rows)
    started = time.perf_counter()
    draft = read(path)
    assert time.perf_counter() - started < 10.0
    assert len(rejected(draft)) == 1000
