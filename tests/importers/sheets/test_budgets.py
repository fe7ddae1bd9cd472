"""The sheets Budgets and Budget lines: what is read, what is said back, what is refused."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest

from specflow.budgets import evaluate_budget
from specflow.importers.sheets.line_values import CellContext, read_line_value
from specflow.model.budget import Budget, Law
from specflow.model.budget_line import (
    ConditionTable,
    Constant,
    Distribution,
    Meaning,
    TouchstoneTrace,
    Trace,
    WordTable,
)
from specflow.model.draft import Draft
from specflow.parameters import load_dictionary
from tests.builders import a_snapshot, read_sheets

REQUIREMENT = {
    "ID": "R-1",
    "Title": "Noise figure",
    "Block": "SYS",
    "Parameter": "noise_figure",
    "Limit": "<= 3 dB",
    "Conditions": "CS",
    "Derived reason": "invented",
}
BLOCKS = [
    {"ID": "SYS", "Name": "System"},
    *({"ID": name, "Name": name, "Parent": "SYS"} for name in ("LNA", "FIL")),
]
CONDITIONS = [
    {"ID": "CS", "Dimension": "frequency", "Required": "18, 20 GHz"},
    {"ID": "CS", "Dimension": "temperature_ambient", "Required": "-25, 55 °C"},
]
MAPS = [{"ID": "CM", "Block": "LNA", "Formula": "temperature_baseplate = temperature_ambient + 18 K"}]
BUDGET = {"ID": "B-1", "Title": "Receive", "Requirements": "R-1", "Law": "cascade"}
LINES: list[dict[str, Any]] = [
    {
        "Budget": "B-1",
        "Position": 1,
        "Block": "LNA",
        "Parameter": "gain",
        "Value": "24 dB - 0.02 dB/K from 23 °C",
        "Tolerance": "± 0.5 dB",
        "Tolerance means": "limits",
        "Distribution": "uniform",
    },
    {
        "Parameter": "NF",
        "Value": "table frequency: 17.7 GHz 1.4; 20.2 GHz 1.6 dB linear",
        "Tolerance": "+0.3/-0.1",
    },
    {
        "Position": 2,
        "Block": "FIL",
        "Passive": "yes",
        "Parameter": "insertion_loss",
        "Value": 1.2,
        "Unit": "dB",
        "Tolerance": "0.2 dB",
        "Tolerance means": "2 sigma",
    },
]


def draft_of(
    folder: Path, budget: dict[str, Any] | None = None, lines: list[dict[str, Any]] | None = None
) -> Draft:
    return read_sheets(
        folder,
        requirements=[REQUIREMENT],
        blocks=BLOCKS,
        conditions=CONDITIONS,
        condition_maps=MAPS,
        budget_lines=LINES if lines is None else lines,  # before the budgets on purpose
        budgets=[BUDGET | (budget or {})],
    )


def budget_of(draft: Draft) -> Budget:
    assert [finding.message for finding in draft.findings if finding.severity == "error"] == []
    return next(one for one in draft.documents if isinstance(one, Budget))


def errors(draft: Draft) -> list[str]:
    return [finding.message for finding in draft.findings if finding.severity == "error"]


def test_a_budget_with_its_lines_is_read_and_evaluates(tmp_path: Path) -> None:
    draft = draft_of(tmp_path)
    budget = budget_of(draft)
    assert (budget.law, budget.quantity.parameter, budget.requirements) == (
        Law.CASCADE,
        "noise_figure",
        ("R-1",),
    )
    assert [(one.order, one.block, one.passive) for one in budget.positions] == [
        (1, "LNA", False),
        (2, "FIL", True),
    ]
    gain, noise, loss = budget.lines
    assert gain.value == Constant(value=24.0) and gain.tolerance is not None
    assert (gain.tolerance.meaning, gain.tolerance.distribution) == (Meaning.LIMITS, Distribution.UNIFORM)
    assert (gain.drifts[0].dimension, gain.drifts[0].slope) == ("temperature_baseplate", -0.02)
    assert noise.parameter == "noise_figure" and noise.tolerance is not None
    assert (noise.tolerance.plus, noise.tolerance.minus, noise.tolerance.meaning) == (0.3, 0.1, None)
    assert loss.tolerance is not None and (loss.tolerance.k, loss.tolerance.shape) == (
        2.0,
        Distribution.NORMAL,
    )
    snapshot = a_snapshot(*draft.documents)
    result = evaluate_budget(budget, snapshot, load_dictionary())
    assert result.of("noise_figure").result.shape == (4,)
    assert result.figures["gain"][0] == pytest.approx([24.6, 23.0, 24.6, 23.0])


def test_what_was_understood_is_said_back_in_words(tmp_path: Path) -> None:
    words = draft_of(tmp_path).echoes["B-1"]
    assert words.startswith("2 positions, 3 lines")
    assert (
        "LNA gain 24 dB, -0.02 dB/K of temperature_baseplate from 23 °C ± 0.5 dB (limits, uniform)" in words
    )
    assert "is read as by temperature_baseplate" in words
    assert "2 entries by frequency from 17.7 to 20.2 GHz, 1.4 to 1.6 dB, straight between" in words
    assert "drawn in dB" in words and "not said whether limits" in words and "(2 σ, normal)" in words
    assert "the tolerance +0.3/-0.1 is taken in dB" in words


def test_what_a_budget_states_besides(tmp_path: Path) -> None:
    budget = budget_of(
        draft_of(
            tmp_path,
            {
                "Quantity": "gain",
                "Conditions": "CS",
                "Input level": "-60 dBm",
                "Noise source": "150 K",
                "Noise bandwidth": "10 MHz",
                "Channel spacing": "12 MHz",
                "Distortion adds": "non-coherent",
                "Reserve": "noise_figure: 0.2 dB; gain: 1 dB",
                "Reserve held by": "Systems",
                "Correlations": "heat, supply: 0.5",
            },
        )
    )
    assert (budget.quantity.parameter, budget.input_level, budget.noise_source) == ("gain", -60.0, 150.0)
    assert (budget.bandwidth_hz, budget.intermodulation) == (10e6, "non-coherent")
    assert budget.channel_spacing_hz == 12e6
    assert [(one.parameter, one.amount, one.holder) for one in budget.reserves] == [
        ("noise_figure", 0.2, "Systems"),
        ("gain", 1.0, "Systems"),
    ]
    assert budget.correlations[0].coefficient == 0.5


def test_loading_the_budgets_without_their_lines_keeps_the_lines_that_the_project_has(tmp_path: Path) -> None:
    first = draft_of(tmp_path)
    again = read_sheets(tmp_path, a_snapshot(*first.documents), budgets=[BUDGET | {"Title": "Receive chain"}])
    budget = budget_of(again)
    assert budget.title == "Receive chain" and budget.lines == budget_of(first).lines
    lines = read_sheets(tmp_path, a_snapshot(*first.documents), budget_lines=LINES[:1])
    assert len(budget_of(lines).lines) == 1 and budget_of(lines).title == "Receive"


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"Block": "NOPE"}, "no block NOPE"),
        ({"Position": "first"}, "'first' is no position"),
        ({"Value": "24"}, "has no unit"),
        ({"Value": "about 24 dB"}, "no value of a budget line"),
        ({"Value": "table frequency: 17.7 GHz 23.5; 20.2 GHz 24.5 dB"}, "between its entries"),
        ({"Value": "table frequency: 20.2 GHz 23.5; 17.7 GHz 24.5 dB step"}, "list rising values"),
        ({"Value": "table temperature: 0 °C 23.5; 20 °C 24.5 dB step"}, "whose temperature"),
        ({"Value": "24 dB - 0.02 dB/K from 23 °C and more"}, "is not understood"),
        ({"Value": "touchstone none.s2p S21"}, "no such Touchstone file"),
        ({"Tolerance": "a little"}, "no tolerance"),
        ({"Tolerance means": "roughly"}, "neither limits nor k·σ"),
        ({"Tolerance means": "sigma"}, "how many σ"),
        ({"Tolerance": "", "Distribution": ""}, "there is no tolerance"),
        ({"Distribution": "normal"}, "has no limits"),
        ({"Parameter": "ip3"}, "ip3"),
        ({"Parameter": "NF DSB", "Value": "8 dB", "Sideband": "SSB"}, "says DSB, this column says SSB"),
        (
            {"Parameter": "noise figure (SSB)", "Value": "8 dB", "Sideband": "both"},
            "says SSB, this column says both",
        ),
        ({"N in parallel": 0}, "not a whole number from 1"),
        ({"Growth allowance": -0.5}, "is no allowance"),
    ],
)
def test_lines_that_are_refused(tmp_path: Path, change: dict[str, Any], words: str) -> None:
    draft = draft_of(tmp_path, lines=[LINES[0] | change])
    found = errors(draft)
    assert any(words in message for message in found), found
    assert all(finding.remedy and finding.origin for finding in draft.findings if finding.severity == "error")
    assert all(not budget.lines for budget in draft.documents if isinstance(budget, Budget))


def test_a_name_that_says_of_which_sidebands_a_noise_figure_is_counts(tmp_path: Path) -> None:
    lines = [LINES[0], LINES[1] | {"Parameter": "NF DSB"}, LINES[2]]
    assert budget_of(draft_of(tmp_path, lines=lines)).lines[1].sideband == "DSB"


def test_one_mistake_leaves_all_lines_of_the_budget_as_they_were(tmp_path: Path) -> None:
    first = draft_of(tmp_path)
    broken = [*LINES[:2], LINES[2] | {"Value": "x"}]
    again = read_sheets(tmp_path, a_snapshot(*first.documents), budget_lines=broken)
    assert errors(again) and not any(isinstance(one, Budget) for one in again.documents)


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"Law": "magic"}, "none of the words"),
        ({"Requirements": "R-9"}, "no requirement R-9"),
        ({"Reserve": "0.2 dB"}, "no holder"),
        ({"Correlations": "heat supply"}, "no correlation"),
        ({"Noise bandwidth": "10 dB"}, "dB"),
        ({"Input level": "-60"}, "no unit"),
        ({"Noise source": "-5 K"}, "a temperature below 0 K"),
        ({"Noise bandwidth": "0 Hz"}, "no bandwidth"),
        ({"Reserve": "-0.2 dB", "Reserve held by": "Systems"}, "a reserve is a positive amount"),
        ({"Correlations": "heat, supply: 1.5"}, "1.5 is no correlation coefficient"),
        ({"Correlations": "heat, Heat: 0.5"}, "fully correlated as they are"),
    ],
)
def test_budgets_that_are_refused(tmp_path: Path, change: dict[str, Any], words: str) -> None:
    found = errors(draft_of(tmp_path, change))
    assert any(words in message for message in found), found


def test_a_line_given_twice_is_refused_at_its_own_cell(tmp_path: Path) -> None:
    draft = draft_of(tmp_path, lines=[LINES[0], LINES[0]])
    (finding,) = [one for one in draft.findings if "is given above" in one.message]
    assert finding.origin is not None and finding.origin.row == 3


def test_a_position_is_described_once(tmp_path: Path) -> None:
    lines = [LINES[0] | {"N in parallel": 4}, LINES[1] | {"N in parallel": 8}]
    assert any("says 4 above" in message for message in errors(draft_of(tmp_path, lines=lines)))
    named = [LINES[0], LINES[2] | {"Position": 1}]
    assert any("position 1 is LNA above" in message for message in errors(draft_of(tmp_path, lines=named)))


def test_shapes_of_a_value_cell() -> None:
    context = CellContext()
    found = read_line_value("table by if_frequency: 2000 MHz: 8; 6 GHz: 7.2 dB step", context)
    assert isinstance(found.value, ConditionTable)
    assert (found.value.dimension, found.value.dimension_unit) == ("if_frequency", "MHz")
    assert (found.value.at, found.value.values, found.value.between) == ((2000.0, 6000.0), (8.0, 7.2), "step")
    power = read_line_value("table frequency: 1 GHz 10; 3 GHz 20 dB linear in power", context)
    assert isinstance(power.value, ConditionTable) and power.value.drawn_in == "linear"
    trace = read_line_value("trace T-12: Gain along frequency item LNA-1", CellContext(unit="dB"))
    assert trace.value == Trace(table="T-12", column="Gain", along="frequency", item="LNA-1")
    both = read_line_value(
        "24,5 dB + 0.5 dB/GHz of frequency from 18 GHz − 0.02 dB/K of temperature_baseplate from 23 °C "
        "between -40 °C and 85 °C",
        context,
    )
    assert both.value == Constant(value=24.5)
    assert [(one.dimension, one.slope, one.low, one.high) for one in both.drifts] == [
        ("frequency", 0.5, None, None),
        ("temperature_baseplate", -0.02, -40.0, 85.0),
    ]
    level = read_line_value("10 dBm - 0.02 dB/°C of temperature_case from 300 K", context)
    assert level.drifts[0].slope == pytest.approx(-0.02) and level.drifts[0].dimension_unit == "K"


def test_a_touchstone_entry_is_taken_over_with_the_digest_of_its_file(tmp_path: Path) -> None:
    skrf = pytest.importorskip("skrf")
    path = tmp_path / "lna.s2p"
    path.write_text("# GHz S DB R 50\n18 -20 0 20 10 -40 0 -15 0\n20 -20 0 22 10 -40 0 -15 0\n")
    value = read_line_value("touchstone lna.s2p S21 along frequency", CellContext(folder=tmp_path)).value
    assert isinstance(value, TouchstoneTrace) and len(value.sha256) == 64
    assert value.values_db == pytest.approx((20.0, 22.0))
    assert value.frequency_hz == pytest.approx(np.asarray(skrf.Network(str(path)).f))
    for entry, words in (("S31", "no S31"), ("S2", "no S2")):
        with pytest.raises(Exception, match=words):
            read_line_value(f"touchstone lna.s2p {entry}", CellContext(folder=tmp_path))
    (tmp_path / "bad.s2p").write_text("nothing of the kind")
    with pytest.raises(Exception, match="not readable"):
        read_line_value("touchstone bad.s2p S21", CellContext(folder=tmp_path))


def test_a_table_by_words_is_read_and_refused_where_it_is_none() -> None:
    context = CellContext()
    found = read_line_value("table gain_state: high = 20 dB; low = 5 dB", context)
    assert found.value == WordTable(dimension="gain_state", words=("high", "low"), values=(20.0, 5.0))
    assert found.unit == "dB"
    quoted = read_line_value("table by mode: 'high power' = 3; eco = 2.5", CellContext(unit="dB"))
    assert isinstance(quoted.value, WordTable) and quoted.value.words == ("high power", "eco")
    for text, words in (
        ("table mode: high = 20 dB; low 5 dB", "no table by words"),
        ("table mode: high = 20 dB; low = 5 %", "dB and %"),
        ("table mode: high = 20 dB; High = 5 dB", "twice"),
    ):
        with pytest.raises(Exception, match=words):
            read_line_value(text, context)
