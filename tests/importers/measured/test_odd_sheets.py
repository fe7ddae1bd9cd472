"""Odd sheets as laboratories send them: what is taken, what is asked, with the cell. All are made up by hand."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from specflow.importers.measurements import MeasuredTable, Role
from tests.importers.measured.make import SAID, book, low, measure, one_table, questions, rejected, taken

Rows = Sequence[Sequence[Any]]
F = [27.5, 28.0, 28.5]


def under(headers: Sequence[str], *columns: Sequence[Any], above: Rows = ()) -> list[list[Any]]:
    """A table of frequencies and further columns, with lines above it."""
    lines = [list(line) for line in above] + ([[]] if above else [])
    body = [[F[place], *cells] for place, cells in enumerate(zip(*columns, strict=True))]
    return [*lines, ["f (GHz)", *headers], *body]


@dataclass(frozen=True)
class Taken:
    """A sheet that is read: values by column, and words that must be said about it."""

    rows: Rows
    values: Mapping[str, Sequence[float]]
    unit: str = ""
    words: Sequence[str] = ()
    lost: Mapping[str, str] = field(default_factory=dict)
    said: Mapping[str, str] = field(default_factory=dict)


@dataclass(frozen=True)
class Asked:
    """A sheet that is not read before something is settled: the cell, and words of the question."""

    rows: Rows
    cell: str
    words: str
    said: Mapping[str, str] = field(default_factory=dict)


TAKEN = {
    "units in every cell, two of them": Taken(
        under(["Output power"], ["12.3 dBm", "20 mW", "12.1 dBm"]),
        {"Output power": [12.3, 13.0103, 12.1]},
        "dBm",
        ["dBm in 2, mW in 1", "the reading in mW was converted to dBm (B3)"],
    ),
    "one cell in another unit than its header": Taken(
        under(["Output power (dBm)"], [12.3, "20 mW", 11.9]),
        {"Output power": [12.3, 13.0103, 11.9]},
        "dBm",
        ["the reading in mW was converted to dBm (B3)"],
    ),
    "a unit that cannot be brought": Taken(
        under(["Output power (dBm)"], [12.3, "3 dB", 11.9]),
        {"Output power": [12.3, np.nan, 11.9]},
        "dBm",
        lost={"B3": "the cell says dB, the column dBm"},
    ),
    "no power in dBm": Taken(
        under(["Output power (dBm)"], [12.3, "0 mW", 11.9]),
        {"Output power": [12.3, np.nan, 11.9]},
        lost={"B3": "0 mW has no value in dBm"},
    ),
    "a unit column": Taken(
        under(["Gain", "Unit"], [20, 21, 22], ["dB", "dB", "dB"]),
        {"Gain": [20, 21, 22]},
        "dB",
        ["unit from the unit column C1"],
    ),
    "a unit column with two prefixes": Taken(
        under(["Supply current", "Unit"], [1200, 1.3, 1250], ["mA", "A", "mA"]),
        {"Supply current": [1200, 1300, 1250]},
        "mA",
        ["the reading in A was converted to mA (B3)"],
    ),
    "a row without its unit": Taken(
        under(["Gain", "Unit"], [20, 21, 22], ["dB", "dB", None]),
        {"Gain": [20, 21, np.nan]},
        lost={"B4": "no unit beside the reading, in C4"},
    ),
    "the unit in brackets above": Taken(
        under(["Output power"], [12.3, 12.4, 12.5], above=[["Trace Data:(Unit:dBm)"]]),
        {"Output power": [12.3, 12.4, 12.5]},
        "dBm",
        ["stated in A1"],
    ),
    "units of both axes above": Taken(
        [["XUnit", "MHz"], ["YUnit", "dB"], [], ["Frequency", "Gain"], [2000, 20], [2100, 21]],
        {"Gain": [20, 21]},
        "dB",
    ),
    "a power of ten in the unit": Taken(
        under(["Supply voltage ripple [10^-3 V]"], [2, 3, 4]),
        {"Supply voltage ripple": [0.002, 0.003, 0.004]},
        said={"column B": "supply_ripple"},
        words=["every reading was multiplied by 0.001 to be in V"],
    ),
    "a factor that the person settles": Taken(
        under(["I (x20 A)"], [0.1, 0.2, 0.3]),
        {"I": [2, 4, 6]},
        "A",
        ["every reading was multiplied by 20 to be in A"],
        said={"column B": "supply_current in 20 A"},
    ),
    "shift-key spellings with one meaning": Taken(
        [["f (Mhz)", "Gain (DB)"], [2000, 20]],
        {"Gain": [20]},
        "dB",
    ),
    "overflow marks of instruments": Taken(
        under(["Gain (dB)"], [20, "OVLD", 9.91e37]),
        {"Gain": [20, np.nan, np.nan]},
        lost={"B3": "overload of the instrument", "B4": "a placeholder of the instrument"},
    ),
    "a trace that was never swept": Taken(
        under(["Gain (dB)", "NF (dB)"], [20, 21, 22], [-2147.48, -2147.48, -2147.48]),
        {"Gain": [20, 21, 22]},
        words=["column C was never swept: -2147.48 in all 3 rows"],
    ),
    "a column of dashes": Taken(
        under(["Gain (dB)", "NF (dB)"], [20, 21, 22], ["---", "---", "---"]),
        {"Gain": [20, 21, 22]},
        words=["column C was never swept: '---' in all 3 rows"],
    ),
    "a slipped decimal": Taken(
        under(["Gain (dB)"], [20.1, 2.02, 20.3]),
        {"Gain": [20.1, 2.02, 20.3]},
        words=["B3: 2.02 dB stands beside 20.1 (B2) and 20.3 (B4)", "a slipped decimal"],
    ),
    "a sign that slipped": Taken(
        under(["Gain (dB)"], [20.1, -20.2, 20.3]),
        {"Gain": [20.1, -20.2, 20.3]},
        words=["of the other sign"],
    ),
    "a floor among readings": Taken(
        under(["Gain (dB)"], [20.1, -200, 20.3]),
        {"Gain": [20.1, -200, 20.3]},
        words=["a floor, or a mark of the instrument?"],
    ),
    "watts that cannot be": Taken(
        under(["Output power (W)"], [2, 0, -0.1]),
        {"Output power": [2, 0, np.nan]},
        words=["a reading is 0 W (row 3)"],
        lost={"B4": "cannot be negative"},
    ),
    "formatted data of a network analyser": Taken(
        under(
            ["Formatted Data"],
            [20, 21, 22],
            above=[["Meas Type", "S21"], ["IFBW", "10 kHz"], ["Format", "Log Mag"]],
        ),
        {"Formatted Data": [20, 21, 22]},
        "dB",
        ["S21 as Log Mag, stated in B3"],
    ),
    "the same columns with a phase": Taken(
        under(
            ["Formatted Data"],
            [170, -175, -160],
            above=[["Meas Type", "S21"], ["IFBW", "10 kHz"], ["Format", "Phase"]],
        ),
        {"Formatted Data": [170, -175, -160]},
        "deg",
        ["phase, in deg"],
    ),
    "a magnitude and a phase of one parameter": Taken(
        under(["S21(DB)", "S21(DEG)"], [20, 21, 22], [170, -175, -160]),
        {"S21": [20, 21, 22], "S21 (C)": [170, -175, -160]},
        words=["gain, in dB", "phase, in deg"],
    ),
    "the offset of a power meter": Taken(
        under(["Output power (dBm)"], [20, 21, 22], above=[["Offset", "20 dB"]]),
        {"Output power": [20, 21, 22]},
        words=["corrected already, by what the file says: Offset 20 dB"],
    ),
    "the attenuator of the analyser": Taken(
        under(
            ["EIRP (dBm)"], [40, 41, 42], above=[["RBW", "1 MHz"], ["Ref", "0 dBm"], ["Attenuation", "20 dB"]]
        ),
        {"EIRP": [40, 41, 42]},
        words=["B3: Attenuation = 20 dB"],
    ),
    "a row without its bandwidth": Taken(
        [["f (MHz)", "Spurious (dBm)", "RBW"], [100, -60, "100 kHz"], [200, -61, None]],
        {"Spurious (in 100000 Hz)": [-60, np.nan], "Spurious": [np.nan, -61]},
    ),
    "limits that are no numbers alone": Taken(
        [["f (GHz)", "Gain (dB)", "Limit", "Verdict"], [28, 20, "≥ 19 dB", "met"]],
        {"Gain": [20]},
    ),
    "a factor that is said to be in": Taken(
        under(["EIRP (dBm)"], [40, 41, 42], above=[["Scale factor", 0.1], ["Scale", "10 dB/div"]]),
        {"EIRP": [40, 41, 42]},
        said={"scaled": "yes"},
        words=["the readings are taken as they stand"],
    ),
    "peaks that cannot be": Taken(
        [
            ["Peak list"],
            ["Scanned range", "30 MHz to 1 GHz (floor -85 dBm)"],
            [],
            ["No", "Frequency (MHz)", "Spurious (dBm)"],
            [1, 2000, -60],
            [2, 100, -90],
        ],
        {"Spurious": [-60, -90, -np.inf]},
        words=[
            "scanned from 30 MHz to 1 GHz down to -85 dBm",
            "a peak lies outside what was scanned (row 5)",
            "a peak lies under the floor (row 6)",
        ],
    ),
    "the plane of a cut": Taken(
        [["Cut: phi = 90 deg"], ["Angle (deg)", "Gain (dBi)"], [0, 20], [1, 19.9]],
        {"Gain": [20, 19.9]},
        words=["phi = 90 deg for all rows", "theta in deg"],
    ),
    "a date of an American instrument": Taken(
        under(
            ["Gain (dB)"],
            [20, 21, 22],
            above=[["Date", "10/20/2023 3:27:51 PM"], ["Cal due", "2026-05-01"], ["Analyzer", "A1"]],
        ),
        {"Gain": [20, 21, 22]},
        words=["date: 10/20/2023 3:27:51 PM", "A1"],
    ),
}

ASKED = {
    "a power density by its product": Asked(under(["Gain (mW/cm*cm)"], [1, 2, 3]), "B1", "Gain in mW/cm²"),
    "a factor above the table": Asked(
        under(["EIRP (dBm)"], [400, 401, 402], above=[["Scale factor", 0.1]]), "B1", "Scale factor: 0.1"
    ),
    "a factor in the title": Asked(
        under(["EIRP (dBm)"], [400, 401, 402], above=[["All levels x 0.1 dBm"]]),
        "A3:B6",
        "hold 'x 0.1 dBm' already",
    ),
    "readings relative to their peak": Asked(
        under(["Gain (dB)"], [0, -1, -2], above=[["Normalised to peak: 32.1 dBi"]]),
        "A1",
        "Normalised to peak",
    ),
    "a floor without its unit": Asked(
        [
            ["Peak list"],
            ["Scanned range", "30 MHz to 1 GHz"],
            ["Noise floor", -85],
            [],
            ["No", "Frequency (MHz)", "Spurious (dBm)"],
            [1, 100, -60],
        ],
        "B2",
        "the floor of the scan, '-85' has no unit",
    ),
    "a ratio of voltages under a gain": Asked(
        under(["Gain (V/V)"], [10, 11, 12]), "B1", "V/V is a ratio of amplitudes, Gain is one of powers"
    ),
    "a unit above and another in the header": Asked(
        under(["Output power (dBW)"], [1, 2, 3], above=[["YUnit", "dBm"]]), "B3", "says dBW, B1 says dBm"
    ),
    "an axis with two units": Asked(
        [["XUnit", "Hz"], [], ["Frequency (MHz)", "Gain (dB)"], [2000, 20]], "A3", "says MHz, B1 says Hz"
    ),
    "a frequency above in milli": Asked(
        [["Frequency", "2000 mHz"], [], ["Vdd (V)", "Gain (dB)"], [5, 20]], "B1", "differ by nine decades"
    ),
    "decibels of nothing": Asked(under(["Gain [dBX]"], [1, 2, 3]), "B1", "unit 'dBX' is not known"),
    "milli or mega": Asked(
        [["f (mHz)", "Gain (dB)"], [2000, 20]], "A1", "mHz and MHz differ by nine decades"
    ),
    "mega or milli": Asked(under(["Output power (MW)"], [1, 2, 3]), "B1", "MW and mW differ by nine decades"),
    "a factor with two directions": Asked(
        under(["Supply current (x20 A)"], [0.1, 0.2, 0.3]),
        "B1",
        "does not say whether readings are to be multiplied",
    ),
    "a factor behind the unit": Asked(under(["EIRP (dBm/10)"], [321, 322, 323]), "B1", "'/10' in the header"),
    "a unit column with two kinds": Asked(
        under(["Gain", "Unit"], [20, 21, 22], ["dB", "dBm", "dB"]),
        "B1",
        "the unit column C1 holds different units",
    ),
    "a phase under a gain": Asked(
        under(["Gain (dB)"], [170, -175, -160], above=[["Meas Type", "S21"], ["Format", "Phase"]]),
        "B4",
        "gain, in dB, but the file says a phase",
    ),
    "formatted data of nothing": Asked(
        under(["Formatted Data"], [1, 2, 3], above=[["Format", "Log Mag"]]),
        "B3",
        "of which parameter it does not say",
    ),
    "whose serial number": Asked(
        under(
            ["Gain (dB)"],
            [1, 2, 3],
            above=[["Model", "E1"], ["Serial Number", "MY1"], ["RBW", "1 kHz"], ["Span", "1 MHz"]],
        ),
        "",
        "a test must say which item it was on",
        said={"block": "LNA"},
    ),
    "direction cosines in degrees": Asked(
        [["u", "v", "Gain (dBi)"], [10, 20, 20]],
        "",
        "u = 10, v = 20 is no direction",
        said={**SAID, "directions": "u/v"},
    ),
    "an order of axes that nobody knows": Asked(
        [["Az (deg)", "El (deg)", "Gain (dBi)"], [10, 20, 20]],
        "",
        "'az/el' is no frame",
        said={**SAID, "directions": "az/el"},
    ),
    "limits that may be statistics": Asked(
        under(["Gain (dB)", "Min", "P/F"], [20, 21, 22], [19, 19, 19], ["P", "P", "P"]),
        "C1",
        "'Min' may mean",
    ),
    "a scan that runs downwards": Asked(
        [
            ["Peak list"],
            ["Scanned range", "1 GHz to 30 MHz"],
            [],
            ["No", "Frequency (MHz)", "Spurious (dBm)"],
            [1, 100, -60],
        ],
        "B2",
        "runs downwards",
    ),
}


def read(path: Path, rows: Rows, said: Mapping[str, str]) -> MeasuredTable:
    stated = {**SAID, **said} if "block" not in said else dict(said)
    return one_table(book(path / "a.xlsx", rows), stated=stated)


def told(table: MeasuredTable) -> str:
    """All that is said about a table and its columns."""
    lines = [*table.notes, *table.unused, *(one.message for one in table.findings)]
    lines += [f"{one.cell} {one.meaning} {one.reason}" for one in table.recognised]
    return "\n".join(lines)


@pytest.mark.parametrize("name", TAKEN)
def test_what_is_taken(tmp_path: Path, name: str) -> None:
    case = TAKEN[name]
    table = taken(read(tmp_path, case.rows, case.said))
    assert table.document is not None and table.columns is not None
    assert set(table.columns.values) == set(case.values)
    for column, expected in case.values.items():
        np.testing.assert_allclose(low(table, column), expected, rtol=1e-6)
    assert not case.unit or {one.unit for one in table.document.values} == {case.unit}
    assert all(words in told(table) for words in case.words), told(table)
    found = rejected(table)
    assert set(found) == set(case.lost), found
    assert all(words in found[cell] for cell, words in case.lost.items()), found


@pytest.mark.parametrize("name", ASKED)
def test_what_is_asked(tmp_path: Path, name: str) -> None:
    case = ASKED[name]
    table = read(tmp_path, case.rows, case.said)
    lines = questions(table).splitlines()
    assert any(line.startswith(f"{case.cell}:") and case.words in line for line in lines), lines
    assert all(one.remedy for one in table.questions)


def test_there_are_enough_of_them() -> None:
    assert len(TAKEN) + len(ASKED) >= 25


def test_a_proposal_never_holds_one_unit_against_those_beside_the_readings(tmp_path: Path) -> None:
    """A mapping made of a file with units in its cells reads another such file by its own units."""

    rows = under(["Supply current", "Unit"], [1200, 1.3, 1250], ["mA", "A", "mA"])
    proposal = measure(book(tmp_path / "a.xlsx", rows)).proposal
    again = under(["Supply current", "Unit"], [1.2, 1300, 1.25], ["A", "mA", "A"])
    table = taken(one_table(book(tmp_path / "b.xlsx", again), mapping=proposal))
    assert table.document is not None and table.document.values[0].unit == "A"
    assert low(table, "Supply current") == [1.2, 1.3, 1.25]


def test_a_proposal_does_not_hold_fast_what_only_this_file_says(tmp_path: Path) -> None:
    """The same layout holds a magnitude in one file and a phase in the next; an unused trace may be used tomorrow."""

    head = [["Meas Type", "S21"], ["IFBW", "10 kHz"], ["Format", "Log Mag"]]
    proposal = measure(
        book(tmp_path / "a.xlsx", under(["Formatted Data"], [20, 21, 22], above=head))
    ).proposal
    phase = under(["Formatted Data"], [170, -175, 1], above=[*head[:2], ["Format", "Phase"]])
    table = taken(one_table(book(tmp_path / "b.xlsx", phase), mapping=proposal))
    assert table.document is not None and table.document.values[0].quantity.parameter == "phase"
    idle = under(["Gain (dB)", "NF (dB)"], [20, 21, 22], [-999, -999, -999])
    proposal = measure(book(tmp_path / "c.xlsx", idle)).proposal
    swept = under(["Gain (dB)", "NF (dB)"], [20, 21, 22], [1.5, 1.6, 1.7])
    table = taken(one_table(book(tmp_path / "d.xlsx", swept), mapping=proposal))
    assert low(table, "NF") == [1.5, 1.6, 1.7]


def test_a_unit_column_is_not_an_item(tmp_path: Path) -> None:
    rows = under(["Gain", "Unit"], [20, 21, 22], ["dB", "dB", "dB"])
    roles = {one.header: one.role for one in read(tmp_path, rows, {}).recognised}
    assert roles["Unit"] is Role.NOT_READ
