"""A kept mapping takes unit and plane of each file from where they stand there, never from the file it was made for."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from openpyxl.worksheet.worksheet import Worksheet

from tests.importers.measured.make import SAID, book, low, measure, one_table, questions, taken

HEAD = ["f (GHz)", "Output power"]


def under(unit: str) -> list[list[Any]]:
    return [["Unit", unit], [], HEAD, [28, 30], [29, 31]]


def kept(tmp_path: Path, rows: list[list[Any]], **options: Any) -> str:
    return measure(book(tmp_path / "a.xlsx", rows, **options)).proposal


def unit_of(table: Any) -> str:
    assert table.document is not None
    return str(table.document.values[0].unit)


def test_a_unit_above_the_table(tmp_path: Path) -> None:
    table = taken(one_table(book(tmp_path / "b.xlsx", under("dBW")), mapping=kept(tmp_path, under("dBm"))))
    assert unit_of(table) == "dBW" and low(table, "Output power") == [30, 31]


def test_a_mapping_by_hand_against_the_unit_above_the_table_is_asked_about(tmp_path: Path) -> None:
    path = book(tmp_path / "b.xlsx", under("dBW"))
    key = one_table(path).layout_key
    mapping = f"""format = 1
[[table]]
layout = "{key}"
[[table.column]]
header = "Output power"
parameter = "output_power"
unit = "dBm"
"""
    assert "the mapping says dBm, B1 says dBW" in questions(one_table(path, mapping=mapping))
    table = taken(one_table(path, mapping=mapping, stated={**SAID, "unit": "dBm"}))
    assert unit_of(table) == "dBm"


def test_a_unit_in_the_number_format(tmp_path: Path) -> None:
    def shown_in(unit: str) -> Any:
        def change(sheet: Worksheet) -> None:
            for row in (2, 3):
                sheet.cell(row, 2).number_format = f'0.0" {unit}"'

        return change

    rows = [HEAD, [28, 1.5], [29, 1.6]]
    mapping = kept(tmp_path, rows, change=shown_in("dBm"))
    table = taken(one_table(book(tmp_path / "b.xlsx", rows, change=shown_in("W")), mapping=mapping))
    assert unit_of(table) == "W"
    assert "Output power without a unit" in questions(
        one_table(book(tmp_path / "c.xlsx", rows), mapping=mapping)
    )


def test_a_unit_in_the_cells(tmp_path: Path) -> None:
    mapping = kept(tmp_path, [HEAD, [28, "30 dBm"], [29, "31 dBm"]])
    rows = [HEAD, [28, "1.5 W"], [29, "1.6 W"]]
    assert unit_of(taken(one_table(book(tmp_path / "b.xlsx", rows), mapping=mapping))) == "W"


def at(plane: str) -> list[list[Any]]:
    return [["Plane", plane], [], ["f (GHz)", "Output power (dBm)"], [28, 30], [29, 31]]


def test_a_plane_above_the_table(tmp_path: Path) -> None:
    mapping = kept(tmp_path, at("antenna port"))
    table = taken(one_table(book(tmp_path / "b.xlsx", at("amplifier output")), mapping=mapping))
    assert table.document is not None and table.document.values[0].quantity.plane == "amplifier output"


def test_a_plane_by_hand_against_the_one_above_the_table_is_asked_about(tmp_path: Path) -> None:
    path = book(tmp_path / "b.xlsx", at("amplifier output"))
    mapping = kept(tmp_path, at("antenna port")).replace(
        'unit = "dBm"', 'unit = "dBm"\nplane = "antenna port"'
    )
    assert "the mapping says the plane 'antenna port', B1 says 'amplifier output'" in questions(
        one_table(path, mapping=mapping)
    )
    taken(one_table(path, mapping=mapping, stated={**SAID, "plane": "antenna port"}))
