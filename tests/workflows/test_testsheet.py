"""Test sheets out and back: exactly what is missing, filled in, attached, and found where it was tampered with."""

from __future__ import annotations

import shutil
import subprocess
from collections.abc import Callable, Iterator
from datetime import date
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from openpyxl.workbook.workbook import Workbook
from openpyxl.worksheet.worksheet import Worksheet

from specflow.conditions import make_conditions_set, parse_dimension, parse_map_entry
from specflow.errors import DocumentError, FileError
from specflow.limits import parse_limit
from specflow.model.base import Document
from specflow.model.bench_sheet import IDENTITY_SHEET, BenchPoint, identity_lines, identity_of, read_identity
from specflow.model.conditions import ConditionMap
from specflow.model.evidence import Supersession
from specflow.model.requirement import Method, Provers, Requirement, Stage
from specflow.parameters import load_dictionary
from specflow.store import ProjectStore, create_project
from specflow.workflows import testsheet as verb
from specflow.workflows.attach import (
    Attached,
    AttachOptions,
    AttachPreview,
    Decision,
    accept_attach,
    preview_attach,
)
from specflow.workflows.evaluate_project import evaluate_project
from specflow.workflows.missing_points import Scope
from specflow.workflows.testsheet import TestSheet, write_testsheet
from specflow.workflows.verify_files import verify_files
from tests.builders import a_block, a_project, a_quantity, adding, an_activity, an_item, editing
from tests.conftest import noon

AS_OF = date(2026, 6, 1)
ME = Decision("A. B.")
BOTH = Provers(rule="each of", items=("LNA-1", "LNA-2"))
DICTIONARY = load_dictionary()


def requirement(id: str, limit: str, parameter: str = "gain", **fields: Any) -> Requirement:
    known = DICTIONARY.get(parameter)
    assert known is not None
    facts = {
        "id": id,
        "title": id,
        "tier": "block",
        "block": "LNA",
        "quantity": a_quantity(parameter),
        "limit": parse_limit(limit, parameter=known),
        "conditions": "CS",
    }
    return Requirement.model_validate(facts | fields)


def the_project() -> list[Document]:
    corners = make_conditions_set(
        "CS",
        [
            parse_dimension("frequency: 27.5, 30 GHz ± 10 MHz"),
            parse_dimension("temperature_ambient: -40, 25, 85 °C ± 2 K"),
            parse_dimension("supply_voltage: 4.5, 5.5 V ± 0.1 V"),
        ],
    )
    sweep = make_conditions_set("SW", [parse_dimension("frequency: 27.5 to 30 GHz step 0.7 GHz")])
    fine = make_conditions_set("FINE", [parse_dimension("frequency: 27.5 to 30 GHz step 1 MHz")])
    return [
        a_block("TERM", tier="system"),
        a_block("LNA"),
        a_block("PA"),
        *(an_item(name) for name in ("LNA-1", "LNA-2")),
        an_item("PA-1", block="PA", serial="0815"),
        corners,
        sweep,
        fine,
        requirement("G-1", ">= 20 dB"),
        requirement("G-2", "<= 24 dB"),
        requirement("NF-1", "<= 2 dB", "noise_figure", provers=BOTH, conditions="SW"),
        requirement("EIRP-1", ">= 45 dBm", "eirp", block="PA", conditions="SW"),
        requirement("TBD-1", "TBD dB max", "noise_figure"),
        requirement("FINE-1", ">= 1 dB", block="PA", conditions="FINE"),
        requirement("ANA-1", ">= 1 dB", block="PA"),
        an_activity("ANA-1", method=Method.ANALYSIS),
        an_activity("EIRP-1", stage=Stage.ACCEPTANCE, gate="TRR"),
    ]  # fmt: skip


@pytest.fixture
def store(tmp_path: Path) -> Iterator[ProjectStore]:
    with create_project(tmp_path / "p.specflow", a_project(), clock=noon) as project:
        project.apply(adding(*the_project()), by="A. B.")
        yield project


def made(store: ProjectStore, **scope: Any) -> TestSheet:
    return verb.testsheet(store, AS_OF, Scope(**scope))


def written(store: ProjectStore, path: Path, **scope: Any) -> Path:
    write_testsheet(made(store, **scope), path)
    return path


def points(sheet: TestSheet) -> list[BenchPoint]:
    return [point for one in sheet.workbook.sheets for _, point in one.rows]


def edited(path: Path, change: Callable[[Workbook], object]) -> Path:
    workbook = openpyxl.load_workbook(path)
    change(workbook)
    workbook.save(path)
    return path


