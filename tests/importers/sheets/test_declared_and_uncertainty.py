"""The sheets of declared values, of the uncertainty register and of the project's own parameters."""

from __future__ import annotations

from datetime import date, datetime
from pathlib import Path
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from specflow.model.declared import DeclaredValue, UncertaintyEntry
from specflow.model.draft import Draft
from specflow.model.finding import Finding, Severity
from specflow.model.parameter import Better, Parameter
from specflow.model.requirement import Requirement
from tests.builders import a_block, a_snapshot, read_sheets

LINE = {"ID": "U-1", "Set-up": "Range A", "Parameter": "eirp"}


def only(draft: Draft) -> Any:
    assert not draft.findings, draft.findings
    (document,) = draft.documents
    return document


def rejected(draft: Draft) -> Finding:
    (finding,) = [one for one in draft.findings if one.severity is Severity.ERROR]
    assert not draft.documents
    return finding


def test_declared_values_and_uncertainties_are_said_back(tmp_path: Path) -> None:
    line = LINE | {"Uncertainty": "0,8 dB", "k": "2", "Frequency from": "27.5 GHz", "Level to": "45 dBm"}
    draft = read_sheets(
        tmp_path,
        declared_values=[{"Name": "P_rated", "Value": "19,5", "Unit": "dBm", "Variant": "M"}],
        uncertainty=[line],
    )
    assert draft.echoes == {
        "P_rated": "P_rated is 19.5 dBm for M",
        "U-1": "EIRP on Range A: u = 0.4 dB (k = 1), frequency from 27.5 GHz, level to 45 dBm",
    }


@pytest.mark.parametrize(
    "cells",
    [{"Value": "38 dBm"}, {"Value": 38, "Unit": "dBm"}, {"Value [dBm]": 38}, {"Value": "38", "Unit": "dBm"}],
)
def test_a_declared_value_has_its_unit_with_it_beside_it_or_in_the_header(
    tmp_path: Path, cells: dict[str, Any]
) -> None:
    value = only(read_sheets(tmp_path, declared_values=[{"Name": "P_rated"} | cells]))
    assert isinstance(value, DeclaredValue)
    assert (value.id, value.name, value.value, value.unit) == ("P_rated", "P_rated", 38.0, "dBm")


def test_a_declared_value_with_everything(tmp_path: Path) -> None:
    row = {
        "ID": "D-1",
        "Name": "P_rated",
        "Value": "38 dBm",
        "Date": datetime(2026, 3, 31),
        "By": "RF",
        "Variant": "M",
    }
    value = only(read_sheets(tmp_path, declared_values=[row]))
    assert (value.id, value.declared_on, value.declared_by, value.applies_to) == (
        "D-1",
        date(2026, 3, 31),
        "RF",
        "M",
    )


@pytest.mark.parametrize(
    ("cells", "words"),
    [
        ({"Value": 38}, "38 has no unit"),
        ({"Value": "38 dBmm"}, "dBmm"),
        ({"Value": None}, "Value is empty"),
        ({"Value": "NaN", "Unit": "dBm"}, "NaN"),
        ({"Name": "P rated", "Value": "38 dBm"}, "cannot be used in a limit"),
        ({"Value": "38 dBm", "Date": 45000}, "not a date"),
    ],
)
def test_a_declared_value_that_cannot_be_read_is_one_finding(
    tmp_path: Path, cells: dict[str, Any], words: str
) -> None:
    finding = rejected(read_sheets(tmp_path, declared_values=[{"Name": "P_rated"} | cells]))
    assert words in finding.message
    assert finding.remedy


def test_one_name_has_one_value_for_each_variant(tmp_path: Path) -> None:
    rows = [
        {"ID": "D-1", "Name": "P_rated", "Value": "38 dBm", "Applies to": "maritime"},
        {"ID": "D-2", "Name": "P_rated", "Value": "35 dBm", "Applies to": "river"},
        {"ID": "D-3", "Name": "P_rated", "Value": "33 dBm", "Applies to": "River"},
    ]
    draft = read_sheets(tmp_path, declared_values=rows)
    (finding,) = draft.findings
    assert finding.message == "P_rated is declared already, by D-2 as 35 dBm"
    assert len(draft.documents) == 2


