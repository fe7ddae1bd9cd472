"""Tables are found below titles, and end where something else begins."""

from __future__ import annotations

from pathlib import Path

from tests.importers.measured.make import (
    SAID,
    book,
    low,
    measure,
    one_table,
    questions,
    rejected,
    taken,
    text,
)


def test_header_below_title_facts_and_blank_rows(tmp_path: Path) -> None:
    rows = [
        ["Gain of the LNA"],
        ["DUT:", "LNA-1", "Date:", "2026-03-02"],
        [],
        ["f (GHz)", "Gain (dB)"],
        [27.5, 20.1],
        [30, 19.9],
        [],
        ["Note: after warm-up"],
    ]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows), stated={}))
    assert (table.title, table.place, table.rows) == ("Gain of the LNA", "A4:B6", 2)
    assert table.document is not None and table.columns is not None
    assert str(table.document.performed_on) == "2026-03-02"
    assert list(table.columns.source_rows) == [5, 6]
    assert table.document.values[0].column == 2


def test_a_table_away_from_the_corner_keeps_its_addresses(tmp_path: Path) -> None:
    rows = [[], [None, None, "f (GHz)", "Gain (dB)"], [None, None, 27.5, 20.1]]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows)))
    assert table.document is not None and table.columns is not None
    assert (table.document.values[0].column, int(table.columns.source_rows[0])) == (4, 3)


def test_units_row(tmp_path: Path) -> None:
    rows = [["Frequency", "Gain", "Mode"], ["[GHz]", "[dB]", ""], [27.5, 20, "a"]]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows)))
    assert table.document is not None
    assert (table.document.values[0].unit, table.document.values[0].unit_from) == ("dB", "the units row, B2")


def test_header_and_units_row_that_disagree_are_asked_about(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Gain (dB)"], ["GHz", "dBm"], [27.5, 20]]
    assert "the header says dB, the units row dBm" in questions(one_table(book(tmp_path / "a.xlsx", rows)))


def test_a_table_goes_on_after_a_blank_row(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Gain (dB)"], [27.5, 20], [], [28, 21], [None, None], [30, 22]]
    assert low(taken(one_table(book(tmp_path / "a.xlsx", rows))), "Gain") == [20, 21, 22]


def test_tables_below_each_other_with_what_is_said_above_each(tmp_path: Path) -> None:
    rows = [
        ["Date: 2026-03-02"],
        ["DUT: LNA-1"],
        ["Ambient: 23 °C"],
        ["f (GHz)", "Gain (dB)"],
        [27.5, 20],
        [],
        ["DUT: LNA-2"],
        ["f (GHz)", "NF (dB)"],
        [27.5, 1.2],
    ]
    first, second = map(taken, measure(book(tmp_path / "a.xlsx", rows), stated={}).tables)
    assert first.columns is not None and second.columns is not None and second.document is not None
    assert (first.columns.items.word(0), second.columns.items.word(0)) == ("LNA-1", "LNA-2")
    assert second.document.performed_on is not None  # the date is that of the sheet
    assert "temperature_ambient" in first.columns.conditions.numeric
    assert "temperature_ambient" not in second.columns.conditions.numeric  # said of the first table only


def test_a_condition_between_the_rows_is_asked_about(tmp_path: Path) -> None:
    rows = [["Ambient: 23 °C"], ["f (GHz)", "Gain (dB)"], [27.5, 20], [], ["Ambient: 85 °C"], [27.5, 19]]
    assert "'Ambient: 85 °C' stands among the rows" in questions(one_table(book(tmp_path / "a.xlsx", rows)))


def test_repeated_headers_are_stepped_over(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Gain (dB)"], [27.5, 20], ["f (GHz)", "Gain (dB)"], [28, 21]]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows)))
    assert low(table, "Gain") == [20, 21] and "row 3 repeats the headers" in table.notes


def test_numbers_without_a_header_are_asked_about(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Gain (dB)"], [27.5, 20, 7]]
    assert "column C: numbers without a header" in questions(one_table(book(tmp_path / "a.xlsx", rows)))


def test_rows_of_numbers_that_belong_to_no_table_are_an_error(tmp_path: Path) -> None:
    rows = [[27.4, 20], [27.6, 21], [], ["f (GHz)", "Gain (dB)"], [27.5, 20]]
    read = measure(book(tmp_path / "a.xlsx", rows))
    assert low(taken(read.tables[0]), "Gain") == [20]
    assert [finding.severity for finding in read.findings] == ["error"]
    assert "2 rows of numbers belong to no table, the first is row 1" in read.findings[0].message


def test_a_summary_below_a_blank_row_is_rejected_and_signatures_are_not(tmp_path: Path) -> None:
    rows = [
        ["f (GHz)", "Gain (dB)", "Vdd (V)", "Mode"],
        [27.5, 20, 5, "a"],
        [],
        ["Worst case", 20],
        [],
        ["Checked by", "A. B."],
    ]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows)))
    assert low(table, "Gain") == [20] and set(rejected(table)) == {"A4"}


def test_rows_that_sum_up_are_left_out_and_a_mode_called_max_is_not(tmp_path: Path) -> None:
    rows = [
        ["Mode", "f (GHz)", "Gain (dB)"],
        ["Max", 27.5, 20],
        ["Min", 27.5, 19],
        ["Limit", None, 18],
    ]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows)))
    assert low(table, "Gain") == [20, 19]
    assert set(rejected(table)) == {"A4"} and table.rejected_cells == 1
    rows = [["f (GHz)", "Gain (dB)"], [27.5, 20], [28, 19], ["Mean", 19.5], ["Worst case", 19]]
    table = taken(one_table(book(tmp_path / "b.xlsx", rows)))
    assert low(table, "Gain") == [20, 19] and set(rejected(table)) == {"A5"}
    assert any("left out as sums of the others (Mean): row 4" in note for note in table.notes)
    assert table.document is not None
    left_out = {one.cell: one.reason for one in table.document.left_out}
    assert set(left_out) == {"A4", "A5"} and left_out["A4"].startswith("a summary of the others")


