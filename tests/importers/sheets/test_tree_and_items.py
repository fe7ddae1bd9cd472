"""The sheets of blocks, items and condition maps."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from specflow.model.block import Block, HardwareType, Item, Maturity, Plane, PlanePath, Tier
from specflow.model.conditions import ConditionMap
from specflow.model.draft import Draft
from specflow.model.finding import Finding, Severity
from tests.builders import a_block, a_snapshot, read_sheets

UT = {"ID": "UT", "Name": "Invented terminal"}


def found(draft: Draft, code: str) -> Any:
    assert not draft.findings, draft.findings
    return next(one for one in draft.documents if getattr(one, "id", "") == code)


def rejected(draft: Draft) -> Finding:
    (finding,) = [one for one in draft.findings if one.severity is Severity.ERROR]
    return finding


def test_a_block_without_a_tier_has_that_of_its_place_in_the_tree(tmp_path: Path) -> None:
    rows = [
        UT,
        {"ID": "TX", "Parent": "UT"},
        {"ID": "PA", "Parent": "tx"},
        {"ID": "LO", "Parent": "UT", "Tier": "Assembly"},
    ]
    draft = read_sheets(tmp_path, blocks=rows)
    tiers = {one.id: one.tier for one in draft.documents if isinstance(one, Block)}
    assert tiers == {"UT": Tier.SYSTEM, "TX": Tier.ASSEMBLY, "PA": Tier.BLOCK, "LO": Tier.ASSEMBLY}


def test_blocks_stand_in_the_order_of_their_rows_below_each_parent(tmp_path: Path) -> None:
    rows = [UT, {"ID": "TX", "Parent": "UT"}, {"ID": "PA", "Parent": "TX"}, {"ID": "RX", "Parent": "UT"}]
    draft = read_sheets(tmp_path, blocks=rows)
    orders = {one.id: one.order for one in draft.documents if isinstance(one, Block)}
    assert orders == {"UT": 1, "TX": 1, "PA": 1, "RX": 2}


def test_a_block_with_everything(tmp_path: Path) -> None:
    row = {
        "Block ID": "PA",
        "Title": "Output stage",
        "Part of": "UT",
        "Qty": 4,
        "Position": 3,
        "Ports": "PA input; PA output (EIRP)",
        "Paths": "PA input -> PA output: 24 dB, u 0.15 dB",
        "Maturity": "datasheet limit",
        "Part no.": 1042,
    }
    block = found(read_sheets(tmp_path, a_snapshot(a_block("UT")), blocks=[row]), "PA")
    assert (block.name, block.parent, block.quantity, block.order) == ("Output stage", "UT", 4, 3)
    assert block.planes == (Plane(name="PA input"), Plane(name="PA output", convention="EIRP"))
    assert block.paths == (
        PlanePath(start="PA input", end="PA output", gain_db=24, standard_uncertainty_db=0.15),
    )
    assert (block.maturity, block.part_number) == (Maturity.DATASHEET_LIMIT, "1042")


@pytest.mark.parametrize(
    ("cells", "words"),
    [
        ({"Parent": "UX"}, "no block UX"),
        ({"Quantity": 2.5}, "2.5 is not a whole number from 1"),
        ({"Quantity": "four"}, "'four' is not a number"),
        ({"Maturity": "ripe"}, "none of the words"),
        ({"Plane paths": "A -> B: 3 dB"}, "its standard uncertainty u"),
        ({"Plane paths": "A -> B: 3 dBm, u 0.1 dB"}, "is not in dB"),
        ({"ID": "A\x85B"}, "control character"),
    ],
)
def test_a_block_that_cannot_be_read_is_one_finding(
    tmp_path: Path, cells: dict[str, Any], words: str
) -> None:
    finding = rejected(read_sheets(tmp_path, blocks=[{"ID": "PA"} | cells]))
    assert words in finding.message
    assert finding.remedy


def test_items_take_the_id_as_serial_and_the_spelling_of_their_block(tmp_path: Path) -> None:
    rows = [
        {"ID": "T-1", "Block": "ut", "Hardware type": "production", "HW rev": "B", "FW": 1.4},
        {"ID": "T-2", "Block": "UT", "S/N": 7, "Built into": "T-1"},
    ]
    draft = read_sheets(tmp_path, blocks=[UT], items=rows)
    first, second = found(draft, "T-1"), found(draft, "T-2")
    assert isinstance(first, Item)
    assert (first.serial, first.block, first.hardware_type) == ("T-1", "UT", HardwareType.PRODUCTION)
    assert (first.hardware_revision, first.firmware) == ("B", "1.4")
    assert (second.serial, second.built_into) == ("7", "T-1")


def test_an_item_built_into_itself_is_a_circle(tmp_path: Path) -> None:
    draft = read_sheets(tmp_path, blocks=[UT], items=[{"ID": "T-1", "Block": "UT", "Built into": "T-1"}])
    assert "T-1 -> T-1" in rejected(draft).message


def test_formulas_with_one_id_are_one_map(tmp_path: Path) -> None:
    rows = [
        {"ID": "CM-1", "Block": "UT", "Formula": "temperature_baseplate = temperature_ambient + 18 K"},
        {"Formula": "if_frequency = frequency - 20 GHz"},
    ]
    draft = read_sheets(tmp_path, blocks=[UT], condition_maps=rows)
    found_map = found(draft, "CM-1")
    assert isinstance(found_map, ConditionMap)
    assert found_map.block == "UT"
    assert [entry.target for entry in found_map.entries] == ["temperature_baseplate", "if_frequency"]
    assert "temperature_baseplate = temperature_ambient + 18 K" in draft.echoes["CM-1"]


@pytest.mark.parametrize(
    ("rows", "words"),
    [
        ([{"ID": "CM-1", "Formula": "temperature_baseplate of ambient"}], ""),
        ([{"ID": "CM-1", "Formula": None, "Block": "UT"}], "Formula is empty"),
        ([{"ID": "CM-1", "Block": "UX", "Formula": "if_frequency = frequency - 20 GHz"}], "no block UX"),
        ([{"ID": "CM-1", "Formula": "if_frequency = frequency - 20 GHz"}] * 2, "defined twice"),
    ],
)
def test_a_map_that_cannot_be_read_is_one_finding(
    tmp_path: Path, rows: list[dict[str, Any]], words: str
) -> None:
    draft = read_sheets(tmp_path, blocks=[UT], condition_maps=rows)
    assert words in rejected(draft).message
    assert not any(isinstance(one, ConditionMap) for one in draft.documents)


def condition_map(tmp_path: Path, formula: str, **sheets: Any) -> Draft:
    return read_sheets(tmp_path, condition_maps=[{"ID": "CM-1", "Formula": formula}], **sheets)


@pytest.mark.parametrize(
    ("formula", "says"),
    [
        ("temperature_case = temperature_ambient + 20 GHz", "GHz"),
        (
            "temperature_case = 5 V",
            "the formula gives temperature_case in V, but it is in °C",
        ),
        ("if_frequency = frequency - temperature_ambient", "°C"),
        ("supply_voltage = 2 * frequency", "the formula gives supply_voltage in Hz, but it is in V"),
    ],
)
def test_a_condition_map_whose_units_do_not_go_together_is_refused(
    tmp_path: Path, formula: str, says: str
) -> None:
    draft = condition_map(tmp_path, formula)
    (finding,) = draft.findings
    assert finding.severity is Severity.ERROR
    assert says in finding.message and finding.remedy
    assert finding.origin is not None and finding.origin.cell == "B2"
    assert not draft.documents


@pytest.mark.parametrize(
    "formula",
    [
        "temperature_case = temperature_ambient + 18 K",
        "frequency = frequency - 24.5 GHz",
        "if_frequency = frequency - lo_frequency",
        "input_level [dBm] = power_level + 20 dB",
        "supply_voltage = 5 V",
    ],
)
def test_condition_maps_whose_units_go_together_are_taken(tmp_path: Path, formula: str) -> None:
    draft = condition_map(tmp_path, formula)
    assert len(draft.documents) == 1
    assert not [one for one in draft.findings if one.severity is Severity.ERROR]


def test_a_condition_map_that_reads_what_nobody_states_says_so(tmp_path: Path) -> None:
    draft = condition_map(tmp_path, "temperature_case = temperature_ambeint + 18 K")
    (finding,) = draft.findings
    assert (finding.rule, finding.severity) == ("workbook-unknown-input", Severity.WARNING)
    assert finding.message.startswith("temperature_ambeint is no known condition")
    assert "nearest: temperature_ambient" in finding.message


def test_a_condition_of_ones_own_is_known_to_a_condition_map_by_its_conditions_set(tmp_path: Path) -> None:
    own = [{"ID": "CS-1", "Dimension": "fan_pressure", "Required": "20, 40 Pa"}]
    draft = condition_map(tmp_path, "fan_pressure = fan_pressure - 5 Pa", conditions=own)
    assert not draft.findings
