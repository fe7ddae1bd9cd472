"""Text exports of instruments and simulators: what is taken, what is asked. All numbers are invented."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from specflow.errors import FileError
from tests.importers.measured.make import SAID, low, measure, one_table, questions, rejected, taken, text


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


def test_the_letter_of_a_channel_is_no_unit_and_its_unit_column_asks_nothing(tmp_path: Path) -> None:
    lines = [
        "Time;Channel A;Unit",
        "09:00:01;12,31;dBm",
        "09:00:02;17,02;mW",
        "09:00:03;OVER;dBm",
        "09:00:04;1,232;dBm",
    ]
    path = text(tmp_path / "log.csv", "\n".join(lines))
    assert [one.cell for one in one_table(path).questions] == ["B1"]
    table = taken(one_table(path, stated={**SAID, "column B": "output_power"}))
    assert low(table, "Channel A") == pytest.approx([12.31, 12.3096, np.nan, 1.232], abs=1e-4, nan_ok=True)
    assert "B4" in rejected(table)


def test_the_parts_of_a_record_name_no_quantity(tmp_path: Path) -> None:
    record = '{"sn": "LNA-1", "conditions": {"frequency": {"value": 28, "unit": "GHz"}}, "results": {"gain_db": 24.5}}'
    table = taken(
        one_table(text(tmp_path / "a.jsonl", f"{record}\n{record.replace('28', '29').replace('.5', '')}"))
    )
    assert low(table, "gain") == [24.5, 24]
    assert table.columns is not None and table.columns.conditions.numeric["frequency"].tolist() == [28, 29]


def test_a_field_strength_is_known_by_its_unit_and_a_level_in_dbc_is_asked_about(tmp_path: Path) -> None:
    lines = ["Frequency (MHz)\tQuasiPeak (dBµV/m)\tBandwidth (kHz)", "31.4\t28.4\t120", "125\t---\t9"]
    path = text(tmp_path / "final.txt", "\n".join(lines))
    assert [one.cell for one in one_table(path).questions] == ["C1"]
    table = taken(one_table(path, stated={**SAID, "column C": "not read"}))
    assert table.document is not None
    quantity = table.document.values[0].quantity
    assert (quantity.parameter, quantity.statistic) == ("field_strength", "quasi-peak")
    spurs = text(tmp_path / "spurs.csv", "Offset (Hz),Level (dBc)\n1E5,-78\n2E5,-80\n3E5,-82\n")
    assert "no power" in questions(one_table(spurs)) and "spurious_relative" in questions(one_table(spurs))


@pytest.mark.parametrize("cell", ["(-3.0e+00dB,-4.5e+01°)", "0.9-0.5j", "(0.9;45)", "0.9 ∠ -45°"])
def test_two_numbers_in_a_cell_become_no_remark(tmp_path: Path, cell: str) -> None:
    path = text(
        tmp_path / "a.txt", f"Frequency (Hz)\tV(out)/V(in)\tGain (dB)\n1e3\t{cell}\t2\n2e3\t{cell}\t3\n"
    )
    assert "two numbers" in questions(one_table(path))


def test_cuts_below_titles_in_a_file_of_an_ending_of_its_own(tmp_path: Path) -> None:
    lines = ["NAME INVENTED", "FREQUENCY 869.5 MHz", "GAIN 14.2 dBd"]
    for cut, width in (("HORIZONTAL", 65), ("VERTICAL", 12)):
        lines += [f"{cut} 36", *(f"{10.0 * step} {step % 19 * width / 100:.2f}" for step in range(36))]
    path = text(tmp_path / "a.msi", "\n".join(lines))
    assert [one.cell for table in measure(path).tables for one in table.questions] == ["B5", "B42"]
    said = {**SAID, "column B": "antenna_gain in dBi"}
    tables = [taken(table) for table in measure(path, stated=said).tables]
    for table, cut in zip(tables, ("horizontal", "vertical"), strict=True):
        assert table.columns is not None
        conditions = table.columns.conditions
        assert conditions.text["cut_plane"].word(0) == cut and set(conditions.numeric["frequency"]) == {869.5}
        assert conditions.numeric["cut_angle"].tolist() == [10.0 * step for step in range(36)]
        assert "B3: GAIN = 14.2 dBd" in table.unused


def test_text_without_columns_of_numbers_stays_a_kind_that_is_not_read(tmp_path: Path) -> None:
    for name, content in (
        ("a.py", "x = 1\ny = 2\nz = 3\n"),
        ("b.log", "\0\1 1 2\n" * 5),
        ("c.xml", "1 2\n" * 5),
    ):
        with pytest.raises(FileError, match="are not read"):
            measure(text(tmp_path / name, content))


def test_markers_above_a_trace_take_no_headers_from_it(tmp_path: Path) -> None:
    markers = ["Marker,Frequency (GHz),Output power (dBm)", "M1,28,-12.5", "M2,28.5,-14", ""]
    trace = ["Frequency (GHz),Output power (dBm)", "27.5,-20", "28,-12.5", "28.5,-14", "29,-21"]
    first, second = measure(text(tmp_path / "a.csv", "\n".join([*markers, *trace]))).tables
    assert low(taken(first), "Output power") == [-12.5, -14]
    assert low(taken(second), "Output power") == [-20, -21]  # two readings stand in both


def test_a_letter_that_stands_for_unlike_columns_is_asked_about(tmp_path: Path) -> None:
    trace = ["Offset (Hz),Phase Noise (dBc/Hz)", "1E3,-80", "1E4,-100", "1E5,-120"]
    spurs = ["Spurs", "Offset (Hz),Level (dBc)", "2E4,-78", "3E5,-91"]
    path = text(tmp_path / "a.csv", "\n".join([*trace, "", *spurs]))
    for table in measure(path, stated={**SAID, "column B": "spurious_relative in dBc"}).tables:
        assert "no letter alone" in questions(table)
    first, second = measure(path, stated={**SAID, "column B7": "spurious_relative in dBc"}).tables
    assert first.document is not None and first.document.values[0].quantity.parameter == "phase_noise"
    assert second.document is not None and second.document.values[0].quantity.parameter == "spurious_relative"


@pytest.mark.parametrize(
    ("line", "key", "said"),
    [("FREQUENCY\t869.5", "frequency", "28 GHz"), ("Date\t01/02/2026", "date", "2026-02-01")],
)
def test_what_the_person_says_settles_what_the_file_leaves_open(
    tmp_path: Path, line: str, key: str, said: str
) -> None:
    path = text(tmp_path / "a.txt", f"{line}\nSupply voltage (V)\tGain (dB)\n3\t20\n4\t21\n5\t22\n")
    assert key in questions(one_table(path)) or "no date" in questions(one_table(path))
    assert low(taken(one_table(path, stated={**SAID, key: said})), "Gain") == [20, 21, 22]


def test_the_port_in_the_name_of_a_match_is_its_plane(tmp_path: Path) -> None:
    header = "Frequency (GHz),Input Return Loss (dB),Output Return Loss (dB),S11 (dB),S22 (dB),Output VSWR"
    table = taken(
        one_table(text(tmp_path / "a.csv", f"{header}\n28,18,12,-18,-12,1.7\n29,17,11,-17,-11,1.8\n"))
    )
    assert table.document is not None
    planes = [column.quantity.plane for column in table.document.values]
    assert planes == ["input", "output", "", "port 2", "output"]


def test_complex_cells_are_no_gain_whatever_unit_is_stated(tmp_path: Path) -> None:
    path = text(tmp_path / "a.csv", "freq (GHz),S21\n28,0.9-0.5j\n29,0.8+0.1j\n")
    assert "two numbers" in questions(one_table(path, stated={**SAID, "unit": "dB"}))


def test_a_line_of_prose_with_as_many_words_as_columns_is_no_header(tmp_path: Path) -> None:
    lines = [
        "Field data in cuts",
        " -20.0 10.0 5 0.0 3 1 2",
        *(f" 0.{step} 0.01 0.002 0.5" for step in range(5)),
    ]
    table = one_table(text(tmp_path / "feed.cut", "\n".join(lines)))
    assert table.rows == 5 and {one.cell for one in table.questions} >= {"A3", "B3", "C3", "D3"}


def test_a_row_that_lacks_a_number_leaves_unknown_headers_where_they_are(tmp_path: Path) -> None:
    path = text(tmp_path / "a.csv", "Foo,Bar,Quux\n1,,3\n4,5,6\n7,8,9\n1,2,3\n")
    assert {one.header for one in one_table(path).questions} == {"Foo", "Bar", "Quux"}


def test_a_temperature_may_say_celsius_in_its_name(tmp_path: Path) -> None:
    lines = [f'{{"freq_ghz": {f}, "gain_db": 20, "temp_c": 25}}' for f in (28, 29)]
    table = taken(
        one_table(text(tmp_path / "a.jsonl", "\n".join(lines)), stated={**SAID, "temperature": "ambient"})
    )
    assert table.columns is not None and table.columns.conditions.units["temperature_ambient"] == "°C"


@pytest.mark.parametrize(("unit", "tables"), [("dBm", [[30, 20, 27]]), ("dBW", [[30, 20], [27]])])
def test_repeated_headers_over_other_units_begin_another_table(
    tmp_path: Path, unit: str, tables: list[list[float]]
) -> None:
    lines = [
        "Frequency\tEIRP",
        "GHz\tdBm",
        "27\t30",
        "28\t20",
        "",
        "Frequency\tEIRP",
        f"GHz\t{unit}",
        "29\t27",
    ]
    found = measure(text(tmp_path / "a.txt", "\n".join(lines))).tables
    assert [low(taken(table), "EIRP") for table in found] == tables
    assert [table.document.values[0].unit for table in found if table.document] == ["dBm", unit][
        : len(tables)
    ]
    assert not any(table.rejected for table in found)


def test_a_mark_before_the_names_in_a_comment_is_none_of_them(tmp_path: Path) -> None:
    lines = ["// Source file", "// >> Theta (deg), Gain (dBi)", "0 30.0", "5 29.5", "10 28.0"]
    table = taken(one_table(text(tmp_path / "a.ffs", "\n".join(lines))))
    assert low(table, "Gain") == [30, 29.5, 28]
    assert table.columns is not None and table.columns.conditions.numeric["theta"].tolist() == [0, 5, 10]
