"""JSON Lines: one record a line; the line is the row, the keys are headers above the first line."""

from __future__ import annotations

import json
import tempfile
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.importers.readers import Grid, OddKind, open_grids
from tests.importers.readers.workbooks import refused


def grid_of(path: Path, *lines: str) -> Grid:
    path.write_text("\n".join(lines) + "\n", encoding="utf-8")
    return open_grids(path)[0]


def test_keys_are_headers_and_lines_are_rows(tmp_path: Path) -> None:
    grid = grid_of(
        tmp_path / "a.jsonl",
        '{"item": "T001", "at": {"frequency (GHz)": 27.5, "temp": null}, "gain (dB)": 20}',
        "",
        '{"gain (dB)": "20.5", "item": "T002", "passed": true}',
    )
    assert grid.first_row == 0
    assert grid.rows == [
        ["item", "at.frequency (GHz)", "at.temp", "gain (dB)", "passed"],
        ["T001", 27.5, "", 20.0, ""],
        [],
        ["T002", "", "", "20.5", True],
    ]
    assert grid.value(3, 4) == "20.5"
    assert [odd.kind for odd in grid.oddities(3, 4)] == [OddKind.TEXT_NUMBER]
    assert grid.notes == ("'gain (dB)' holds numbers and texts",)


def test_a_unit_that_all_lines_agree_in_goes_into_the_header(tmp_path: Path) -> None:
    lines = [json.dumps({"gain": {"value": 20.5 + row, "unit": "dB", "k": 2}}) for row in range(3)]
    grid = grid_of(tmp_path / "a.jsonl", *lines)
    assert list(grid.rows[:2]) == [["gain (dB)", "gain.k"], [20.5, 2.0]]


@pytest.mark.parametrize(
    ("other", "cells"),
    [
        ('{"value": 3, "unit": "dBm"}', [3.0, "dBm"]),
        ('{"value": 3}', [3.0, ""]),
        ('{"value": 3, "unit": null}', [3.0, ""]),
        ('{"unit": "dBm"}', ["", "dBm"]),
    ],
)
def test_units_of_one_quantity_that_differ_are_a_column(
    tmp_path: Path, other: str, cells: list[object]
) -> None:
    lines = ('{"what": "P", "result": {"value": 1.25, "unit": "W"}}', f'{{"what": "Q", "result": {other}}}')
    grid = grid_of(tmp_path / "a.ndjson", *lines)
    assert grid.rows == [["what", "result", "unit"], ["P", 1.25, "W"], ["Q", *cells]]


def test_units_of_several_quantities_that_differ_stay_in_their_cells(tmp_path: Path) -> None:
    lines = (
        '{"P": {"value": 1.25, "unit": "W"}, "G": {"value": 20, "units": "dB"}}',
        '{"P": {"value": 31, "unit": "dBm"}, "G": {"value": "OL"}}',
    )
    grid = grid_of(tmp_path / "a.ndjson", *lines)
    assert grid.rows == [["P", "G"], ["1.25 W", "20.0 dB"], ["31.0 dBm", "OL"]]


def test_a_value_in_some_lines_and_a_quantity_in_others_are_two_columns(tmp_path: Path) -> None:
    grid = grid_of(tmp_path / "a.ndjson", '{"P": {"value": 1.25, "unit": "W"}}', '{"P": 3}')
    assert grid.rows == [["P.value", "P.unit", "P"], [1.25, "W", ""], ["", "", 3.0]]
    assert grid.notes == ("'P' is a value in some lines and an object in others",)


def test_numbers_are_exact(tmp_path: Path) -> None:
    numbers = [
        "0.1",
        "1e-30",
        "30000000.000000000000000000001",
        "-0.0",
        "123456789012345678901",
        "9007199254740992",
    ]
    grid = grid_of(tmp_path / "a.jsonl", *(f'{{"x": {number}}}' for number in numbers))
    assert [str(row[0]) for row in grid.rows[1:]] == [
        "0.1", "1e-30", "30000000.0", "-0.0", "123456789012345678901", "9007199254740992.0"
    ]  # fmt: skip


