"""Standing row by row, calibration, residuals, validated ranges, condition maps, hardware, stage and procedure."""

from __future__ import annotations

from datetime import date

import pytest

from specflow.conditions.maps import parse_map_entry
from specflow.model.block import HardwareType
from specflow.model.conditions import ConditionMap
from specflow.model.declared import UncertaintyEntry
from specflow.model.evidence import Equipment, FileKind, ItemChange
from specflow.model.parameter import Better
from specflow.model.requirement import Method, Stage
from specflow.model.verdict import Label, Standing
from tests.builders import (
    a_block,
    a_conditions_set,
    a_dimension,
    a_parameter,
    a_quantity,
    a_requirement,
    a_value_column,
    an_activity,
    an_evidence_file,
    an_evidence_table,
    an_item,
    at_most,
    some_columns,
    some_evidence,
)
from tests.verification.evaluating import status_of

CHANGE = ItemChange(id="C-1", block="LNA", effective=date(2026, 5, 10), description="new bias")


def test_dates_of_rows_decide_which_are_stale() -> None:
    dated = some_evidence(dates=["2026-05-09", "2026-05-10", "2026-05-11"])
    status = status_of(CHANGE, an_evidence_table(performed_on=None), T_1=dated)
    assert status.standing == {Standing.ACCEPTED: 2, Standing.STALE: 1}


def test_evidence_without_a_date_is_stale_once_its_subject_changed() -> None:
    undated = an_evidence_table(performed_on=None)
    assert status_of(undated, T_1=some_evidence()).label is Label.READY
    assert status_of(CHANGE, undated, T_1=some_evidence()).label is Label.REVERIFY


def test_a_change_after_the_day_of_judgement_does_not_count_yet() -> None:
    later = CHANGE.model_copy(update={"effective": date(2026, 7, 1)})
    assert status_of(later).label is Label.READY


@pytest.mark.parametrize(("aspect", "method", "label"), [
    ("model", Method.TEST, Label.READY),
    ("model", Method.ANALYSIS, Label.REVERIFY),
    ("calibration", Method.ANALYSIS, Label.READY),
    ("procedure", Method.TEST, Label.REVERIFY),
])  # fmt: skip
def test_a_change_touches_the_evidence_of_its_aspect(aspect: str, method: Method, label: Label) -> None:
    change = CHANGE.model_copy(update={"aspect": aspect})
    status = status_of(
        change, an_activity(method=method), an_evidence_table(method=method), T_1=some_evidence()
    )
    assert status.label is label


def test_an_instrument_out_of_calibration_on_the_day_makes_evidence_provisional() -> None:
    table = an_evidence_table(equipment=(Equipment(asset="PM-1", calibration_due=date(2026, 4, 30)),))
    status = status_of(table, T_1=some_evidence())
    assert status.standing == {Standing.PROVISIONAL: 3}
    assert any("PM-1 had run out" in remark for remark in status.remarks)
    due = an_evidence_table(equipment=(Equipment(asset="PM-1", calibration_due=date(2026, 5, 1)),))
    assert status_of(due, T_1=some_evidence()).label is Label.READY


def test_evidence_dated_after_the_day_of_judgement_is_provisional() -> None:
    status = status_of(an_evidence_table(performed_on="2026-06-02"), T_1=some_evidence())
    assert status.standing == {Standing.PROVISIONAL: 3}


def test_readings_near_the_residual_of_the_instrument_are_bounds() -> None:
    """A signal as strong as the residual reads 3.01 dB above it: 2.9 dB above is a bound, 3.1 dB is a value."""
    floor = UncertaintyEntry(
        id="U-1", set_up="ANALYSER", parameter="spurious", standard_uncertainty=0.5, unit="dB", residual=-90.0,
        residual_unit="dBm",
    )  # fmt: skip
    quantity = a_quantity("spurious")
    table = an_evidence_table(set_up="ANALYSER", values=(a_value_column("S", quantity=quantity, unit="dBm"),))
    readings = some_evidence({"S": [-87.1, -86.9, -60.0]})
    spurious = a_parameter("spurious", unit="dBm", better=Better.LOWER)
    status = status_of(
        a_requirement(quantity=quantity, limit=at_most(-50, "dBm")), floor, table, spurious, T_1=readings
    )
    low = status.activities[0].items["LNA-1"].value_low
    assert low.tolist() == [float("-inf"), -86.9, -60.0]
    assert status.k == 3


