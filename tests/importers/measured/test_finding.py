"""Tables of a sheet are found however they lie; what has two readings is asked about with both of them."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
from openpyxl.worksheet.worksheet import Worksheet

from specflow.importers.measurements import MeasuredTable
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

GAIN = [["f (GHz)", "Gain (dB)"], [27.5, 20], [28, 20.5]]
BASEPLATE = SAID | {"temperature": "baseplate"}


def conditions(table: MeasuredTable) -> dict[str, list[float]]:
    assert table.columns is not None, table.questions
    return {name: list(values) for name, values in table.columns.conditions.numeric.items()}


def values(table: MeasuredTable) -> list[float]:
    assert table.columns is not None, table.questions
    return [number for one in table.columns.values.values() for number in one.low]


def test_two_tables_beside_each_other_that_may_be_one_are_asked_about(tmp_path: Path) -> None:
    rows = [
        ["f (GHz)", "Gain (dB)", None, "Baseplate (°C)", "NF (dB)"],
        [27.5, 20, None, -20, 1.5],
        [28, 21, None, 25, 1.6],
    ]
    path = book(tmp_path / "a.xlsx", rows)
    asked = questions(one_table(path))
    assert "A1:B3 and D1:E3 may be two tables" in asked and 'area = "A1:E3"' in asked
    areas = 'format = 1\n[[table]]\narea = "A1:B3"\n[[table]]\narea = "D1:E3"\nalone = true\n'
    assert [table.values for table in measure(path, mapping=areas).tables] == [2, 2]
    whole = 'format = 1\n[[table]]\narea = "A1:E3"\nalone = true\n'
    assert [table.values for table in measure(path, mapping=whole).tables] == [4]


def test_a_blank_column_inside_a_table_parts_nothing(tmp_path: Path) -> None:
    rows = [["f (GHz)", None, "Gain (dB)", None, "Limit (dB)"], [27.5, None, 20, None, 18]]
    assert taken(one_table(book(tmp_path / "a.xlsx", rows))).place == "A1:E2"


def test_tables_of_other_rows_beside_each_other(tmp_path: Path) -> None:
    rows = [
        ["f (GHz)", "Gain (dB)"],
        [27.5, 20, None, "f (GHz)", "NF (dB)"],
        [28, 21, None, 28, 1.6],
        [None, None, None, 29, 1.7],
    ]
    first, second = measure(book(tmp_path / "a.xlsx", rows)).tables
    assert (taken(first).place, taken(second).place) == ("A1:B3", "D2:E4")


def test_five_tables_with_the_frequency_over_each(tmp_path: Path) -> None:
    frequencies = [27.5, 28, 28.5, 29, 30]
    head = [cell for one in frequencies for cell in (f"{one} GHz", None, None)]
    names = [cell for _ in frequencies for cell in ("Baseplate (°C)", "Gain (dB)", None)]
    body = [[cell for one in frequencies for cell in (t, one - t / 100, None)] for t in (-20, 25, 70)]
    tables = measure(book(tmp_path / "a.xlsx", [head, names, *body])).tables
    assert [set(conditions(taken(table))["frequency"]) for table in tables] == [{one} for one in frequencies]
    assert [table.place for table in tables][1] == "D2:E5"


def test_titles_whose_meaning_is_open_are_asked_about(tmp_path: Path) -> None:
    rows = [
        ["after 20 min", None, None, "after 40 min"],
        ["f (GHz)", "Gain (dB)", None, "f (GHz)", "Gain (dB)"],
    ]
    rows += [[27.5, 20, None, 27.5, 19]]
    rows[0] = ["run at 5 V", None, None, "run at 6 V"]
    first, second = measure(book(tmp_path / "a.xlsx", rows)).tables
    assert "'run at 5 V' stands over one of 2 tables" in questions(first)
    assert "'run at 6 V' stands over one of 2 tables" in questions(second)


@pytest.mark.parametrize(
    ("rows", "found"),
    [
        ([["Gain (dB)"], ["f (GHz) \\ Baseplate (°C)", -20, 70], [27.5, 20, 18], [28, 21, 19]], {-20, 70}),
        (
            [
                [None, "Gain (dB)"],
                [None, "Baseplate (°C)"],
                ["f (GHz)", -20, 70],
                [27.5, 20, 18],
                [28, 21, 19],
            ],
            {-20, 70},
        ),
        ([["f (GHz)", "Gain (dB)"], [None, "-20 °C", "70 °C"], [27.5, 20, 18], [28, 21, 19]], {-20, 70}),
        ([["f (GHz)", "Gain @ -20 °C (dB)", "Gain @ 70 °C (dB)"], [27.5, 20, 18], [28, 21, 19]], {-20, 70}),
    ],
)
def test_a_condition_across_the_columns(tmp_path: Path, rows: list[list[Any]], found: set[float]) -> None:
    table = taken(one_table(book(tmp_path / "a.xlsx", rows), stated=BASEPLATE))
    assert set(conditions(table)["temperature_baseplate"]) == found
    assert sorted(values(table)) == [18, 19, 20, 21]


def test_items_in_the_rows_and_a_condition_across_the_columns(tmp_path: Path) -> None:
    rows = [["Gain (dB)"], ["Item \\ Frequency (GHz)", 27.5, 30], ["LNA-1", 20, 19], ["LNA-2", 21, 20]]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows), stated={"block": "LNA"}))
    assert table.columns is not None and conditions(table) == {"frequency": [27.5, 27.5, 30, 30]}
    assert [table.columns.items.word(row) for row in range(4)] == ["LNA-1", "LNA-2"] * 2
    assert values(table) == [20, 21, 19, 20]


def test_words_below_the_headers_are_no_sum_of_the_readings(tmp_path: Path) -> None:
    rows = [
        ["f", "Gain", "NF"],
        ["[GHz]", "[dB]", "[dB]"],
        [None, "min", "max"],
        [27.5, 20, 1.5],
        [28, 21, 1.6],
    ]
    assert list(rejected(one_table(book(tmp_path / "a.xlsx", rows)))) == ["A3"]


def test_numbers_as_headers_that_nothing_names_are_asked_about_once(tmp_path: Path) -> None:
    rows = [["f (GHz)", -20, 25, 70], [27.5, 20, 19, 18], [28, 21, 20, 19]]
    table = one_table(book(tmp_path / "a.xlsx", rows))
    assert len(table.questions) == 1 and "columns B to D have numbers as headers" in questions(table)
    mapping = (
        '[[table]]\n[table.pivot]\nheader = "{temperature_baseplate}"\ncolumns = "B:D"\nparameter = "gain"\n'
        'unit = "dB"\nunits = { temperature_baseplate = "°C" }\n'
    )
    mapped = taken(one_table(book(tmp_path / "a.xlsx", rows), mapping=mapping))
    assert set(conditions(mapped)["temperature_baseplate"]) == {-20, 25, 70}


def test_a_limit_directly_below_the_headers_is_no_header(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Gain (dB)", "NF (dB)"], ["Limit", 18, 2], [27.5, 20, 1.5], [28, 21, 1.6]]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows)))
    assert low(table, "Gain") == [20, 21] and list(rejected(table)) == ["A2"]


def test_groups_under_a_temperature(tmp_path: Path) -> None:
    rows = [[None, "+25 °C", None, "+85 °C"], ["f (GHz)", "Gain (dB)", "NF (dB)", "Gain (dB)", "NF (dB)"]]
    rows += [[27.5, 20, 1.5, 18, 2.5]]

    def merge(sheet: Worksheet) -> None:
        sheet.merge_cells("B1:C1")
        sheet.merge_cells("D1:E1")

    cold, hot = measure(book(tmp_path / "a.xlsx", rows, change=merge), stated=BASEPLATE).tables
    assert (conditions(taken(cold))["temperature_baseplate"], values(cold)) == ([25], [20, 1.5])
    assert (conditions(taken(hot))["temperature_baseplate"], values(hot)) == ([85], [18, 2.5])


def test_single_results_below_what_is_said_of_them(tmp_path: Path) -> None:
    rows = [
        ["DUT", "LNA-2"],
        ["Frequency", "28 GHz"],
        [],
        ["Gain", 20.5, "dB"],
        ["NF", 1.6, "dB"],
        ["OIP3", 31.2, "dBm"],
    ]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows), stated={"block": "LNA"}))
    assert values(table) == [20.5, 1.6, 31.2] and conditions(table) == {"frequency": [28]}
    assert table.columns is not None and table.columns.items.labels == ("LNA-2",)
    assert table.document is not None
    assert [table.document.cell(int(table.columns.source_rows[0]), one.column) for one in table.document.values] == [
        (4, 2), (5, 2), (6, 2)
    ]  # fmt: skip


def test_a_turned_table_whose_names_are_open_is_asked_about(tmp_path: Path) -> None:
    rows = [["Parameter", "27.5 GHz", "28 GHz"], ["Gain (dB)", 20, 21], ["NF (dB)", 1.5, 1.6]]
    assert "row 1 says 27.5 GHz, 28 GHz over the readings" in questions(
        one_table(book(tmp_path / "a.xlsx", rows))
    )
    rows[0] = ["Parameter", "SN 1", "SN 2"]
    table = taken(one_table(book(tmp_path / "b.xlsx", rows), stated={"block": "LNA"}))
    assert table.columns is not None and table.columns.items.labels == ("SN 1", "SN 2")


def test_a_condition_among_quantities_in_rows(tmp_path: Path) -> None:
    rows = [["Parameter", "Value", "Unit"], ["Frequency", 28, "GHz"], ["Gain", 20, "dB"], ["NF", 1.5, "dB"]]
    tables = measure(book(tmp_path / "a.xlsx", rows)).tables
    assert [conditions(taken(table)) for table in tables] == [{"frequency": [28]}] * 2
    rows[1], rows[2] = rows[2], rows[1]
    asked = measure(book(tmp_path / "b.xlsx", rows)).tables
    assert all("'Frequency' stands among the quantities (B3)" in questions(table) for table in asked)


def test_what_is_said_beside_a_table(tmp_path: Path) -> None:
    rows = [
        [*GAIN[0], None, "DUT", "LNA-2"],
        [*GAIN[1], None, "RBW", "1 MHz"],
        [*GAIN[2], None, "Date", "2026-03-02"],
    ]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows), stated={"block": "LNA"}))
    assert table.columns is not None and table.columns.items.labels == ("LNA-2",)
    assert table.document is not None and str(table.document.performed_on) == "2026-03-02"


def test_a_regrouped_copy_counts_once(tmp_path: Path) -> None:
    rows = [
        *GAIN,
        [],
        ["Sorted by gain"],
        GAIN[0],
        GAIN[2],
        GAIN[1],
        [],
        ["With noise"],
        [*GAIN[0], "NF (dB)"],
        [28, 20.5, 1.5],
    ]
    first, copy, third = measure(book(tmp_path / "a.xlsx", rows)).tables
    assert (first.values, copy.values, copy.document, third.values) == (2, 0, None, 1)
    assert any(
        "2 values say what data!A1:B3 says" in note and "not taken twice" in note for note in copy.notes
    )


def _trace(number: int) -> str:
    body = "".join(f"{-80 + number + step / 10},{1e6 * (step + 1):.0f}\n" for step in range(12))
    return f"[Trace]\nTrace {number},,dBm\nNumberPoints,12\nXStart,1000000,Hz\nXStop,12000000,Hz\n{body}"


def test_traces_without_headers_below_their_settings(tmp_path: Path) -> None:
    path = text(tmp_path / "a.csv", "[Global]\nAzimuth,0,deg\n" + _trace(1) + _trace(2))
    said = SAID | {"column A": "spurious_emission"}
    first, second = measure(path, stated=said).tables
    assert set(conditions(taken(first))) == {
        "frequency"
    }  # the azimuth of another section is none of this trace
    assert (values(first)[0], values(taken(second))[0]) == (-79, -78)
    assert first.document is not None and first.document.values[0].unit == "dBm"
    assert "the settings above" in first.document.values[0].unit_from


def test_an_axis_that_its_settings_do_not_confirm_is_asked_about(tmp_path: Path) -> None:
    path = text(tmp_path / "a.csv", _trace(1).replace("XStop,12000000", "XStop,13000000"))
    assert "column A" in questions(one_table(path)) and "column B" in questions(one_table(path))


def test_headers_in_a_comment_line(tmp_path: Path) -> None:
    body = "".join(f"{27 + step / 10:.1f} {20 + step / 100:.2f}\n" for step in range(8))
    table = taken(one_table(text(tmp_path / "a.txt", "# exported\n# f(GHz) Gain(dB)\n" + body)))
    assert conditions(table)["frequency"][0] == 27 and len(values(table)) == 8


def test_a_serial_with_as_many_words_as_there_are_columns(tmp_path: Path) -> None:
    body = "".join(f"{angle}\t{20 - angle / 10}\t{9 - angle}\n" for angle in range(0, 40, 10))
    content = "DUT: SN 12\n\nAzimuth (deg)\tGain (dBi)\tEIRP (dBm)\n" + body
    table = taken(one_table(text(tmp_path / "a.txt", content), stated={"block": "LNA"}))
    assert table.columns is not None and table.columns.items.labels == ("SN 12",)


def test_a_second_row_fills_the_blanks_of_the_headers(tmp_path: Path) -> None:
    rows = [
        ["Azimuth (deg)", "Gain @ _ GHz (dBi)", "Gain @ _ GHz (dBi)"],
        [None, 27.5, 30],
        [0, 20, 21],
        [5, 19, 20],
    ]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows)))
    assert conditions(table)["frequency"] == [27.5, 27.5, 30, 30] and values(table) == [20, 19, 21, 20]


def test_many_columns_that_nothing_names_make_one_question(tmp_path: Path) -> None:
    body = "\n".join(",".join(str(10 * row + column + 0.5) for column in range(12)) for row in range(6))
    table = one_table(text(tmp_path / "a.csv", body + "\n"))
    assert len(table.questions) == 1 and "6 rows of 12 columns of numbers without headers" in questions(table)
    rows = [["f (GHz)", *(f"X @ {step} °C" for step in (-20, 0, 25, 70))], [27.5, 1, 2, 3, 4]]
    table = one_table(book(tmp_path / "b.xlsx", rows))
    assert "4 columns from B to E are headed 'X @ {temperature} °C'" in questions(table)


@pytest.mark.parametrize(
    "rows",
    [
        [
            ["f (GHz)", "Gain (dB)", None, "Baseplate (°C)", "NF (dB)"],
            [27.5, 20, None, -20, 1.5],
            [28, 21, None, 25, 1.6],
        ],
        [["Parameter", "27.5 GHz", "28 GHz"], ["Gain (dB)", 20, 21], ["NF (dB)", 1.5, 1.6]],
        [["f (GHz)", -20, 25, 70], [27.5, 20, 19, 18], [28, 21, 20, 19]],
    ],
)
def test_a_proposal_that_nobody_edited_answers_no_question(tmp_path: Path, rows: list[list[Any]]) -> None:
    path = book(tmp_path / "a.xlsx", rows)
    first = measure(path)
    assert "# TO SETTLE." in first.proposal
    again = measure(path, mapping=first.proposal)
    assert [table.document for table in again.tables] == [None]
    assert questions(again.tables[0]) == questions(first.tables[0])
