"""Deriving: stored with law and inputs, traced to the cell, stale when the input goes, derived again, mapped."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from datetime import date
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from specflow.errors import DocumentError
from specflow.limits import parse_limit
from specflow.model.conditions import Span
from specflow.model.derivation import Derivation
from specflow.model.evidence import Equipment, EvidenceTable, Supersession, Withdrawal
from specflow.model.finding import Finding
from specflow.model.requirement import Method
from specflow.model.source_statement import PeakList
from specflow.model.verdict import RequirementStatus, Standing, Verdict
from specflow.store import ProjectStore, create_project
from specflow.workflows.attach import AttachOptions, Decision, accept_attach, preview_attach
from specflow.workflows.attach_tables import preview_sentence
from specflow.workflows.derive import DeriveOptions, accept_derive, preview_derive
from specflow.workflows.derive_again import derive_again, preview_again
from specflow.workflows.derive_proposals import proposals
from specflow.workflows.evaluate_project import evaluate_project
from specflow.workflows.trace import trace
from tests.builders import (
    a_block,
    a_conditions_set,
    a_dimension,
    a_project,
    a_quantity,
    a_requirement,
    adding,
    an_evidence_file,
    an_item,
    at_least,
    at_most,
    between,
)
from tests.conftest import noon
from tests.derive.deriving import a_trace

DAY = date(2026, 6, 1)
FREQUENCY = np.round(np.arange(17.7, 20.21, 0.1), 1)
OVER = "frequency 17.7..20.2 GHz step 0.1 GHz"
BAND = a_dimension("frequency", "GHz", span=Span(low=17.7, high=20.2, step=0.25))
WARM = a_dimension("temperature_ambient", "°C", values=(25.0, 85.0), tolerance=2)


def gain_trace(
    id: str = "T-1", off: float = 0.0, ripple: float = 0.5, step: int = 1, until: float = 20.2
) -> Any:
    """Gain from 17.7 to 20.2 GHz at two temperatures."""
    place = FREQUENCY[until >= FREQUENCY][::step]
    gain = 22 + ripple * np.sin(3 * place) - off
    return a_trace(
        id,
        {"Gain": [*gain, *(gain - 1)]},
        frequency=[*place, *place],
        temperature_ambient=[25] * len(place) + [85] * len(place),
    )


@pytest.fixture
def store(tmp_path: Path) -> Iterator[ProjectStore]:
    """A project with a flatness over the band (R-1), a gain at temperatures (R-2), and a gain trace."""
    documents = (
        a_block(),
        an_item(),
        a_conditions_set("CS", WARM, BAND),
        a_conditions_set("WARM", WARM),
        a_requirement("R-1", quantity=a_quantity("gain_flatness"), limit=at_most(1.2)),
        a_requirement("R-2", quantity=a_quantity(statistic="worst"), limit=at_least(20), conditions="WARM"),
        an_evidence_file(),
    )
    table, columns = gain_trace()
    with create_project(tmp_path / "p.specflow", a_project(), clock=noon) as project:
        project.apply(adding(*documents, table), columns={"T-1": columns}, by="A. B.")
        yield project


def derived(store: ProjectStore, law: str, *tables: str, **fields: Any) -> str:
    """Derive and store; return the id of the table."""
    options = DeriveOptions(law, tables or ("T-1",), over=(fields.pop("over", OVER),), **fields)
    return accept_derive(store, preview_derive(store, options), by="A. B.").table


def status(store: ProjectStore, requirement: str) -> RequirementStatus:
    return evaluate_project(store, DAY).results.of(requirement)


def findings(store: ProjectStore, rule: str) -> list[Finding]:
    return [one for one in evaluate_project(store, DAY).findings if one.rule == rule]


def supersede(store: ProjectStore, later: Any, **fields: Any) -> None:
    """Store a table that replaces T-1."""
    table, columns = later
    step = Supersession(
        id="SUP-1", earlier="T-1", later=table.id, by="A. B.", at="2026-05-20T00:00:00Z", **fields
    )
    store.apply(adding(table, step), columns={table.id: columns}, by="A. B.")


def test_a_derivation_is_stored_with_all_that_it_was_made_from(store: ProjectStore) -> None:
    assert derived(store, "ripple", requirement="R-1") == "EV-1"
    snapshot = store.load()
    [derivation] = snapshot.all(Derivation)
    table = snapshot.find(EvidenceTable, "EV-1")
    assert table is not None
    assert (derivation.id, derivation.law, derivation.inputs) == ("DV-1", "ripple", ("T-1",))
    assert derivation.digests == ("digest of T-1",)
    assert (derivation.by, derivation.at, derivation.over) == ("A. B.", "2026-05-04T12:00:00Z", (OVER,))
    assert (table.derivation, table.file, table.rows) == ("DV-1", "F-1", 2)
    assert table.performed_on is not None  # what the raw table says of itself holds for what is made of it
    [value] = table.values
    assert (value.quantity, value.unit, value.column) == (a_quantity("gain_flatness"), "dB", 3)
    assert "ripple of Gain over frequency" in value.conversions[-1]
    columns = snapshot.load_columns(["EV-1"])["EV-1"]
    gain = np.sin(3 * FREQUENCY) * 0.5
    assert columns.values["gain_flatness"].low == pytest.approx([np.ptp(gain)] * 2)


def test_deriving_twice_stores_nothing_twice(store: ProjectStore) -> None:
    derived(store, "ripple", requirement="R-1")
    revision = store.revision
    preview = preview_derive(store, DeriveOptions("ripple", ("T-1",), over=(OVER,), requirement="R-1"))
    assert preview.stored_as == "EV-1"
    assert accept_derive(store, preview, by="A. B.").revision == revision
    assert store.revision == revision


def test_a_ripple_over_the_range_proves_the_range(store: ProjectStore) -> None:
    assert status(store, "R-1").k == 0
    derived(store, "ripple", requirement="R-1")
    found = status(store, "R-1")
    assert (found.k, found.n, found.verdict) == (2, 2, Verdict.PASS)


def test_a_generous_tolerance_of_the_law_proves_no_end_that_was_not_measured(store: ProjectStore) -> None:
    supersede(store, gain_trace("T-2", until=19.9))
    derived(store, "ripple", "T-2", requirement="R-1", over="frequency 17.7..20.2 GHz ± 0.5 GHz step 0.1 GHz")
    assert status(store, "R-1").k == 0


@pytest.mark.parametrize(
    ("over", "step", "why"),
    [
        ("frequency 18..20 GHz", 1, "derived over 18 to 20 GHz"),
        ("frequency 17.7..20.2 GHz", 5, "gaps up to 0.5 GHz"),
    ],
)
def test_a_part_of_the_range_or_too_wide_a_step_proves_nothing(
    store: ProjectStore, over: str, step: int, why: str
) -> None:
    table, columns = gain_trace("T-2", step=step)
    store.apply(adding(table), columns={"T-2": columns}, by="A. B.")
    derived(store, "ripple", "T-2", over=over, requirement="R-1")
    found = status(store, "R-1")
    assert found.k == 0
    assert any(why in mismatch.what for mismatch in found.mismatches)
    told = [cell.text for row in trace(store, DAY, "R-1").rows for cell in row.cells]
    assert any(f"{why.removeprefix('derived over ')}" in text and "is asked" in text for text in told)


def test_two_ripples_over_halves_are_none_over_the_whole(store: ProjectStore) -> None:
    for over in ("frequency 17.7..19 GHz", "frequency 19..20.2 GHz"):
        derived(store, "ripple", over=over, requirement="R-1")
    assert status(store, "R-1").k == 0


def test_the_worst_of_each_half_is_the_worst_of_the_whole(store: ProjectStore) -> None:
    worst = a_requirement("R-3", quantity=a_quantity(statistic="worst"), limit=at_least(20))
    store.apply(adding(worst), by="A. B.")
    derived(store, "worst", over="frequency 17.7..19 GHz")
    assert status(store, "R-3").k == 0
    derived(store, "worst", over="frequency 19..20.2 GHz")
    assert status(store, "R-3").k == 2


def test_a_derived_value_is_traced_to_the_raw_cell(store: ProjectStore) -> None:
    derived(store, "worst")
    snapshot = store.load()
    raw, columns = (snapshot.load_columns([id])[id] for id in ("T-1", "EV-1"))
    for row in range(2):
        origin = list(raw.source_rows).index(columns.source_rows[row])
        assert raw.values["Gain"].low[origin] == columns.values["gain"].low[row]
    steps = [[cell.text for cell in row.cells] for row in trace(store, DAY, "R-2").rows]
    told = [cells for cells in steps if "derivation" in cells[0]]
    assert told and "worst of Gain over frequency" in told[0][2] and "· 18.3 GHz" in told[0][2]
    assert any("input" in cells[0] and "T-1" in cells[1] for cells in steps)


def test_an_input_that_is_superseded_makes_the_result_stale(store: ProjectStore) -> None:
    derived(store, "ripple", requirement="R-1")
    supersede(store, gain_trace("T-2", ripple=0.4))
    found = status(store, "R-1")
    assert (found.k, found.standing.get(Standing.STALE)) == (0, 2)
    [finding] = findings(store, "outdated-derivation")
    assert (finding.subject, finding.message) == ("EV-1", "its input T-1 was superseded by T-2")
    assert "--again" in finding.remedy


def test_an_input_that_is_withdrawn_makes_the_result_stale(store: ProjectStore) -> None:
    derived(store, "ripple", requirement="R-1")
    store.apply(
        adding(
            Withdrawal(id="W-1", table="T-1", reason="cable loose", by="A. B.", at="2026-05-20T00:00:00Z")
        ),
        by="A. B.",
    )
    assert status(store, "R-1").k == 0
    [again] = preview_again(store, DAY)
    assert again.failure is not None and "nothing replaces it" in again.failure.message


def test_a_stale_fail_stays_open(store: ProjectStore) -> None:
    table, columns = gain_trace("T-9", ripple=2.0)
    store.apply(adding(table), columns={"T-9": columns}, by="A. B.")
    derived(store, "ripple", "T-9", requirement="R-1")
    assert status(store, "R-1").n_failing == 2
    store.apply(
        adding(Withdrawal(id="W-1", table="T-9", reason="doubted", by="A. B.", at="2026-05-20T00:00:00Z")),
        by="A. B.",
    )
    assert status(store, "R-1").n_failing == 2


def test_deriving_again_supersedes_what_was_made_of_the_replaced_input(store: ProjectStore) -> None:
    derived(store, "ripple", requirement="R-1")
    derived(store, "worst")
    supersede(store, gain_trace("T-2", ripple=0.4), names_fail="DR-7, retested")
    assert [one.table.id for one in preview_again(store, DAY)] == ["EV-1", "EV-2"]
    stored, left = derive_again(store, DAY, by="A. B.")
    assert [(one.superseded, one.table) for one in stored] == [("EV-1", "EV-3"), ("EV-2", "EV-4")]
    assert not left and not preview_again(store, DAY)
    snapshot = store.load()
    third = snapshot.find(Derivation, "DV-3")
    assert third is not None
    assert (third.again_of, third.inputs, third.gives) == ("DV-1", ("T-2",), a_quantity("gain_flatness"))
    steps = {one.earlier: one for one in snapshot.all(Supersession)}
    assert steps["EV-1"].names_fail == "DR-7, retested"
    assert status(store, "R-1").k == 2
    assert not findings(store, "outdated-derivation")


def test_what_was_made_of_a_derived_table_is_derived_again_after_it(store: ProjectStore) -> None:
    derived(store, "worst")
    first = preview_derive(
        store,
        DeriveOptions(
            "worst", ("EV-1",), over=("temperature_ambient 25..85 °C",), gives="gain", statistic="worst"
        ),
    )
    accept_derive(store, first, by="A. B.")
    supersede(store, gain_trace("T-2", off=0.5))
    assert {one.id for one in store.load().tables if one.derivation} == {"EV-1", "EV-2"}
    assert len(findings(store, "outdated-derivation")) == 2
    assert [one.table.id for one in preview_again(store, DAY)] == ["EV-1"]
    stored, left = derive_again(store, DAY, by="A. B.")
    assert [(one.superseded, one.table) for one in stored] == [("EV-1", "EV-3"), ("EV-2", "EV-4")]
    assert not left
    second = store.load().find(Derivation, "DV-4")
    assert second is not None and second.inputs == ("EV-3",)


def test_groups_that_gave_nothing_are_left_out_with_consent_only(store: ProjectStore) -> None:
    table, columns = a_trace(
        "T-5",
        {"Gain": [1.0, 2, 3, 4, 5]},
        frequency=[1, 2, 3, 1, 2],
        temperature_ambient=[25, 25, 25, 85, 85],
    )
    store.apply(adding(table), columns={"T-5": columns}, by="A. B.")
    preview = preview_derive(store, DeriveOptions("worst", ("T-5",), over=("frequency 1..3 GHz",)))
    with pytest.raises(DocumentError, match="1 group of rows gave no result; nothing was stored"):
        accept_derive(store, preview, by="A. B.")
    done = accept_derive(store, preview, by="A. B.", take_rest=True)
    kept = store.load().find(EvidenceTable, done.table)
    assert kept is not None and kept.rows == 1
    assert [one.text for one in kept.left_out] == ["item LNA-1, +85 °C ambient"]


@pytest.mark.parametrize(
    ("law", "limit", "settings", "message"),
    [
        ("mean", at_least(20), {"of": "dB"}, "names no statistic, so it holds for every reading"),
        ("percentile", at_least(20), {"percentile": "50"}, "names no statistic"),
        ("worst", at_most(30), {}, "is not shown by the lowest reading alone"),
        ("worst", between(20, 30), {}, "is not shown by the lowest reading alone"),
    ],
)
def test_no_law_may_hide_the_worst_from_a_requirement(
    store: ProjectStore, law: str, limit: Any, settings: dict[str, str], message: str
) -> None:
    store.apply(adding(a_requirement("R-3", limit=limit, conditions="WARM")), by="A. B.")
    with pytest.raises(DocumentError, match=message):
        preview_derive(
            store, DeriveOptions(law, ("T-1",), over=(OVER,), settings=settings, requirement="R-3")
        )


def test_both_ends_serve_a_two_sided_limit(store: ProjectStore) -> None:
    store.apply(
        adding(a_requirement("R-3", limit=between(20, 30), conditions="WARM")),
        by="A. B.",
    )
    derived(store, "worst", settings={"side": "both"}, requirement="R-3")
    columns = store.load().load_columns(["EV-1"])["EV-1"].values["gain"]
    assert columns.low[0] < 21.6 < 22.4 < columns.high[0]


def test_a_mean_is_never_called_a_reading(store: ProjectStore) -> None:
    preview = preview_derive(store, DeriveOptions("mean", ("T-1",), over=(OVER,), settings={"of": "power"}))
    assert preview.derivation.gives == a_quantity(statistic="mean of power")


@pytest.mark.parametrize(
    ("fields", "message"),
    [
        ({"law": "riple"}, "there is no law 'riple'"),
        ({"tables": ("T-7",)}, "there is no evidence table 'T-7'"),
        ({"tables": ()}, "no table is named"),
        ({"values": ("Power",)}, "no value column is called 'Power'"),
        ({"values": ("Gain", "Gain")}, "reads 1 value column: value"),
        ({"gives": "flatness of everything"}, "is no known parameter"),
        ({"gives": "noise_temperature"}, "gives dB here; noise_temperature is in K"),
        ({}, "it is not said of what parameter the result of the law ripple is"),
        ({"requirement": "R-9"}, "there is no requirement 'R-9'"),
    ],
)
def test_what_cannot_be_understood_is_refused(
    store: ProjectStore, fields: dict[str, Any], message: str
) -> None:
    from specflow.errors import SpecflowError

    options = DeriveOptions(**{"law": "ripple", "tables": ("T-1",), "over": (OVER,)} | fields)
    with pytest.raises(SpecflowError, match=message):
        preview_derive(store, options)
    assert store.revision == 2


def test_nothing_is_derived_from_a_table_that_was_replaced(store: ProjectStore) -> None:
    supersede(store, gain_trace("T-2"))
    with pytest.raises(DocumentError, match="T-1 was superseded by T-2"):
        preview_derive(store, DeriveOptions("worst", ("T-1",), over=(OVER,)))


def test_what_a_law_would_give_and_refuse_is_counted_in_words(store: ProjectStore) -> None:
    table, columns = gain_trace("T-2")
    low = columns.values["Gain"].low.copy()
    low[0] = np.nan  # the first end at 25 °C was not measured
    columns = replace(columns, values={"Gain": replace(columns.values["Gain"], low=low, high=low)})
    supersede(store, (table, columns))
    [found] = [one for one in proposals(store, DAY) if one.requirement.id == "R-1"]
    assert found.why.endswith("gives 1 value, 1 group refused")


def test_what_requirements_lack_is_proposed_with_the_words_to_say(store: ProjectStore) -> None:
    found = {one.requirement.id: one for one in proposals(store, DAY)}
    assert found["R-1"].command == (
        "specflow derive ripple --from T-1 --value Gain --over "
        "'frequency 17.7..20.2 GHz step 0.25 GHz' --for R-1"
    )
    assert "gives 2 values" in found["R-1"].why
    assert "the requirement states no range" in found["R-2"].why
    derived(store, "ripple", requirement="R-1", over="frequency 17.7..20.2 GHz step 0.25 GHz")
    assert "R-1" not in {one.requirement.id for one in proposals(store, DAY)}


MAPPING = """
[[table]]
block = "LNA"

