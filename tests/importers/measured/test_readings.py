"""Cells: read rightly, counted as blank with their reason, or rejected with their address."""

from __future__ import annotations

import math
from datetime import datetime
from decimal import Decimal
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.importers.measured.make import book, low, one_table, questions, rejected, taken, text
from tests.importers.readers.workbooks import by_hand


def values_of(path: Path, header: str, cells: list[Any], formats: dict[int, str] | None = None) -> Any:
    def change(sheet: Any) -> None:
        for row, code in (formats or {}).items():
            sheet.cell(row, 2).number_format = code

    rows = [["f (GHz)", header], *([27.5, cell] for cell in cells)]
    return one_table(book(path / "a.xlsx", rows, change=change))


def test_bounds_and_ranges_are_intervals(tmp_path: Path) -> None:
    table = taken(values_of(tmp_path, "Isolation (dB)", [60, "> 60", "<90", "55 .. 58", "−3,5"]))
    assert table.columns is not None
    arrays = table.columns.values["Isolation"]
    assert list(arrays.low) == [60, 60, -math.inf, 55, -3.5]
    assert list(arrays.high) == [60, math.inf, 90, 58, -3.5]
    assert table.values == 5


def test_all_points_share_one_array(tmp_path: Path) -> None:
    table = taken(values_of(tmp_path, "Gain (dB)", [20, 21]))
    assert table.columns is not None
    assert table.columns.values["Gain"].high is table.columns.values["Gain"].low


def test_blanks_are_counted_by_reason(tmp_path: Path) -> None:
    table = taken(values_of(tmp_path, "Gain (dB)", [20, "N/A", "—", "n.m.", None]))
    assert table.values == 1 and table.rejected == ()
    assert table.blank == {
        "not applicable: N/A": 1,
        "nothing written: —": 1,
        "not measured: n.m.": 1,
        "nothing written": 1,
    }


@pytest.mark.parametrize(
    ("cell", "words"),
    [
        ("NaN", "not a number"),
        ("OL", "overload of the instrument"),
        ("OVLD", "overload of the instrument"),
        ("uncal", "invalid at the instrument"),
        ("inf", "not a number"),
        ("abc", "'abc' is not a number"),
        ("20*", "note"),
        ("20 ± 1", "uncertainty"),
        ("~20", "approximate"),
        (True, "truth value"),
        (datetime(2026, 3, 1), "a date or time"),
        ("=1+", "never calculated"),
        ("#DIV/0!", "error"),
        (9.91e37, "placeholder"),
        ("20 dBm", "the cell says dBm, the column dB"),
        ("1,234", "can be read as"),
    ],
)
def test_what_is_no_reading_is_rejected_with_its_address(tmp_path: Path, cell: Any, words: str) -> None:
    table = taken(values_of(tmp_path, "Gain (dB)", [20, cell]))
    assert words in rejected(table)["B3"] and table.rejected_cells == 1
    assert table.values == 1 and table.document is not None
    assert [one.cell for one in table.document.left_out] == ["B3"]


def test_percent_formatted_cells_under_percent_are_what_they_show(tmp_path: Path) -> None:
    table = taken(values_of(tmp_path, "EVM (%)", [0.031, 0.029], {2: "0.0%", 3: "0.0%"}))
    assert low(table, "EVM") == [3.1, 2.9]
    assert "0.031 is shown as 3.1 %" in table.document.values[0].conversions[0]  # type: ignore[union-attr]


def test_plain_numbers_under_percent_are_as_written(tmp_path: Path) -> None:
    assert low(taken(values_of(tmp_path, "EVM (% rms)", [3.1, 2.9])), "EVM") == [3.1, 2.9]


def test_a_percent_sign_in_a_cell_agrees_with_percent_rms(tmp_path: Path) -> None:
    table = taken(values_of(tmp_path, "EVM (% rms)", [3.1, "2.9 %"]))
    assert low(table, "EVM") == [3.1, 2.9] and table.rejected == ()


def test_percent_formats_in_part_of_a_column_are_asked_about(tmp_path: Path) -> None:
    assert "1 cells are in a percent format (from row 2)" in questions(
        values_of(tmp_path, "EVM (%)", [0.031, 2.9], {2: "0.0%"})
    )


def test_a_percent_format_under_another_unit_is_asked_about(tmp_path: Path) -> None:
    assert "percent format under the unit dB" in questions(
        values_of(tmp_path, "Gain (dB)", [0.031, 0.03], {2: "0%", 3: "0%"})
    )


