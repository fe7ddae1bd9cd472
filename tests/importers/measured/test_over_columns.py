"""A mapping of a grid does not read another quantity, or another condition, that stands over the same columns."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from tests.importers.measured.make import SAID, book, low, measure, one_table, questions, taken

STATED = {**SAID, "temperature": "ambient"}
BELOW: list[list[Any]] = [[28, 20.1, 20.2], [29, 20.3, 20.4], [30, 20.5, 20.6]]
ITEMS = ["f (GHz)", "SN 1", "SN 2"]
NUMBERS = ["f (GHz)", -30, 70]


def grid(title: str, head: list[Any]) -> list[list[Any]]:
    return [[title], head, *BELOW]


def read(tmp_path: Path, rows: list[list[Any]], mapping: str, stated: dict[str, str] = STATED) -> Any:
    (table,) = measure(book(tmp_path / "b.xlsx", rows), mapping=mapping, stated=stated).tables
    return table


def proposed(tmp_path: Path, rows: list[list[Any]], stated: dict[str, str] = STATED) -> str:
    return measure(book(tmp_path / "a.xlsx", rows), stated=stated).proposal


@pytest.mark.parametrize(
    ("first", "second"),
    [
        (grid("S21 (dB)", ITEMS), grid("S11 (dB)", ITEMS)),
        (grid("Output power (dBm)", ITEMS), grid("Output power (dBW)", ITEMS)),
        (grid("S21 (dB)", ITEMS), grid("Results of Monday", ITEMS)),
        (grid("Gain (dB)", ["f (GHz) \\ T (°C)", -30, 70]), grid("NF (dB)", ["f (GHz) \\ T (°C)", -30, 70])),
        (
            grid("Gain (dB)", ["f (GHz) \\ T (°C)", -30, 70]),
            grid("Gain (dB)", ["f (GHz) \\ Supply voltage (V)", -30, 70]),
        ),
        (grid("Gain (dB)", ["f (GHz) \\ T (°C)", -30, 70]), grid("Gain (dB)", ["f (GHz) \\ T (K)", -30, 70])),
    ],
)
def test_a_kept_proposal_asks_where_other_words_stand_over_the_columns(
    tmp_path: Path, first: list[list[Any]], second: list[list[Any]]
) -> None:
    mapping = proposed(tmp_path, first)
    again = taken(read(tmp_path, first, mapping))
    assert next(iter(again.columns.values.values())).low.tolist() == [20.1, 20.3, 20.5, 20.2, 20.4, 20.6]
    assert "the mapping says" in questions(read(tmp_path, second, mapping))


def test_the_same_quantity_under_another_title_is_read(tmp_path: Path) -> None:
    mapping = proposed(tmp_path, grid("S21 (dB)", ITEMS))
    table = taken(read(tmp_path, grid("Gain (dB)", ITEMS), mapping))
    assert low(table, "gain") == [20.1, 20.3, 20.5, 20.2, 20.4, 20.6] and table.title == "Gain (dB)"


def test_a_person_says_for_which_words_a_pivot_is_meant(tmp_path: Path) -> None:
    rows = [["Gain (dB)"], NUMBERS, *BELOW]
    key = one_table(book(tmp_path / "a.xlsx", rows)).layout_key
    mapping = f"""format = 1
[[table]]
layout = "{key}"
[table.pivot]
header = "{{temperature_ambient}}"
columns = "B:C"
parameter = "antenna_gain"
unit = "dBi"
units = {{ temperature_ambient = "°C" }}
"""
    asked = questions(read(tmp_path, rows, mapping))
    assert "B2: the mapping says antenna_gain in dBi; 'Gain (dB)' stands over the columns" in asked
    table = taken(read(tmp_path, rows, mapping + 'over = "Gain (dB)"\n'))
    assert table.document.values[0].quantity.parameter == "antenna_gain"
    other = [["NF (dB)"], NUMBERS, *BELOW]
    assert "'NF (dB)' stands over" in questions(read(tmp_path, other, mapping + 'over = "Gain (dB)"\n'))
