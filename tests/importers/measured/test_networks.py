"""Network files as evidence: what becomes a column, what is asked, what comments state, what is to be derived."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from specflow.errors import FileError
from specflow.importers.measured.network_facts import comment_facts
from specflow.importers.measurements import MeasuredTable, Measurements, read_measurements
from specflow.importers.readers.touchstone_network import Comment
from specflow.limits import parse_limit
from specflow.model.base import Document
from specflow.model.conditions import Span
from specflow.model.evidence import TableMapping
from specflow.model.requirement import Requirement
from specflow.parameters import load_dictionary
from tests.builders import (
    a_block,
    a_conditions_set,
    a_dimension,
    a_quantity,
    a_requirement,
    a_snapshot,
    an_item,
    at_most,
)

DATA = Path(__file__).parents[2] / "data"
SAID = {"block": "LNA", "item": "LNA-1"}
PORTS = {"port 1": "input", "port 2": "output"}
AT_PORTS = {"reference": "comments"}
BAND = a_conditions_set("CS", a_dimension(span=Span(low=1.0, high=3.0, step=0.5), tolerance=0.0))
ROWS = "1 0.1 0 2 0 0.01 0 0.2 0\n2 0.1 0 2 10 0.01 0 0.2 0\n3 0.1 0 2 20 0.01 0 0.2 0\n"


def wanted(parameter: str, plane: str = "", id: str = "R-1", **fields: Any) -> Requirement:
    return a_requirement(id, quantity=a_quantity(parameter, plane=plane, **fields), limit=at_most(1))


def read(path: Path, *documents: Document, mapping: str = "", **stated: str) -> Measurements:
    snapshot = a_snapshot(a_block(), an_item(), BAND, *documents)
    return read_measurements(path, snapshot, load_dictionary(), stated=SAID | stated, mapping=mapping)


def raw(path: Path, *documents: Document, **stated: str) -> MeasuredTable:
    return read(path, *documents, **stated).tables[0]


@pytest.fixture
def amplifier(tmp_path: Path) -> Path:
    path = tmp_path / "amp.s2p"
    path.write_text(f"# GHz S MA R 50\n{ROWS}")
    return path


def planned(table: MeasuredTable) -> list[tuple[str, str, str]]:
    return [(one.quantity.parameter, one.law, one.shown) for one in table.plans]


# --- the raw table


def test_every_entry_comes_in_as_recorded(amplifier: Path) -> None:
    table = raw(amplifier)
    assert table.document is not None and table.columns is not None
    names = [one.name for one in table.document.values]
    assert names == [f"S{i}{j} {part}" for i in (1, 2) for j in (1, 2) for part in ("magnitude", "angle")]
    by_name = {one.name: one for one in table.document.values}
    s21 = by_name["S21 magnitude"]
    assert (s21.quantity.parameter, s21.quantity.plane, s21.unit) == (
        "scattering_magnitude",
        "port 1 to port 2",
        "1",
    )
    assert (by_name["S22 angle"].quantity.plane, by_name["S22 angle"].unit) == ("port 2", "deg")
    assert table.columns.values["S21 angle"].low.tolist() == [0, 10, 20]
    assert table.columns.conditions.numeric["frequency"].tolist() == [1, 2, 3]
    assert table.columns.conditions.units["frequency"] == "GHz"
    assert table.columns.source_rows.tolist() == [2, 3, 4] and (s21.column, s21.lines_below) == (4, 0)
    assert table.columns.items.word(0) == "LNA-1"


def test_no_raw_column_is_of_a_quantity_that_a_requirement_names(amplifier: Path) -> None:
    """Not even where a limit is on gain and nothing said which port is the input: then it is asked, not matched."""
    table = raw(amplifier, wanted("gain"), derive="none")
    assert table.document is not None
    assert all(one.quantity.parameter.startswith("scattering_") for one in table.document.values)


@pytest.mark.parametrize(
    ("name", "stated", "values"),
    [
        ("transistor_noise.s2p", {}, 37 * 8),
        ("four_port_75ohm.s4p", {}, 205 * 32),
        ("splitter_25c.S3P", {"temperature": "case"}, 169 * 18),
        ("ten_port_sim.s10p", AT_PORTS, 11 * 200),
        ("lowpass_25c.s2p", {"temperature": "case"}, 2006 * 8),
        ("lowpass_125c.s2p", {"temperature": "case"}, 2006 * 8),
        ("mmwave_tx_140_220ghz.S2P", {}, 801 * 8),
    ],
)
def test_published_files_come_in_with_at_most_a_location_of_their_temperature(
    name: str, stated: dict[str, str], values: int
) -> None:
    table = raw(DATA / name, **stated)
    assert table.document is not None and table.values == values and not table.rejected


def test_rows_over_several_lines_keep_the_line_of_each_entry() -> None:
    table = raw(DATA / "ten_port_sim.s10p", **AT_PORTS)
    assert table.document is not None and table.columns is not None
    [column] = [one for one in table.document.values if one.name == "S10_10 magnitude"]
    line = int(table.columns.source_rows[0]) + column.lines_below
    words = (DATA / "ten_port_sim.s10p").read_text().splitlines()[line - 1].split()
    assert float(words[column.column - 1]) == table.columns.values["S10_10 magnitude"].low[0]


def test_a_noise_block_is_a_table_of_its_own() -> None:
    first, noise = read(DATA / "transistor_noise.s2p").tables
    assert noise.document is not None and noise.columns is not None and first.document is not None
    parameters = [one.quantity.parameter for one in noise.document.values]
    assert parameters == ["noise_figure_minimum", "optimum_source_magnitude", "optimum_source_angle",
                          "noise_resistance_normalised"]  # fmt: skip
    place = int(np.flatnonzero(noise.columns.conditions.numeric["frequency"] == 1000)[0])
    assert [noise.columns.values[name].low[place] for name in ("Fmin", "Gopt magnitude", "Gopt angle", "Rn")] == [
        0.9502, 0.09867, 162.93, 0.0914,
    ]  # fmt: skip
    assert first.document.table_key != noise.document.table_key


def test_a_number_that_is_none_is_rejected_with_its_place(tmp_path: Path) -> None:
    path = tmp_path / "a.s1p"
    path.write_text("# GHz S DB R 50\n1 -3 0\n2 nan 5\n")
    table = raw(path)
    assert [(one.cell, one.text) for one in table.rejected] == [("B3", "nan")] and table.values == 2


def test_converted_parameters_say_so(tmp_path: Path) -> None:
    path = tmp_path / "a.s1p"
    path.write_text("# GHz Z RI R 75\n1 0.99 0\n")
    table = raw(path)
    assert table.document is not None and table.columns is not None
    column = table.document.values[0]
    assert (column.name, column.conversions) == (
        "S11 real",
        ("S from Z at 75 ohm (normalised to it in version 1)",),
    )
    assert table.columns.values["S11 real"].low[0] == pytest.approx((74.25 - 75) / (74.25 + 75))


# --- doubts


def test_another_column_order_is_asked_and_taken_as_told(tmp_path: Path) -> None:
    path = tmp_path / "a.s2p"
    path.write_text(f"! Freq S11 S12 S21 S22\n# GHz S MA R 50\n{ROWS}")
    [question] = raw(path).questions
    assert (
        question.cell == "line 1"
        and "S11 S12 S21 S22; by the format they are S11 S21 S12 S22" in question.what
    )
    by_format, by_comment = raw(path, **{"column order": "format"}), raw(path, **{"column order": "comment"})
    assert (
        by_format.columns is not None and by_comment.columns is not None and by_comment.document is not None
    )
    assert by_format.columns.values["S21 magnitude"].low[0] == 2.0
    assert by_comment.columns.values["S21 magnitude"].low[0] == 0.01
    [moved] = [one for one in by_comment.document.values if one.name == "S21 magnitude"]
    assert moved.column == 6
    assert raw(path, **{"column order": "either"}).questions


def test_an_x_axis_of_power_is_asked_and_becomes_the_condition(tmp_path: Path) -> None:
    path = tmp_path / "a.s2p"
    rows = ROWS.replace("1 0.1", "-30 0.1").replace("2 0.1", "-20 0.1").replace("3 0.1", "-10 0.1")
    path.write_text(f"! Pin(dBm) S11 S21 S12 S22\n# GHz S MA R 50\n{rows}")
    assert {one.header for one in raw(path).questions} == {"x axis"}
    table = raw(path, wanted("gain"), **PORTS, **{"x axis": "input_level in dBm", "frequency": "28 GHz"})
    assert table.document is not None and table.columns is not None
    conditions = table.columns.conditions
    assert conditions.numeric["input_level"].tolist() == [-30, -20, -10]
    assert (conditions.units["input_level"], conditions.numeric["frequency"].tolist()) == (
        "dBm",
        [28, 28, 28],
    )
    assert planned(table) == [("gain", "gain", "S21")]
    assert raw(path, **{"x axis": "frequency"}).questions == ()
    assert (
        raw(path, **{"x axis": "mood"}).questions and raw(path, **{"x axis": "input_level in GHz"}).questions
    )


def test_an_option_line_with_a_unit_of_power_is_asked(tmp_path: Path) -> None:
    path = tmp_path / "a.s2p"
    path.write_text(f"# dBm S MA R 50\n{ROWS}")
    [question] = raw(path).questions
    assert (question.header, question.cell) == (
        "x axis",
        "line 1",
    ) and "no unit of frequency" in question.what
    assert raw(path, **{"x axis": "frequency"}).questions
    table = raw(path, **{"x axis": "input_level in dBm"})
    assert table.columns is not None and list(table.columns.conditions.numeric) == ["input_level"]


def test_a_network_with_the_ending_of_a_text_file_is_known_by_its_option_line(tmp_path: Path) -> None:
    path = tmp_path / "amp.txt"
    path.write_text(f"! by an analyser\n# GHz S MA R 50\n{ROWS}")
    assert raw(path).values == 24
    with pytest.raises(FileError, match="has no sheets"):
        read_measurements(path, a_snapshot(a_block()), load_dictionary(), sheets=["one"])
    table = tmp_path / "gain.csv"
    table.write_text("# S parameters in MHz\nItem,f (GHz),Gain (dB)\nLNA-1,27.5,20.1\n")
    assert [one.quantity.parameter for one in raw(table).document.values] == ["gain"]  # type: ignore[union-attr]


def test_ports_that_comments_name_input_and_output_are_taken(tmp_path: Path) -> None:
    path = tmp_path / "a.s2p"
    path.write_text(f"! PORT 1 = RF IN, PORT 2 = RF OUT\n# GHz S MA R 50\n{ROWS}")
    table = raw(path, wanted("gain"))
    assert planned(table) == [("gain", "gain", "S21")]
    assert {one.header: one.reason for one in table.recognised}["port 1"] == "a comment of the file"


def test_modes_are_the_names_of_ports(tmp_path: Path) -> None:
    path = tmp_path / "a.s4p"
    rows = "\n".join(" ".join(f"{10 * i + j} 0" for j in range(1, 5)) for i in range(1, 5))
    path.write_text(
        "[Version] 2.1\n# MHz S MA\n[Number of Ports] 4\n[Number of Frequencies] 1\n"
        f"[Mixed-Mode Order] D1,2 D3,4 C1,2 C3,4\n[Network Data]\n5 {rows}\n[End]\n"
    )
    table = raw(path, wanted("gain", "D1,2 to D3,4"))
    assert table.document is not None and table.document.values[0].name == "S D1,2 D1,2 magnitude"
    assert planned(table) == [("gain", "gain", "S D3,4 D1,2")]


def test_a_unit_that_is_hardly_right_is_asked_and_taken_as_told(tmp_path: Path) -> None:
    path = tmp_path / "a.s2p"
    path.write_text(
        f"# GHz S MA R 50\n{ROWS}".replace("\n1 ", "\n1e9 ")
        .replace("\n2 ", "\n2e9 ")
        .replace("\n3 ", "\n3e9 ")
    )
    [question] = raw(path).questions
    assert "3000000000 GHz; is the unit" in question.what
    table = raw(path, **{"x axis": "frequency in Hz"})
    assert table.columns is not None and table.columns.conditions.units["frequency"] == "Hz"
    assert raw(path, **{"x axis": "frequency in s"}).questions


def test_another_format_is_asked_and_taken_as_told(tmp_path: Path) -> None:
    path = tmp_path / "a.s1p"
    path.write_text("# GHz S MA R 50\n1 -20 0\n2 -10 0\n")
    [question] = raw(path).questions
    assert "below zero" in question.what and question.cell == "line 2"
    table = raw(path, format="DB")
    assert table.document is not None and table.document.values[0].unit == "dB"
    assert raw(path, format="dBm").questions


def test_impedances_in_comments_that_are_not_the_reference_are_asked(tmp_path: Path) -> None:
    """The entries stand as written; a title that says 50 ohm would say more than the file does."""
    array = DATA / "ten_port_sim.s10p"
    [question] = raw(array).questions
    assert question.header == "reference" and "268.957769 ohm" in question.what and "50 ohm" in question.what
    assert raw(array, **AT_PORTS).title.endswith("at the impedances of the comments (131.1 to 461.8 ohm)")
    assert raw(array, reference="50 ohm").title.endswith("of 10 ports at 50 ohm")
    for wrong in ("50 75", "comment", "-50", "mood"):
        [question] = raw(array, reference=wrong).questions
        assert f"{wrong!r} is no reference" in question.what
    path = tmp_path / "a.s2p"
    path.write_text(f"! port impedance 75 ohm\n# GHz S MA\n{ROWS}")
    assert [one.header for one in raw(path).questions] == ["reference"]
    assert raw(path, reference="75").title.endswith("at 75 ohm")
    assert raw(path, reference="50, 75 Ω").title.endswith("at 50, 75 ohm")
    assert raw(path, **AT_PORTS).questions  # there is no list of impedances by frequency


# --- what comments state


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("TEST CONDITIONS: INPUT POWER = 0 dBm - +25 deg C", {"input power": "0 dBm", "temperature": "25 °C"}),
        ("TEST CONDITIONS: INPUT POWER = -10 dBm @ Temperature = + 25 deg C",
         {"input power": "-10 dBm", "temperature": "25 °C"}),
        ("CAL POWER: -10 dBm", {}),
        ("Output power: 12 dBm", {}),
        ("Pin=-20dBm", {"input power": "-20 dBm"}),
        ("Power: -10 dBm", {"power level": "-10 dBm"}),
        ("Source power -20 dBm, IFBW 1 kHz", {"input power": "-20 dBm"}),
        ("0 dBm -40 deg C", {"temperature": "-40 °C"}),
        ("Temp: 25 C", {"temperature": "25 °C"}),
        ("T = -40.5°C", {"temperature": "-40.5 °C"}),
        ("Temperature: +85 degC", {"temperature": "85 °C"}),
        ("measured in C band, 3 C connectors", {}),
        ("S/N: Unit# 1", {"S/N": "Unit# 1"}),
        ("Date: Thu Apr 05 13:49:22 2012", {"date": "2012-04-05"}),
        ("Date: 03/04/2012", {}),
        ("VAR V_in= 0.838700", {}),
        ("VAR Vdd= 3.3 V", {"Vdd": "3.3 V"}),
        ("Vdd = 3.3V, Idd=60mA, 25 deg C", {"Vdd": "3.3V", "temperature": "25 °C"}),
        ("Port[1] = 1:1", {}),
        ("Freq S11:SOLT2(ON) S21:SOLT2(ON)", {}),
    ],
)  # fmt: skip
def test_facts_in_comments(text: str, expected: dict[str, str]) -> None:
    found = comment_facts([Comment(3, text)])
    assert {one.key: one.value for one in found.facts} == expected and not found.questions


def test_a_dash_that_may_be_a_minus_is_asked() -> None:
    found = comment_facts([Comment(6, "INPUT POWER = 0 dBm - 25 deg C")])
    [question] = found.questions
    assert question.cell == "line 6" and "a minus?" in question.what
    assert [one.key for one in found.facts] == ["input power"]


# --- what is derived


@pytest.mark.parametrize(
    ("parameter", "plane", "expected"),
    [
        ("gain", "", ("gain", "S21")),
        ("gain", "input to output", ("gain", "S21")),
        ("insertion_loss", "", ("loss", "S21")),
        ("return_loss", "input", ("loss", "S11")),
        ("return_loss", "port 2", ("loss", "S22")),
        ("reflection_magnitude", "output", ("gain", "S22")),
        ("vswr", "output", ("vswr", "S22")),
        ("reverse_isolation", "", ("loss", "S12")),
        ("reverse_transmission", "output to input", ("gain", "S12")),
        ("isolation", "output to input", ("loss", "S12")),
        ("phase", "", ("phase", "S21")),
        ("group_delay", "", ("group delay", "S21")),
        ("phase_linearity", "", ("phase linearity", "S21")),
    ],
)
def test_requirements_say_what_is_derived(
    amplifier: Path, parameter: str, plane: str, expected: tuple[str, str]
) -> None:
    table = raw(amplifier, wanted(parameter, plane), **PORTS)
    assert planned(table) == [(parameter, *expected)] and table.plans[0].why == "R-1"
    assert table.plans[0].quantity == a_quantity(parameter, plane=plane)


def test_ports_the_other_way_round_give_the_other_entry(amplifier: Path) -> None:
    turned = {"port 1": "output", "port 2": "input"}
    assert planned(raw(amplifier, wanted("gain"), **turned)) == [("gain", "gain", "S12")]


def test_a_line_is_fitted_over_the_band_of_the_requirement_only(amplifier: Path) -> None:
    [plan] = raw(amplifier, wanted("phase_linearity"), **PORTS).plans
    assert plan.over == "frequency: 1.0..3.0 GHz"
    without = wanted("phase_linearity").model_copy(update={"conditions": None})
    table = raw(amplifier, without, **PORTS)
    assert not table.plans and any("no range of frequency" in note for note in table.notes)


def test_paths_of_a_splitter_whose_comments_name_the_outputs() -> None:
    documents = (wanted("amplitude_imbalance"), wanted("phase_imbalance", id="R-2"), wanted("isolation", id="R-3"),
                 wanted("isolation", "OUT1 to OUT2", id="R-4"))  # fmt: skip
    said = {"temperature": "case"}
    [question, *_] = raw(DATA / "splitter_25c.S3P", *documents, **said).questions
    assert "no port is named 'input'" in question.what
    table = raw(DATA / "splitter_25c.S3P", *documents, **said, **{"port 1": "input"})
    assert planned(table) == [
        ("amplitude_imbalance", "amplitude imbalance", "S21, S31"),
        ("phase_imbalance", "phase imbalance", "S21, S31"),
        ("isolation", "loss", "S32"),
        ("isolation", "loss", "S32"),
    ]
    shown = {one.header: one.reason for one in table.recognised}
    assert (shown["port 1"], shown["port 2"]) == ("stated by the person", "a comment of the file")


def test_a_return_loss_of_no_port_is_told_and_not_guessed(amplifier: Path) -> None:
    table = raw(amplifier, wanted("return_loss"), **PORTS)
    assert not table.plans and any("does not say of which port" in note for note in table.notes)


def test_a_statistic_over_a_range_is_left_to_the_laws_of_ranges(amplifier: Path) -> None:
    table = raw(amplifier, wanted("gain", statistic="worst"), **PORTS)
    assert not table.plans and any("R-1: gain, worst: a law over a range" in note for note in table.notes)


def test_what_is_derived_may_be_said(amplifier: Path) -> None:
    table = raw(amplifier, derive="gain; return loss at input, VSWR of output", **PORTS)
    assert planned(table) == [
        ("gain", "gain", "S21"),
        ("return_loss", "loss", "S11"),
        ("vswr", "vswr", "S22"),
    ]
    [question] = raw(amplifier, derive="happiness", **PORTS).questions
    assert "'happiness'" in question.what


def test_a_noise_figure_needs_the_noise_block(amplifier: Path) -> None:
    first, noise = read(DATA / "transistor_noise.s2p", wanted("noise_figure")).tables
    assert not first.plans and planned(noise) == [("noise_figure", "noise figure", "the noise block")]
    assert dict(noise.plans[0].settings) == {"reference": "50"}
    assert any("no noise block" in note for note in raw(amplifier, wanted("noise_figure")).notes)


def test_active_reflection_needs_spacing_and_scan() -> None:
    scan = a_dimension("scan_theta", "deg", span=Span(low=-60.0, high=60.0, step=5.0), tolerance=0.0)
    frequency = a_dimension(span=Span(low=3.6, high=3.8, step=0.02), tolerance=0.0)
    conditions = a_conditions_set("ARRAY", frequency, scan)
    requirement = wanted("active_reflection").model_copy(update={"conditions": "ARRAY"})
    bare = raw(DATA / "ten_port_sim.s10p", conditions, requirement, **AT_PORTS)
    assert any("spacing of the elements is not said" in note for note in bare.notes)
    [plan] = raw(DATA / "ten_port_sim.s10p", conditions, requirement, **AT_PORTS, spacing="40 mm").plans
    assert (plan.law, len(plan.values), plan.over) == ("active reflection", 200, "frequency: 3.6..3.8 GHz")
    assert dict(plan.settings) == {"spacing": "40 mm", "scan": "-60.0..60.0 deg step 5.0 deg"}


# --- mappings


def test_a_mapping_names_the_ports_and_is_known_again_by_the_shape(amplifier: Path, tmp_path: Path) -> None:
    proposal = read(amplifier).proposal
    assert '"port 1" = "?"' in proposal
    mapping = proposal.replace('"port 1" = "?"', '"port 1" = "input"').replace(
        '"port 2" = "?"', '"port 2" = "output"'
    )
    given = read(amplifier, wanted("gain"), mapping=mapping).tables[0]
    assert planned(given) == [("gain", "gain", "S21")] and given.mapping_from == "the mapping file mapping"
    stored = TableMapping(id="MAP-1", layout_key=given.layout_key, toml=given.mapping)
    other = tmp_path / "other.s2p"
    other.write_text("# MHz S MA R 50\n5 0.1 0 3 0 0.01 0 0.2 0\n6 0.1 0 3 0 0.01 0 0.2 0\n")
    again = raw(other, wanted("gain"), stored)
    assert planned(again) == [("gain", "gain", "S21")] and again.mapping_from.startswith("MAP-1")
    commented = tmp_path / "commented.s2p"
    commented.write_text("! another analyser\n" + other.read_text())
    assert raw(commented, wanted("gain"), stored).questions
    person = raw(other, wanted("gain"), stored, **{"port 1": "output", "port 2": "input"})
    assert planned(person) == [("gain", "gain", "S12")]


def test_a_mapping_may_skip_a_file_or_ask_for_laws(amplifier: Path) -> None:
    proposal = read(amplifier).proposal
    nobody = read(amplifier, wanted("gain"), mapping=proposal).tables[0]
    assert "no port is named" in nobody.questions[0].what  # "?" names no port
    left = read(amplifier, mapping=proposal.replace("[[table]]", "[[table]]\nskip = true"))
    assert not left.tables and left.skipped == ("amp.s2p: the mapping file mapping says skip",)
    law = '\n[[table.derive]]\nlaw = "gain"\nvalues = ["S21 magnitude", "S21 angle"]\ngives = "gain"\n'
    assert [one.law for one in read(amplifier, mapping=proposal + law).tables[0].asked] == ["gain"]


def test_a_port_that_is_not_there_is_asked(amplifier: Path) -> None:
    assert any("no port 3" in one.what for one in raw(amplifier, **{"port 3": "output"}).questions)


def _words(notes: Sequence[str]) -> str:
    return " ".join(notes)


def test_entries_of_zeros_are_said(tmp_path: Path) -> None:
    path = tmp_path / "a.s2p"
    path.write_text("# GHz S RI R 50\n1 0.1 0 2 0 0 0 0 0\n")
    assert "S12, S22: all numbers are 0" in _words(raw(path).notes)


@pytest.mark.parametrize(
    "above",
    [
        "! CW time sweep\n# GHz S MA R 50\n",
        "# GHz S MA R 50\n! Time(s) S11\n",
        "! Sweep type: CW\n# GHz S MA R 50\n",
    ],
)
def test_a_sweep_over_time_is_no_sweep_over_frequency(tmp_path: Path, above: str) -> None:
    path = tmp_path / "a.s2p"
    path.write_text(f"{above}{ROWS}")
    assert [one.header for one in raw(path).questions] == ["x axis"]


def test_a_sweep_time_in_a_header_is_no_x_axis(tmp_path: Path) -> None:
    path = tmp_path / "a.s2p"
    path.write_text(f"! Sweep time: 0.5 s, real-time sweep off, at time 12:03\n# GHz S MA R 50\n{ROWS}")
    assert raw(path).questions == ()


def test_rows_of_one_frequency_do_not_say_what_was_swept(tmp_path: Path) -> None:
    path = tmp_path / "a.s1p"
    path.write_text("# GHz S MA R 50\n10 0.5 0\n10 0.6 0\n10 0.7 0\n")
    [question] = raw(path).questions
    assert question.header == "x axis" and "all 3 rows have the frequency 10 GHz" in question.what
    assert raw(path, **{"x axis": "frequency"}).questions == ()


def test_angles_that_fill_the_range_of_radians_are_asked_and_kept_in_degrees(tmp_path: Path) -> None:
    path = tmp_path / "a.s1p"
    angles = np.linspace(-3.1, 3.1, 24)
    path.write_text(
        "# GHz S MA R 50\n" + "".join(f"{k} 0.5 {x!r}\n" for k, x in enumerate(angles.tolist(), 1))
    )
    [question] = raw(path).questions
    assert question.header == "angles" and "no angle is beyond 3.1" in question.what
    asked = raw(path, angles="turns").questions
    assert [one.what for one in asked] == ["'turns' is no unit of the angles"]

    kept, converted = raw(path, angles="degrees").columns, raw(path, angles="radians").columns
    assert kept is not None and converted is not None
    assert kept.values["S11 angle"].low.tolist() == angles.tolist()
    assert converted.values["S11 angle"].low.tolist() == np.rad2deg(angles).tolist()


def test_an_option_line_that_is_missing_is_stated(tmp_path: Path) -> None:
    path = tmp_path / "a.s2p"
    path.write_text(f"! no option line\n{ROWS}")
    with pytest.raises(FileError, match="no option line") as caught:
        raw(path)
    assert caught.value.hint == 'say it, as in --state "option line=# GHz S MA R 50"'
    table = raw(path, **{"Option line": "# MHz S RI R 75"})
    assert table.document is not None and table.columns is not None
    assert table.document.values[0].name == "S11 real"
    assert table.columns.conditions.units["frequency"] == "MHz" and table.title.endswith("at 75 ohm")
    assert any("is that stated by the person" in note for note in table.notes)
    with pytest.raises(FileError, match="'furlong' is no option"):
        raw(path, **{"option line": "# furlong S RI R 75"})


def test_an_option_line_is_stated_for_numbers_above_the_one_of_the_file_only(
    tmp_path: Path, amplifier: Path
) -> None:
    late = tmp_path / "late.s2p"
    late.write_text(f"{ROWS}# MHz S DB R 50\n")
    with pytest.raises(FileError, match="numbers stand above"):
        raw(late)
    table = raw(late, **{"option line": "# GHz S MA R 50"})
    assert any("another option line (# MHz S DB R 50) was ignored" in note for note in table.notes)
    with pytest.raises(FileError, match="an option line of its own"):
        raw(amplifier, **{"option line": "# GHz S DB R 50"})


def test_a_comment_on_how_the_numbers_were_treated_is_shown(tmp_path: Path) -> None:
    path = tmp_path / "a.s2p"
    path.write_text(
        "! De-embedded to the connector planes\n! Averaging 16, IFBW 100 Hz\n! a fine day\n! Smoothing on\n"
        f"# GHz S MA R 50\n{ROWS}"
    )
    shown = [note for note in raw(path).notes if note.startswith("not used")]
    assert shown == [
        "not used: line 1: De-embedded to the connector planes",
        "not used: line 2: Averaging 16, IFBW 100 Hz",
        "not used: line 4: Smoothing on",
    ]


def test_the_step_around_a_hole_is_said_without_digits_of_its_difference(tmp_path: Path) -> None:
    path = tmp_path / "a.s2p"
    rows = "".join(f"{0.1 * k:.1f} 0.1 0 {2 if k != 3 else 'nan'} 0 0.01 0 0.2 0\n" for k in range(1, 8))
    path.write_text(f"# GHz S MA R 50\n{rows}")
    [plan] = raw(path, wanted("group_delay"), **PORTS).plans
    assert plan.over == "frequency: 0.1..0.7 GHz step 0.2 GHz"


def test_a_requirement_that_leaves_open_which_output_stops_no_file(tmp_path: Path) -> None:
    """No name of a port settles it: the requirement has to say it, and the rest is derived meanwhile."""
    path = tmp_path / "a.s3p"
    path.write_text("# GHz S MA R 50\n1 0.1 0 0.7 0 0.6 0\n0.7 0 0.1 0 0.2 0\n0.6 0 0.2 0 0.1 0\n")
    names = {"port 1": "in", "port 2": "out 1", "port 3": "out 2"}
    table = raw(path, wanted("insertion_loss"), wanted("amplitude_imbalance", id="R-2"), **names)
    assert planned(table) == [("amplitude_imbalance", "amplitude imbalance", "S21, S31")]
    [left] = [note for note in table.notes if note.startswith("not derived")]
    assert "R-1" in left and "the ports 2, 3 are all 'output'" in left and "must name one of them" in left
    table = raw(path, wanted("insertion_loss", "input to port 2"), **names)
    assert planned(table) == [("insertion_loss", "loss", "S21")]


def test_a_quantity_between_modes_is_stated_with_their_commas(tmp_path: Path) -> None:
    path = tmp_path / "a.s4p"
    rows = "\n".join(" ".join(f"{10 * i + j} 0" for j in range(1, 5)) for i in range(1, 5))
    path.write_text(
        "[Version] 2.1\n# MHz S MA\n[Number of Ports] 4\n[Number of Frequencies] 1\n"
        f"[Mixed-Mode Order] D1,2 D3,4 C1,2 C3,4\n[Network Data]\n5 {rows}\n[End]\n"
    )
    table = raw(path, derive="gain from D1,2 to D3,4, return loss at C3,4;isolation from C1,2 to D3,4")
    assert [one[2] for one in planned(table)] == ["S D3,4 D1,2", "S C3,4 C3,4", "S D3,4 C1,2"]
    assert {one.header: one.reason for one in table.recognised}["port 1"] == "[Mixed-Mode Order]"


def test_the_name_of_a_port_stands_without_its_quotes(tmp_path: Path) -> None:
    path = tmp_path / "a.s2p"
    path.write_text(f"! Port[1] = \"in\"\n! Port[2] = 'out'\n# GHz S MA R 50\n{ROWS}")
    assert planned(raw(path, wanted("gain"))) == [("gain", "gain", "S21")]


@pytest.mark.parametrize(
    ("limit", "near"),
    [("180 ± 5 deg", "180 deg"), ("-180 ± 5 deg", "-180 deg"), ("175 to 185 deg", "180 deg"), ("90 ± 5 deg", None),
     ("<= 185 deg", None)],
)  # fmt: skip
def test_a_phase_imbalance_is_given_in_the_turn_of_its_limit(
    tmp_path: Path, limit: str, near: str | None
) -> None:
    """Of outputs in antiphase -179 deg are 181 deg: within 180 ± 5 deg, which a file never says."""
    path = tmp_path / "a.s3p"
    path.write_text("# GHz S MA R 50\n1 0.1 0 0.7 0 0.6 0\n0.7 0 0.1 0 0.2 0\n0.6 0 0.2 0 0.1 0\n")
    names = {"port 1": "in", "port 2": "out 1", "port 3": "out 2"}
    requirement = wanted("phase_imbalance").model_copy(update={"limit": parse_limit(limit)})
    [plan] = raw(path, requirement, **names).plans
    assert dict(plan.settings) == ({"near": near} if near else {})


def test_a_packed_network_file_is_refused_with_the_endings_that_are_read(tmp_path: Path) -> None:
    path = tmp_path / "a.s2p.zip"
    path.write_bytes(b"PK\x05\x06" + bytes(18))
    with pytest.raises(FileError) as caught:
        read(path)
    assert caught.value.hint.startswith("unpack it") and ".s2p ... .ts" in caught.value.hint
