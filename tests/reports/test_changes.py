"""What a load would change, as a table and counted in words."""

from __future__ import annotations

from specflow.model.report import CellTone
from specflow.reports.changes import changes_in_words, changes_table
from tests.builders import a_block, a_declared_value, a_requirement, adding, editing


def test_new_documents_are_told_only_where_there_is_something_to_say() -> None:
    changes = adding(a_block("LNA"), a_requirement("R-1"))
    (row,) = changes_table(changes, {"R-1": "at least 20 dB"}).rows
    assert [cell.text for cell in row.cells] == ["added", "requirement", "R-1", "", "at least 20 dB"]


def test_an_edit_is_always_told_and_stands_out() -> None:
    (row,) = changes_table([editing(a_declared_value(), value=53.0)], {}).rows
    assert row.cells[0].text == "changed"
    assert row.cells[0].tone is CellTone.DOUBTFUL


def test_changes_are_counted_by_what_happens_and_by_noun() -> None:
    changes = [
        *adding(a_block("LNA"), a_block("MIX"), a_requirement("R-1")),
        editing(a_declared_value(), value=53.0),
    ]
    assert changes_in_words(changes) == "added: 2 blocks, 1 requirement; changed: 1 declared value"
    assert changes_in_words([]) == ""