def columns(sheet: Worksheet) -> tuple[int, dict[str, int]]:
    """The header row of a sheet, and its columns by title."""
    row = next(row for row in range(1, 20) if sheet.cell(row, 1).value == "No.")
    return row, {str(cell.value): cell.column for cell in sheet[row] if cell.value}


def fill(path: Path, value: Callable[[dict[str, Any]], dict[str, Any] | None]) -> Path:
    """Fill in rows as the bench does: ``value`` gets a row by column title and returns what is written into it."""

    def change(workbook: Workbook) -> None:
        for sheet in workbook.worksheets:
            if sheet.sheet_state != "visible" or sheet.title == "How to fill in":
                continue
            header, by_title = columns(sheet)
            for row in range(header + 1, sheet.max_row + 1):
                told = {title: sheet.cell(row, column).value for title, column in by_title.items()}
                if isinstance(told["No."], int | float):
                    for title, entry in (value(told | {"Sheet": sheet.title}) or {}).items():
                        sheet.cell(row, by_title[title]).value = entry

    return edited(path, change)


def good(row: dict[str, Any]) -> dict[str, Any]:
    """A value that meets the limit, with what belongs to it."""
    values = {"Gain": 22, "Noise figure": 1.5, "EIRP": 47}
    item = row["Item"] or ("LNA-1" if row["Sheet"] == "LNA" else "PA-1")
    return {"Value": values[row["Quantity"]], "U (k = 2)": 0.2, "Item": item, "Date": date(2026, 5, 20),
            "Equipment": "SA-12", "Remark": "as required"}  # fmt: skip


def attach(store: ProjectStore, path: Path, decision: Decision = ME) -> Attached:
    return accept_attach(store, preview_attach(store, path, AttachOptions()), decision)


def look(store: ProjectStore, path: Path) -> AttachPreview:
    return preview_attach(store, path, AttachOptions())


def proved(store: ProjectStore) -> dict[str, tuple[int, int]]:
    results = evaluate_project(store, AS_OF).results
    names = ("G-1", "G-2", "NF-1", "EIRP-1")
    return {name: (results.of(name).k, results.of(name).n) for name in names}


def test_it_has_exactly_what_is_missing_and_says_what_it_leaves_out(store: ProjectStore) -> None:
    sheet = made(store)
    lna, pa = sheet.workbook.sheets
    assert (lna.block, pa.block) == ("LNA", "PA")
    both = [point for _, point in lna.rows if point.requirements == ("G-1", "G-2")]
    assert len(both) == 12 and both[0].limits == ("at least 20 dB", "at most 24 dB")
    noise = [point for _, point in lna.rows if point.requirements == ("NF-1",)]
    assert {point.item for point in noise} == {"LNA-1", "LNA-2"} and all(one.must_be_item for one in noise)
    first = [one.conditions[0].value for one in noise if one.item == "LNA-1"]
    assert first == [27.5, 28.2, 28.9, 29.6, 30.0]
    assert {point.stage for _, point in pa.rows} == {Stage.ACCEPTANCE} and len(pa.rows) == 5
    assert sheet.workbook.points == 12 + 2 * 5 + 5
    left_out = "; ".join(sheet.workbook.notes)
    assert "TBD-1: its limit is to be determined" in left_out
    assert "ANA-1: by analysis, not on a bench" in left_out
    assert "FINE-1: frequency 27.5 to 30 GHz has 2501 values, too many" in left_out


def test_what_the_conditions_come_to_at_the_block_itself_stands_beside_them(
    store: ProjectStore, tmp_path: Path
) -> None:
    entries = ("if_frequency = frequency - 26.1 GHz", "temperature_baseplate = temperature_ambient + 20 K")
    own = ConditionMap(id="CM", block="LNA", entries=tuple(parse_map_entry(one) for one in entries))
    store.apply(adding(own), by="A. B.")
    lna, pa = made(store).workbook.sheets
    said = {point.conditions[:2]: point.at_block for _, point in lna.rows if "G-1" in point.requirements}
    words = next(words for at, words in said.items() if [one.value for one in at] == [27.5, 85.0])
    assert words == "intermediate frequency 1.4 GHz; baseplate temperature 105 °C"
    assert {point.at_block for _, point in pa.rows} == {""}
    assert [one.title for one in lna.columns if "at the block" in one.title]
    assert not [one.title for one in pa.columns if "at the block" in one.title]
    path = fill(written(store, tmp_path / "t.xlsx"), good)
    attach(store, path)
    assert all(k == n for k, n in proved(store).values())


