"""Which item a row is of: rows that name none are asked about, and a sheet may have the name of an item."""

from __future__ import annotations

from pathlib import Path

from tests.importers.measured.make import book, low, one_table, questions, taken

ROWS = [
    ["Serial", "f (GHz)", "Gain (dB)"],
    ["LNA-1", 28, 20.1],
    [None, 29, 20.2],
    ["LNA-2", 28, 20.3],
    [None, 29, 20.4],
]


def test_rows_that_name_no_item_are_asked_about(tmp_path: Path) -> None:
    path = book(tmp_path / "a.xlsx", ROWS)
    asked = questions(one_table(path))
    assert "A3: column A names no item in 2 of 4 rows" in asked and "fill_down = true" in asked


def test_a_mapping_says_that_a_blank_cell_means_the_item_above(tmp_path: Path) -> None:
    path = book(tmp_path / "a.xlsx", ROWS)
    key = one_table(path).layout_key
    mapping = f"""format = 1
[[table]]
layout = "{key}"
[[table.column]]
header = "Serial"
role = "item"
fill_down = true
"""
    table = taken(one_table(path, mapping=mapping))
    assert table.columns is not None
    items = [table.columns.items.word(row) for row in range(4)]
    assert items == ["LNA-1", "LNA-1", "LNA-2", "LNA-2"] and low(table, "Gain") == [20.1, 20.2, 20.3, 20.4]


def test_results_of_an_analysis_need_no_item(tmp_path: Path) -> None:
    stated = {"block": "LNA", "method": "analysis", "model": "m"}
    taken(one_table(book(tmp_path / "a.xlsx", ROWS), stated=stated))


def test_a_sheet_with_the_name_of_an_item_says_whose_its_readings_are(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Gain (dB)"], [28, 20.1], [29, 20.2]]
    path = book(tmp_path / "a.xlsx", rows, sheet="LNA-2")
    table = taken(one_table(path, stated={"block": "LNA"}))
    assert table.columns is not None and table.columns.items.labels == ("LNA-2",)
    assert "the item is LNA-2, by the name of the sheet" in table.notes
    assert "the sheet has the name of the item LNA-2, and LNA-1 is stated" in questions(one_table(path))
    mapping = f"""format = 1
[[table]]
layout = "{table.layout_key}"
[table.stated]
item = "LNA-1"
"""
    other = taken(one_table(path, mapping=mapping))
    assert other.columns is not None and other.columns.items.labels == ("LNA-1",)
    assert "must say which item" in questions(
        one_table(book(tmp_path / "b.xlsx", rows, sheet="bench"), stated={"block": "LNA"})
    )