def test_the_unit_may_stand_in_the_number_format(tmp_path: Path) -> None:
    table = taken(values_of(tmp_path, "Pout", [30, 31], {2: '0.0" dBm"', 3: '0.0" dBm"'}))
    value = table.document.values[0]  # type: ignore[union-attr]
    assert (value.unit, value.unit_from) == ("dBm", "the number format of B2")


def test_a_number_format_with_another_unit_rejects_the_cell(tmp_path: Path) -> None:
    table = taken(values_of(tmp_path, "Pout (dBm)", [30, 1], {3: '0.0" dBW"'}))
    assert rejected(table) == {"B3": "the number format says dBW, the column dBm"}


def test_a_scaled_number_format_rejects_the_cell(tmp_path: Path) -> None:
    table = taken(values_of(tmp_path, "Supply current (mA)", [30, 12000], {3: "0,"}))
    assert "another size" in rejected(table)["B3"]


def test_the_unit_may_stand_in_every_cell(tmp_path: Path) -> None:
    table = taken(values_of(tmp_path, "Gain", ["20 dB", "21dB", "<18 dB"]))
    assert table.document is not None and table.document.values[0].unit_from == "the text of the cells"
    assert "the cells carry different units: dB, dBm" in questions(
        values_of(tmp_path, "Pout", ["20 dB", "21 dBm"])
    )


def test_numbers_stored_as_text_are_read_and_reported(tmp_path: Path) -> None:
    table = taken(values_of(tmp_path, "Gain (dB)", [20, "21"]))
    assert low(table, "Gain") == [20, 21] and "column B: 1 numbers stored as text were read" in table.notes


def test_merged_conditions_hold_for_their_rows_and_merged_values_for_none(tmp_path: Path) -> None:
    def merge(sheet: Any) -> None:
        sheet.merge_cells("A2:A3")
        sheet.merge_cells("C2:C3")

    rows = [["T_amb (°C)", "f (GHz)", "Gain (dB)"], [-40, 27.5, 20], [None, 30, None], [85, 30, 18]]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows, change=merge)))
    assert table.columns is not None
    assert list(table.columns.conditions.numeric["temperature_ambient"]) == [-40, -40, 85]
    assert rejected(table)["C2"].startswith("merged cells C2:C3")
    assert np.isnan(low(table, "Gain")[0])


def test_a_blank_condition_is_unstated_and_said(tmp_path: Path) -> None:
    rows = [["T_amb (°C)", "f (GHz)", "Gain (dB)"], [-40, 27.5, 20], [None, 30, 19]]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows)))
    assert table.columns is not None and np.isnan(table.columns.conditions.numeric["temperature_ambient"][1])
    assert any("states no temperature ambient in 1 of 2 rows" in note for note in table.notes)
    filled = 'format = 1\n[[table]]\n[[table.column]]\nheader = "T_amb (°C)"\nfill_down = true\n'
    table = taken(one_table(tmp_path / "a.xlsx", mapping=filled))
    assert table.columns is not None
    assert list(table.columns.conditions.numeric["temperature_ambient"]) == [-40, -40]


