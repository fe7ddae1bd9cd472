"""Columns in groups under cells that say what they have in common: each group by its own cell, and by no other."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from openpyxl.worksheet.worksheet import Worksheet

from specflow.importers.measurements import MeasuredTable
from tests.importers.measured.make import SAID, book, low, measure, taken

STATED = {**SAID, "temperature": "ambient"}


def merge(sheet: Worksheet) -> None:
    sheet.merge_cells("B1:C1")
    sheet.merge_cells("D1:E1")


def read(
    path: Path, first: str, second: str, mapping: str = "", corner: str | None = None
) -> list[MeasuredTable]:
    axis = "(dBm)" if corner else "f (GHz)"
    rows: list[list[Any]] = [
        [corner, first, None, second, None],
        [axis, "Gain (dB)", "NF (dB)", "Gain (dB)", "NF (dB)"],
        [28, 20.1, 1.1, 20.2, 1.2],
        [29, 20.3, 1.3, 20.4, 1.4],
    ]
    return list(measure(book(path, rows, change=merge), stated=STATED, mapping=mapping).tables)


def stated(table: MeasuredTable, name: str) -> float:
    assert table.columns is not None
    return float(table.columns.conditions.numeric[name][0])


def test_each_group_has_the_condition_of_its_own_cell(tmp_path: Path) -> None:
    one, other = (taken(table) for table in read(tmp_path / "a.xlsx", "VDD = 3 V", "VDD = 5 V"))
    assert (stated(one, "supply_voltage"), stated(other, "supply_voltage")) == (3, 5)
    assert low(one, "Gain") == [20.1, 20.3] and low(other, "NF") == [1.2, 1.4]
    assert not one.unused and not other.unused


def test_a_kept_mapping_reads_the_groups_of_the_next_file_by_their_cells(tmp_path: Path) -> None:
    rows = tmp_path / "a.xlsx"
    read(rows, "-30 °C", "+25 °C")
    mapping = measure(rows, stated=STATED).proposal
    one, other = (taken(table) for table in read(tmp_path / "b.xlsx", "+25 °C", "+70 °C", mapping))
    assert (stated(one, "temperature_ambient"), stated(other, "temperature_ambient")) == (25, 70)
    assert low(one, "Gain") == [20.1, 20.3] and low(other, "Gain") == [20.2, 20.4]


def test_the_name_of_the_axis_may_stand_over_its_unit(tmp_path: Path) -> None:
    path = tmp_path / "a.xlsx"
    read(path, "-30 °C", "+25 °C", corner="Blocker level")
    tables = [taken(table) for table in measure(path, stated=STATED).tables]
    assert [stated(table, "temperature_ambient") for table in tables] == [-30, 25]
    assert [stated(table, "blocker_level") for table in tables] == [28, 28]