@pytest.mark.parametrize(
    ("scope", "count"),
    [
        ({"requirements": ["g-1"]}, 12),
        ({"requirements": ["G-1", "NF-1"]}, 22),
        ({"blocks": ["PA"]}, 5),
        ({"items": ["LNA-2"]}, 17),
        ({"items": ["0815"]}, 5),
        ({"gate": "trr"}, 5),
        ({"stage": "acceptance"}, 5),
        ({"stage": "development"}, 0),
        ({"gate": "TRR", "blocks": ["LNA"]}, 0),
    ],
)
def test_it_is_limited_to_what_is_asked_for(store: ProjectStore, scope: dict[str, Any], count: int) -> None:
    sheet = made(store, **scope)
    assert sheet.workbook.points == count and bool(sheet.content) == bool(count)


@pytest.mark.parametrize(
    ("scope", "words"),
    [
        ({"requirements": ["G-9"]}, "requirement 'G-9'"),
        ({"blocks": ["LNB"]}, "block 'LNB'"),
        ({"items": ["X"]}, "item 'X'"),
        ({"stage": "sometime"}, "no stage 'sometime'"),
        ({"gate": "CDR"}, "for the gate 'CDR'"),
    ],
)
def test_what_is_not_there_is_refused(store: ProjectStore, scope: dict[str, Any], words: str) -> None:
    with pytest.raises(DocumentError, match=words):
        made(store, **scope)


def test_cells_are_protected_but_for_those_to_fill_in(store: ProjectStore, tmp_path: Path) -> None:
    workbook = openpyxl.load_workbook(written(store, tmp_path / "t.xlsx"))
    assert {sheet.title: sheet.sheet_state for sheet in workbook.worksheets} == {
        "How to fill in": "visible", "LNA": "visible", "PA": "visible",
        "specflow lists": "hidden", "specflow identity": "hidden",
    }  # fmt: skip
    for sheet in (workbook["LNA"], workbook["PA"]):
        assert sheet.protection.sheet and not sheet.protection.password
        header, by_title = columns(sheet)
        row = next(row for row in range(header + 1, sheet.max_row) if sheet.cell(row, 1).value == 1)
        open_ones = {
            title for title, column in by_title.items() if not sheet.cell(row, column).protection.locked
        }
        assert open_ones - {"Item"} == {"Value", "U (k = 2)", "Date", "Equipment", "Remark"}
        offered = {rule.type for rule in sheet.data_validations.dataValidation}
        assert offered == {"list", "date", "decimal"}
    lna, by_title = workbook["LNA"], columns(workbook["LNA"])[1]
    rows = [
        row
        for row in range(1, lna.max_row + 1)
        if lna.cell(row, by_title["Quantity"]).value == "Noise figure"
    ]
    assert all(lna.cell(row, by_title["Item"]).protection.locked for row in rows)
    said = [str(cell.value) for row in workbook["PA"].iter_rows() for cell in row if cell.value]
    assert any("keep people out of the main beam" in text for text in said)
    assert any(text.startswith("High power:") for text in said)
    assert not any("High power" in str(cell.value) for row in lna.iter_rows() for cell in row)
    assert made(store).content == made(store).content


def test_filled_in_it_is_attached_without_a_mapping_and_proves_its_points(
    store: ProjectStore, tmp_path: Path
) -> None:
    path = fill(written(store, tmp_path / "t.xlsx"), good)
    edited(path, lambda workbook: workbook["LNA"].__setitem__("C3", "Bench crew"))
    done = attach(store, path)
    assert done.values == 27 and len(done.tables) == 3
    assert proved(store) == {"G-1": (12, 12), "G-2": (12, 12), "NF-1": (2, 2), "EIRP-1": (1, 1)}
    tables = {table.values[0].quantity.parameter: table for table in store.load().tables}
    gain, eirp = tables["gain"], tables["eirp"]
    assert (gain.block, gain.sheet, gain.performer, gain.stage) == (
        "LNA",
        "LNA",
        "Bench crew",
        Stage.QUALIFICATION,
    )
    assert [one.asset for one in gain.equipment] == ["SA-12"] and gain.mapping is None
    assert gain.how_read.layout.startswith("specflow test sheet ")
    assert (eirp.stage, eirp.requirement, gain.requirement) == (Stage.ACCEPTANCE, "EIRP-1", None)
    assert gain.values[0].unit_from == "the test sheet"
    arrays = store.load().load_columns([gain.id])[gain.id]
    values = arrays.values[gain.values[0].name]
    assert set(values.low) == {22.0} and values.u is not None and set(values.u) == {0.1}
    assert arrays.dates is not None and arrays.dates.word(0) == "2026-05-20"
    assert verify_files(store).is_clean
    assert made(store).workbook.points == 0
    assert look(store, path).is_unchanged


