"""System conditions told as a block's own, and back."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.conditions import expand, map_columns, match, parse_map_entry, proves, unmap_columns
from specflow.errors import ConditionsError
from specflow.model.columns import Columns, Spans
from specflow.model.conditions import ConditionMap
from tests.conditions.make import a_set, everything, rows


def a_map(*lines: str) -> ConditionMap:
    return ConditionMap(id="CM-1", entries=tuple(parse_map_entry(line) for line in lines))


def test_the_four_usual_entries() -> None:
    # Frequency translation IF = RF - LO, temperature rise, drive level = level + gain in front, regulated supply.
    mapped = map_columns(
        a_map(
            "if_frequency = frequency - 24.5 GHz",
            "temperature_baseplate = temperature_ambient + 18 K",
            "input_level = power_level - 32 dB",
            "supply_voltage = 5 V",
        ),
        rows(
            frequency=[27.5, 30],
            temperature_ambient=[-40, 55],
            power_level=[40, None],
            supply_voltage=[24, 30],
        ),
    )
    assert mapped.numeric["if_frequency"] == pytest.approx([3.0, 5.5])
    assert mapped.numeric["temperature_baseplate"].tolist() == [-22, 73]
    assert mapped.numeric["input_level"].tolist()[0] == 8 and np.isnan(mapped.numeric["input_level"][1])
    assert mapped.numeric["supply_voltage"].tolist() == [5, 5]
    assert (mapped.units["if_frequency"], mapped.units["temperature_baseplate"]) == ("GHz", "°C")
    assert (mapped.units["input_level"], mapped.units["supply_voltage"]) == ("dBm", "V")
    assert mapped.numeric["frequency"].tolist() == [27.5, 30], "what the map does not speak of passes through"


def test_high_side_mixing_and_two_sources() -> None:
    mapped = map_columns(
        a_map("if_frequency = lo_frequency - frequency"),
        rows({"lo_frequency": "MHz"}, lo_frequency=[32000.0], frequency=[28.5]),
    )
    assert mapped.units["if_frequency"] == "MHz"
    assert mapped.numeric["if_frequency"].tolist() == pytest.approx([3500])


def test_factors() -> None:
    mapped = map_columns(a_map("lo_frequency = 0.25 * frequency + 1 GHz"), rows(frequency=[28.0]))
    assert mapped.numeric["lo_frequency"].tolist() == [8.0]


def test_offsets_are_converted() -> None:
    mapped = map_columns(a_map("if_frequency [MHz] = frequency - 24.5 GHz"), rows(frequency=[27.5]))
    assert mapped.numeric["if_frequency"].tolist() == pytest.approx([3000])
    assert mapped.units["if_frequency"] == "MHz"
    kelvin = rows({"temperature_ambient": "K"}, temperature_ambient=[300.0])
    mapped = map_columns(a_map("temperature_baseplate [°C] = temperature_ambient + 18 K"), kelvin)
    assert mapped.numeric["temperature_baseplate"].tolist() == pytest.approx([44.85])


def test_a_target_without_its_source_never_keeps_the_systems_value() -> None:
    mapped = map_columns(a_map("frequency = lo_frequency - 1 GHz"), rows(frequency=[28.0]))
    assert "frequency" not in mapped.numeric


def test_aliases_of_dimensions_are_understood() -> None:
    entry = parse_map_entry("T_case = Tamb + 12 K")
    assert (entry.target, entry.terms[0].dimension) == ("temperature_case", "temperature_ambient")


@pytest.mark.parametrize(
    ("line", "complaint"),
    [
        ("temperature_baseplate", "no line"),
        ("= frequency", "no line"),
        ("a = b * c", "neither"),
        ("a = b +", "nothing behind"),
        ("a = b + 3 GHz - 2 MHz", "adds"),
        ("a = sin(b)", "neither"),
    ],
)
def test_lines_that_are_not_linear_are_refused(line: str, complaint: str) -> None:
    with pytest.raises(ConditionsError, match=complaint):
        parse_map_entry(line)


def test_units_that_do_not_fit_are_refused() -> None:
    with pytest.raises(ConditionsError):
        map_columns(a_map("if_frequency = frequency - 3 dB"), rows(frequency=[28.0]))
    with pytest.raises(ConditionsError):
        map_columns(a_map("input_level [dBm] = frequency"), rows(frequency=[28.0]))
    with pytest.raises(ConditionsError):
        map_columns(a_map("if_frequency = frequency - 3"), rows(frequency=[28.0]))


def test_a_blocks_evidence_serves_system_points_through_the_map() -> None:
    # Required at +55 degC ambient; measured on the bench at a baseplate of +73 degC.
    points = expand(a_set("temperature_ambient: -40, 55 °C ± 2 K", "frequency: 27.5, 30 GHz ± 10 MHz"))
    bench = rows(temperature_baseplate=[73.5, -22, 80], frequency=[3.0, 5.5, 3.0])
    assert len(match(points, bench).record) == 0
    told = unmap_columns(
        a_map("temperature_baseplate = temperature_ambient + 18 K", "frequency = frequency - 24.5 GHz"), bench
    )
    matching = match(points, told)
    assert dict(zip(matching.record.tolist(), matching.point.tolist(), strict=True)) == {1: 1, 0: 2}
    assert proves(points, matching, everything(bench)).tolist() == [False, True, True, False]


def test_what_a_row_states_itself_is_kept() -> None:
    bench = rows(temperature_baseplate=[73, 73], temperature_ambient=[20, None])
    told = unmap_columns(a_map("temperature_baseplate = temperature_ambient + 18 K"), bench)
    assert told.numeric["temperature_ambient"].tolist() == [20, 55]


def test_a_constant_implies_nothing_about_the_system() -> None:
    told = unmap_columns(a_map("supply_voltage = 5 V"), rows(supply_voltage=[5.0]))
    assert told.numeric["supply_voltage"].tolist() == [5.0]
    assert told.names == ("supply_voltage",)


finite = st.floats(-1e3, 1e3, allow_nan=False)


@given(st.lists(finite, min_size=1, max_size=5), st.floats(-50, 50), st.sampled_from([1.0, -1.0, 0.5, 4.0]))
def test_back_and_forth(values: list[float], offset: float, factor: float) -> None:
    condition_map = a_map(f"temperature_baseplate = {factor} * temperature_ambient + {abs(offset):.6f} K")
    there = map_columns(condition_map, rows(temperature_ambient=values))
    block = rows(temperature_baseplate=there.numeric["temperature_baseplate"].tolist())
    back = unmap_columns(condition_map, block)
    assert back.numeric["temperature_ambient"] == pytest.approx(values, abs=1e-9)


pieces = st.sampled_from(
    ["a", "frequency", "Tamb", "+", "-", "*", "=", "3", "18 K", "2.5 GHz", "1e-3", "[", "]", "dBm", ""]
)


@given(st.lists(pieces, max_size=8))
def test_whatever_line_is_typed_is_read_or_refused_in_words(typed: list[str]) -> None:
    try:
        assert parse_map_entry(" ".join(typed)).target
    except ConditionsError as error:
        assert str(error)


def test_ranges_that_rows_speak_for_are_taken_to_the_system_too() -> None:
    """A value derived over the block's IF speaks for the RF range; with a falling factor the ends change places."""
    spans = Spans(np.array([1.0]), np.array([2.0]), np.array([0.1]), "GHz", undivided=np.array([True]))
    columns = Columns(
        1,
        {"lo_frequency": np.array([20.0]), "temperature_ambient": np.array([25.0])},
        units={"lo_frequency": "GHz", "temperature_ambient": "°C"},
        spans={"if_frequency": spans, "offset": spans},
    )
    for formula, low, high in (
        ("if_frequency = frequency - lo_frequency", 21.0, 22.0),
        ("if_frequency = lo_frequency - frequency", 18.0, 19.0),
    ):
        entry = parse_map_entry(formula)
        found = unmap_columns(ConditionMap(id="M", entries=(entry,)), columns).spans
        one = found["frequency"]
        assert (one.low[0], one.high[0], one.unit) == (low, high, "GHz")
        assert one.gap[0] == pytest.approx(0.1)
        assert one.undivided is not None and one.undivided[0]
        assert found["offset"] is spans  # what no entry speaks of is kept as it is
