"""Whole budgets against chains that others published: open worksheets of a small-satellite radio, and textbooks.

The worksheets are read from ``tests/data`` (origin and licence in its README). Numbers of textbooks are recalled from
memory, as said at each; all of them recompute.
"""

from __future__ import annotations

import itertools
import math
from pathlib import Path
from typing import Any

import pytest
from openpyxl import load_workbook
from openpyxl.worksheet.worksheet import Worksheet

from specflow.budgets import evaluate_budget, shares_of
from specflow.budgets.result import BudgetResult
from specflow.parameters import load_dictionary
from tests.budgets.chains import a_chain, project_of
from tests.builders import a_conditions_set, a_dimension, at_least, at_most

DICTIONARY = load_dictionary()
DATA = Path(__file__).parents[1] / "data"


def sheet(file: str, name: str) -> Worksheet:
    found = load_workbook(DATA / file, data_only=True)[name]
    assert isinstance(found, Worksheet)
    return found


def evaluated(
    *stages: dict[str, Any], parameter: str, unit: str, kelvin: float | None = None, **fields: Any
) -> BudgetResult:
    """Return a chain evaluated, at one physical temperature where one is given."""
    more = []
    if kelvin is not None:
        more = [a_conditions_set("CS", a_dimension("temperature_ambient", "K", values=(kelvin,)))]
        fields["conditions"] = "CS"
    budget = a_chain(*stages, parameter=parameter, **fields)
    limit = at_most(1e9, unit) if unit != "dB/K" else at_least(-999, unit)
    return evaluate_budget(budget, project_of(budget, *more, limit=limit), DICTIONARY)


def satellite_receiver() -> tuple[list[dict[str, Any]], Worksheet]:
    """Return the twelve positions of the worksheet "General": gains, losses written negative, noise figures in dB."""
    general = sheet("rx_noise_temp_chain.xlsx", "General")
    rows = [
        row for row in general.iter_rows(min_row=6, max_row=26, max_col=13) if isinstance(row[0].value, int)
    ]
    assert len(rows) == 12
    stages = []
    for row in rows:
        stage = {"block": f"S{row[0].value}", "noise_figure": float(str(row[4].value))}
        if isinstance(row[3].value, int | float):
            stage["gain"] = float(row[3].value)
        stages.append(stage)
    return stages, general


def beside(table: Worksheet, words: str) -> float:
    """Return the number to the right of some words."""
    for row in table.iter_rows(max_row=40):
        for cell, following in itertools.pairwise(row):
            if isinstance(cell.value, str) and cell.value.strip() == words:
                return float(str(following.value))
    raise AssertionError(words)


def column(general: Worksheet, letter: str) -> list[float]:
    first = next(row for row in range(1, 30) if general[f"A{row}"].value == 1)
    return [float(str(general[f"{letter}{first + row}"].value)) for row in range(12)]


def test_a_satellite_receiver_of_twelve_positions() -> None:
    """Noise factor so far (column M), parts of the temperature (column K), 304.50 K with the antenna's 140 K."""
    stages, general = satellite_receiver()
    found = evaluated(*stages, parameter="system_noise_temperature", unit="K", noise_source=140.0)
    system = found.of("system_noise_temperature")
    assert system.result[0] == pytest.approx(304.5017588416508, rel=1e-12)
    factors = [(kelvin - 140.0) / 290.0 + 1.0 for kelvin in system.cumulative[:, 0]]
    assert factors == pytest.approx(column(general, "M"), rel=1e-12)
    (shares,) = shares_of(found)
    assert (shares.shares[:, 0] * 304.5017588416508).tolist() == pytest.approx(column(general, "K"), rel=1e-9)


def test_the_same_receiver_with_its_feed_at_300_k() -> None:
    """Worksheet "SME": what is in front of the amplifier is at 300 K, and the sum stands at the amplifier: 233.25 K.

    Losses are taken at their physical temperature, not at the 290 K of noise figures.
    """
    stages, _ = satellite_receiver()
    for stage in stages[:2]:
        stage |= {"passive": True, "insertion_loss": -stage.pop("gain")}
        stage.pop("noise_figure")
    found = evaluated(
        *stages, parameter="system_noise_temperature", unit="K", kelvin=300.0, noise_source=140.0
    )
    through = 10 ** (-(0.353 + 0.85) / 10)
    stated = beside(sheet("rx_noise_temp_chain.xlsx", "SME"), "Ts (K):")
    assert stated == pytest.approx(233.248, abs=0.001)
    assert found.of("system_noise_temperature").result[0] * through == pytest.approx(stated, rel=1e-9)


def test_moving_the_plane_from_the_antenna_to_the_amplifier_leaves_g_over_t() -> None:
    """Worksheet "King": 230.83 K at the amplifier is 304.50 K at the antenna less the 1.203 dB between them."""
    stages, _ = satellite_receiver()
    antenna = {"block": "ANT", "antenna_gain": 14.0}
    at_face = evaluated(antenna, *stages, parameter="g_over_t", unit="dB/K", noise_source=140.0)
    behind = {"block": "ANT", "antenna_gain": 14.0 - 0.353 - 0.85}
    source = 176.2919376277669  # the worksheet's temperature of antenna and feed at the amplifier
    at_amplifier = evaluated(behind, *stages[2:], parameter="g_over_t", unit="dB/K", noise_source=source)
    merit = 14.0 - 10 * math.log10(304.5017588416508)
    assert at_face.of("g_over_t").result[0] == pytest.approx(merit, rel=1e-12)
    assert at_amplifier.of("g_over_t").result[0] == pytest.approx(merit, rel=1e-9)
    assert merit == pytest.approx(14.0 - 1.203 - 10 * math.log10(230.8286999121407), rel=1e-9)