def test_half_filled_is_fine_and_what_is_missing_then_is_less(store: ProjectStore, tmp_path: Path) -> None:
    path = fill(
        written(store, tmp_path / "t.xlsx"),
        lambda row: good(row) if row.get("Ambient temperature (°C)") == -40 else None,
    )
    assert attach(store, path).values == 4
    assert proved(store)["G-1"] == (4, 12)
    second = made(store)
    assert second.workbook.points == 27 - 4
    rest = [point for point in points(second) if "G-1" in point.requirements]
    assert len(rest) == 8 and {point.item for point in rest} == {"LNA-1"}
    assert not any(condition.value == -40 for point in rest for condition in point.conditions)
    write_testsheet(second, tmp_path / "second.xlsx")
    attach(store, fill(tmp_path / "second.xlsx", good))
    assert made(store).workbook.points == 0


def test_the_same_sheet_filled_in_further_takes_the_place_of_what_it_was(
    store: ProjectStore, tmp_path: Path
) -> None:
    path = fill(
        written(store, tmp_path / "t.xlsx", blocks=["LNA"]), lambda row: good(row) if row["No."] < 6 else None
    )
    attach(store, path)
    fill(path, good)
    attach(store, path)
    assert proved(store) == {"G-1": (12, 12), "G-2": (12, 12), "NF-1": (2, 2), "EIRP-1": (0, 1)}
    replaced = [one.earlier for one in store.load().all(Supersession) if one.rows is None]
    assert replaced == ["EV-1"] and len(store.load().tables) == 3
    assert [str(check.state) for check in verify_files(store).checks] == ["replaced", "unchanged"]
    fill(path, lambda row: {"Value": 21} if row["No."] == 1 else None)
    with pytest.raises(DocumentError, match="with other values; it was not said which holds"):
        attach(store, path)


def test_a_value_may_be_a_bound_and_what_is_none_is_rejected_by_cell(
    store: ProjectStore, tmp_path: Path
) -> None:
    path = written(store, tmp_path / "t.xlsx", requirements=["G-1"])
    entries = {1: "> 21", 2: "abc", 3: "20,5", 4: None, 5: "N/A", 6: "0.0225 kdB"}
    fill(path, lambda row: {"Value": entries.get(row["No."]), "Item": "LNA-1", "Remark": "seen"})
    preview = look(store, path)
    [table] = preview.measurements.tables
    assert {one.text for one in table.rejected} >= {"abc"} and all(
        one.cell.startswith("J") for one in table.rejected
    )
    assert any("no value (seen)" in finding.message for finding in preview.measurements.findings)
    with pytest.raises(DocumentError, match="rejected; nothing was stored"):
        attach(store, path)
    attach(store, path, Decision("A. B.", take_rest=True))
    arrays = store.load().load_columns(["EV-1"])["EV-1"]
    [values] = arrays.values.values()
    assert (values.low[0], values.high[0]) == (21.0, float("inf"))


def test_a_value_without_an_item_is_rejected(store: ProjectStore, tmp_path: Path) -> None:
    path = written(store, tmp_path / "t.xlsx", requirements=["G-1"])
    fill(path, lambda row: {"Value": 22, "Item": None if row["No."] == 1 else "LNA-1"})
    preview = look(store, path)
    [table] = preview.measurements.tables
    assert [(one.cell, one.reason, one.text) for one in table.rejected] == [("J9", "I9 names no item", "22")]
    assert table.values == 11


def test_a_condition_that_may_be_anywhere_is_written_down_by_the_bench(
    store: ProjectStore, tmp_path: Path
) -> None:
    room = make_conditions_set("ROOM", [parse_dimension("frequency: 30 GHz ± 10 MHz"),
                                        parse_dimension("humidity: 30 to 60 % anywhere")])  # fmt: skip
    store.apply(adding(room, requirement("ROOM-1", ">= 20 dB", conditions="ROOM")), by="A. B.")
    path = written(store, tmp_path / "t.xlsx", requirements=["ROOM-1"])
    fill(path, lambda row: {"Value": 22, "Item": "LNA-1"})
    preview = look(store, path)
    assert "does not say at which humidity it was" in preview.measurements.tables[0].rejected[0].reason
    fill(path, lambda row: {"Relative humidity (%)": 45})
    attach(store, path)
    assert evaluate_project(store, AS_OF).results.of("ROOM-1").k == 1