def test_a_mode_of_a_table_without_other_conditions_is_rejected_and_not_passed_over(tmp_path: Path) -> None:
    rows = [["Mode", "Gain (dB)"], ["Low", 20], ["Max", 19]]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows)))
    assert low(table, "Gain") == [20] and set(rejected(table)) == {"A3"}


def test_hidden_rows_are_left_out_unless_asked_for(tmp_path: Path) -> None:
    def hide(sheet: object) -> None:
        sheet.row_dimensions[3].hidden = True  # type: ignore[attr-defined]

    path = book(tmp_path / "a.xlsx", [["f (GHz)", "Gain (dB)"], [27.5, 20], [28, 21]], change=hide)
    table = taken(one_table(path))
    assert low(table, "Gain") == [20] and "hidden" in rejected(table)["A3"]
    assert low(taken(one_table(path, include_hidden_rows=True)), "Gain") == [20, 21]


def test_semicolons_and_decimal_commas(tmp_path: Path) -> None:
    path = text(tmp_path / "a.csv", "# DUT: SN LNA-1\nfreq_ghz;Gain in dB\n27,5;20,1\n28,75;<18,5\n")
    table = taken(one_table(path, stated={}))
    assert table.columns is not None
    gain = table.columns.values["Gain"]
    assert (list(gain.low), list(gain.high)) == ([20.1, float("-inf")], [20.1, 18.5])
    assert (list(table.columns.conditions.numeric["frequency"]), table.columns.items.word(0)) == (
        [27.5, 28.75],
        "LNA-1",
    )
    assert list(table.columns.source_rows) == [3, 4]


def test_a_sheet_without_a_table_is_named(tmp_path: Path) -> None:
    read = measure(book(tmp_path / "a.xlsx", [["only prose"], ["and more"]], sheet="Notes"))
    assert read.tables == () and "sheet Notes: no table" in read.skipped[0]
    assert [finding.rule for finding in read.findings] == ["attach-no-table"]