@pytest.mark.parametrize(
    ("cells", "standard"),
    [
        ({"Uncertainty": "0.8 dB", "k": "k=2"}, 0.4),
        ({"Uncertainty": "0.8 dB", "Coverage factor": 2}, 0.4),
        ({"Uncertainty": "± 0.9 dB (k=3)"}, 0.3),
        ({"Uncertainty": "U = 0.8 dB, k = 2"}, 0.4),
        ({"Uncertainty": "u = 0.4 dB"}, 0.4),
        ({"Uncertainty": "0.4 dB", "k": 1}, 0.4),
    ],
)
def test_an_uncertainty_is_kept_as_standard_uncertainty(
    tmp_path: Path, cells: dict[str, Any], standard: float
) -> None:
    draft = read_sheets(tmp_path, uncertainty_register=[LINE | cells])
    entry = only(draft)
    assert isinstance(entry, UncertaintyEntry)
    assert entry.standard_uncertainty == pytest.approx(standard, rel=1e-12)
    assert (entry.unit, entry.parameter, entry.set_up) == ("dB", "eirp", "Range A")


@settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(
    expanded=st.decimals(min_value="0.01", max_value=9, places=2),
    k=st.decimals(min_value=1, max_value=4, places=2),
)
def test_expanded_uncertainty_is_divided_by_its_coverage_factor(
    tmp_path: Path, expanded: Any, k: Any
) -> None:
    entry = only(read_sheets(tmp_path, uncertainty=[LINE | {"Uncertainty": f"{expanded} dB", "k": f"k={k}"}]))
    assert entry.standard_uncertainty == pytest.approx(float(expanded) / float(k), rel=1e-12)


def test_ranges_are_kept_in_hertz_and_in_one_level_unit(tmp_path: Path) -> None:
    row = LINE | {
        "Uncertainty": "0.8 dB (k=2)",
        "Frequency from": "27.5 GHz",
        "Frequency to": "30 GHz",
        "Level from": "1 mW",
        "Level to": "45 dBm",
        "Residual": "-60 dBm",
    }
    entry = only(read_sheets(tmp_path, uncertainty=[row]))
    assert (entry.frequency_from_hz, entry.frequency_to_hz) == (27.5e9, 30e9)
    assert entry.level_unit == "mW"
    assert (entry.level_from, entry.level_to) == (1.0, pytest.approx(10**4.5, rel=1e-9))
    assert (entry.residual, entry.residual_unit) == (-60.0, "dBm")


@pytest.mark.parametrize(
    ("cells", "words"),
    [
        ({"Uncertainty": "0.8 dB"}, "without its coverage factor k says nothing"),
        ({"Uncertainty": "0.8 dB", "k": None}, "without its coverage factor k says nothing"),
        ({"Uncertainty": "0.8 dB", "k": "two"}, "no coverage factor"),
        ({"Uncertainty": "0 dB", "k": 2}, "cannot be"),
        ({"Uncertainty": "0.8 GHz", "k": 2}, "GHz"),
        ({"Uncertainty": "0.8 dBm", "k": 2}, "dBm"),
        ({"Uncertainty": 0.8, "k": 2}, "no unit"),
        ({"Uncertainty": "0.8 dB", "k": 2, "Frequency from": "3 dB"}, "dB"),
        ({"Uncertainty": "0.8 dB", "k": 2, "Frequency from": 27.5}, "no unit"),
    ],
)
def test_an_uncertainty_that_cannot_be_read_is_one_finding(
    tmp_path: Path, cells: dict[str, Any], words: str
) -> None:
    finding = rejected(read_sheets(tmp_path, uncertainty=[LINE | cells]))
    assert words in finding.message
    assert finding.remedy


def test_a_parameter_of_the_project_serves_the_requirements_of_the_same_workbook(tmp_path: Path) -> None:
    draft = read_sheets(
        tmp_path,
        a_snapshot(a_block("UT")),
        parameters=[
            {
                "Key": "beam_table_load_time",
                "Unit": "us",
                "Better": "lower",
                "Aliases": "table load; load time",
            }
        ],
        requirements=[{"ID": "R-1", "Block": "UT", "Parameter": "Table load", "Limit": "20 µs"}],
    )
    assert not draft.findings
    parameter = next(one for one in draft.documents if isinstance(one, Parameter))
    assert (parameter.unit, parameter.better, parameter.aliases) == (
        "µs",
        Better.LOWER,
        ("table load", "load time"),
    )
    requirement = next(one for one in draft.documents if isinstance(one, Requirement))
    assert requirement.quantity.parameter == "beam_table_load_time"


def test_a_parameter_that_replaces_a_shipped_one_is_reported(tmp_path: Path) -> None:
    draft = read_sheets(tmp_path, parameters=[{"Key": "eirp", "Unit": "dBW", "Better": "higher"}])
    assert [one.rule for one in draft.findings] == ["workbook-replaces-parameter"]
    assert len(draft.documents) == 1


def test_a_parameter_with_an_unknown_unit_is_refused(tmp_path: Path) -> None:
    finding = rejected(read_sheets(tmp_path, parameters=[{"Key": "x", "Unit": "dBq", "Better": "lower"}]))
    assert "dBq" in finding.message
