"""The sheet of correction tables: the sign is said, the unit is dB, U without k is refused. All invented."""

from __future__ import annotations

from datetime import date, datetime
from pathlib import Path
from typing import Any

import pytest

from specflow.model.correction import Correction
from specflow.model.draft import Draft
from specflow.model.finding import Severity
from tests.builders import read_sheets

FIRST = {
    "ID": "CABLE-3",
    "Frequency": "27.5 GHz",
    "Amount": "3.2 dB",
    "Kind": "loss",
    "Uncertainty": "0.2 dB (k=2)",
}
SECOND = {"ID": "", "Frequency": "30 GHz", "Amount": "3.6 dB", "Kind": "", "Uncertainty": "u = 0.15 dB"}


def sheet(path: Path, *rows: dict[str, Any]) -> Draft:
    return read_sheets(path, correction=[dict(row) for row in rows])


def only(draft: Draft) -> Correction:
    assert not draft.findings, draft.findings
    (document,) = draft.documents
    assert isinstance(document, Correction)
    return document


def test_rows_of_one_id_are_one_table(tmp_path: Path) -> None:
    more = {
        "Issue": "B",
        "Valid from": datetime(2026, 1, 15),
        "Valid until": "2027-01-14",
        "Set-up": "Range A",
    }
    found = only(sheet(tmp_path, FIRST | more, SECOND))
    assert [(point.frequency_hz, point.added, point.u) for point in found.points] == [
        (27.5e9, 3.2, 0.1),
        (30e9, 3.6, 0.15),
    ]
    assert (found.issue, found.set_up, found.valid_until) == ("B", "Range A", date(2027, 1, 14))


def test_what_it_does_is_said_back(tmp_path: Path) -> None:
    draft = sheet(tmp_path, FIRST, SECOND)
    assert draft.echoes == {"CABLE-3": "adds 3.2 dB at 27.5 GHz to 3.6 dB at 30 GHz to a reading (2 points)"}


def test_a_gain_is_taken_off_the_reading(tmp_path: Path) -> None:
    found = only(sheet(tmp_path, FIRST | {"Kind": "gain", "Amount": "20 dB"}))
    assert found.points[0].added == -20.0


@pytest.mark.parametrize(
    ("cells", "words"),
    [
        ({"Kind": ""}, "the kind is not stated"),
        ({"Kind": "attenuator"}, "does not say whether the amount is added"),
        ({"Amount": "3.2"}, "3.2 has no unit"),
        ({"Amount": "3.2 dBm"}, "a correction in dBm"),
        ({"Frequency": "27.5"}, "27.5 has no unit"),
        ({"Frequency": "0 Hz"}, "no frequency of a correction"),
        ({"Uncertainty": "0.2 dB"}, "has no coverage factor"),
        ({"Uncertainty": "u = 0.1 GHz"}, "no uncertainty of a correction in dB"),
    ],
)
def test_what_cannot_be_is_refused_by_cell(tmp_path: Path, cells: dict[str, str], words: str) -> None:
    draft = sheet(tmp_path, FIRST | cells)
    errors = [one for one in draft.findings if one.severity is Severity.ERROR]
    assert errors and not draft.documents
    assert any(words in one.message for one in errors), [one.message for one in errors]
    assert all(one.origin is not None and one.remedy for one in errors)


def test_two_rows_at_one_frequency_or_of_two_signs_are_refused(tmp_path: Path) -> None:
    assert not sheet(tmp_path, FIRST, SECOND | {"Frequency": "27.5 GHz"}).documents
    assert not sheet(tmp_path, FIRST, SECOND | {"Kind": "gain"}).documents