def test_a_hidden_sheet_is_skipped_unless_named(tmp_path: Path) -> None:
    from openpyxl import load_workbook

    path = book(tmp_path / "a.xlsx", [["f (GHz)", "Gain (dB)"], [27.5, 20]], sheet="Old")
    workbook = load_workbook(path)
    workbook.create_sheet("New")["A1"] = "x"
    workbook["Old"].sheet_state = "hidden"
    workbook.save(path)
    assert measure(path).tables == () and "Old" in measure(path).skipped[0]
    assert len(measure(path, sheets=("old",)).tables) == 1


def test_what_stands_over_a_second_table_of_the_same_headers_is_said_of_that_table(tmp_path: Path) -> None:
    header = ["f (GHz)", "Gain (dB)"]
    for between in (
        [[], ["S/N", "LNA-2"], ["Ambient temperature (°C)", 85]],
        [["S/N", "LNA-2"], ["Ambient temperature (°C)", 85]],
        [["Second run"], ["S/N: LNA-2"], ["Ambient: 85 °C"]],
    ):
        rows = [["S/N", "LNA-1"], ["Ambient", "23 °C"], header, [27.5, 20], [30, 19]]
        rows += [*between, header, [27.5, 18], [30, 17]]
        first, second = map(taken, measure(book(tmp_path / "a.xlsx", rows), stated={}).tables)
        assert first.columns is not None and second.columns is not None
        assert (first.columns.items.word(0), second.columns.items.word(0)) == ("LNA-1", "LNA-2")
        assert (low(first, "Gain"), low(second, "Gain")) == ([20, 19], [18, 17])
        assert list(first.columns.conditions.numeric["temperature_ambient"]) == [23, 23]
        assert list(second.columns.conditions.numeric["temperature_ambient"]) == [85, 85]
        assert first.rejected == second.rejected == ()


def test_a_statement_beside_the_table_ends_it_too(tmp_path: Path) -> None:
    header = [None, None, "f (GHz)", "Gain (dB)"]
    rows = [
        ["DUT", "LNA-1"],
        header,
        [None, None, 27.5, 20],
        ["DUT", "LNA-2"],
        header,
        [None, None, 27.5, 18],
    ]
    first, second = map(taken, measure(book(tmp_path / "a.xlsx", rows), stated={}).tables)
    assert first.columns is not None and second.columns is not None
    assert (first.columns.items.word(0), second.columns.items.word(0)) == ("LNA-1", "LNA-2")


def test_a_key_with_its_value_among_the_rows_is_asked_about(tmp_path: Path) -> None:
    for between in (
        ["S/N", "LNA-2"],
        ["DUT: spare"],
        ["Ambient temperature (°C)", 85],
        ["Temperature", 85, "°C"],
    ):
        rows = [["f (GHz)", "Gain (dB)", "NF (dB)"], [27.5, 20, 1], between, [27.5, 19, 1]]
        table = one_table(book(tmp_path / "a.xlsx", rows))
        assert "stands among the rows and may hold for those below" in questions(table)


def test_items_and_modes_in_the_first_column_are_no_statements(tmp_path: Path) -> None:
    rows = [["DUT", "Gain (dB)"], ["LNA-1", 20], ["LNA-2", 19], ["DUT", "Gain (dB)"], ["LNA-1", 18]]
    assert low(taken(one_table(book(tmp_path / "a.xlsx", rows), stated={})), "Gain") == [20, 19, 18]


def test_a_merged_header_is_read_with_the_row_that_tells_its_columns_apart(tmp_path: Path) -> None:
    rows = [["Frequency", "Gain, dB"], ["GHz", "Min", "Typ", "Max"], [27.5, 19, 20, 21]]
    path = book(tmp_path / "a.xlsx", rows, change=lambda sheet: sheet.merge_cells("B1:D1"))
    asked = questions(one_table(path))
    assert "'min' may mean the smallest of several readings, or a limit" in asked and "D1" in asked
    said = SAID | {"column C": "gain in dB", "column B": "not read", "column D": "not read"}
    table = taken(one_table(path, stated=said))
    assert low(table, "Gain Typ") == [20] and table.rejected == ()


