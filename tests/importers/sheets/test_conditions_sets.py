"""The sheet of conditions sets: rows of a set, listed points, exceptions."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import Any

import pytest

from specflow.conditions import expand, point_words
from specflow.model.conditions import Combination, ConditionsSet, MatchingRule, Need
from specflow.model.finding import Finding, Severity
from tests.builders import read_sheets

FREQUENCY = {"ID": "CS-1", "Dimension": "frequency", "Required": "27.5, 28.75, 30 GHz"}
TEMPERATURE = {"ID": "CS-1", "Dimension": "temperature_ambient", "Required": "-30, 55 °C"}


def only_set(tmp_path: Path, rows: Sequence[dict[str, Any]]) -> ConditionsSet:
    draft = read_sheets(tmp_path, conditions=rows)
    assert not draft.findings, draft.findings
    (found,) = draft.documents
    assert isinstance(found, ConditionsSet)
    return found


def rejected(tmp_path: Path, rows: Sequence[dict[str, Any]]) -> Finding:
    draft = read_sheets(tmp_path, conditions=rows)
    (finding,) = [one for one in draft.findings if one.severity is Severity.ERROR]
    assert not draft.documents
    return finding


def test_rows_with_one_id_are_one_set(tmp_path: Path) -> None:
    found = only_set(
        tmp_path,
        [
            FREQUENCY | {"Title": "Transmit", "Setting tolerance": "10 MHz", "Source": "SPEC (invented)"},
            TEMPERATURE | {"ID": "cs-1"},
            {"ID": None, "Dimension": "humidity", "Required": "not required"},
        ],
    )
    assert (found.id, found.title, found.source) == ("CS-1", "Transmit", "SPEC (invented)")
    assert [one.name for one in found.dimensions] == ["frequency", "temperature_ambient", "humidity"]
    assert found.dimensions[0].tolerance == 0.01
    assert found.dimensions[2].need is Need.NOT_REQUIRED
    assert expand(found).size == 6


def test_an_empty_id_continues_the_set_above_and_an_id_ends_it(tmp_path: Path) -> None:
    draft = read_sheets(
        tmp_path, conditions=[FREQUENCY, TEMPERATURE | {"ID": None}, FREQUENCY | {"ID": "CS-2"}]
    )
    sizes = {one.id: len(one.dimensions) for one in draft.documents if isinstance(one, ConditionsSet)}
    assert sizes == {"CS-1": 2, "CS-2": 1}


def test_unit_tolerance_and_rule_may_have_columns_of_their_own(tmp_path: Path) -> None:
    row = {"ID": "CS-1", "Dimension": "input_level", "Required": "-40; -30", "Unit": "dBm"}
    found = only_set(tmp_path, [row | {"Setting tolerance": "0.5 dB", "Matching": "at or beyond"}])
    dimension = found.dimensions[0]
    assert (dimension.unit, dimension.tolerance, dimension.rule) == ("dBm", 0.5, MatchingRule.OUTWARD)


def test_a_number_typed_as_a_number_is_a_required_value(tmp_path: Path) -> None:
    found = only_set(tmp_path, [{"ID": "CS-1", "Dimension": "supply_voltage", "Required": 12, "Unit": "V"}])
    assert found.dimensions[0].values == (12.0,)


def test_corners_need_no_step(tmp_path: Path) -> None:
    found = only_set(
        tmp_path,
        [
            FREQUENCY | {"Combination": "corners", "Required": "27.5 to 30 GHz"},
            TEMPERATURE | {"Required": "-30 to 55 °C"},
        ],
    )
    assert found.combination is Combination.CORNERS
    assert expand(found).size == 4


def test_listed_points_are_written_one_a_row(tmp_path: Path) -> None:
    names = "frequency; temperature_ambient"
    found = only_set(
        tmp_path,
        [
            {
                "ID": "CS-1",
                "Dimension": names,
                "Required": "27.5 GHz; -30 °C",
                "Setting tolerance": "10 MHz; 3 K",
            },
            {"ID": "CS-1", "Dimension": names, "Required": "28.75 GHz; 20 °C"},
            {"ID": "CS-1", "Dimension": names, "Required": "30 GHz; 55 °C"},
        ],
    )
    points = expand(found)
    assert [point_words(points, point) for point in range(points.size)] == [
        "27.5 GHz, -30 °C ambient",
        "28.75 GHz, +20 °C ambient",
        "30 GHz, +55 °C ambient",
    ]
    assert [one.tolerance for one in found.dimensions] == [0.01, 3.0]


def test_listed_rows_may_also_be_said_by_the_combination(tmp_path: Path) -> None:
    found = only_set(
        tmp_path,
        [FREQUENCY | {"Combination": "listed rows", "Required": "27.5, 30 GHz"}, TEMPERATURE],
    )
    assert expand(found).size == 2


def test_listed_points_combine_with_the_other_dimensions(tmp_path: Path) -> None:
    names = "frequency; temperature_ambient"
    found = only_set(
        tmp_path,
        [
            {"ID": "CS-1", "Dimension": names, "Required": "27.5 GHz; -30 °C"},
            {"ID": "CS-1", "Dimension": names, "Required": "30 GHz; 55 °C"},
            {"ID": "CS-1", "Dimension": "polarisation", "Required": "H, V"},
        ],
    )
    assert expand(found).size == 4


def test_exceptions_take_points_away_and_keep_their_reason(tmp_path: Path) -> None:
    found = only_set(
        tmp_path,
        [
            FREQUENCY,
            TEMPERATURE | {"Except": "frequency = 30 GHz and temperature_ambient = 55 °C because not used"},
        ],
    )
    assert expand(found).size == 5
    assert found.exclusions[0].reason == "not used"


@pytest.mark.parametrize(
    ("row", "cell", "words"),
    [
        ({"Required": "27.5 to 30 GHz"}, "C2", "states no step"),
        ({"Required": "27.5, 30"}, "C2", "no unit"),
        ({"Required": None}, "C2", "Required is empty"),
        ({"Dimension": "temperature", "Required": "20 °C"}, "C2", "does not say which temperature"),
        ({"Required": "3 dBm"}, "C2", "frequency cannot be in dBm"),
        ({"Combination": "some"}, "D2", "no way to combine"),
        ({"Except": "phi = 3 deg"}, "D2", "which the set does not have"),
        ({"Setting tolerance": "wide"}, "C2", "wide"),
    ],
)
def test_what_cannot_be_read_is_one_finding_at_its_cell(
    tmp_path: Path, row: dict[str, Any], cell: str, words: str
) -> None:
    finding = rejected(tmp_path, [FREQUENCY | row])
    assert words in finding.message
    assert finding.origin is not None
    assert finding.origin.cell == cell
    assert finding.remedy


def test_a_list_with_too_few_values_is_refused(tmp_path: Path) -> None:
    row = {"ID": "CS-1", "Dimension": "frequency; temperature_ambient", "Required": "27.5 GHz"}
    assert "2 dimensions and 1 values" in rejected(tmp_path, [row]).message


def test_one_dimension_twice_is_refused(tmp_path: Path) -> None:
    assert "appears twice" in rejected(tmp_path, [FREQUENCY, FREQUENCY]).message


def test_two_titles_of_one_set_contradict_each_other(tmp_path: Path) -> None:
    finding = rejected(tmp_path, [FREQUENCY | {"Title": "One"}, TEMPERATURE | {"Title": "Two"}])
    assert "'Two' contradicts 'One' in D2" in finding.message


def test_a_set_given_on_two_sheets_is_refused(tmp_path: Path) -> None:
    draft = read_sheets(tmp_path, conditions=[FREQUENCY], condition_sets=[TEMPERATURE])
    (finding,) = [one for one in draft.findings if one.severity is Severity.ERROR]
    assert "given already in Conditions A2" in finding.message


def test_corners_say_which_listed_values_they_pass_over(tmp_path: Path) -> None:
    rows = [
        FREQUENCY | {"Combination": "corners", "Required": "71, 76, 81, 86 GHz"},
        TEMPERATURE | {"Required": "-33, 23, 55 °C"},
    ]
    words = read_sheets(tmp_path, conditions=rows).echoes["CS-1"]
    assert words.startswith("4 required points: ")
    assert words.endswith(
        "(corners: lowest and highest of each; no point at 76, 81 GHz nor at +23 °C ambient)"
    )


def test_corners_of_two_values_each_pass_over_nothing(tmp_path: Path) -> None:
    rows = [FREQUENCY | {"Combination": "corners", "Required": "27.5 to 30 GHz"}, TEMPERATURE]
    assert (
        read_sheets(tmp_path, conditions=rows)
        .echoes["CS-1"]
        .endswith("(corners: lowest and highest of each)")
    )


def test_a_step_in_corners_is_refused_at_its_own_cell(tmp_path: Path) -> None:
    stepped = TEMPERATURE | {"Required": "-30 to 55 °C step 5 K"}
    finding = rejected(tmp_path, [FREQUENCY | {"Combination": "corners"}, stepped])
    assert finding.message == (
        "corners use the ends of the range of temperature_ambient only, but it states a step"
    )
    assert finding.remedy == "drop the step, or combine as all combinations"
    assert finding.origin is not None and finding.origin.cell == "C3"


def test_parts_that_do_not_go_with_the_dimensions_name_their_column(tmp_path: Path) -> None:
    row = {"ID": "CS-1", "Dimension": "frequency; bandwidth", "Required": "28 GHz; 250 MHz"}
    finding = rejected(tmp_path, [row | {"Setting tolerance": "1 MHz"}])
    assert finding.message == "Setting tolerance has 1 part for 2 dimensions"
