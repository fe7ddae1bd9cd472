"""What a report says stands in the cell of a record: the reading as read, not what was made of it."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest

from specflow.model.columns import TextColumn
from specflow.model.correction import AppliedCorrection, Correction, CorrectionPoint
from specflow.model.evidence import EvidenceColumns, as_read_column
from specflow.model.verdict import RecordRef
from specflow.reports.origins import OriginFinder
from tests.builders import a_snapshot, a_value_column, an_evidence_table, some_evidence

RECORD = RecordRef("T-1", "EIRP", 0)
APPLIED = (AppliedCorrection(correction="CAB-1", revision=1, column="EIRP", words="2.1 dB added"),)
EIRP = a_value_column("EIRP", unit="dBm")


def recorded(evidence: EvidenceColumns, *corrections: Correction, **fields: Any) -> str:
    """Return what is told of the first record of a table of one value column."""
    table = an_evidence_table(values=(EIRP,), **fields)
    snapshot = a_snapshot(table, *corrections, columns={"T-1": evidence})
    return OriginFinder(snapshot).recorded(RECORD).text


@pytest.mark.parametrize(
    ("kept", "told"),
    [
        ("48.5", "48.5 dBm, before correction"),
        ("-inf .. 48.5", "≤ 48.5 dBm, before correction"),
        ("48.25 .. 48.75", "48.25 to 48.75 dBm, before correction"),
        ("", "50.6 dBm"),
    ],
)
def test_a_corrected_reading_is_told_as_it_stands_in_its_cell(kept: str, told: str) -> None:
    evidence = some_evidence({"EIRP": [50.6, 50.9, 50.6]})
    evidence = replace(evidence, extra={as_read_column("EIRP"): TextColumn.of([kept or None] * 3)})
    assert recorded(evidence, applied=APPLIED) == told


def test_the_unit_is_left_off_where_the_correction_changed_it() -> None:
    points = (CorrectionPoint(frequency_hz=27e9, added=3.0), CorrectionPoint(frequency_hz=28e9, added=3.2))
    factor = Correction(id="CAB-1", points=points, unit="dB(1/m)")
    evidence = some_evidence({"EIRP": [50.6, 50.9, 50.6]})
    evidence = replace(evidence, extra={as_read_column("EIRP"): TextColumn.of(["48.5"] * 3)})
    assert recorded(evidence, factor, applied=APPLIED) == "48.5, before correction"


def test_what_was_derived_is_not_told_as_what_stands_in_the_cell() -> None:
    assert recorded(some_evidence({"EIRP": [50.6, 50.9, 50.6]}), derivation="DV-1") == "50.6 dBm, derived"
