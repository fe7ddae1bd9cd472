"""A mapping as a way in for any table: where it stands, how it lies, which cells state its conditions."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from specflow.errors import FileError
from specflow.importers.measured.mapping import read_mappings, write_mapping
from specflow.model.evidence import TableMapping
from tests.importers.measured.make import book, low, measure, one_table, questions, taken, text

ROWS: list[list[Any]] = [
    ["Results of the second run", None, None, None, None],
    [None, "Frequency", "28 GHz", None, None],
    [None, 27.5, 20.1, "ok", None],
    [None, 28.0, 20.4, "ok", None],
    [None, "TOTALS", 40.5, None, None],
]
COLUMNS = """
[[table.column]]
column = "B"
dimension = "frequency"
unit = "GHz"
[[table.column]]
column = "C"
parameter = "gain"
unit = "dB"
"""


def head(words: str) -> str:
    return f"format = 1\n[[table]]\n{words}\n"


def test_an_area_without_headers_goes_by_letters(tmp_path: Path) -> None:
    path = book(tmp_path / "a.xlsx", ROWS)
    mapping = head('area = "B3:D4"\nheader_rows = 0\nalone = true') + COLUMNS
    [table] = measure(path, mapping=mapping).tables
    assert table.columns is not None and low(taken(table), "column #3") == [20.1, 20.4]
    assert (table.place, list(table.columns.source_rows)) == ("B3:D4", [3, 4])
    assert list(table.columns.conditions.numeric["frequency"]) == [27.5, 28.0]


def test_an_area_to_the_end_of_the_sheet_stops_at_words(tmp_path: Path) -> None:
    path = book(tmp_path / "a.xlsx", ROWS)
    mapping = (
        head('area = "B3:D"\nheader_rows = 0\nalone = true\nstop_at = "totals"\nskip_rows = [3]') + COLUMNS
    )
    [table] = measure(path, mapping=mapping).tables
    assert low(taken(table), "column #3") == [20.4]
    assert any("not read, as the mapping says: rows 3" in note for note in table.notes)


def test_without_alone_the_rest_of_the_sheet_is_still_looked_at(tmp_path: Path) -> None:
    rows = [*ROWS, [], ["f (GHz)", "NF (dB)"], [27.5, 1.5]]
    mapping = head('area = "B3:C4"\nheader_rows = 0') + COLUMNS
    first, second = measure(book(tmp_path / "a.xlsx", rows), mapping=mapping).tables
    assert (first.values, second.place, second.values) == (2, "A7:B8", 1)


def test_an_area_of_another_layout_is_not_read_by_a_mapping_that_names_its_own(tmp_path: Path) -> None:
    path = book(tmp_path / "a.xlsx", [["f (GHz)", "Gain (dB)"], [27.5, 20]])
    measured = measure(path, mapping=head('layout = "L-0000000000000000"\narea = "A1:B2"\nalone = true'))
    assert [finding.rule for finding in measured.findings] == ["attach-layout-not-met"]
    assert measured.tables[0].mapping_from == ""


def test_a_stored_mapping_of_bare_numbers_is_not_taken_by_itself(tmp_path: Path) -> None:
    """Two columns of numbers look like any other two: nothing says that they are of the kind that was mapped."""
    path = text(tmp_path / "a.csv", "27.5,20.1\n28,20.2\n29,20.3\n")
    by_hand = COLUMNS.replace('"B"', '"A"').replace('"C"', '"B"')
    [table] = measure(path, mapping=head("") + by_hand).tables
    assert taken(table).values == 3
    kept = TableMapping(id="M-1", layout_key=table.layout_key, toml=table.mapping)
    other = text(tmp_path / "b.csv", "1,200\n2,300\n3,400\n")
    assert "column A" in questions(one_table(other, kept))


@pytest.mark.parametrize(
    ("words", "value", "unit"),
    [
        ("cell C1", 28.0, "GHz"),
        ("cell C2 in GHz", 28.5, "GHz"),
        ("cell C3", 29.0, "GHz"),
        ("cell E3", 30.0, "GHz"),
        ("above", 28.25, "GHz"),
    ],
)
def test_a_condition_from_a_cell(tmp_path: Path, words: str, value: float, unit: str) -> None:
    rows = [
        ["Run 2", None, "Results at 28 GHz, SN 7"],
        ["plain", None, 28.5],
        ["f", "is", 29, "GHz", 30, "GHz"],
        ["taken at 28.25 GHz"],
        ["Baseplate (°C)", "Gain (dB)"],
        [25, 20],
    ]
    mapping = head(f'[table.stated]\nfrequency = "{words}"')
    [table] = measure(book(tmp_path / "a.xlsx", rows), mapping=mapping).tables
    assert table.columns is not None and table.document is not None, table.questions
    assert list(table.columns.conditions.numeric["frequency"]) == [value]
    assert table.columns.conditions.units["frequency"] == unit
    [stated] = [one for one in table.document.conditions if one.dimension == "frequency"]
    assert stated.stated_by.startswith("stated in ")


def test_a_cell_that_says_nothing_is_asked_about(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Gain (dB)"], [27.5, 20]]
    mapping = head('[table.stated]\nsupply_voltage = "cell H9"')
    assert "supply_voltage from 'cell H9'; nothing is written there" in questions(
        one_table(book(tmp_path / "a.xlsx", rows), mapping=mapping)
    )


def test_one_layout_with_two_meanings_is_told_apart_by_what_stands_above(tmp_path: Path) -> None:
    rows = [
        ["Run:", "A"],
        ["f (GHz)", "Trace"],
        [27.5, 20],
        [],
        ["Run:", "B"],
        ["f (GHz)", "Trace"],
        [27.5, 1.5],
    ]
    column = '\n[[table.column]]\nheader = "Trace"\nparameter = "{}"\nunit = "dB"\n'
    mapping = head('when = { Run = "A" }') + column.format("gain")
    mapping += '[[table]]\nwhen = { Run = "B" }\n' + column.format("noise_figure")
    first = measure(book(tmp_path / "a.xlsx", rows), mapping=mapping)
    said = [
        table.document.values[0].quantity.parameter for table in first.tables if table.document is not None
    ]
    assert said == ["gain", "noise_figure"]
    keys = {table.layout_key for table in first.tables}
    assert len(keys) == 2
    kept = [
        TableMapping(id=f"M-{n}", layout_key=t.layout_key, toml=t.mapping) for n, t in enumerate(first.tables)
    ]
    again = measure(book(tmp_path / "b.xlsx", [rows[4], *rows[5:]]), *kept)
    assert again.tables[0].document is not None
    assert again.tables[0].document.values[0].quantity.parameter == "noise_figure"


def test_long_form_by_a_mapping(tmp_path: Path) -> None:
    rows = [["Symbol", "Figure", "in"], ["G", 20.5, "dB"], ["Tn", 120, "K"], ["x", 3, "m"]]
    mapping = head(
        '[table.long]\nparameter = "Symbol"\nvalue = "Figure"\nunit = "in"\nonly = ["G", "Tn"]\n'
        'parameters = { G = "gain", Tn = "noise_temperature" }'
    )
    gain, noise = measure(book(tmp_path / "a.xlsx", rows), mapping=mapping).tables
    assert (low(taken(gain), "G"), low(taken(noise), "Tn")) == ([20.5], [120])
    assert any(note == "x: 1 rows, not read, as the mapping says" for note in gain.notes)
    assert noise.document is not None and noise.document.values[0].unit_from.startswith(
        "the column of units, C"
    )


def test_a_matrix_of_bare_numbers(tmp_path: Path) -> None:
    path = text(tmp_path / "a.csv", "10,9,8\n7,6,5\n")
    mapping = head(
        'area = "A1:C2"\nheader_rows = 0\nmethod = "analysis"\n[table.matrix]\nparameter = "antenna_gain"\n'
        'unit = "dBi"\nrows = { dimension = "theta", start = 0, step = 30, unit = "deg" }\n'
        'columns = { dimension = "phi", start = -90, step = 90, unit = "deg" }'
    )
    [table] = measure(path, mapping=mapping).tables
    assert taken(table).columns is not None and table.columns is not None
    numeric = table.columns.conditions.numeric
    said = set(zip(numeric["theta"], numeric["phi"], low(table, "antenna_gain"), strict=True))
    assert said == {(0, -90, 10), (0, 0, 9), (0, 90, 8), (30, -90, 7), (30, 0, 6), (30, 90, 5)}
    wrong = mapping.replace('step = 30, unit = "deg"', 'step = 30, unit = "GHz"')
    assert "theta in GHz" in questions(one_table(path, mapping=wrong))


@pytest.mark.parametrize(
    ("words", "message"),
    [
        ('area = "K6-L10"', "no area of a sheet"),
        ('area = "L10:K6"', "no area of a sheet"),
        ("header_rows = 0", "header_rows = 0 without an area"),
        ("header_rows = -1", "header_rows = -1"),
        ('skip_rows = ["a"]', "skip_rows"),
        ('others = "remark"', "others = 'remark'"),
        ("when = { Format = 1 }", "when"),
        ('[table.long]\nparameter = "A"', "value is missing"),
        ('[table.matrix]\nparameter = "gain"\nunit = "dB"', "dimension is missing"),
        (
            '[table.matrix]\nparameter = "gain"\nunit = "dB"\nrows = { dimension = "theta", start = 0, step = 0 }\n'
            'columns = { dimension = "phi", start = 0, step = 1 }',
            "a step of 0",
        ),
    ],
)
def test_a_mapping_is_read_strictly(words: str, message: str) -> None:
    with pytest.raises(FileError) as error:
        read_mappings(head(words), "m.toml")
    assert message in str(error.value)


def test_all_words_of_a_mapping_come_back() -> None:
    toml = head(
        'sheet = "data"\narea = "A1:C9"\nalone = true\nturned = true\nheader_rows = 0\nskip_rows = [4, 5]\n'
        'stop_at = "END"\nothers = "not read"\nwhen = { Format = "Phase" }\n[table.long]\nparameter = "A"\n'
        'value = "B"\nonly = ["x"]\n[[table.pivot]]\nheader = "{frequency}"\nparameter = "gain"\n'
        'unit = "dB"\ncolumns = "C:D"\n'
        '[[table.pivot]]\nheader = "{item}"\nparameter = "gain"\nunit = "dB"'
    )
    [mapping] = read_mappings(toml, "m.toml")
    assert read_mappings("format = 1\n" + write_mapping(mapping), "m.toml") == (mapping,)
