"""Slipped decimals are told; resonances, nulls, band edges, steps and spectra full of lines are not."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.typing import NDArray

from specflow.importers.measured.slips import Slip, _candidates, _is_even, find_slips
from specflow.importers.measurements import read_measurements
from specflow.model.columns import Columns, TextColumn
from specflow.parameters import load_dictionary
from tests.builders import a_block, a_snapshot, an_item
from tests.importers.measured.make import book, measure
from tests.importers.measured.test_published_tables import OWN_PARAMETERS
from tests.published import BESIDE, DATA

Floats = NDArray[np.float64]


def slips(
    values: Floats, unit: str = "dB", items: list[str] | None = None, axis: Floats | None = None
) -> list[Slip]:
    along = np.arange(len(values), dtype=float) if axis is None else axis
    named = TextColumn.of(items or ["1"] * len(values))
    return find_slips(np.asarray(values, float), unit, Columns(len(values), {"frequency": along}), named)


@pytest.mark.parametrize(
    ("values", "unit", "place", "words"),
    [
        ([20.1, 2.02, 20.3, 20.2], "dB", 1, "1/10"),
        ([20.1, 20.3, 202.0, 20.2], "dB", 2, "10 times"),
        ([1.2, 1.3, 1200, 1.25, 1.3], "W", 2, "1000 times"),
        ([30, 30.1, 0.2, 30.1, 30], "dBm", 2, "30 dB off"),
        ([20, 20.2, -20.1, 20.3, 20], "dB", 2, "the other sign"),
        ([20.1, -200, 20.3, 20.2], "dB", 1, "a floor, or a mark"),
        ([-60, -61, -6.1, -60, -62, -61, -60, -59], "dB", 2, "1/10"),
    ],
)
def test_a_slip_is_told_with_its_neighbours(values: list[float], unit: str, place: int, words: str) -> None:
    (found,) = slips(np.array(values), unit)
    assert found.place == place and words in found.words and len(found.neighbours) == 2


def test_an_item_off_the_rest_at_like_conditions() -> None:
    axis = np.repeat([1.0, 2.0], 5)
    values = np.array([20.1, 20.2, 20.3, 2.01, 20.2, 30.1, 30.2, 30.3, 30.1, 30.2])
    (found,) = slips(values, items=list("abcde") * 2, axis=axis)
    assert found.place == 3


def test_items_of_two_readings_each_are_compared_together() -> None:
    values = np.array([45.1, 45.3, 45.2, 0.448])
    (found,) = slips(values, "dBW", items=["1", "1", "2", "2"])
    assert found.place == 3 and "100" in found.words


@pytest.mark.parametrize(
    "values",
    [
        -10 * np.log10(1 + 1e4 / (1 + ((np.linspace(0, 10, 1001) - 5) / 0.01) ** 2)),  # a notch of one sample
        20
        * np.log10(
            np.abs(np.sinc(8 * np.sin(np.radians(np.linspace(-90, 90, 181))))) + 1e-12
        ),  # a pattern's nulls
        np.where(np.abs(np.linspace(0, 10, 1001) - 5) < 1, -0.3, -60.0),  # band edges
        np.repeat([0.5, 1.0, 2.0, 4.0, 8.0, 16.0], 5),  # an attenuator in steps
        np.geomspace(1e-3, 1e3, 60),  # a level in a linear unit over six decades
        np.concatenate([np.linspace(-180, 180, 37), np.linspace(-180, 180, 37)]),
    ],
)
def test_what_is_smooth_steep_or_stepped_is_no_slip(values: Floats) -> None:
    assert slips(values) == []


def test_a_phase_that_wraps_is_no_slip() -> None:
    assert slips(np.array([170.0, 176.0, -178.0, 179.0, -176.0, -170.0]), "deg") == []


@given(st.integers(0, 10_000))
def test_lines_in_a_spectrum_are_no_slips(seed: int) -> None:
    chance = np.random.default_rng(seed)
    spectrum = chance.normal(-100, 1.5, 1001)
    spectrum[chance.integers(0, 1001, 3)] = chance.uniform(-90, -5, 3)
    assert slips(spectrum, "dBm") == []


@pytest.mark.parametrize(
    "name",
    [
        "digitiser_gain.csv",
        "spillover_vs_zenith_a.dat",
        "hot_cold_if_power.dat",
        "thermistor_mount_vs_temp.csv",
        "sa_zero_hz_nul.CSV",
        "sa_three_trace.CSV",
        "bench_s21_mag_phase.csv",
        "field_scan_sections.csv",
        "monopole_scan_sections.csv",
    ],
)
def test_no_alarm_on_published_files(name: str) -> None:
    """Measured and simulated files of others: a slip in one of them would be news to its origin."""
    path = DATA / name if (DATA / name).exists() else BESIDE / name
    mapping = (DATA / "mappings" / name).with_suffix(".toml")
    if not path.exists() or not mapping.exists():
        pytest.skip(f"{name} may not be copied into the tests")
    snapshot = a_snapshot(a_block(), an_item(), *OWN_PARAMETERS)
    read = read_measurements(
        path, snapshot, load_dictionary(OWN_PARAMETERS), mapping=mapping.read_text(encoding="utf-8"),
        stated={"block": "LNA", "item": "LNA-1"},
    )  # fmt: skip
    assert [one.message for one in read.findings if one.rule == "attach-looks-slipped"] == []


def test_the_finding_names_the_cells_and_changes_nothing(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Gain (dB)"], *([27 + step / 10, 20.0 if step != 7 else 2.0] for step in range(12))]
    found = measure(book(tmp_path / "a.xlsx", rows))
    (finding,) = [one for one in found.findings if one.rule == "attach-looks-slipped"]
    assert "data!B9: 2 dB stands beside 20 (B8) and 20 (B10)" in finding.message
    assert finding.origin is not None and (finding.origin.row, finding.origin.column) == (9, 2)
    assert found.tables[0].columns is not None and found.tables[0].columns.values["Gain"].low[7] == 2.0
    assert found.tables[0].rejected == ()


def test_many_in_one_column_are_counted(tmp_path: Path) -> None:
    values = np.full(400, 20.0)
    values[20:400:60] = 2.0
    rows = [["f (GHz)", "Gain (dB)"], *([27 + step / 100, value] for step, value in enumerate(values))]
    found = [one.message for one in measure(book(tmp_path / "a.xlsx", rows)).findings]
    assert len(found) == 6 and "2 more readings look like a slip" in found[-1]


@given(
    st.lists(st.floats(1.0, 8.0), min_size=3, max_size=12)
    | st.lists(st.floats(-60, -20), min_size=3, max_size=12)
    | st.lists(st.sampled_from([100.0, 200.0, 590.0, 1000.0]), min_size=3, max_size=12),
    st.booleans(),
)
def test_readings_that_are_passed_over_at_once_have_no_candidate(
    readings: list[float], is_level: bool
) -> None:
    run = np.array(readings)
    if _is_even(run, is_level):
        assert _candidates(run, is_level) == []