[[table.column]]
header = "Serial"
role = "item"

[[table.derive]]
law = "ripple"
over = "frequency 17.7..20.2 GHz step 0.5 GHz"
requirement = "R-1"
"""


def sweep(path: Path, ripple: float) -> Path:
    """Write a gain sweep as csv."""
    lines = ["Frequency (GHz),Ambient temperature (°C),Serial,Gain (dB)"]
    for warm in (25, 85):
        for place in FREQUENCY:
            lines.append(f"{place},{warm},LNA-1,{22 + ripple * np.sin(3 * place):.3f}")
    path.write_text("\n".join(lines) + "\n", encoding="utf-8")
    return path


def test_a_mapping_asks_for_laws_and_the_file_comes_in_with_what_is_derived(
    store: ProjectStore, tmp_path: Path
) -> None:
    mapping = tmp_path / "m.toml"
    mapping.write_text(MAPPING, encoding="utf-8")
    first = preview_attach(store, sweep(tmp_path / "a.csv", 0.5), AttachOptions(mapping=mapping))
    before = store.revision
    done = accept_attach(store, first, Decision("A. B."))
    assert store.revision == before + 1  # one transaction
    assert list(done.tables) == ["EV-1", "EV-2"]
    assert status(store, "R-1").k == 2
    second = preview_attach(store, sweep(tmp_path / "b.csv", 0.4), AttachOptions())  # the layout is known now
    accept_attach(store, second, Decision("A. B.", supersedes=["EV-1"]))
    [step] = [one for one in store.load().all(Supersession) if one.earlier == "EV-2"]
    assert step.later == "EV-4"
    assert status(store, "R-1").k == 2 and not findings(store, "outdated-derivation")


def test_a_mapping_that_names_no_law_is_refused(store: ProjectStore, tmp_path: Path) -> None:
    from specflow.errors import FileError

    mapping = tmp_path / "m.toml"
    mapping.write_text(MAPPING.replace('law = "ripple"', ""), encoding="utf-8")
    with pytest.raises(FileError, match="law is missing"):
        preview_attach(store, sweep(tmp_path / "a.csv", 0.5), AttachOptions(mapping=mapping))


def test_a_file_attached_again_does_not_replace_what_was_derived_from_it(
    store: ProjectStore, tmp_path: Path
) -> None:
    mapping = tmp_path / "m.toml"
    mapping.write_text(MAPPING, encoding="utf-8")
    path = sweep(tmp_path / "a.csv", 0.5)
    accept_attach(store, preview_attach(store, path, AttachOptions(mapping=mapping)), Decision("A. B."))
    assert preview_attach(store, path, AttachOptions()).is_unchanged
    mapping.write_text(MAPPING.replace('block = "LNA"', 'block = "LNA"\nset_up = "two"'), encoding="utf-8")
    again = preview_attach(store, path, AttachOptions(mapping=mapping))
    assert {one.earlier for found in again.replacements.values() for one in found} == {"EV-1"}


def test_an_off_axis_mask_is_judged_from_the_commanded_direction(store: ProjectStore) -> None:
    """A beam commanded to θ 30° that points there: its mask holds from there, not from boresight."""
    theta = np.arange(0.0, 60.1, 0.25)
    density = 20 - 25 * np.log10(np.maximum(np.abs(theta - 30), 1))  # dBW/40 kHz, falling from the beam
    mask = parse_limit("mask(off_axis_angle[deg], max dBW/40 kHz: 2..7: 13 to -1 log; 7..30: 0 to -16 log)")
    raw, columns = a_trace(
        "T-8",
        {"Density": density.tolist()},
        quantities={"Density": {"parameter": "eirp_density"}},
        units={"Density": "dBW/40 kHz"},
        theta=theta.tolist(),
        phi=np.zeros(len(theta)).tolist(),
    )
    requirement = a_requirement(
        "R-8", quantity=a_quantity("off_axis_eirp_density"), limit=mask, conditions=None
    )
    store.apply(adding(requirement, raw), columns={"T-8": columns}, by="A. B.")
    assert status(store, "R-8").k == 0  # the raw density is one over directions, not off the axis
    options = DeriveOptions(
        "off axis", ("T-8",), settings={"polar": "30 deg", "turn": "0 deg"}, gives="off_axis_eirp_density"
    )
    accept_derive(store, preview_derive(store, options), by="A. B.")
    found = status(store, "R-8")
    assert (found.k, found.n, found.verdict) == (1, 1, Verdict.PASS)
    wrong = DeriveOptions(
        "off axis", ("T-8",), settings={"polar": "25 deg", "turn": "0 deg"}, gives="off_axis_eirp_density"
    )
    accept_derive(store, preview_derive(store, wrong), by="A. B.")
    assert status(store, "R-8").verdict is Verdict.FAIL


def test_a_newer_version_of_a_law_is_a_reason_to_derive_again(
    store: ProjectStore, monkeypatch: pytest.MonkeyPatch
) -> None:
    from dataclasses import replace

    from specflow.derive import LAW_BY_NAME

    derived(store, "ripple", requirement="R-1")
    monkeypatch.setitem(LAW_BY_NAME, "ripple", replace(LAW_BY_NAME["ripple"], version=2))
    [again] = preview_again(store, DAY)
    assert again.why == "the law ripple is at version 2, it was derived by version 1"
    stored, left = derive_again(store, DAY, by="A. B.")
    assert [one.superseded for one in stored] == ["EV-1"] and not left
    third = store.load().find(Derivation, "DV-2")
    assert third is not None and third.law_version == 2
    assert not preview_again(store, DAY)


def test_a_list_of_peaks_is_no_trace(store: ProjectStore) -> None:
    table, columns = gain_trace("T-7")
    peaks = table.model_copy(update={"peaks": PeakList()})
    store.apply(adding(peaks), columns={"T-7": columns}, by="A. B.")
    with pytest.raises(DocumentError, match="T-7 is a list of peaks"):
        preview_derive(store, DeriveOptions("worst", ("T-7",), over=(OVER,)))


def test_tables_taken_in_other_ways_are_not_put_together(store: ProjectStore) -> None:
    table, columns = gain_trace("T-7")
    simulated = table.model_copy(update={"method": Method.ANALYSIS})
    store.apply(adding(simulated), columns={"T-7": columns}, by="A. B.")
    with pytest.raises(DocumentError, match="T-1 and T-7 differ in method: test and analysis"):
        preview_derive(
            store,
            DeriveOptions("difference", ("T-1", "T-7"), values=("T-1:Gain", "T-7:Gain"), gives="gain_step"),
        )


def test_a_result_of_two_tables_is_as_old_as_the_older(store: ProjectStore) -> None:
    table, columns = gain_trace("T-7")
    older = table.model_copy(
        update={
            "performed_on": date(2026, 3, 1),
            "equipment": (Equipment(asset="PM-1", calibration_due=date(2027, 1, 1)),),
        }
    )
    store.apply(adding(older), columns={"T-7": columns}, by="A. B.")
    done = accept_derive(
        store,
        preview_derive(
            store,
            DeriveOptions("difference", ("T-1", "T-7"), values=("T-1:Gain", "T-7:Gain"), gives="gain_step"),
        ),
        by="A. B.",
    )
    found = store.load().find(EvidenceTable, done.table)
    assert found is not None
    assert (found.performed_on, [one.asset for one in found.equipment]) == (date(2026, 3, 1), ["PM-1"])
    assert found.rows == 52


def test_the_sum_of_two_polarisations_is_of_neither(store: ProjectStore) -> None:
    table, columns = a_trace(
        "T-7",
        {"V": [30.0, 29], "H": [20.0, 19]},
        quantities={name: {"parameter": "eirp", "polarisation": name} for name in ("V", "H")},
        units={"V": "dBm", "H": "dBm"},
        theta=[0, 10],
        phi=[0, 0],
    )
    store.apply(adding(table), columns={"T-7": columns}, by="A. B.")
    preview = preview_derive(store, DeriveOptions("power sum", ("T-7",), values=("V", "H")))
    assert preview.derivation.gives == a_quantity("eirp")
    assert preview.derived.columns.values["eirp"].low[0] == pytest.approx(30.4139, abs=1e-4)


def test_a_law_that_gives_nothing_is_said_and_the_raw_data_comes_in(
    store: ProjectStore, tmp_path: Path
) -> None:
    mapping = tmp_path / "m.toml"
    mapping.write_text(MAPPING.replace("17.7..20.2", "17.0..20.2"), encoding="utf-8")
    preview = preview_attach(store, sweep(tmp_path / "a.csv", 0.5), AttachOptions(mapping=mapping))
    assert "1 not derived (ripple: the lower end is not reached" in preview_sentence(preview)
    done = accept_attach(store, preview, Decision("A. B."))
    assert list(done.tables) == ["EV-1"]
