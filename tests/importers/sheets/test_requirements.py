"""The sheet of requirements: every column, as engineers fill it in."""

from __future__ import annotations

from datetime import date
from pathlib import Path
from typing import Any

import pytest

from specflow.importers.sheets import SHEETS
from specflow.limits import parse_limit
from specflow.model.draft import Draft
from specflow.model.limit import LimitState
from specflow.model.requirement import DecisionRule, OpenValue, Provers, Requirement, RuleName, Source
from specflow.parameters import load_dictionary
from tests.builders import a_block, a_declared_value, a_snapshot, an_item, read_sheets

ROW = {"ID": "R-1", "Block": "UT", "Parameter": "eirp", "Limit": ">= 45 dBm"}


def load(tmp_path: Path, **cells: Any) -> Draft:
    project = a_snapshot(
        a_block("UT", tier="system"),
        an_item("PA-7", block="UT", serial="SN 007"),
        an_item("PA-8", block="UT", serial="SN 008"),
        a_declared_value("P_rated"),
    )
    return read_sheets(tmp_path, project, requirements=[ROW | cells])


def requirement(tmp_path: Path, **cells: Any) -> Requirement:
    draft = load(tmp_path, **cells)
    assert not draft.findings, draft.findings
    return next(one for one in draft.documents if isinstance(one, Requirement))


@pytest.mark.parametrize(
    ("cells", "says", "where"),
    [
        ({"Limit": "< -40 dBm", "Unit": "dBW"}, "'< -40 dBm' is in dBm", "E2"),
        ({"Limit": "-10 dBW max", "Unit": "dBm"}, "'-10 dBW max' is in dBW", "E2"),
        ({"Limit": None, "Max": "24 dBm", "Unit": "dBW"}, "'24 dBm' is in dBm", "F2"),
    ],
)
def test_a_limit_in_another_unit_than_the_unit_column_says_is_refused(
    tmp_path: Path, cells: dict[str, Any], says: str, where: str
) -> None:
    (finding,) = load(tmp_path, **cells).findings
    assert finding.rule == "workbook-unit-conflict"
    assert finding.message == f"the unit column says {cells['Unit']}, but the limit {says}"
    assert finding.origin is not None and finding.origin.cell == where


@pytest.mark.parametrize(
    ("cells", "text"),
    [
        ({"Limit": ">= 45,5", "Unit": "dBm"}, ">= 45,5 dBm"),
        ({"Limit": None, "Min": 21, "Max": "24,5", "Unit": "dBm"}, "21 to 24,5 dBm"),
        ({"Limit": ">= 45 dBm", "Unit": "dBm"}, ">= 45 dBm"),
        ({"Limit": "20 dBm +1.5/-2", "Unit": "dBm"}, "20 dBm +1.5/-2"),
        ({"Limit": "TBD", "Unit": "dBm"}, "TBD"),
        ({"Limit": ">= P_rated - 3 dB", "Unit": "dBm"}, ">= P_rated - 3 dB"),
        (
            {"Limit": "by band (n257: >= 22; n260: >= 20)", "Unit": "dBm"},
            "by band (n257: >= 22; n260: >= 20)",
        ),
    ],
)
def test_the_text_of_a_bare_number_is_shown_with_the_unit_of_its_column(
    tmp_path: Path, cells: dict[str, Any], text: str
) -> None:
    draft = load(tmp_path, **cells)
    (found,) = [one for one in draft.documents if isinstance(one, Requirement)]
    assert found.limit.text == text


@pytest.mark.parametrize(
    ("least", "greatest", "words"),
    [
        ("n/a", "24", "EIRP: at most 24 dBm"),
        (21, "N/A", "EIRP: at least 21 dBm"),
        ("none", "TBR 24", "EIRP: at most 24 dBm; to be reviewed (TBR): it computes but cannot close"),
        ("n/a", "n/a", "EIRP: not applicable"),
    ],
)
def test_an_end_that_is_not_applicable_is_no_end(
    tmp_path: Path, least: Any, greatest: Any, words: str
) -> None:
    draft = load(tmp_path, Limit=None, Min=least, Max=greatest, Unit="dBm")
    assert not draft.findings
    assert draft.echoes["R-1"] == words


