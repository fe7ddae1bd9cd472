"""Text exports of instruments and simulators: what is taken, what is asked. All numbers are invented."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.importers.measured.make import SAID, low, measure, one_table, questions, taken, text


def test_settings_that_say_nothing_of_the_readings_are_named_once(tmp_path: Path) -> None:
    lines = ["Type;XA-7;", "Version;3.20;", "Span;400;Hz", "Sweep Count;100;", "RBW;1000000;Hz", "x-Unit;Hz;"]
    rows = [f"{27.8e9 + 1e7 * row:.0f};{-60 + row};" for row in range(6)]
    table = one_table(text(tmp_path / "a.dat", "\n".join([*lines, *rows])))
    assert table.unused == (
        "B1: Type = XA-7",
        "B2: Version = 3.20",
        "B3: Span = 400 Hz",
        "B4: Sweep Count = 100",
    )
    assert not [note for note in table.notes if "Version" in note]


def test_a_line_may_state_several_conditions(tmp_path: Path) -> None:
    lines = []
    for cut, fixed in (("Azimuth", "Elevation"), ("Elevation", "Azimuth")):
        lines += [f"{cut} cut, {fixed} = 0 deg, Frequency = 28 GHz", f"{cut} (deg)\tGain (dBi)"]
        lines += [f"{angle}\t{30 - abs(angle)}" for angle in (-10, 0, 10)] + [""]
    tables = measure(text(tmp_path / "cuts.txt", "\n".join(lines))).tables
    assert [low(taken(table), "Gain") for table in tables] == [
        [20, 30, 20],
        [20, 20],
    ]  # both have the same middle
    across, along = (table.columns.conditions.numeric for table in tables if table.columns is not None)
    assert across["azimuth"].tolist() == [-10, 0, 10] and across["elevation"].tolist() == [0, 0, 0]
    assert along["azimuth"].tolist() == [0, 0] and along["elevation"].tolist() == [-10, 10]
    assert set(across["frequency"].tolist()) == {28}


def test_units_below_a_line_drawn_under_the_headers(tmp_path: Path) -> None:
    lines = [
        "Frequency    Noise Figure    Gain",
        "---------    ------------    ----",
        "[GHz]        [dB]            [dB]",
    ]
    table = taken(
        one_table(text(tmp_path / "a.txt", "\n".join([*lines, "27.5  1.4  24", "28.0  1.5  23.9"])))
    )
    assert low(table, "Noise Figure") == [1.4, 1.5] and low(table, "Gain") == [24, 23.9]


@pytest.mark.parametrize(
    ("header", "parameter", "plane", "unit"),
    [
        ("S11 Log Mag(dB)", "scattering_db", "port 1", "dB"),
        ("dB(S(2,1)) []", "scattering_db", "port 1 to port 2", "dB"),
        ("ang_deg(S(1,2)) [deg]", "scattering_angle", "port 2 to port 1", "deg"),
        ("Re(S21)", "scattering_real", "port 1 to port 2", "1"),
        ("s21_im", "scattering_imaginary", "port 1 to port 2", "1"),
        ("S22 Lin Mag", "scattering_magnitude", "port 2", "1"),
    ],
)
def test_entries_of_a_scattering_matrix_are_raw(
    tmp_path: Path, header: str, parameter: str, plane: str, unit: str
) -> None:
    table = taken(one_table(text(tmp_path / "a.csv", f'"Freq [GHz]","{header}"\n27.5,0.5\n28.0,0.25\n')))
    assert table.document is not None
    (column,) = table.document.values
    assert (column.quantity.parameter, column.quantity.plane, column.unit) == (parameter, plane, unit)
    said = {**SAID, "column B": "gain in dB"}
    as_gain = taken(one_table(tmp_path / "a.csv", stated=said)).document
    assert as_gain is not None and as_gain.values[0].quantity.parameter == "gain"


def test_a_form_that_its_unit_contradicts_is_asked_about(tmp_path: Path) -> None:
    path = text(tmp_path / "a.csv", '"Freq [GHz]","dB(S(2,1)) [deg]"\n27.5,0.5\n28.0,0.25\n')
    assert "B1" in questions(one_table(path))