def asked(store: ProjectStore, path: Path) -> list[tuple[str, str]]:
    return [
        (one.cell, one.what) for table in look(store, path).measurements.tables for one in table.questions
    ]


EDITS: dict[str, tuple[str, Any, str]] = {
    "a condition": ("D9", 85, "was -40, is 85"),
    "a condition as text": ("D9", "-40", "was -40, is '-40'"),
    "a requirement": ("B9", "G-2", "was 'G-1', is 'G-2'"),
    "a quantity": ("C9", "Noise figure", "was 'Gain', is 'Noise figure'"),
    "a unit": ("K9", "dBm", "was 'dB', is 'dBm'"),
    "a limit": ("G9", "at least 2 dB", "was 'at least 20 dB', is 'at least 2 dB'"),
    "the unit of u": ("M9", "%", "was 'dB', is '%'"),
    "a header": ("J7", "Reading", "was 'Value', is 'Reading'"),
    "a set-up": ("A8", "Set-up", "was 'Set-up 1 of 6"),
    "an emptied cell": ("B9", None, "was 'G-1', is empty"),
}


@pytest.mark.parametrize("edit", EDITS)
def test_an_edited_protected_cell_is_found_and_nothing_of_its_sheet_is_read(
    store: ProjectStore, tmp_path: Path, edit: str
) -> None:
    cell, value, words = EDITS[edit]
    path = fill(written(store, tmp_path / "t.xlsx", requirements=["G-1"]), good)
    edited(path, lambda workbook: workbook["LNA"].__setitem__(cell, value))
    [(place, what)] = asked(store, path)
    assert place == cell and what.startswith("this protected cell was edited: ") and words in what
    before = store.revision
    for decision in (ME, Decision("A. B.", take_rest=True)):
        with pytest.raises(DocumentError, match="protected cell was edited"):
            attach(store, path, decision)
    assert store.revision == before


def test_only_the_sheet_that_was_edited_is_left_out(store: ProjectStore, tmp_path: Path) -> None:
    path = fill(written(store, tmp_path / "t.xlsx"), good)
    edited(path, lambda workbook: workbook["PA"].__setitem__("B9", "G-1"))
    attach(store, path, Decision("A. B.", take_rest=True))
    assert {table.block for table in store.load().tables} == {"LNA"}


def test_rows_that_were_sorted_added_or_given_an_item_are_found(store: ProjectStore, tmp_path: Path) -> None:
    path = fill(written(store, tmp_path / "t.xlsx"), good)

    def swap(workbook: Workbook) -> None:
        sheet = workbook["LNA"]
        for first, second in zip(sheet[9], sheet[12], strict=True):
            first.value, second.value = second.value, first.value

    def add(workbook: Workbook) -> None:
        workbook["LNA"]["J60"] = 22

    def hand_over(workbook: Workbook) -> None:
        sheet = workbook["LNA"]
        row = next(row for row in range(9, 60) if sheet.cell(row, 2).value == "NF-1")
        sheet.cell(row, 9).value = "LNA-7"

    for change, words in ((swap, "was"), (add, "stands in no row"), (hand_over, "is 'LNA-7'")):
        other = edited(Path(shutil.copy(path, tmp_path / "other.xlsx")), change)
        found = asked(store, other)
        assert found and any(words in what for _, what in found), change


def test_the_identity_is_trusted_only_as_it_was_written(store: ProjectStore, tmp_path: Path) -> None:
    path = fill(written(store, tmp_path / "t.xlsx"), good)

    def tamper(workbook: Workbook) -> None:
        sheet = workbook[IDENTITY_SHEET]
        row = next(row for row in range(3, 60) if '"G-1"' in str(sheet.cell(row, 1).value))
        sheet.cell(row, 1).value = str(sheet.cell(row, 1).value).replace('"G-1"', '"NF-1"')

    for change, words in (
        (tamper, "identifies it was edited"),
        (lambda workbook: workbook[IDENTITY_SHEET].__setitem__("A1", "specflow test sheet 9"), "another format"),
        (lambda workbook: workbook[IDENTITY_SHEET].__setitem__("A2", None), "identifies it was edited"),
    ):  # fmt: skip
        other = edited(Path(shutil.copy(path, tmp_path / "other.xlsx")), change)
        with pytest.raises(FileError, match=words) as caught:
            look(store, other)
        assert IDENTITY_SHEET in caught.value.where and "specflow testsheet" in caught.value.hint
    gone = edited(Path(shutil.copy(path, tmp_path / "gone.xlsx")), lambda w: w.remove(w[IDENTITY_SHEET]))
    assert not look(store, gone).new_tables  # without it, it is a table like any other, with questions
    renamed = edited(Path(shutil.copy(path, tmp_path / "ren.xlsx")), lambda w: setattr(w["PA"], "title", "X"))
    assert ("", "the sheet 'PA' is missing or was renamed") in asked(store, renamed)