@pytest.mark.parametrize(
    ("limit", "rules"),
    [
        ("mask(offset[MHz], max dBm, in 1 MHz: 0..5: 0; 5..50: -12 in 10 MHz)", []),
        ("mask(offset[MHz], max dBm/MHz: 0..5: 0; 5..50: -12)", []),
        ("mask(offset[MHz], max dBm: 0..5: 0; 5..50: -12 in 10 MHz)", ["workbook-no-bandwidth"]),
        ("by offset[MHz] (0..5: <= -30 dBm in 1 MHz; 5..50: <= -20 dBm in 10 MHz)", []),
        ("by offset[MHz] (0..5: <= -30 dBm in 1 MHz; 5..50: <= -20 dBm)", ["workbook-no-bandwidth"]),
        ("looser(<= -36 dBm in 1 MHz; <= -60 dBc)", []),
        ("<= -36 dBm", ["workbook-no-bandwidth"]),
    ],
)
def test_a_reference_bandwidth_is_missed_only_where_a_part_of_the_limit_states_none(
    tmp_path: Path, limit: str, rules: list[str]
) -> None:
    offsets = [{"ID": "CS", "Dimension": "offset", "Required": "2, 20 MHz"}]
    row = ROW | {"Parameter": "mask_emission", "Limit": limit, "Conditions": "CS"}
    draft = read_sheets(tmp_path, a_snapshot(a_block("UT")), conditions=offsets, requirements=[row])
    assert [one.rule for one in draft.findings] == rules


def test_a_unit_that_is_written_twice_the_same_is_no_conflict(tmp_path: Path) -> None:
    assert requirement(tmp_path, Limit=">= 45 dBm", Unit="dBm").limit.unit == "dBm"
    assert requirement(tmp_path, Limit="20 dBm +2/-3 dB", Unit=" dBm ").limit.unit == "dBm"
    assert requirement(tmp_path, Parameter="evm", Limit="8 %", Unit="percent").limit.unit == "%"


@pytest.mark.parametrize(
    ("parameter", "text", "words"),
    [
        ("eirp", ">= 45 dBm", "EIRP: at least 45 dBm"),
        ("aclr", ">= 28 dB", "at least 28 dB"),
        ("eirp", "54 ± 1.5 dBm", "54 dBm ± 1.5 dB"),
        ("eirp", "26 +2/-3 dBm", "26 dBm, up to 2 dB above and up to 3 dB below"),
        ("eirp", "min(-5, max(P_rated - 35, -12)) dBm max", "at most the smaller of"),
        ("noise_figure", "TBR 3.2 dB", "to be reviewed (TBR)"),
        ("noise_figure", "TBD", "to be determined (TBD)"),
        ("evm", "8 %", "at most 8 %"),
        ("vswr", "1.5 max", "at most 1.5"),
        ("eirp", "P_rated ± 3.4 dB", "P_rated dBm ± 3.4 dB"),
        ("eirp", "<= P_rated + 2 dB", "at most (P_rated + 2 dB) dBm"),
        ("aclr", ">= 28 dB or -13 dBm/MHz whichever is looser", "whichever is less stringent"),
        ("evm", "17.5 % max if modulation == QPSK", "only where modulation is QPSK"),
        ("spurious_emission", "-36 dBm/100 kHz max", "at most -36 dBm/100 kHz"),
    ],
)
def test_limits_are_typed_as_engineers_write_them(
    tmp_path: Path, parameter: str, text: str, words: str
) -> None:
    draft = load(tmp_path, Parameter=parameter, Limit=text)
    assert words in draft.echoes["R-1"]
    found = next(one for one in draft.documents if isinstance(one, Requirement))
    assert found.limit == parse_limit(
        text, unit_hint=found.limit.unit, parameter=load_dictionary().get(parameter)
    )


def test_prose_source_and_obligation_are_kept(tmp_path: Path) -> None:
    found = requirement(
        tmp_path,
        **{
            "Title": "EIRP",
            "Statement": "The terminal shall radiate\u00a0enough.",
            "Source document": "SPEC (invented)",
            "Source issue": date(2026, 3, 1),
            "Source paragraph": 4.2,
            "Obligation": "Should",
            "Owner": "RF",
            "Type": "functional",
            "Rationale": "Link budget",
            "Note": "see note",
            "Priority": 1,
        },
    )
    assert found.statement == "The terminal shall radiate enough."
    assert found.source == Source(document="SPEC (invented)", issue="2026-03-01", paragraph="4.2")
    assert (found.obligation, found.owner, found.kind, found.priority) == ("should", "RF", "functional", "1")


def test_without_a_title_the_parameter_gives_it_and_the_block_gives_the_tier(tmp_path: Path) -> None:
    found = requirement(tmp_path)
    assert (found.title, found.tier) == ("EIRP", "system")


