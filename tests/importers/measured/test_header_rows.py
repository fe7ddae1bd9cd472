"""Headers of three rows, with cells merged over those below, and footnote marks; numbers in them that carry a unit."""

from __future__ import annotations

from pathlib import Path

from openpyxl.worksheet.worksheet import Worksheet

from tests.importers.measured.make import book, measure, one_table, questions, taken

ROWS = [
    ["Mode", "DC power (W)"],
    [None, "28 V", None, "24000 mV"],
    [None, "mean", "max ¹⁾", "mean", "max ¹⁾"],
    ["Standby", 10.1, 10.4, 9.1, 9.4],
    ["Transmit ²⁾", 50.1, 50.4, 49.1, 49.4],
    [],
    ["¹⁾ over temperature"],
]


def merge(sheet: Worksheet) -> None:
    for area in ("A1:A3", "B1:E1", "B2:C2", "D2:E2"):
        sheet.merge_cells(area)


def test_three_rows_of_headers_are_one(tmp_path: Path) -> None:
    table = one_table(book(tmp_path / "a.xlsx", ROWS, change=merge))
    assert [one.header for one in table.recognised if one.cell[1:] == "1"] == [
        "Mode", "DC power 28 V mean (W)", "DC power 28 V max ¹⁾ (W)", "DC power 24000 mV mean (W)",
        "DC power 24000 mV max ¹⁾ (W)",
    ]  # fmt: skip
    assert "numbers without a header" not in questions(table) and table.rows == 2 and not table.rejected


def test_a_number_of_a_header_is_brought_from_its_own_unit_to_that_of_the_pivot(tmp_path: Path) -> None:
    path = book(tmp_path / "a.xlsx", ROWS, change=merge)
    pivots = "".join(
        f"""[[table.pivot]]
header = "DC power {{supply_voltage}} {word} (W)"
parameter = "dc_power"
unit = "W"
statistic = "{statistic}"
units = {{ supply_voltage = "V" }}
"""
        for word, statistic in (("mean", "mean"), ("max ¹⁾", "maximum"))
    )
    mapping = f'format = 1\n[[table]]\nlayout = "{one_table(path).layout_key}"\n{pivots}'
    first, second = (taken(table) for table in measure(path, mapping=mapping).tables)
    for table, values in ((first, [10.1, 50.1, 9.1, 49.1]), (second, [10.4, 50.4, 9.4, 49.4])):
        assert table.columns is not None
        assert table.columns.values["dc_power"].low.tolist() == values
        assert table.columns.conditions.numeric["supply_voltage"].tolist() == [28, 28, 24, 24]
    wrong = mapping.replace('{ supply_voltage = "V" }', '{ supply_voltage = "A" }')
    assert any(table.questions for table in measure(path, mapping=wrong).tables)
