"""Limits and verdicts that a sheet states: which side, in which unit, of which values. All invented."""

from __future__ import annotations

from pathlib import Path

import pytest

from specflow.importers.measured.source_says import side_of
from specflow.model.source_statement import StatedColumn
from tests.importers.measured.make import book, one_table, taken


def stated(path: Path, headers: list[str], row: list[object]) -> dict[str, StatedColumn]:
    table = taken(one_table(book(path / "a.xlsx", [headers, row])))
    assert table.document is not None and table.columns is not None
    assert {one.name for one in table.document.stated} <= set(table.columns.extra)
    return {one.name: one for one in table.document.stated}


@pytest.mark.parametrize(
    ("header", "side"),
    [
        ("LSL (dB)", "lower"),
        ("Upper limit", "upper"),
        ("Gain min. limit", "lower"),
        ("Limit (dBm)", ""),
        ("Min/max limit", ""),
    ],
)
def test_the_side_is_said_by_the_header(header: str, side: str) -> None:
    assert side_of(header) == side


def test_of_one_value_column_all_are(tmp_path: Path) -> None:
    found = stated(
        tmp_path,
        ["f (GHz)", "Gain (dB)", "Lower limit (dB)", "USL", "Result", "Margin (dB)"],
        [28, 20, 19, 22, "PASS", 1],
    )
    assert found["Lower limit"] == StatedColumn(
        name="Lower limit", kind="limit", side="lower", unit="dB", of="Gain"
    )
    assert (found["USL"].unit, found["USL"].side) == ("dB", "upper")  # the unit of the values
    assert found["Result"].kind == "verdict" and "Margin" not in found


def test_of_several_they_are_those_named_or_beside(tmp_path: Path) -> None:
    found = stated(
        tmp_path,
        ["f (GHz)", "Gain (dB)", "Gain limit (dB)", "Output power (W)", "Limit", "Noise figure limit (dB)"],
        [28, 20, 19, 2.0, 1.5, 3],
    )
    assert (found["Gain limit"].of, found["Limit"].of, found["Limit"].unit) == ("Gain", "Output power", "W")
    assert found["Noise figure limit"].of == ""  # of a quantity that is not here


def test_another_verdict_is_another_content(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Gain (dB)", "P/F"], [28, 20, "P"]]
    first = taken(one_table(book(tmp_path / "a.xlsx", rows))).document
    rows[1][2] = "F"
    second = taken(one_table(book(tmp_path / "b.xlsx", rows))).document
    assert first is not None and second is not None and first.digest != second.digest