@pytest.mark.parametrize(
    ("text", "key", "limit"),
    [
        ("noise_figure", "noise_figure", "<= 3 dB"),
        ("Noise Figure", "noise_figure", "<= 3 dB"),
        ("NF", "noise_figure", "<= 3 dB"),
        ("NF [dB]", "noise_figure", "<= 3 dB"),
        ("eirp density", "eirp_density", "-13 dBm/MHz max"),
    ],
)
def test_a_parameter_goes_by_key_title_or_alias(tmp_path: Path, text: str, key: str, limit: str) -> None:
    assert requirement(tmp_path, Parameter=text, Limit=limit).quantity.parameter == key


def test_the_quantity_identity_is_put_together_from_its_columns(tmp_path: Path) -> None:
    found = requirement(
        tmp_path,
        Parameter="spurious_emission",
        Limit="-30 dBm max",
        Statistic="RMS",
        Polarisation="H",
        **{"Reference bandwidth": "1 MHz"},
    )
    quantity = found.quantity
    assert (quantity.statistic, quantity.bandwidth_hz, quantity.polarisation) == ("rms", 1e6, "H")


def test_a_plane_in_the_parameter_cell_counts_as_stated(tmp_path: Path) -> None:
    found = requirement(tmp_path, Parameter="Spurious (TRP)", Limit="-30 dBm max in 1 MHz")
    assert (found.quantity.parameter, found.quantity.plane) == ("spurious_emission", "TRP")


@pytest.mark.parametrize("limit", ["-13 dBm/MHz max", "<= -13 dBm per MHz"])
def test_the_reference_bandwidth_is_taken_from_a_density(tmp_path: Path, limit: str) -> None:
    assert requirement(tmp_path, Parameter="eirp_density", Limit=limit).quantity.bandwidth_hz == 1e6


def test_the_reference_bandwidth_is_taken_from_what_a_limit_is_measured_in(tmp_path: Path) -> None:
    found = requirement(tmp_path, Parameter="spurious_emission", Limit="-36 dBm max in 100 kHz")
    assert found.quantity.bandwidth_hz == 1e5


def test_noise_and_emissions_without_a_bandwidth_are_reported(tmp_path: Path) -> None:
    draft = load(tmp_path, Parameter="spurious_emission", Limit="-30 dBm max")
    assert [one.rule for one in draft.findings] == ["workbook-no-bandwidth"]


@pytest.mark.parametrize(
    ("text", "rule"),
    [
        ("simple", DecisionRule()),
        ("guarded", DecisionRule(name=RuleName.GUARDED)),
        ("guarded 1.0 U", DecisionRule(name=RuleName.GUARDED)),
        ("Guarded w = 0.83 U", DecisionRule(name=RuleName.GUARDED, guard_factor=0.83)),
        ("four-way 1.0 U", DecisionRule(name=RuleName.FOUR_WAY)),
        ("four way 0.5·U", DecisionRule(name=RuleName.FOUR_WAY, guard_factor=0.5)),
    ],
)
def test_decision_rules_are_said_in_words(tmp_path: Path, text: str, rule: DecisionRule) -> None:
    assert requirement(tmp_path, **{"Decision rule": text}).decision_rule == rule


@pytest.mark.parametrize(("text", "expanded"), [("1.2 dB", 1.2), ("U <= 1.2 dB", 1.2), ("1.8 dB (k=3)", 1.2)])
def test_the_greatest_uncertainty_is_kept_at_k_2(tmp_path: Path, text: str, expanded: float) -> None:
    found = requirement(
        tmp_path, **{"Greatest uncertainty": text, "Excess uncertainty": "tightens the limit"}
    )
    assert found.decision_rule.greatest_uncertainty == pytest.approx(expanded, rel=1e-12)
    assert found.decision_rule.excess_tightens


@pytest.mark.parametrize(
    ("text", "provers"),
    [
        ("any one", Provers()),
        ("each of: sn 007, PA-8", Provers(rule="each of", items=("SN 007", "PA-8"))),
        ("number of: 3", Provers(rule="number of", number=3)),
        ("number of 2 together", Provers(rule="number of", number=2, may_complete_each_other=True)),
        ("any one, together", Provers(may_complete_each_other=True)),
        (
            "each of: SN 007, SN 008 (together)",
            Provers(rule="each of", items=("SN 007", "SN 008"), may_complete_each_other=True),
        ),
    ],
)
def test_who_must_prove_is_said_in_words(tmp_path: Path, text: str, provers: Provers) -> None:
    assert requirement(tmp_path, **{"Proved by": text}).provers == provers


