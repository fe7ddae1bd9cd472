"""Layouts of sheets: what they are found by, and that they contradict neither themselves nor the documents."""

from __future__ import annotations

import pytest
from pydantic import ValidationError

from specflow.importers.sheets import SHEETS, Sheet
from specflow.model.nouns import NOUN_BY_DOCUMENT
from specflow.model.sheet import SheetColumn, SheetLayout, header_key


def test_headers_are_compared_without_case_blanks_and_punctuation() -> None:
    assert header_key(" Req. ID ") == header_key("reqid") == "reqid"
    assert header_key("Set-up") == header_key("set up")


def test_one_header_for_two_columns_is_refused() -> None:
    columns = (SheetColumn(key="id", title="ID"), SheetColumn(key="code", title="Code", aliases=("i.d.",)))
    with pytest.raises(ValidationError, match="names both id and code"):
        SheetLayout(noun="block", title="Blocks", intro="", columns=columns)


def test_the_first_example_row_is_made_of_the_columns_examples() -> None:
    columns = (SheetColumn(key="id", title="ID", example="A"), SheetColumn(key="note", title="Note"))
    layout = SheetLayout(
        noun="block", title="Blocks", intro="", columns=columns, more_examples=({"id": "B"},)
    )
    assert layout.examples() == ({"id": "A"}, {"id": "B"})


@pytest.mark.parametrize("sheet", SHEETS, ids=lambda sheet: str(sheet.layout.title))
def test_each_sheet_fills_fields_of_its_own_noun(sheet: Sheet) -> None:
    assert NOUN_BY_DOCUMENT[sheet.document].name == sheet.layout.noun
    others = {"requirement": {"method", "stage", "hardware"}, "project": {"value"}}
    beside = {"mark"} | others.get(sheet.layout.noun, set())
    for column in sheet.layout.columns:
        if column.key not in beside:
            field, _, part = column.fills.partition(".")
            assert field in sheet.document.model_fields, column.title
            assert not part or part in str(sheet.document.model_json_schema()), column.title


def test_no_two_sheets_go_by_the_same_name() -> None:
    names = [header_key(name) for sheet in SHEETS for name in {header_key(name) for name in sheet.names()}]
    assert len(names) == len(set(names))
