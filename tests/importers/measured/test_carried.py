"""Labels that hold for the rows below: also where their own row is hidden, and never past a cell that is not blank."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from openpyxl.worksheet.worksheet import Worksheet

from specflow.importers.measurements import MeasuredTable
from tests.importers.measured.make import book, one_table, taken

HEAD = ["Serial", "Baseplate (°C)", "f (GHz)", "Gain (dB)"]


def hide(*hidden: int, merged: str = "") -> Any:
    def change(sheet: Worksheet) -> None:
        for row in hidden:
            sheet.row_dimensions[row].hidden = True
        if merged:
            sheet.merge_cells(merged)

    return change


def filled(tmp_path: Path, rows: list[list[Any]], change: Any = None, more: str = "") -> MeasuredTable:
    path = book(tmp_path / "a.xlsx", [HEAD, *rows], change=change)
    mapping = f"""format = 1
[[table]]
layout = "{one_table(path).layout_key}"
{more}
[[table.column]]
header = "Serial"
role = "item"
fill_down = true
[[table.column]]
header = "Baseplate (°C)"
role = "condition"
dimension = "temperature_baseplate"
fill_down = true
"""
    return taken(one_table(path, mapping=mapping))


def labels(table: MeasuredTable) -> list[tuple[str, float]]:
    assert table.columns is not None
    items, numbers = table.columns.items, table.columns.conditions.numeric["temperature_baseplate"]
    return [(items.word(row), float(numbers[row])) for row in range(table.columns.conditions.size)]


ROWS: list[list[Any]] = [
    ["LNA-1", -30, 28, 20.1],
    [None, None, 29, 20.2],
    ["LNA-2", 70, 28, 20.3],
    [None, None, 29, 20.4],
]


def test_a_label_in_a_hidden_row_is_that_of_the_rows_below(tmp_path: Path) -> None:
    table = filled(tmp_path, ROWS, hide(4))
    assert labels(table) == [("LNA-1", -30), ("LNA-1", -30), ("LNA-2", 70)]


def test_a_label_in_a_row_that_a_mapping_skips_is_that_of_the_rows_below(tmp_path: Path) -> None:
    table = filled(tmp_path, ROWS, more="skip_rows = [4]")
    assert labels(table) == [("LNA-1", -30), ("LNA-1", -30), ("LNA-2", 70)]


def test_a_merged_label_whose_first_row_is_hidden(tmp_path: Path) -> None:
    path = book(
        tmp_path / "a.xlsx", [HEAD, *[[row[0], 25, *row[2:]] for row in ROWS]], change=hide(4, merged="A4:A5")
    )
    table = one_table(path)
    assert "A3: column A names no item in 1 of 3 rows" in "\n".join(
        f"{q.cell}: {q.what}" for q in table.questions
    )
    rows = [["LNA-1", 25, 28, 20.1], ["LNA-1", 25, 29, 20.2], *[[row[0], 25, *row[2:]] for row in ROWS[2:]]]
    read = taken(one_table(book(tmp_path / "b.xlsx", [HEAD, *rows], change=hide(4, merged="A4:A5"))))
    assert read.columns is not None
    assert [read.columns.items.word(row) for row in range(3)] == ["LNA-1", "LNA-1", "LNA-2"]


def test_a_cell_that_cannot_be_read_hands_nothing_down_and_takes_nothing(tmp_path: Path) -> None:
    rows = [ROWS[0], ["LNA-2", "cold", 28, 20.2], [None, None, 29, 20.3], [None, "-", 30, 20.4]]
    table = filled(tmp_path, rows)
    found = labels(table)
    assert [item for item, _ in found] == ["LNA-1", "LNA-2", "LNA-2", "LNA-2"]
    assert found[0][1] == -30 and all(number != number for _, number in found[1:])


def test_sums_between_hand_nothing_down(tmp_path: Path) -> None:
    rows = [ROWS[0], ["Mean", None, None, 20.2], ROWS[1], ROWS[2], ROWS[3]]
    assert labels(filled(tmp_path, rows)) == [("LNA-1", -30), ("LNA-1", -30), ("LNA-2", 70), ("LNA-2", 70)]


def test_marks_for_the_word_above_are_asked_about(tmp_path: Path) -> None:
    rows = [["Serial", "Mode", "Gain (dB)"], ["LNA-1", "Low", 20.1], ['"', "do.", 20.2]]
    table = one_table(book(tmp_path / "a.xlsx", rows))
    asked = [f"{one.cell} {one.what}" for one in table.questions]
    assert asked == [
        "A1 column A: '\"' stands for the word above",
        "B1 column B: 'do.' stands for the word above",
    ]