@pytest.mark.parametrize(("text", "place"), [("0.7 dB", "limit"), ("0.7 dB on the stimulus", "stimulus")])
def test_the_test_tolerance_is_kept_apart_from_the_limit(tmp_path: Path, text: str, place: str) -> None:
    limit = requirement(tmp_path, **{"Test tolerance": text}).limit
    assert limit.test_tolerance is not None
    assert (limit.test_tolerance.amount.value, limit.test_tolerance.amount.unit) == (0.7, "dB")
    assert limit.test_tolerance.place == place


def test_an_open_value_has_owner_date_and_action(tmp_path: Path) -> None:
    found = requirement(
        tmp_path,
        Limit="TBR >= 45 dBm",
        **{"TBR owner": "RF", "TBR due": date(2026, 9, 30), "TBR action": "Measure"},
    )
    assert found.limit.state is LimitState.TBR
    assert found.open_value == OpenValue(owner="RF", due=date(2026, 9, 30), action="Measure")
    assert requirement(tmp_path).open_value is None
    assert requirement(tmp_path, Limit="TBD").open_value == OpenValue()


def test_applicability_and_tailoring(tmp_path: Path) -> None:
    assert requirement(tmp_path, Applicability="U").applicability == ""
    assert (
        requirement(tmp_path, Applicability="C: variant == maritime").applicability == "variant == maritime"
    )
    found = requirement(
        tmp_path,
        **{
            "Not applicable: reason": "No such port",
            "Not applicable: approver": "Board",
            "Met by lower level": "Yes",
        },
    )
    assert (found.not_applicable_reason, found.not_applicable_approver) == ("No such port", "Board")
    assert found.met_by_lower_level


def test_a_derived_requirement_says_why(tmp_path: Path) -> None:
    found = requirement(tmp_path, Parents="derived", **{"Derived reason": "Link budget"})
    assert (found.parents, found.derived_reason) == ((), "Link budget")


def test_a_name_nobody_declares_is_reported_with_the_nearest(tmp_path: Path) -> None:
    draft = load(tmp_path, Limit=">= P_ratd - 3 dB")
    (finding,) = draft.findings
    assert finding.rule == "workbook-unknown-input"
    assert "nearest: P_rated" in finding.message


def test_a_word_that_the_dictionary_does_not_have_is_doubtful_not_wrong(tmp_path: Path) -> None:
    draft = load(tmp_path, Statistic="average")
    (finding,) = draft.findings
    assert finding.rule == "workbook-unknown-word"
    assert any(
        isinstance(one, Requirement) and one.quantity.statistic == "average" for one in draft.documents
    )


def test_a_limit_of_another_kind_is_refused_naming_both_units(tmp_path: Path) -> None:
    (finding,) = load(tmp_path, Limit=">= 3 GHz").findings
    assert finding.message == "the limit is in GHz, but EIRP (eirp) is in dBm"


@pytest.mark.parametrize(
    ("parameter", "limit", "message", "meant"),
    [
        ("noise_figure", "<= 600 K", "is in dB", "noise_temperature (K)"),
        ("vswr", ">= 14 dB", "VSWR (vswr) is a plain number", "return_loss (dB)"),
        ("frequency_error", "± 500 kHz", "is in ppm", "frequency_error_absolute (Hz)"),
        ("mask_emission", "<= -12 dBr", "is in dBm", "mask_emission_relative (dBr)"),
    ],
)
def test_a_limit_of_another_kind_names_the_parameter_that_may_be_meant(
    tmp_path: Path, parameter: str, limit: str, message: str, meant: str
) -> None:
    found = next(
        one for one in load(tmp_path, Parameter=parameter, Limit=limit).findings if one.severity == "error"
    )
    assert found.rule == "workbook-unit-kind"
    assert message in found.message
    assert meant in found.remedy


def test_a_bare_number_takes_its_unit_from_the_unit_column_only(tmp_path: Path) -> None:
    assert requirement(tmp_path, Limit=">= 45", Unit="dBm").limit.unit == "dBm"


@pytest.mark.parametrize(
    "text",
    [">= 45", "45..48", ">= 45 if frequency > 28 GHz", "TBR >= 45", ">= 40 and <= 45", "max(40, 45) min"],
)
def test_a_limit_without_any_unit_is_refused_though_its_parameter_has_one(tmp_path: Path, text: str) -> None:
    (finding,) = load(tmp_path, Limit=text).findings
    assert finding.rule == "workbook-no-unit"
    assert text in finding.message


def test_the_layout_of_requirements_has_every_column_the_process_asks_for() -> None:
    layout = next(sheet.layout for sheet in SHEETS if sheet.layout.noun == "requirement")
    filled = {column.fills.partition(".")[0] for column in layout.columns}
    assert set(Requirement.model_fields) - filled == {"revision", "origin"}


