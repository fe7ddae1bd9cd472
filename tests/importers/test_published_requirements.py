"""Published limits as requirements: parameters, identities, conditions sets and what stays text."""

from __future__ import annotations

from pathlib import Path

import pytest

from specflow.importers.published_limits import read_published_limits
from specflow.importers.published_requirements import PUBLISHED_FINDINGS, published_draft
from specflow.model.block import Tier
from specflow.model.conditions import ConditionsSet, MatchingRule
from specflow.model.draft import Draft
from specflow.model.finding import Severity
from specflow.model.parameter import Better, Parameter
from specflow.model.requirement import Activity, Requirement
from specflow.model.snapshot import Snapshot
from specflow.parameters import load_dictionary
from tests.builders import a_block, a_snapshot

HEADER = "id,standard,version,clause,parameter,bound,value,unit,conditions\n"
BLOCK = a_block("RADIO", tier=Tier.ASSEMBLY)


def draft(tmp_path: Path, rows: str, snapshot: Snapshot | None = None, prefix: str = "") -> Draft:
    path = tmp_path / "limits.csv"
    path.write_text(HEADER + rows, encoding="utf-8")
    known = snapshot or a_snapshot(BLOCK)
    return published_draft(
        read_published_limits(path),
        known,
        load_dictionary(known.all(Parameter)),
        block=BLOCK,
        prefix=prefix,
        file=str(path),
    )


def of(made: Draft, kind: type) -> list:  # type: ignore[type-arg]
    return [document for document in made.documents if isinstance(document, kind)]


def only(made: Draft) -> Requirement:
    (found,) = of(made, Requirement)
    assert isinstance(found, Requirement)
    return found


def test_a_row_becomes_a_requirement_with_its_source_and_a_default_activity(tmp_path: Path) -> None:
    made = draft(tmp_path, "R1,EN 1,V2,4.3,noise figure,max,3.20,dB,\n", prefix="EN-")
    found = only(made)
    assert (found.id, found.title, found.block, found.tier) == (
        "EN-R1",
        "noise figure",
        "RADIO",
        Tier.ASSEMBLY,
    )
    assert (found.source.document, found.source.issue, found.source.paragraph) == ("EN 1", "V2", "4.3")
    assert (found.quantity.parameter, found.limit.text, found.conditions) == (
        "noise_figure",
        "<= 3.20 dB",
        None,
    )
    assert found.origin is not None and found.origin.cell == "line 2"
    (activity,) = of(made, Activity)
    assert isinstance(activity, Activity)
    assert (activity.id, activity.planned) == ("EN-R1/A1", False)
    assert made.echoes["EN-R1"] == "Noise figure: at most 3.20 dB"


def test_conditions_that_select_become_dimensions_and_the_rest_stays_text(tmp_path: Path) -> None:
    conditions = "band=n257|n258;bw_MHz=50|100;env=normal;power_class=3;note=why, not;origin=regulatory"
    made = draft(tmp_path, f'R1,s,v,c,EIRP,min,22.4,dBm,"{conditions}"\n')
    (conditions_set,) = of(made, ConditionsSet)
    assert isinstance(conditions_set, ConditionsSet)
    assert {one.name: one.words or one.values for one in conditions_set.dimensions} == {
        "band": ("n257", "n258"),
        "channel_bandwidth": (50.0, 100.0),
        "environment": ("normal",),
        "power_class": (3.0,),
    }
    assert only(made).conditions == conditions_set.id == "CS-R1"
    assert only(made).note == "As published: note=why, not; origin=regulatory"
    assert "2 conditions kept as written" in made.findings[0].message


def test_limits_of_the_same_conditions_share_a_set(tmp_path: Path) -> None:
    rows = "R1,s,v,c,EIRP,min,3,dBm,band=a\nR2,s,v,c,TRP,max,4,dBm,band=a\nR3,s,v,c,TRP,max,5,dBm,band=b\n"
    made = draft(tmp_path, rows)
    assert [one.conditions for one in of(made, Requirement)] == ["CS-R1", "CS-R1", "CS-R3"]


def test_a_range_asks_for_both_ends_and_says_so(tmp_path: Path) -> None:
    made = draft(
        tmp_path, "R1,s,v,c,spurious emission,max,-36,dBm,f=30 MHz-1 GHz;bw_MHz=20..50;rbw_kHz=100\n"
    )
    (conditions_set,) = of(made, ConditionsSet)
    frequency = conditions_set.dimension("frequency")
    assert (frequency.unit, frequency.span.low, frequency.span.high, frequency.span.step) == (
        "GHz",
        0.03,
        1,
        0.97,
    )
    # A set proves along one range only; the second stays text.
    assert only(made).note == "As published: bw_MHz=20..50"
    assert only(made).quantity.bandwidth_hz == 100e3
    assert [one.severity for one in made.findings if one.rule == "published-no-step"] == [Severity.INFO]


