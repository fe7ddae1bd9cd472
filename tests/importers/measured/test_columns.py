"""What columns are taken for; and that nothing is taken that has two readings."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from specflow.importers.measurements import MeasuredTable, Role
from specflow.model.base import Document
from specflow.model.block import Plane
from tests.builders import a_block, a_conditions_set, a_dimension, a_quantity, a_requirement, at_least
from tests.importers.measured.make import SAID, book, low, one_table, questions, taken


def column(path: Path, header: str, cell: Any = 20.0, *documents: Document, **options: Any) -> MeasuredTable:
    """A table of a frequency and one other column."""
    rows = [["f (GHz)", header], [27.5, cell], [28, cell]]
    return one_table(book(path / "a.xlsx", rows), *documents, **options)


@pytest.mark.parametrize(
    ("header", "parameter", "unit", "statistic", "polarisation"),
    [
        ("Gain (dB)", "gain", "dB", "", ""),
        ("NF / dB", "noise_figure", "dB", "", ""),
        ("EVM rms [%]", "evm", "%", "rms", ""),
        ("EIRP peak V-pol (dBm)", "eirp", "dBm", "peak", "V"),
        ("EIRP H-pol (dBm/MHz)", "eirp_density", "dBm/MHz", "", "H"),
        ("P1dB out (dBm)", "op1db", "dBm", "", ""),
        ("G/T (dB/K)", "g_over_t", "dB/K", "", ""),
        ("S21 (dB)", "gain", "dB", "", ""),
        ("VSWR", "vswr", "1", "", ""),  # a plain number
    ],
)
def test_values(
    tmp_path: Path, header: str, parameter: str, unit: str, statistic: str, polarisation: str
) -> None:
    table = taken(column(tmp_path, header, 1.5))
    assert table.document is not None
    value = table.document.values[0]
    found = (value.quantity.parameter, value.unit, value.quantity.statistic, value.quantity.polarisation)
    assert found == (parameter, unit, statistic, polarisation)
    assert value.unit_from and value.header == header


@pytest.mark.parametrize(
    ("header", "words"),
    [
        ("Gain", "Gain without a unit"),
        ("Noise figure (dBm)", "Noise figure in dBm; a noise figure is a ratio (dB)"),
        ("Gain (GHz)", "Gain in GHz"),
        ("Mystery", "names no parameter and no condition"),
        ("Channel power [dBX]", "'dBX' is no unit"),
        ("S21 (lin)", "a linear S21 is an amplitude ratio"),
        ("Gain min (dB)", "'min' may mean the smallest of several readings, or a limit"),
        ("Gain mean (dB)", "a mean, of power or of dB"),
        ("Gain typ (dB)", "a typical value"),
        ("Gain simulated (dB)", "a simulation"),
        ("Gain (port 2) (dB)", "'port 2' is no plane that is known"),
        ("Gain @ 28 GHz (dB)", "'28 GHz' is a condition in the header"),
        ("Temp (°C)", "a temperature that does not say whose"),
        ("T (°C)", "a temperature that does not say whose"),
        ("Ambient temperature", "ambient temperature without a unit"),
        ("Vdd (A)", "supply voltage in A; expected is a unit like V"),
    ],
)
def test_what_is_unclear_is_asked_with_what_settles_it(tmp_path: Path, header: str, words: str) -> None:
    table = column(tmp_path, header)
    assert words in questions(table)
    assert all(
        question.cell == "B1" and question.remedy
        for question in table.questions
        if "column B" in question.what
    )


def test_a_named_port_of_a_block_is_a_plane(tmp_path: Path) -> None:
    block = a_block("ARRAY", planes=(Plane(name="array face"),))
    table = taken(column(tmp_path, "Gain @ array face (dB)", 20.0, block))
    assert table.document is not None and table.document.values[0].quantity.plane == "array face"


def test_a_temperature_whose_location_is_stated(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Temp (°C)", "Gain (dB)"], [27.5, 23, 20]]
    path = book(tmp_path / "a.xlsx", rows)
    table = taken(one_table(path, stated={"block": "LNA", "item": "LNA-1", "temperature": "baseplate"}))
    assert table.columns is not None
    assert list(table.columns.conditions.numeric["temperature_baseplate"]) == [23]


def test_the_same_header_twice_is_asked_about(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Gain (dB)", "Gain (dB)"], [27.5, 20, 21]]
    asked = questions(one_table(book(tmp_path / "a.xlsx", rows)))
    assert "B1" in asked and "C1" in asked and "more than once" in asked


def test_two_columns_of_one_quantity_are_asked_about(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Gain (dB)", "S21 [dB]"], [27.5, 20, 21]]
    assert "gain, in dB, as is C1" in questions(one_table(book(tmp_path / "a.xlsx", rows)))


def test_what_the_source_says_of_limits_is_kept_aside(tmp_path: Path) -> None:
    rows = [
        ["#", "f (GHz)", "Gain (dB)", "Gain limit (dB)", "Margin (dB)", "Pass/Fail", "Remark"],
        [1, 27.5, 20, 19, 1, "PASS", "fine"],
    ]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows)))
    assert table.document is not None and table.columns is not None
    assert [value.name for value in table.document.values] == ["Gain"]
    roles = {one.header: one.role for one in table.recognised}
    assert roles["#"] is Role.INDEX and roles["Gain limit (dB)"] is roles["Margin (dB)"] is Role.STATED_LIMIT
    assert (
        table.columns.extra["Pass/Fail"].word(0) == "PASS"
        and table.columns.extra["Gain limit"].word(0) == "19"
    )


def test_a_level_beside_other_values_is_a_condition_or_a_result(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Pout (dBm)", "Gain (dB)"], [27.5, 30, 20]]
    path = book(tmp_path / "a.xlsx", rows)
    assert "may be the condition power level or a value of Output power" in questions(one_table(path))
    said = {"block": "LNA", "item": "LNA-1", "column B": "value"}
    table = taken(one_table(path, stated=said))
    assert table.document is not None and len(table.document.values) == 2
    table = taken(one_table(path, stated=said | {"column B": "condition"}))
    assert table.columns is not None and "power_level" in table.columns.conditions.numeric
    required = a_requirement("R-2", quantity=a_quantity("output_power"), limit=at_least(28, "dBm"))
    assert len(taken(one_table(path, required)).document.values) == 2  # type: ignore[union-attr]
    levels = a_conditions_set("CS-2", a_dimension("power_level", "dBm", values=(30.0,), tolerance=0.5))
    assert len(taken(one_table(path, levels)).document.values) == 1  # type: ignore[union-attr]


def test_a_column_that_says_the_same_in_every_row_speaks_of_the_table(tmp_path: Path) -> None:
    rows: list[list[Any]] = [
        ["f (GHz)", "Spurious (dBm)", "RBW (kHz)", "Set-up"],
        [27.5, -60, 100, "bench 3"],
        [28, -61, 100, "bench 3"],
    ]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows)))
    assert table.document is not None
    assert table.document.values[0].quantity.bandwidth_hz == 100e3 and table.document.set_up == "bench 3"
    rows[2][3] = "bench 4"
    assert "more than one set up: bench 3, bench 4" in questions(one_table(book(tmp_path / "b.xlsx", rows)))


def test_a_bandwidth_of_each_row_makes_a_column_for_each(tmp_path: Path) -> None:
    rows = [
        ["f (GHz)", "Spurious (dBm)", "Gain (dB)", "RBW (kHz)"],
        [27.5, -60, 20, 100],
        [28, -61, 21, 1000],
    ]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows)))
    assert table.document is not None
    found = {one.name: one.quantity.bandwidth_hz for one in table.document.values}
    assert found == {"Spurious (in 100000 Hz)": 100e3, "Spurious (in 1e+06 Hz)": 1e6, "Gain": None}
    assert [low(table, name)[0] for name in ("Spurious (in 100000 Hz)", "Gain")] == [-60, 20]
    assert [low(table, name)[1] for name in ("Spurious (in 1e+06 Hz)", "Gain")] == [-61, 21]


def test_the_bandwidth_of_a_density_is_that_of_its_unit(tmp_path: Path) -> None:
    table = taken(column(tmp_path, "EIRP density (dBm/40 kHz)"))
    assert table.document is not None and table.document.values[0].quantity.bandwidth_hz == 40e3


def test_a_resolution_bandwidth_does_not_make_a_gain_another_quantity(tmp_path: Path) -> None:
    rows = [["RBW", 1, "MHz"], ["f (GHz)", "Gain (dB)", "Spurious (dBm)"], [27.5, 20, -60]]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows)))
    assert table.document is not None
    assert [value.quantity.bandwidth_hz for value in table.document.values] == [None, 1e6]


def test_serial_numbers_and_signal_to_noise_are_told_apart(tmp_path: Path) -> None:
    rows = [["S/N", "f (GHz)", "Gain (dB)"], [7, 27.5, 20]]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows), stated={"block": "LNA"}))
    assert table.columns is not None and table.columns.items.word(0) == "7"
    assert any("'7' is not known" in note for note in table.notes)


def test_an_item_as_written_above_the_table_is_found_by_its_serial(tmp_path: Path) -> None:
    rows = [["DUT: SN LNA-2"], ["f (GHz)", "Gain (dB)"], [27.5, 20]]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows), stated={}))
    assert table.columns is not None and table.document is not None
    assert (table.columns.items.word(0), table.document.block) == ("LNA-2", "LNA")


def test_block_and_item_must_be_known_somehow(tmp_path: Path) -> None:
    path = book(tmp_path / "a.xlsx", [["f (GHz)", "Gain (dB)"], [27.5, 20]])
    asked = questions(one_table(path, stated={}))
    assert "which block" in asked and "which item" in asked and "--state block=ID" in asked
    assert "no block 'LMA'" in questions(one_table(path, stated={"block": "LMA", "item": "LNA-1"}))
    by_sheet = book(tmp_path / "b.xlsx", [["f (GHz)", "Gain (dB)"], [27.5, 20]], sheet="PA")
    assert taken(one_table(by_sheet, stated={"item": "PA-9"})).document.block == "PA"  # type: ignore[union-attr]
    analysis = {"block": "LNA", "method": "analysis", "model": "tline", "model_version": "3.1"}
    document = taken(one_table(path, stated=analysis)).document
    assert document is not None and document.simulation_version == "3.1"


def test_a_method_or_stage_that_is_none_is_asked_about(tmp_path: Path) -> None:
    path = book(tmp_path / "a.xlsx", [["f (GHz)", "Gain (dB)"], [27.5, 20]])
    for name in ("method", "stage", "spectrum"):
        asked = questions(one_table(path, stated={"block": "LNA", "item": "LNA-1", name: "hopeful"}))
        assert f"'hopeful' is no {name}" in asked and "one of:" in asked


def test_what_the_file_and_the_person_say_of_the_whole_table(tmp_path: Path) -> None:
    rows = [
        ["Operator", "A. B.", "Procedure", "TP-12 rev B"],
        ["Ambient temperature (°C)", 23],
        ["Analyser cal due: 2026-09-01"],
        ["f (GHz)", "Gain (dB)"],
        [27.5, 20],
    ]
    path = book(tmp_path / "a.xlsx", rows)
    table = taken(one_table(path))
    document = table.document
    assert document is not None and table.columns is not None
    assert (document.performer, document.procedure, document.procedure_revision) == ("A. B.", "TP-12", "B")
    assert [(one.asset, str(one.calibration_due)) for one in document.equipment] == [
        ("Analyser", "2026-09-01")
    ]
    assert [one.stated_by for one in document.conditions if one.column is None] == ["stated in B2"]
    said = {"block": "LNA", "item": "LNA-1", "temperature_ambient": "25 °C", "performer": "C. D."}
    table = taken(one_table(path, stated=said))
    assert table.columns is not None and table.document is not None
    assert (table.columns.conditions.numeric["temperature_ambient"][0], table.document.performer) == (
        25.0,
        "C. D.",
    )


@pytest.mark.parametrize("text", ["23 ± 2 °C", "20 to 25 °C", "23", "warm"])
def test_a_stated_temperature_that_is_not_one_value_is_asked_about(tmp_path: Path, text: str) -> None:
    rows = [["Ambient temperature", text], ["f (GHz)", "Gain (dB)"], [27.5, 20]]
    assert "B1" in questions(one_table(book(tmp_path / "a.xlsx", rows)))


def test_a_date_with_two_readings_is_asked_about(tmp_path: Path) -> None:
    rows = [["Date", "02/03/2026"], ["f (GHz)", "Gain (dB)"], [27.5, 20]]
    assert "no date with one meaning" in questions(one_table(book(tmp_path / "a.xlsx", rows)))


def test_dc_supply_columns_by_their_usual_names(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Vdc (V)", "Idc (mA)"], [27.5, 28, 410]]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows)))
    assert table.document is not None and table.columns is not None
    assert table.document.values[0].quantity.parameter == "supply_current"
    assert list(table.columns.conditions.numeric["supply_voltage"]) == [28]


def test_a_bare_min_or_max_says_what_it_may_be(tmp_path: Path) -> None:
    path = book(tmp_path / "a.xlsx", [["f (GHz)", "Gain (dB)", "Min (dB)", "Max (dB)"], [27.5, 20, 18, 22]])
    asked = questions(one_table(path))
    assert "'Min' may mean the smallest of several readings, or a limit" in asked
    assert '--state "column C=stated limit"' in asked
    said = SAID | {"column C": "stated limit", "column D": "stated limit"}
    assert low(taken(one_table(path, stated=said)), "Gain") == [20]