def test_what_else_is_in_the_workbook_is_not_read(store: ProjectStore, tmp_path: Path) -> None:
    path = fill(written(store, tmp_path / "t.xlsx", requirements=["G-1"]), good)
    edited(path, lambda workbook: workbook.create_sheet("raw").append(["f (GHz)", "Gain (dB)"]))
    preview = look(store, path)
    assert preview.values == 12 and "sheet raw: not part of the test sheet" in preview.measurements.skipped[0]


def test_an_empty_test_sheet_says_so(store: ProjectStore, tmp_path: Path) -> None:
    with pytest.raises(DocumentError, match="nothing is filled in on this test sheet"):
        attach(store, written(store, tmp_path / "t.xlsx"))


def test_a_requirement_that_went_on_is_said_and_the_value_stored(store: ProjectStore, tmp_path: Path) -> None:
    path = fill(written(store, tmp_path / "t.xlsx", requirements=["G-1"]), good)
    changed = next(one for one in store.load().requirements if one.id == "G-1")
    store.apply([editing(changed, quantity=a_quantity(plane="LNA output"))], by="A. B.")
    notes = [finding.message for finding in look(store, path).measurements.findings]
    assert any("G-1 is on another quantity than when the test sheet was written" in note for note in notes)
    assert attach(store, path).values == 12


def test_failing_points_are_left_out_unless_a_retest_is_asked_for(
    store: ProjectStore, tmp_path: Path
) -> None:
    path = written(store, tmp_path / "t.xlsx", requirements=["G-1"])
    attach(store, fill(path, lambda row: good(row) | ({"Value": 18} if row["No."] == 1 else {})))
    assert made(store, requirements=["G-1"]).workbook.points == 0
    assert "G-1: has failing points, which --retest adds" in made(store, requirements=["G-1"]).workbook.notes
    [point] = points(made(store, requirements=["G-1"], retest=True))
    assert (point.why, point.item) == (("fails",), "LNA-1")


def test_what_is_made_of_a_whole_sweep_is_not_asked_value_by_value(store: ProjectStore) -> None:
    store.apply(
        adding(
            requirement("FLAT-1", "<= 1 dB", "gain_flatness", conditions="SW"),
            requirement("FLAT-2", "<= 1 dB", "gain_flatness"),
        ),
        by="A. B.",
    )
    sheet = made(store, requirements=("FLAT-1",))
    assert not sheet.workbook.points
    assert list(sheet.workbook.notes) == [
        "FLAT-1: one value of the whole sweep over frequency: attach the sweep and derive it (specflow derive ripple)"
    ]
    assert made(store, requirements=("FLAT-2",)).workbook.points == 12, "at single frequencies it is asked"


def test_a_number_of_items_is_asked_of_so_many(store: ProjectStore, tmp_path: Path) -> None:
    store.apply(
        adding(requirement("N-1", ">= 20 dB", conditions=None, provers=Provers(rule="number of", number=2))),
        by="A. B.",
    )
    assert [point.item for point in points(made(store, requirements=["N-1"]))] == [""]
    path = written(store, tmp_path / "t.xlsx", requirements=["N-1"])
    attach(store, fill(path, lambda row: good(row) | {"Item": "LNA-2"}))
    assert evaluate_project(store, AS_OF).results.of("N-1").k == 1
    assert len(points(made(store, requirements=["N-1"]))) == 1


def test_a_file_that_is_there_is_not_overwritten(store: ProjectStore, tmp_path: Path) -> None:
    path = written(store, tmp_path / "t.xlsx")
    with pytest.raises(FileError, match="exists already"):
        written(store, path)
    with pytest.raises(FileError, match="cannot be written"):
        written(store, tmp_path / "none" / "t.xlsx")
    assert not list(tmp_path.rglob("*.part"))


def test_an_identity_is_read_back_as_it_was_written(store: ProjectStore) -> None:
    identity = identity_of(made(store).workbook)
    lines = identity_lines(identity)
    assert read_identity(lines) == identity and all(line.isascii() and len(line) < 32_000 for line in lines)
    for place in range(len(lines)):
        with pytest.raises(ValueError):
            read_identity([*lines[:place], *lines[place + 1 :]])
    with pytest.raises(ValueError):
        read_identity([])