@pytest.mark.parametrize(
    ("condition", "rule", "note"),
    [
        ("bw_MHz=>=20", MatchingRule.AT_OR_ABOVE, ""),
        ("bw_MHz=<=20", MatchingRule.AT_OR_BELOW, ""),
        ("bw_MHz=>20", MatchingRule.AT_OR_ABOVE, "As published: bw_MHz=>20"),
    ],
)
def test_one_ended_ranges_are_matched_at_or_beyond(
    tmp_path: Path, condition: str, rule: MatchingRule, note: str
) -> None:
    made = draft(tmp_path, f"R1,s,v,c,EVM,max,8,%,{condition}\n")
    (conditions_set,) = of(made, ConditionsSet)
    assert (conditions_set.dimensions[0].values, conditions_set.dimensions[0].rule) == ((20.0,), rule)
    assert only(made).note == note


@pytest.mark.parametrize("condition", ["f=Fstep1-Fstep2", "bw=20", "bw_dB=20", "theta=a few", "whatever=3"])
def test_what_cannot_be_required_as_written_stays_text(tmp_path: Path, condition: str) -> None:
    made = draft(tmp_path, f"R1,s,v,c,EVM,max,8,%,{condition}\n")
    assert only(made).conditions is None
    assert only(made).note == f"As published: {condition}"


@pytest.mark.parametrize("said", ["metric=TRP", "metric=trp"])
def test_a_plane_that_a_condition_names_goes_into_the_identity(tmp_path: Path, said: str) -> None:
    found = only(draft(tmp_path, f"R1,s,v,c,spurious emission,max,-36,dBm,{said}\n"))
    assert (found.quantity.plane, found.note) == ("TRP", "")


def test_a_plane_that_the_title_names_goes_into_the_identity(tmp_path: Path) -> None:
    assert only(draft(tmp_path, "R1,s,v,c,spurious emission (TRP),max,-36,dBm,\n")).quantity.plane == "TRP"


def test_a_title_that_names_nothing_known_gets_a_parameter_of_the_project(tmp_path: Path) -> None:
    rows = "R1,s,v,c,Twinkle ratio,min,3,dB,\nR2,s,v,c,Twinkle ratio,min,4,dB,\n"
    made = draft(tmp_path, rows)
    (parameter,) = of(made, Parameter)
    assert isinstance(parameter, Parameter)
    assert (parameter.key, parameter.title, parameter.unit, parameter.better) == (
        "twinkle_ratio",
        "Twinkle ratio",
        "dB",
        Better.HIGHER,
    )
    assert [one.quantity.parameter for one in of(made, Requirement)] == ["twinkle_ratio"] * 2
    (warning,) = [one for one in made.findings if one.rule == "published-own-parameter"]
    assert "'Twinkle ratio' is no known parameter" in warning.message
    again = draft(tmp_path, rows, a_snapshot(BLOCK, parameter))
    assert of(again, Parameter) == []
    assert [one.quantity.parameter for one in of(again, Requirement)] == ["twinkle_ratio"] * 2


def test_a_title_in_a_unit_of_another_kind_gets_a_parameter_of_its_own(tmp_path: Path) -> None:
    made = draft(tmp_path, "R1,s,v,c,noise figure,max,8,GHz,\n")
    assert only(made).quantity.parameter == "noise_figure_ghz"
    assert "noise_figure in dB, but the limit is in GHz" in made.findings[1].message


def test_rows_not_taken_are_told_apart_by_whether_they_are_limits(tmp_path: Path) -> None:
    rows = "R1,s,v,c,channel raster,,60,kHz,\nR2,s,v,c,EVM,max,8,quarkz,\n"
    made = draft(tmp_path, rows)
    found = [(one.rule, one.severity, one.origin.row if one.origin else 0) for one in made.findings]
    assert found == [
        ("published-counts", Severity.INFO, None),
        ("published-no-limit", Severity.INFO, 2),
        ("published-not-read", Severity.ERROR, 3),
    ]
    assert {one.rule for one in made.findings} <= set(PUBLISHED_FINDINGS)


def test_an_id_that_leaves_no_room_for_its_activity_is_refused(tmp_path: Path) -> None:
    made = draft(tmp_path, f"{'R' * 79},s,v,c,EVM,max,8,%,\n")
    assert of(made, Requirement) == []
    assert [one.rule for one in made.findings] == ["published-counts", "published-id-too-long"]
    assert "1 refused for their id" in made.findings[0].message


def test_what_a_table_cannot_say_stays_as_the_project_has_it(tmp_path: Path) -> None:
    first = draft(tmp_path, "R1,s,v,c,noise figure,max,3.2,dB,\n")
    owned = only(first).model_copy(update={"owner": "RF team", "rationale": "link budget"})
    again = draft(
        tmp_path, "R1,s,v,c,noise figure,max,3.0,dB,\n", a_snapshot(BLOCK, owned, *of(first, Activity))
    )
    assert (only(again).owner, only(again).rationale, only(again).limit.text) == (
        "RF team",
        "link budget",
        "<= 3.0 dB",
    )
    assert of(again, Activity) == []


def test_a_mask_that_nothing_asks_to_be_shown_everywhere_is_reported(tmp_path: Path) -> None:
    rows = (
        "M-1,s,v,c,mask breakpoint,max,0,dBr,offset_MHz=9\n"
        "M-2,s,v,c,mask breakpoint,max,-20,dBr,offset_MHz=11\n"
        "R-1,s,v,c,EVM,max,8,%,\n"
    )
    found = [one for one in draft(tmp_path, rows).findings if one.rule == "published-limit-varies"]
    assert [one.subject for one in found] == ["M"]
    assert "differs by offset" in found[0].message
