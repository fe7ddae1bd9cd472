"""The names in a limit: spellings of conditions are said back, names of nothing are found."""

from __future__ import annotations

from datetime import date
from pathlib import Path
from typing import Any

import pytest

from specflow.model.draft import Draft
from specflow.model.finding import Finding
from specflow.model.requirement import Requirement
from specflow.model.verdict import Verdict
from specflow.parameters import load_dictionary
from specflow.verification import evaluate
from tests.builders import (
    a_block,
    a_declared_value,
    a_snapshot,
    an_evidence_table,
    an_item,
    read_sheets,
    some_columns,
    some_evidence,
)

PROJECT = (a_block("LNA"), an_item(), a_declared_value("P_rated"), a_declared_value("drive"))


def load(tmp_path: Path, limit: str, parameter: str = "eirp", **sheets: Any) -> Draft:
    row = {"ID": "R-1", "Block": "LNA", "Parameter": parameter, "Limit": limit}
    if "conditions" in sheets:
        row["Conditions set"] = "CS"
    return read_sheets(tmp_path, a_snapshot(*PROJECT), requirements=[row], **sheets)


def unknown(draft: Draft) -> list[Finding]:
    return [one for one in draft.findings if one.rule == "workbook-unknown-input"]


@pytest.mark.parametrize(
    ("limit", "said"),
    [
        ("mask(f_offset[MHz], max dBm: 0..5: 10; 5<..10: 5)", "f_offset is the condition offset"),
        ("by frequency_GHz (27..28: >= 20 dBm; 28<..30: >= 25 dBm)", ""),
        ("by f[GHz] (27..28: >= 20 dBm; 28<..30: >= 25 dBm)", "f is the condition frequency"),
        (">= 20 dBm if temp_ambient[°C] > 20", "temp_ambient is the condition temperature_ambient"),
        ("<= P_rated + 2 dB", ""),
        ("<= drive + 2 dB", ""),
    ],
)
def test_a_condition_spelled_in_another_way_is_said_back(tmp_path: Path, limit: str, said: str) -> None:
    draft = load(tmp_path, limit)
    assert unknown(draft) == []
    assert said in draft.echoes["R-1"] and ("is the condition" in draft.echoes["R-1"]) == bool(said)


@pytest.mark.parametrize(
    ("limit", "words"),
    [
        (">= P_ratd - 3 dB", "refers to P_ratd, neither declared nor a known condition; nearest: P_rated"),
        (
            ">= 20 dBm if temp_ambiant[°C] > 20",
            "refers to temp_ambiant, neither declared nor a known condition",
        ),
        ("by frequncy[GHz] (27..28: >= 20 dBm; 28<..30: >= 25 dBm)", "nearest: frequency"),
        ("mask(f_ofset[MHz], max dBm: 0..5: 10; 5<..10: 5)", "refers to f_ofset"),
        (">= saturated_power - 3 dB", "but a parameter, and readings of another quantity are not looked up"),
    ],
)
def test_a_name_of_nothing_is_a_finding_with_the_nearest(tmp_path: Path, limit: str, words: str) -> None:
    (finding,) = unknown(load(tmp_path, limit))
    assert words in finding.message
    assert finding.severity == "warning" and finding.origin is not None and finding.origin.cell


def test_two_spellings_of_one_condition_are_a_finding(tmp_path: Path) -> None:
    both = "stricter(mask(f_offset[MHz], max dBm: 0..5: 10); mask(delta_f[MHz], max dBm: 5<..10: 5))"
    draft = load(tmp_path, both)
    (finding,) = unknown(draft)
    assert "delta_f and f_offset in the limit are both spellings of offset" in finding.message
    assert "is the condition" not in draft.echoes["R-1"]


def test_a_condition_of_the_set_needs_no_dictionary(tmp_path: Path) -> None:
    sets = [{"ID": "CS", "Dimension": "tuner_word", "Values": "1, 2"}]
    limit = "by tuner_word (1: >= 20 dBm; 2: >= 25 dBm)"
    assert unknown(load(tmp_path, limit, conditions=sets)) == []
    assert "refers to tuner_word" in unknown(load(tmp_path, limit))[0].message


def test_what_is_said_back_is_what_is_judged(tmp_path: Path) -> None:
    """The mask over f_offset decides readings that are recorded under offset."""
    draft = load(tmp_path, "mask(f_offset[MHz], max dB: 0..5: 10; 5<..10: 5)", "gain")
    requirement = next(one for one in draft.documents if isinstance(one, Requirement))
    sweep = [0.5 * step for step in range(21)]
    for beyond, verdict in ((4.0, Verdict.PASS), (9.0, Verdict.FAIL)):
        arrays = some_evidence(
            [9.0 if offset <= 5 else beyond for offset in sweep],
            conditions=some_columns({"offset": "MHz"}, offset=sweep),
        )
        table = an_evidence_table(rows=len(sweep))
        snapshot = a_snapshot(*PROJECT, *draft.documents, table, columns={"T-1": arrays})
        results = evaluate(snapshot, load_dictionary(), as_of=date(2026, 6, 1))
        assert results.of(requirement.id).verdict is verdict