def test_conditions_in_the_second_row_of_a_merged_header_come_in_by_a_pivot(tmp_path: Path) -> None:
    rows = [
        ["Frequency", "Output power at baseplate temperature"],
        ["GHz", "-20 °C", "70 °C"],
        [27.5, 31, 30],
    ]
    path = book(tmp_path / "a.xlsx", rows, change=lambda sheet: sheet.merge_cells("B1:C1"))
    assert "'baseplate temperature -20' is a condition in the header" in questions(one_table(path))
    mapping = """[[table]]
    [table.pivot]
    header = "Output power at baseplate temperature {temperature_baseplate} °C"
    parameter = "output_power"
    unit = "dBm"
    units = { temperature_baseplate = "°C" }
    """
    table = taken(one_table(path, mapping=mapping))
    assert table.columns is not None
    assert list(table.columns.conditions.numeric["temperature_baseplate"]) == [-20, 70]


def test_columns_named_by_items(tmp_path: Path) -> None:
    """Items that the project knows, or serial numbers, in the headers or alone under a quantity."""
    rows = [["f (GHz)", "LNA-1 gain (dB)", "LNA-2 gain (dB)"], [27.5, 20, 19]]
    path = book(tmp_path / "a.xlsx", rows)
    table = taken(one_table(path, stated={"block": "LNA"}))
    assert table.columns is not None
    assert [table.columns.items.word(row) for row in range(2)] == ["LNA-1", "LNA-2"]
    mapping = '[[table]]\n[table.pivot]\nheader = "{item} gain (dB)"\nparameter = "gain"\nunit = "dB"\n'
    mapped = taken(one_table(path, stated={"block": "LNA"}, mapping=mapping))
    assert mapped.columns is not None and mapped.columns.items.labels == table.columns.items.labels
    rows = [["f (GHz)", "SN 7", "SN 8"], [27.5, 20, 19]]
    asked = questions(one_table(book(tmp_path / "b.xlsx", rows), stated={"block": "LNA"}))
    assert "columns B to C are named by items (SN 7, SN 8); of which quantity" in asked
    table = taken(one_table(book(tmp_path / "c.xlsx", [["Gain (dB)"], *rows]), stated={"block": "LNA"}))
    assert table.columns is not None and table.columns.items.labels == ("SN 7", "SN 8")


def test_a_table_on_its_side_keeps_its_true_cells(tmp_path: Path) -> None:
    rows = [
        ["DUT", "LNA-1"],
        [],
        ["f (GHz)", 27.5, 28, 30],
        ["Gain (dB)", 20, 19, "OL"],
        ["NF (dB)", 1, 2, 3],
    ]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows), stated={"block": "LNA"}))
    assert table.document is not None and table.columns is not None
    assert low(table, "NF") == [1, 2, 3] and list(table.columns.conditions.numeric["frequency"]) == [
        27.5,
        28,
        30,
    ]
    assert (table.place, table.document.turned) == ("A3:D5", True)
    assert table.columns.items.labels == ("LNA-1",)
    cells = [
        table.document.cell(int(row), table.document.values[1].column) for row in table.columns.source_rows
    ]
    assert cells == [(5, 2), (5, 3), (5, 4)]
    assert list(rejected(table)) == ["D4"]


def test_a_condition_among_rows_that_begin_with_items_is_asked_about(tmp_path: Path) -> None:
    rows = [["Ambient", "23 °C"], ["DUT", "f (GHz)", "Gain (dB)"], ["LNA-1", 27.5, 20]]
    rows += [["Ambient (°C)", 85], ["LNA-1", 27.5, 18]]
    table = one_table(book(tmp_path / "a.xlsx", rows), stated={})
    assert "'Ambient (°C): 85 °C' stands among the rows" in questions(table)


def test_a_condition_merged_over_some_headers_is_asked_about(tmp_path: Path) -> None:
    for said in ("+85 °C", "LNA-2"):
        rows = [["T_amb", "23 °C"], [None, said, None], ["f (GHz)", "Gain (dB)", "NF (dB)"], [27.5, 20, 1]]
        path = book(tmp_path / "a.xlsx", rows, change=lambda sheet: sheet.merge_cells("B2:C2"))
        assert f"B2: '{said}' is merged over some of the headers" in questions(one_table(path))
