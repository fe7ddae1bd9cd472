"""The workbook template: what it offers, and that it reads back."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest
from openpyxl import load_workbook
from openpyxl.worksheet.worksheet import Worksheet

from specflow.errors import FileError
from specflow.exporters.limit_spellings import LIMIT_SPELLINGS, LimitSpelling
from specflow.exporters.template import template_bytes, write_template
from specflow.importers.sheets import SHEETS
from specflow.importers.workbook import read_workbook
from specflow.model.finding import Severity
from specflow.model.nouns import NOUN_BY_DOCUMENT
from specflow.model.sheet import EXAMPLE, GUIDE, SheetLayout
from specflow.parameters import load_dictionary
from tests.builders import a_block, a_declared_value, a_snapshot, read_sheets

LAYOUTS = [sheet.layout for sheet in SHEETS]


@pytest.fixture(scope="module")
def template(tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("template") / "project.xlsx"
    write_template(LAYOUTS, path)
    return path


def sheets_of(path: Path) -> Iterator[tuple[SheetLayout, Worksheet]]:
    book = load_workbook(path)
    yield from ((layout, book[layout.title]) for layout in LAYOUTS)


def test_there_is_a_guide_and_one_sheet_a_noun(template: Path) -> None:
    assert load_workbook(template).sheetnames == [GUIDE, *(layout.title for layout in LAYOUTS)]


def guide_of(path: Path) -> dict[str, str]:
    """The guide's second column by its first; a cell without a name in front counts by its own text."""
    rows = load_workbook(path)[GUIDE].iter_rows(values_only=True)
    return {str(name or text): str(text) for name, text, *_ in rows if text}


@pytest.mark.parametrize("spelling", LIMIT_SPELLINGS, ids=lambda spelling: spelling.text)
def test_every_spelling_of_a_limit_in_the_guide_loads_and_is_said_back_as_the_guide_says(
    template: Path, tmp_path: Path, spelling: LimitSpelling
) -> None:
    row = {"ID": "R-1", "Block": "UT", "Parameter": spelling.parameter, "Limit": spelling.text}
    draft = read_sheets(
        tmp_path,
        a_snapshot(a_block("UT"), a_declared_value("P_rated")),
        requirements=[row],
    )
    assert not [one for one in draft.findings if one.severity is Severity.ERROR]
    said = [text for text in guide_of(template).values() if text.startswith(f"{spelling.text}\n")]
    assert said == [f"{spelling.text}\n{draft.echoes['R-1']}"]


def test_the_guide_lists_every_parameter_with_its_unit_and_other_names(template: Path) -> None:
    guide = guide_of(template)
    for parameter in load_dictionary().by_key.values():
        assert parameter.title in guide[parameter.key]
        assert all(alias in guide[parameter.key] for alias in parameter.aliases)
    assert guide["vswr"].startswith("VSWR (plain number)")
    assert guide["eirp"].startswith("EIRP (dBm)")


def test_every_sheet_has_guidance_headers_and_a_marked_example_row(template: Path) -> None:
    for layout, sheet in sheets_of(template):
        headers = [cell.value for cell in sheet[3]]
        assert headers == [column.title for column in layout.offered]
        assert sum(bool(cell.value) for cell in sheet[2]) >= len(layout.required)
        assert sheet["A4"].value == EXAMPLE
        assert sheet.freeze_panes == "C4"
        for column, cell in zip(layout.offered, sheet[4], strict=True):
            assert (cell.value or "") == column.example
            assert not column.required or column.example, f"{layout.title}: {column.title} shows no example"


def test_drop_downs_offer_the_words_that_are_read(template: Path) -> None:
    for layout, sheet in sheets_of(template):
        offered = {
            str(one.sqref).split(":")[0]: one.formula1 for one in sheet.data_validations.dataValidation
        }
        for column, cell in zip(layout.offered, sheet[4], strict=True):
            assert (cell.coordinate in offered) == bool(column.choices)
            if column.choices:
                assert offered[cell.coordinate].strip('"').split(",") == [
                    str(choice) for choice in column.choices
                ]


def test_every_cell_is_formatted_as_text_so_that_ids_stay_ids(template: Path) -> None:
    for _, sheet in sheets_of(template):
        assert {cell.number_format for cell in sheet[4]} == {"@"}


def test_the_template_as_it_is_loads_nothing(template: Path) -> None:
    draft = read_workbook(template, a_snapshot(), load_dictionary())
    assert not draft.documents
    assert [one.rule for one in draft.findings] == ["workbook-nothing-to-load"]


def test_the_example_rows_load_without_a_finding_once_their_mark_is_emptied(
    template: Path, tmp_path: Path
) -> None:
    book = load_workbook(template)
    for layout in LAYOUTS:
        for row in book[layout.title].iter_rows(min_row=4, max_col=1):
            row[0].value = None
    book.save(tmp_path / "filled.xlsx")

    draft = read_workbook(tmp_path / "filled.xlsx", a_snapshot(), load_dictionary())

    assert not draft.findings
    assert {NOUN_BY_DOCUMENT[type(one)].name for one in draft.documents} == {
        layout.noun for layout in LAYOUTS
    }
    again = read_workbook(tmp_path / "filled.xlsx", a_snapshot(*draft.documents), load_dictionary())
    assert not again.findings
    assert all(document in draft.documents for document in again.documents)


def test_the_same_layouts_give_the_same_bytes() -> None:
    assert template_bytes(LAYOUTS) == template_bytes(LAYOUTS)


def test_a_workbook_that_is_there_already_is_not_overwritten(template: Path) -> None:
    before = template.read_bytes()
    with pytest.raises(FileError, match="exists already"):
        write_template(LAYOUTS, template)
    assert template.read_bytes() == before


def test_a_folder_that_is_not_there_is_named_and_nothing_is_left(tmp_path: Path) -> None:
    with pytest.raises(FileError) as refused:
        write_template(LAYOUTS, tmp_path / "nowhere" / "project.xlsx")
    assert "cannot be written" in refused.value.message
    assert refused.value.hint
    assert list(tmp_path.iterdir()) == []