def test_a_bound_is_no_condition(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Gain (dB)"], ["<27.5", 20], [28, 21]]
    assert "must be one value" in rejected(taken(one_table(book(tmp_path / "a.xlsx", rows))))["A2"]


def test_many_cells_of_one_kind_are_one_entry_and_all_are_counted(tmp_path: Path) -> None:
    lines = "".join(f"{27 + row / 1000},bad\n" for row in range(500))
    table = one_table(text(tmp_path / "a.csv", "f (GHz),Gain (dB)\n27,20\n" + lines))
    assert [one.cell for one in table.rejected] == ["B3:B502"] and table.rejected_cells == 500


def test_an_uncalculated_formula_and_an_error_cell_of_any_writer(tmp_path: Path) -> None:
    rows = (
        '<row r="1"><c r="A1" t="inlineStr"><is><t>f (GHz)</t></is></c>'
        '<c r="B1" t="inlineStr"><is><t>Gain (dB)</t></is></c></row>'
        '<row r="2"><c r="A2"><v>27.5</v></c><c r="B2"><f>1+1</f></c></row>'
        '<row r="3"><c r="A3"><v>28</v></c><c r="B3" t="e"><v>#REF!</v></c></row>'
        '<row r="4"><c r="A4"><v>29</v></c><c r="B4"><v>20</v></c></row>'
    )
    table = taken(one_table(by_hand(tmp_path / "a.xlsx", rows)))
    reasons = rejected(table)
    assert "never calculated" in reasons["B2"] and "#REF!" in reasons["B3"]


@settings(deadline=None)
@given(st.lists(st.floats(-200, 200).map(lambda value: round(value, 6)), min_size=1, max_size=8))
def test_numbers_come_in_as_they_were_written(tmp_path_factory: Any, numbers: list[float]) -> None:
    path = tmp_path_factory.mktemp("numbers")
    assert low(taken(values_of(path, "Gain (dB)", list(numbers))), "Gain") == numbers


@settings(deadline=None)
@given(st.lists(st.decimals(-200, 200, places=3), min_size=1, max_size=8))
def test_decimal_commas_come_in_rightly_or_not_at_all(tmp_path_factory: Any, numbers: list[Decimal]) -> None:
    """A lone "1,125" may be a thousand: then it is rejected."""
    path = tmp_path_factory.mktemp("numbers")
    lines = "".join(f"{27 + row};{str(value).replace('.', ',')}\n" for row, value in enumerate(numbers))
    table = one_table(text(path / "a.csv", "f (GHz);Gain (dB)\n" + lines))
    reasons = rejected(table)
    for row, (read, written) in enumerate(zip(low(taken(table), "Gain"), numbers, strict=True), start=2):
        assert read == float(written) or (np.isnan(read) and "can be read as" in reasons[f"B{row}"])


@pytest.mark.parametrize(
    "mark", [-999, 999, -999.9, 9999, -2147.48, -2147.483648, 2147483647, 9.9e37, "-999", "-999.9 dB"]
)
def test_a_placeholder_far_from_the_readings_is_rejected_with_its_reason(tmp_path: Path, mark: Any) -> None:
    table = taken(values_of(tmp_path, "Gain (dB)", [20, mark, 19.5, mark]))
    assert table.values == 2 and set(rejected(table)) == {"B3", "B5"}
    assert "instrument" in rejected(table)["B3"]


def test_a_column_of_nothing_but_placeholders_gives_no_values(tmp_path: Path) -> None:
    table = taken(values_of(tmp_path, "Gain (dB)", [-999, -2147.48]))
    assert table.values == 0 and len(rejected(table)) == 2


def test_a_number_of_nines_among_its_like_is_a_reading(tmp_path: Path) -> None:
    for values in ([998, 999, 1001], [600, 9999, 5200], [-1200, -999], [999.99, 1500]):
        assert low(taken(values_of(tmp_path, "Supply current (mA)", values)), "Supply current") == values


def test_placeholders_are_readings_where_the_mapping_keeps_them(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Supply current (mA)"], [999, 999], [27.5, 9.9e37]]
    mapping = "[[table]]\nkeep_placeholders = true\n"
    table = taken(one_table(book(tmp_path / "a.xlsx", rows), mapping=mapping))
    assert low(table, "Supply current")[0] == 999 and list(rejected(table)) == ["B3"]
    assert "keep_placeholders = true" in table.mapping


def test_a_placeholder_among_conditions_and_uncertainties_is_rejected(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Gain (dB)", "U (dB, k=2)"], [27.5, 20, 0.4], [-999, 20, 0.4], [30, 20, 9999]]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows)))
    assert set(rejected(table)) == {"A3", "C4"}


@pytest.mark.parametrize(
    ("rows", "cell"), [("27,5;20,5\n28;1.234\n", "1.234"), ("27.5;20.5\n28;1,234\n", "1,234")]
)
def test_one_group_behind_the_other_mark_is_asked_about(tmp_path: Path, rows: str, cell: str) -> None:
    table = taken(one_table(text(tmp_path / "a.csv", f"f (GHz);Gain (dB)\n{rows}")))
    assert rejected(table) == {
        "B3": f"'{cell}' can be read as 1.234 or as 1234 (write it with its decimals, or without a mark between "
        "thousands)"
    }


def test_one_group_is_of_thousands_where_others_are_so_for_certain(tmp_path: Path) -> None:
    table = taken(one_table(text(tmp_path / "a.csv", "f (GHz);Gain (dB)\n27,5;1.020,5\n28;1.234\n")))
    assert low(table, "Gain") == [1020.5, 1234.0]


def test_a_day_without_the_format_of_a_date_is_rejected_with_what_to_do(tmp_path: Path) -> None:
    rows = [["Date", "f (GHz)", "Gain (dB)"], [46000, 28, 20.1], ["02/03/2026", 29, 20.2]]
    found = rejected(one_table(book(tmp_path / "a.xlsx", rows)))
    assert "give the cells the format of a date" in found["A2"] and "YYYY-MM-DD" in found["A3"]