def test_parts_that_a_workbook_does_not_state_stay_as_the_project_has_them(tmp_path: Path) -> None:
    whole = {
        "Plane": "antenna face",
        "Statistic": "rms",
        "Source document": "SPEC (invented)",
        "Source paragraph": "4.2",
        "Decision rule": "guarded 0.5 U",
        "Greatest uncertainty": "1.2 dB",
        "Test tolerance": "0.7 dB",
        "Limit": "TBR >= 45 dBm",
        "TBR owner": "RF",
    }
    first = requirement(tmp_path, **whole)
    project = a_snapshot(a_block("UT", tier="system"), first)

    def again(**cells: Any) -> Requirement:
        draft = read_sheets(tmp_path, project, requirements=[ROW | cells])
        return next(one for one in draft.documents if isinstance(one, Requirement))

    unedited = again(Limit="TBR >= 45 dBm")
    assert unedited.model_dump(exclude={"origin"}) == first.model_dump(exclude={"origin"})
    edited = again(**{"Statistic": "peak", "Source paragraph": "4.3", "Greatest uncertainty": "1 dB"})
    assert (edited.quantity.plane, edited.quantity.statistic) == ("antenna face", "peak")
    assert (edited.source.document, edited.source.paragraph) == ("SPEC (invented)", "4.3")
    rule = edited.decision_rule
    assert (rule.name, rule.guard_factor, rule.greatest_uncertainty) == (RuleName.GUARDED, 0.5, 1.0)
    assert again(Statistic=None).quantity.statistic == ""
    assert again(**{"Decision rule": "guarded 1.0 U"}).decision_rule.guard_factor == 1.0
    assert again().open_value is None
    assert again().limit.test_tolerance == first.limit.test_tolerance


@pytest.mark.parametrize(
    ("cells", "words"),
    [
        ({"Min": 20, "Unit": "dB"}, "Gain: at least 20 dB"),
        ({"Max": "24 dB"}, "Gain: at most 24 dB"),
        ({"Min": 20, "Max": 24, "Unit": "dB"}, "Gain: from 20 dB to 24 dB"),
        ({"Min [dB]": "TBR 20"}, "Gain: at least 20 dB; to be reviewed (TBR)"),
        ({"Maximum": "TBD"}, "Gain: to be determined (TBD)"),
    ],
)
def test_columns_of_least_and_greatest_values_stand_in_for_the_limit(
    tmp_path: Path, cells: dict[str, Any], words: str
) -> None:
    project = a_snapshot(a_block("UT", tier="system"))
    row = {"ID": "R-1", "Block": "UT", "Parameter": "gain"} | cells
    draft = read_sheets(tmp_path, project, requirements=[row])
    assert not draft.findings
    assert draft.echoes["R-1"].startswith(words)
    (found,) = [one for one in draft.documents if isinstance(one, Requirement)]
    assert found.origin is not None
    assert found.origin.cell == "D2"


@pytest.mark.parametrize(
    ("cells", "words"),
    [
        ({"Min": 24, "Max": 20, "Unit": "dB"}, "the lower end of the range is above the upper one"),
        ({"Min": None}, "no limit is given"),
        ({"Min": 20}, "no unit"),
        ({"Min": "20 dB", "Limit": ">= 20 dB"}, "and a minimum or maximum too"),
    ],
)
def test_least_and_greatest_values_that_say_no_limit_are_one_finding(
    tmp_path: Path, cells: dict[str, Any], words: str
) -> None:
    row = {"ID": "R-1", "Block": "UT", "Parameter": "gain"} | cells
    (finding,) = read_sheets(tmp_path, a_snapshot(a_block("UT")), requirements=[row]).findings
    assert words in finding.message


def test_a_column_called_requirement_is_the_statement_beside_an_id(tmp_path: Path) -> None:
    found = requirement(tmp_path, Requirement="The terminal shall radiate enough.")
    assert (found.id, found.statement) == ("R-1", "The terminal shall radiate enough.")


def test_a_missing_block_column_is_said_once(tmp_path: Path) -> None:
    rows = [{"ID": f"R-{n}", "Parameter": "gain", "Limit": ">= 20 dB"} for n in range(5)]
    draft = read_sheets(tmp_path, a_snapshot(a_block("UT")), requirements=rows)
    assert [one.rule for one in draft.findings] == ["workbook-default-taken"]
    assert sum(isinstance(one, Requirement) for one in draft.documents) == 5
