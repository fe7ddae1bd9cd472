"""Key–value rows as laboratories write them; what they do not say is not made up."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import Any

import pytest

from specflow.importers.measurements import MeasuredTable
from tests.builders import a_conditions_set, a_dimension
from tests.importers.measured.make import SAID, book, one_table, questions, taken

TABLE = [["f (GHz)", "Spurious (dBm)"], [27.5, -60]]


def above(path: Path, *rows: Sequence[Any], **options: Any) -> MeasuredTable:
    return one_table(book(path / "a.xlsx", [*rows, *TABLE]), **options)


@pytest.mark.parametrize(
    ("row", "field", "value"),
    [
        (["Lab:", "Range A"], "performer", "Range A"),
        (["Operator: A. B."], "performer", "A. B."),
        (["Procedure", "TP-12 rev B"], "procedure", "TP-12"),
        (["Set-up: bench 3"], "set_up", "bench 3"),
        (["Verification stage", "acceptance"], "stage", "acceptance"),
        (["Simulation model", "tline"], "simulation_model", "tline"),
    ],
)
def test_what_is_said_of_the_table(tmp_path: Path, row: Sequence[str], field: str, value: str) -> None:
    document = taken(above(tmp_path, row)).document
    assert document is not None and str(getattr(document, field)) == value


def test_the_laboratory_is_the_performer_and_the_operator_no_part_of_the_key(tmp_path: Path) -> None:
    first = taken(above(tmp_path, ["Operator", "A. B."], ["Lab", "Range A"])).document
    second = taken(above(tmp_path, ["Operator", "C. D."], ["Lab", "Range A"])).document
    other = taken(above(tmp_path, ["Operator", "C. D."], ["Lab", "Range B"])).document
    assert first is not None and second is not None and other is not None
    assert first.performer == "Range A" and first.table_key == second.table_key != other.table_key


@pytest.mark.parametrize(
    "row",
    [
        ["Bandwidth", 100, "MHz"],  # that of the channel, not the one measured in
        ["Method: scan of the sphere"],  # another kind of method
        ["Time: 14:32"],
        ["Level: qualification"],
        ["Model: XY-100"],  # of the radio
        ["Averaging: 10"],
        ["Customer: none"],
    ],
)
def test_keys_that_mean_something_else_change_nothing(tmp_path: Path, row: Sequence[Any]) -> None:
    table = taken(above(tmp_path, row))
    plain = taken(one_table(book(tmp_path / "plain.xlsx", TABLE))).document
    assert table.document is not None and plain is not None
    assert table.document.values[0].quantity == plain.values[0].quantity
    assert (table.document.method, table.document.simulation_model) == (plain.method, "")
    assert "power_level" not in {one.dimension for one in table.document.conditions}


def test_the_resolution_bandwidth(tmp_path: Path) -> None:
    for row in (["RBW", 1, "MHz"], ["RBW: 1 MHz"], ["Resolution bandwidth (MHz)", 1], ["RBW [MHz]:", "1"]):
        document = taken(above(tmp_path, row)).document
        assert document is not None and document.values[0].quantity.bandwidth_hz == 1e6, row


def test_a_detector_is_the_statistic_of_quantities_that_have_one(tmp_path: Path) -> None:
    rows = [["Detector: RMS"], ["f (GHz)", "Spurious (dBm)", "Gain (dB)"], [27.5, -60, 20]]
    document = taken(one_table(book(tmp_path / "a.xlsx", rows))).document
    assert document is not None
    assert [value.quantity.statistic for value in document.values] == ["rms", ""]


@pytest.mark.parametrize(
    ("rows", "item"),
    [
        ([["DUT: LNA"], ["Serial: LNA-2"]], "LNA-2"),
        ([["Unit: LNA-2"]], "LNA-2"),
        ([["Serial number", "SN LNA-2"]], "LNA-2"),
        ([["DUT", "low-noise amplifier"], ["S/N", 77]], "77"),
    ],
)
def test_the_item_is_the_one_that_the_project_knows(tmp_path: Path, rows: Any, item: str) -> None:
    table = taken(above(tmp_path, *rows, stated={"block": "LNA"}))
    assert table.columns is not None and table.columns.items.word(0) == item


def test_a_row_of_keys_over_a_row_of_values(tmp_path: Path) -> None:
    rows = [["DUT", "Serial", "Date", "Ambient (°C)"], ["amplifier", "LNA-2", "2026-03-02", 23], [], *TABLE]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows), stated={}))
    assert table.columns is not None and table.document is not None
    assert (table.columns.items.word(0), str(table.document.performed_on)) == ("LNA-2", "2026-03-02")
    assert table.columns.conditions.numeric["temperature_ambient"][0] == 23


def test_a_range_of_frequencies_above_a_table_with_a_frequency_column_is_no_question(tmp_path: Path) -> None:
    assert taken(above(tmp_path, ["Frequency: 27.5 - 30 GHz"]))
    rows = [["Frequency: 27.5 - 30 GHz"], ["Vdd (V)", "Gain (dB)"], [5, 20]]
    assert "is a range" in questions(one_table(book(tmp_path / "b.xlsx", rows)))


def test_a_file_that_says_two_temperatures_is_asked_about(tmp_path: Path) -> None:
    asked = questions(above(tmp_path, ["Ambient: 23 °C"], ["Ambient temperature", "85 °C"]))
    assert "A1 says 23 °C, the file says 85 °C" in asked


def test_a_number_format_gives_a_stated_number_its_unit(tmp_path: Path) -> None:
    def degrees(sheet: Any) -> None:
        sheet["B1"].number_format = '0" °C"'

    rows = [["Baseplate temperature", 45], *TABLE]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows, change=degrees)))
    assert table.columns is not None and table.columns.conditions.numeric["temperature_baseplate"][0] == 45


def test_what_the_person_says_must_mean_something(tmp_path: Path) -> None:
    assert "'temprature_ambient'" in questions(above(tmp_path, stated=SAID | {"temprature_ambient": "23 °C"}))
    own = a_conditions_set("CS-9", a_dimension("tilt", "deg", values=(0.0,), tolerance=1.0))
    table = taken(one_table(book(tmp_path / "a.xlsx", TABLE), own, stated=SAID | {"tilt": "5 deg"}))
    assert table.columns is not None
    assert (table.columns.conditions.numeric["tilt"][0], table.columns.conditions.units["tilt"]) == (
        5.0,
        "deg",
    )


def test_a_pivot_over_items(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Gain LNA-1 (dB)", "Gain LNA-2 (dB)"], [27.5, 20, 21]]
    mapping = (
        'format = 1\n[[table]]\n[table.pivot]\nheader = "Gain {item} (dB)"\nparameter = "gain"\nunit = "dB"\n'
    )
    table = taken(one_table(book(tmp_path / "a.xlsx", rows), stated={"block": "LNA"}, mapping=mapping))
    assert table.columns is not None
    assert [table.columns.items.word(row) for row in (0, 1)] == ["LNA-1", "LNA-2"]
    assert "item" not in table.columns.conditions.text


def test_a_time_of_day_is_a_remark(tmp_path: Path) -> None:
    rows = [["Time", "f (GHz)", "Gain (dB)"], ["14:32:05", 27.5, 20]]
    assert taken(one_table(book(tmp_path / "a.xlsx", rows)))


def test_a_german_heading_is_understood(tmp_path: Path) -> None:
    lines = [
        "Prüfling;LNA-2",
        "Datum;04.05.2026",
        "Labor;Hafenlabor (erfunden)",
        "",
        "Frequenz [GHz];Umgebungstemperatur [°C];Verstärkung [dB]",
        "27,5;85;19,5",
        "30,0;85;19,1",
    ]
    path = tmp_path / "a.csv"
    path.write_bytes("\r\n".join(lines).encode("cp1252"))
    table = taken(one_table(path, stated={}))
    assert table.columns is not None and table.document is not None
    assert (table.columns.items.word(0), str(table.document.performed_on)) == ("LNA-2", "2026-05-04")
    assert table.document.performer.startswith("Hafenlabor")
    assert list(table.columns.values["Verstärkung"].low) == [19.5, 19.1]
    assert list(table.columns.conditions.numeric["temperature_ambient"]) == [85, 85]


def test_a_dotted_date_under_another_key_is_asked_about(tmp_path: Path) -> None:
    rows = [["Date", "04.05.2026"], *TABLE]
    assert "no date with one meaning" in questions(one_table(book(tmp_path / "a.xlsx", rows)))


def test_the_way_to_say_that_a_table_is_simulated_is_told(tmp_path: Path) -> None:
    path = book(tmp_path / "a.xlsx", TABLE)
    assert "simulation: --state method=analysis" in questions(one_table(path, stated={"block": "LNA"}))
    said = {"block": "LNA", "method": "simulation"}
    assert "a simulation is an analysis" in questions(one_table(path, stated=said))