@pytest.mark.parametrize("row", [11, 12])
def test_dc_power_of_a_beacon_transmitter(row: int) -> None:
    """Worksheet "Power Budget": the amplifier gives 0.1 W (or 1 W) from what it draws at 5 V, the rest draws 2.7 V."""
    table = sheet("radio_dc_power_modes.xlsx", "Power Budget")
    amplifier, rest, whole = (float(str(table[f"{letter}{row}"].value)) / 1e3 for letter in "FGH")
    output = {11: 0.1, 12: 1.0}[row]
    found = evaluated(
        {"block": "RADIO", "gain": 0.0, "dc_power": rest},
        {"block": "PA", "gain": 20.0, "drain_efficiency": 100 * output / amplifier},
        parameter="dc_power",
        unit="W",
        input_level=10 * math.log10(output * 1e3) - 20.0,
    ).of("dc_power")
    assert found.result[0] == pytest.approx(whole, rel=1e-9)
    assert found.cumulative[:, 0].tolist() == pytest.approx([rest, whole], rel=1e-9)


def test_an_earth_station_behind_a_feeder() -> None:
    """50 K of antenna noise, 1 dB of feeder at 290 K, a receiver of 50 K: 149.3 K at the receiver's input.

    G. Maral and M. Bousquet, Satellite Communications Systems, chapter on link analysis (example recalled from memory).
    """
    found = evaluated(
        {"block": "FEED", "insertion_loss": 1.0, "passive": True},
        {"block": "RX", "gain": 40.0, "noise_temperature": 50.0},
        parameter="system_noise_temperature",
        unit="K",
        kelvin=290.0,
        noise_source=50.0,
    )
    at_receiver = found.of("system_noise_temperature").result[0] / 10**0.1
    assert at_receiver == pytest.approx(149.3, abs=0.1)  # 149.36 unrounded


@pytest.mark.parametrize(("mixer_gain", "expected"), [(0.0, 82.5), (-10.0, 127.5)])
def test_a_low_noise_receiver_at_4_ghz(mixer_gain: float, expected: float) -> None:
    """25 K in, amplifier 50 K and 23 dB, mixer 500 K, IF 1000 K; a mixer that loses 10 dB lets the IF through.

    T. Pratt, C. Bostian and J. Allnutt, Satellite Communications, examples on system noise temperature (recalled from
    memory; they round 23 dB to 200, hence the tolerance).
    """
    found = evaluated(
        {"block": "RF", "gain": 23.0, "noise_temperature": 50.0},
        {"block": "MIX", "gain": mixer_gain, "noise_temperature": 500.0},
        {"block": "IF", "gain": 30.0, "noise_temperature": 1000.0},
        parameter="system_noise_temperature",
        unit="K",
        noise_source=25.0,
    )
    assert found.of("system_noise_temperature").result[0] == pytest.approx(expected, abs=0.2)


def test_a_mixer_behind_an_amplifier_limits_the_intercept() -> None:
    """Amplifier 20 dB and IIP3 -10 dBm, mixer +4 dBm: referred to the input the mixer stands at -16 dBm and governs.

    B. Razavi, RF Microelectronics, chapter on basic concepts (example recalled from memory): 1/A² = 1/A1² + a1²/A2².
    """
    found = evaluated(
        {"block": "LNA", "gain": 20.0, "iip3": -10.0},
        {"block": "MIX", "gain": 10.0, "iip3": 4.0},
        parameter="iip3",
        unit="dBm",
    )
    by_hand = -10 * math.log10(1 / 0.1 + 100 / 10**0.4)
    assert found.of("iip3").result[0] == pytest.approx(by_hand) and by_hand == pytest.approx(-16.97, abs=0.01)
    (shares,) = shares_of(found)
    assert shares.shares[1, 0] == pytest.approx(0.799, abs=0.001)


def test_a_radio_telescope_receiver_counts_each_sideband_once() -> None:
    """Double-sideband receiver of 40 K: a line in one sideband sees 2·40 K and the sky in both, 2·(40 + 20) K.

    A. R. Kerr, M. J. Feldman and S.-K. Pan on receiver noise temperature (MMA memorandum 161, recalled from memory):
    T_SSB = 2·T_DSB for a mixer with equal sidebands.
    """
    mixer = {"block": "SIS", "gain": 0.0, "noise_temperature": 40.0, "image_rejection": 0.0}
    line = {**mixer, "more": {"noise_temperature": {"sideband": "DSB"}}}
    both = {name: value for name, value in mixer.items() if name != "image_rejection"}
    continuum = {**both, "more": {"noise_temperature": {"sideband": "both"}}}
    ask = {"parameter": "system_noise_temperature", "unit": "K", "noise_source": 20.0}
    assert evaluated(line, **ask).of("system_noise_temperature").result[0] == pytest.approx(120.0)
    assert evaluated(continuum, **ask).of("system_noise_temperature").result[0] == pytest.approx(60.0)
    filtered = {**line, "image_rejection": 60.0}  # what is kept off leaves a load at 290 K in its place
    assert evaluated(filtered, **ask).of("system_noise_temperature").result[0] == pytest.approx(
        390.0, abs=0.01
    )