def test_a_block_with_an_awkward_name_gets_a_sheet(store: ProjectStore, tmp_path: Path) -> None:
    names = ["A/B:C", "a-b-c", "X" * 40, "History"]
    store.apply(adding(*(a_block(name) for name in names)), by="A. B.")
    wanted = [requirement(f"R-{n}", ">= 1 dB", block=name, conditions=None) for n, name in enumerate(names)]
    store.apply(adding(*wanted), by="A. B.")
    sheet = made(store, blocks=names)
    assert len({one.name.casefold() for one in sheet.workbook.sheets}) == 4
    path = fill(written(store, tmp_path / "t.xlsx", blocks=names), lambda row: {"Value": 2, "Item": "SN 1"})
    assert attach(store, path).values == 4


@pytest.mark.desktop
def test_an_office_program_may_open_and_save_it_on_the_way(store: ProjectStore, tmp_path: Path) -> None:
    office = shutil.which("libreoffice") or shutil.which("soffice")
    if office is None:
        pytest.skip("LibreOffice is not installed")
    written(store, tmp_path / "t.xlsx")
    profile = f"-env:UserInstallation=file://{tmp_path / 'profile'}"

    def through_the_office(name: str, to: str) -> Path:
        (tmp_path / to).mkdir()
        subprocess.run(
            [office, profile, "--headless", "--convert-to", "xlsx:Calc MS Excel 2007 XML", "--outdir", to, name],
            cwd=tmp_path, check=True, timeout=180, capture_output=True,
        )  # fmt: skip
        return tmp_path / to / "t.xlsx"

    saved = through_the_office("t.xlsx", "once")
    filled = fill(saved, good)
    shutil.copy(filled, tmp_path / "t.xlsx")
    back = through_the_office("t.xlsx", "twice")
    workbook = openpyxl.load_workbook(back)
    assert workbook["LNA"].protection.sheet and workbook[IDENTITY_SHEET].sheet_state == "hidden"
    assert not asked(store, back)
    assert attach(store, back).values == 27
    assert proved(store) == {"G-1": (12, 12), "G-2": (12, 12), "NF-1": (2, 2), "EIRP-1": (1, 1)}


def test_what_the_person_says_does_not_outdo_the_identity(store: ProjectStore, tmp_path: Path) -> None:
    path = fill(written(store, tmp_path / "t.xlsx"), good)
    preview = preview_attach(store, path, AttachOptions(stated={"block": "PA"}))
    [lna] = {table.questions[0].what for table in preview.measurements.tables if table.sheet == "LNA"}
    assert "another block, method or stage" in lna
    preview = preview_attach(store, path, AttachOptions(sheets=["pa"]))
    assert {table.sheet for table in preview.measurements.tables} == {"PA"}
    assert "sheet LNA: not asked for" in preview.measurements.skipped
    with pytest.raises(FileError, match="no sheet 'X' on this test sheet"):
        preview_attach(store, path, AttachOptions(sheets=["X"]))


def test_rows_that_are_hidden_are_rejected_unless_they_are_asked_for(
    store: ProjectStore, tmp_path: Path
) -> None:
    path = fill(written(store, tmp_path / "t.xlsx", requirements=["G-1"]), good)

    def hide(workbook: Workbook) -> None:
        workbook["LNA"].row_dimensions[9].hidden = True

    [table] = look(store, edited(path, hide)).measurements.tables
    assert table.values == 11 and "hidden" in table.rejected[0].reason
    preview = preview_attach(store, path, AttachOptions(include_hidden_rows=True))
    assert preview.values == 12


READING = st.one_of(
    st.floats(-200, 200, allow_nan=False).map(lambda value: float(f"{value:.6g}")), st.integers(-60, 60)
)