def test_what_cannot_be_a_value_is_an_error_in_its_place(tmp_path: Path) -> None:
    grid = grid_of(
        tmp_path / "a.jsonl",
        '{"item": "A", "gain": 1}',
        '{"item": "B", "gain": 2, "gain": 3}',
        '{"item": "C", "gain": 4',
        '{"item": "D", "gain": NaN}',
        '{"item": "E", "gain": -Infinity}',
        '{"item": "F", "gain": [1, {"a": 2}]}',
        '{"item": "G", "gain": {"value": 5}}',
        "[1, 2]",
        '{"item": "H", "gain": 1e999}',
    )
    numbers, bad = grid.column_floats(2, 1, 10)
    assert numbers[0] == 1.0
    assert bad == [2, 3, 4, 5, 6, 8, 9]
    assert [odd.detail if (odd := grid.odd.at(row, 2)) else "" for row in (2, 3, 4, 8)] == [
        "the key stands twice in this line",
        "broken line: Expecting ',' delimiter: line 1 column 24 (char 23)",
        "",
        "broken line: it is a list, not an object",
    ]
    assert (grid.value(4, 2), grid.value(5, 2), grid.value(6, 2)) == ("NaN", "-Infinity", '[1.0, {"a": 2.0}]')
    assert grid.notes == (
        "lines 3, 8: no JSON object",
        "line 2: two values of 'gain'",
        "line 6: a list, which is kept as text",
        "'gain' is a value in some lines and an object in others",
        "'gain' holds numbers and texts",
    )


def test_keys_that_become_one_by_flattening_are_two_values(tmp_path: Path) -> None:
    grid = grid_of(tmp_path / "a.jsonl", '{"a.b": 1, "a": {"b": 2}}', '{"a.b": 3}')
    assert grid.odd.at(1, 1) is not None
    assert grid.rows == [["a.b"], [""], [3.0]]


def test_of_an_object_that_stands_twice_nothing_is_taken(tmp_path: Path) -> None:
    twice = '{"f": {"value": 1, "at": 2}, "f": {"value": 3}}'
    grid = grid_of(tmp_path / "a.jsonl", '{"f": {"value": 5, "at": 6}}', twice)
    assert grid.rows == [["f.value", "f.at"], [5.0, 6.0], ["", ""]]
    assert grid.column_floats(1, 1, 3)[1] == grid.column_floats(2, 1, 3)[1] == [2]


@pytest.mark.parametrize(
    ("text", "what"),
    [
        ('[{"a": 1},\n{"a": 2}]\n', "2 of 2 lines are no JSON object"),
        ('{\n"a": 1\n}\n', "3 of 3 lines"),
        ("a,b\n1,2\n", "2 of 2 lines"),
        ("[" * 100_000, "1 of 1 lines"),
        ('{"a": ' * 50_000, "1 of 1 lines"),
        ('{"a": ' + "9" * 5000 + "}", "1 of 1 lines"),
        ("\n", "lines are no JSON object"),
        ('{"a": "\\ud800", "b": 1}\n', "surrogates not"),
        ("{" + ",".join(f'"k{key}": 1' for key in range(3000)) + "}\n", "3,000 keys"),
    ],
)
def test_what_is_not_one_object_a_line_is_refused(tmp_path: Path, text: str, what: str) -> None:
    (tmp_path / "a.jsonl").write_text(text)
    assert what in refused(lambda: open_grids(tmp_path / "a.jsonl"))


keys = st.sampled_from(["f", "gain", "x y"])
scalars = st.one_of(
    st.none(), st.booleans(), st.integers(-(2**40), 2**40), st.floats(allow_nan=False), st.text(max_size=4)
)


@given(st.lists(st.dictionaries(keys, scalars, min_size=1), min_size=1, max_size=6))
def test_every_value_is_that_of_the_json_module(records: list[dict[str, object]]) -> None:
    with tempfile.TemporaryDirectory() as folder:
        grid = grid_of(Path(folder) / "a.jsonl", *map(json.dumps, records))
    headers = list(grid.rows[0])
    for row, record in enumerate(records, start=1):
        for key, value in record.items():
            found = grid.value(row, headers.index(key) + 1)
            expected = "" if value is None else value
            if value in (float("inf"), float("-inf")) and not isinstance(value, bool):
                expected = json.dumps(value)
            assert (found, isinstance(found, bool)) == (expected, isinstance(expected, bool))