def test_results_outside_the_validated_range_of_their_model_decide_nothing() -> None:
    table = an_evidence_table(method=Method.ANALYSIS, simulation_validated="frequency <= 29 GHz")
    status = status_of(an_activity(method=Method.ANALYSIS), table, T_1=some_evidence())
    assert status.label is Label.INCONCLUSIVE
    assert status.k == 2
    stated = an_evidence_table(method=Method.ANALYSIS, simulation_validated="against breadboard 2")
    assert status_of(an_activity(method=Method.ANALYSIS), stated, T_1=some_evidence()).k == 3


def test_a_datasheet_is_no_test_of_this_item() -> None:
    sheet = an_evidence_file(kind=FileKind.DATASHEET)
    status = status_of(sheet)
    assert status.k == 0
    assert any("datasheet" in remark for remark in status.remarks)


def test_an_item_that_is_not_registered_is_taken_as_engineering_hardware() -> None:
    unknown = some_evidence(items="SN-77")
    assert status_of(T_1=unknown).k == 3
    assert status_of(an_activity(credit_from=HardwareType.QUALIFICATION), T_1=unknown).k == 0


def test_evidence_proves_activities_of_its_own_stage() -> None:
    early = an_evidence_table(stage=Stage.DEVELOPMENT)
    assert status_of(early, T_1=some_evidence()).k == 0
    assert status_of(early, an_activity(stage=Stage.DEVELOPMENT), T_1=some_evidence()).k == 3


def test_the_default_activity_that_nobody_planned_takes_any_stage_and_says_so() -> None:
    default = an_activity(planned=False)
    status = status_of(default, an_evidence_table(stage=Stage.DEVELOPMENT), T_1=some_evidence())
    assert status.k == 3
    assert any("nobody planned" in remark for remark in status.remarks)


def test_an_older_revision_of_the_procedure_is_stale() -> None:
    activity = an_activity(procedure="TP-1", procedure_revision="B")
    old = an_evidence_table(procedure="TP-1", procedure_revision="A")
    assert status_of(activity, old, T_1=some_evidence()).label is Label.REVERIFY
    new = an_evidence_table(procedure="TP-1", procedure_revision="B")
    assert status_of(activity, new, T_1=some_evidence()).label is Label.READY


def test_evidence_about_the_design_holds_for_every_item_and_items_stay_apart() -> None:
    nan = float("nan")
    simulated = an_evidence_table("T-2", method=Method.ANALYSIS)
    status = status_of(
        an_activity(method=Method.ANALYSIS),
        simulated,
        an_item("LNA-2"),
        T_1=some_evidence([21, nan, nan]),
        T_2=some_evidence([nan, 21, 21], items=[None, None, None]),
    )
    assert status.k == 3
    assert status.activities[0].shown_item == "LNA-1"


BASEPLATE = ConditionMap(
    id="M-1", block="LNA", entries=(parse_map_entry("temperature_baseplate = temperature_ambient + 18 K"),)
)


def test_a_blocks_own_conditions_serve_system_points_through_its_map() -> None:
    hot = a_conditions_set("CS", a_dimension("temperature_ambient", "°C", values=(67.0,), tolerance=1.0))
    recorded = some_columns({"temperature_baseplate": "°C"}, temperature_baseplate=[85.0])
    evidence = some_evidence([21.0], conditions=recorded)
    assert status_of(hot, T_1=evidence).k == 0
    assert status_of(hot, BASEPLATE, T_1=evidence).k == 1


def test_a_set_that_a_block_above_uses_is_in_system_terms() -> None:
    """frequency = frequency - 24.5 GHz: 5.5 GHz at the block serves 30 GHz of the system, where that is meant."""
    shift = ConditionMap(
        id="M-1", block="LNA", entries=(parse_map_entry("frequency = frequency - 24.5 GHz"),)
    )
    at_if = some_evidence([21.0, 21.0, 21.0], conditions=some_columns(frequency=[3.0, 4.25, 5.5]))
    blocks = a_block("SYS"), a_block(parent="SYS")
    system = a_requirement("R-0", block="SYS")
    assert status_of(*blocks, shift, T_1=at_if).k == 0
    assert status_of(*blocks, shift, system, T_1=at_if).k == 3