@settings(max_examples=12, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(st.lists(st.one_of(st.none(), READING), min_size=12, max_size=12))
def test_any_values_come_back_as_they_were_written_at_the_conditions_of_their_rows(
    store: ProjectStore, tmp_path: Path, values: list[float | None]
) -> None:
    path = tmp_path / "t.xlsx"
    path.unlink(missing_ok=True)
    sheet = made(store, requirements=["G-1"])
    write_testsheet(sheet, path)
    fill(path, lambda row: {"Value": values[int(row["No."]) - 1], "Item": "LNA-1"})
    tables = look(store, path).measurements.tables
    filled = [number for number, value in enumerate(values) if value is not None]
    assert sum(table.values for table in tables) == len(filled)
    rows = dict(sheet.workbook.sheets[0].rows)
    for table in tables:
        assert table.columns is not None and table.document is not None
        [read] = table.columns.values.values()
        numbers = {row: number for number, row in enumerate(sorted(rows))}
        for place, row in enumerate(table.columns.source_rows.tolist()):
            assert read.low[place] == read.high[place] == values[numbers[row]]
            for one in rows[row].conditions:
                assert table.columns.conditions.numeric[one.dimension][place] == one.value


@settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(st.data())
def test_any_protected_cell_that_is_edited_is_found(
    store: ProjectStore, tmp_path: Path, data: st.DataObject
) -> None:
    sheet = made(store)
    path = tmp_path / "t.xlsx"
    path.unlink(missing_ok=True)
    write_testsheet(sheet, path)
    one = data.draw(st.sampled_from(sheet.workbook.sheets))
    cell = data.draw(
        st.sampled_from([cell for cell in one.cells if not cell.is_open and cell.value is not None])
    )
    entry = data.draw(st.one_of(st.none(), st.text("abc -12", min_size=1, max_size=6), st.integers(-99, 99)))
    same = entry == cell.value or (isinstance(entry, str) and entry.strip() == cell.value)
    edited(path, lambda workbook: workbook[one.name].__setitem__(cell.address, entry))
    found = [(place, what) for place, what in asked(store, path) if place == cell.address]
    assert bool(found) is not same, (cell, entry)


def test_a_limit_of_several_units_is_measured_in_that_of_its_parameter(
    store: ProjectStore, tmp_path: Path
) -> None:
    either = "spurious_relative <= -60 dBc or <= -30 dBm, whichever is looser"
    quantity = a_quantity("spurious_emission", bandwidth_hz=100e3)
    store.apply(
        adding(requirement("S-1", either, "spurious_emission", block="PA", quantity=quantity)), by="A. B."
    )
    [unit] = {point.unit for point in points(made(store, requirements=["S-1"]))}
    assert unit == "dBm"
    path = written(store, tmp_path / "t.xlsx", requirements=["S-1"])
    attach(store, fill(path, lambda row: {"Value": -50, "U (k = 2)": 1, "Item": "PA-1"}))
    status = evaluate_project(store, AS_OF).results.of("S-1")
    assert (status.k, status.n) == (12, 12)


def test_what_a_limit_depends_on_and_is_not_required_is_noted_by_the_bench(
    store: ProjectStore, tmp_path: Path
) -> None:
    store.apply(adding(requirement("A-1", ">= 26 dB if power_level > 20 dBm", conditions=None)), by="A. B.")
    path = written(store, tmp_path / "t.xlsx", requirements=["A-1"])
    fill(path, lambda row: {"Value": 30, "Item": "LNA-1"})
    assert "does not say at which power level" in look(store, path).measurements.tables[0].rejected[0].reason
    fill(path, lambda row: {"Power level (dBm)": 23})
    attach(store, path)
    assert evaluate_project(store, AS_OF).results.of("A-1").k == 1


def test_an_error_and_a_formula_without_a_value_are_no_empty_cells(
    store: ProjectStore, tmp_path: Path
) -> None:
    path = written(store, tmp_path / "t.xlsx", requirements=["G-1"])
    entries = {1: "#DIV/0!", 2: "=1+1", 3: 22}
    fill(path, lambda row: {"Value": entries.get(row["No."]), "Item": "LNA-1"})
    [table] = look(store, path).measurements.tables
    assert table.values == 1 and len(table.rejected) == 2
    assert {one.cell for one in table.rejected} == {"J9", "J10"}


def test_a_percent_format_is_read_as_what_is_shown_or_asked_about(
    store: ProjectStore, tmp_path: Path
) -> None:
    store.apply(adding(requirement("E-1", "<= 12 %", "evm", block="PA")), by="A. B.")
    path = written(store, tmp_path / "t.xlsx", requirements=["E-1", "G-1"])

    def all_percent(workbook: Workbook) -> None:
        for name in ("PA", "LNA"):
            sheet = workbook[name]
            header, by_title = columns(sheet)
            for row in range(header + 1, sheet.max_row + 1):
                if isinstance(sheet.cell(row, 1).value, int | float):
                    sheet.cell(row, by_title["Item"]).value = "PA-1" if name == "PA" else "LNA-1"
                    sheet.cell(row, by_title["Value"]).value = 0.05
                    sheet.cell(row, by_title["Value"]).number_format = "0.0%"

    tables = {table.sheet: table for table in look(store, edited(path, all_percent)).measurements.tables}
    pa, lna = tables["PA"], tables["LNA"]
    assert pa.columns is not None and set(pa.columns.values["Value"].low) == {5.0}
    assert lna.questions or lna.values == 0  # a percentage of gain in dB is not one
