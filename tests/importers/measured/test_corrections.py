"""Corrections by name: added to readings with their uncertainty; never extrapolated, never twice. All invented."""

from __future__ import annotations

from datetime import date
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.importers.measured.corrections import at_frequencies
from specflow.importers.measurements import MeasuredTable, read_measurements
from specflow.model.correction import Correction, CorrectionPoint
from specflow.parameters import load_dictionary
from tests.builders import a_snapshot
from tests.importers.measured.make import PROJECT, SAID, book, low, one_table, questions, taken


def a_correction(id: str = "CABLE-3", **fields: Any) -> Correction:
    points = (
        CorrectionPoint(frequency_hz=27e9, added=3.0, u=0.3),
        CorrectionPoint(frequency_hz=28e9, added=3.2, u=0.4),
        CorrectionPoint(frequency_hz=30e9, added=4.0, u=0.4),
    )
    return Correction(id=id, **{"points": points, "issue": "B"} | fields)


def eirp(
    path: Path,
    *lines: list[Any],
    table: Correction | None = None,
    header: str = "EIRP (dBm)",
    **said: str,
) -> MeasuredTable:
    rows = [
        *lines,
        [],
        ["f (GHz)", header, "u EIRP (dB)"],
        [27.5, 40.0, 0.3],
        [28.0, 41.0, 0.3],
        [29.0, 42.0, 0.3],
    ]
    documents = (a_correction(),) if table is None else (table,)
    return one_table(
        book(path / "a.xlsx", rows), *documents, stated={**SAID, "correction": "CABLE-3", **said}
    )


def test_it_is_added_linearly_in_db_and_the_raw_reading_stays(tmp_path: Path) -> None:
    table = taken(eirp(tmp_path))
    assert table.document is not None and table.columns is not None
    assert low(table, "EIRP") == pytest.approx([43.1, 44.2, 45.6])
    assert [table.columns.extra["EIRP as read"].word(row) for row in range(3)] == ["40.0", "41.0", "42.0"]
    applied = table.document.applied[0]
    assert (applied.correction, applied.revision, applied.column) == ("CABLE-3", 1, "EIRP")
    assert "CABLE-3 issue B: 3.1 to 3.6 dB added" in table.document.values[0].conversions[-1]
    assert table.document.corrections == (f"EIRP (dBm): {applied.words}",)


def test_uncertainties_combine_in_rss_at_k_1(tmp_path: Path) -> None:
    """JCGM 100:2008, 5.1.2: u = sqrt(0.3² + 0.4²) = 0.5; between two points the greater of theirs counts."""
    table = taken(eirp(tmp_path))
    assert table.columns is not None and table.columns.values["EIRP"].u is not None
    assert table.columns.values["EIRP"].u.tolist() == pytest.approx([0.5, 0.5, 0.5])


def test_readings_without_uncertainty_get_none_from_a_correction(tmp_path: Path) -> None:
    rows = [["f (GHz)", "EIRP (dBm)"], [28.0, 41.0]]
    path = book(tmp_path / "a.xlsx", rows)
    table = taken(one_table(path, a_correction(), stated={**SAID, "correction": "CABLE-3"}))
    assert table.columns is not None and table.columns.values["EIRP"].u is None
    assert any("not combined: the readings have none" in note for note in table.notes)


@pytest.mark.parametrize(
    ("lines", "said", "words"),
    [
        ([["Path loss corrected: yes"]], {}, "the file says Path loss corrected: yes"),
        ([["Corrections", "CABLE-3"]], {}, "the file says Corrections: CABLE-3"),
        ([["Ref Offset", "10 dB"]], {}, "the file says Ref Offset: 10 dB"),
        ([["Signal path", "via CABLE-3"]], {}, "the file names CABLE-3 itself"),
        ([], {"correction": "CABLE-3, CABLE-3"}, "named 2 times"),
        ([], {"correction": "CABLE-4"}, "there is no correction 'CABLE-4'"),
        ([["Set-up", "bench 2"]], {}, "belongs to the set-up bench 1, the table is of bench 2"),
        (
            [["Date", "2027-02-01"]],
            {},
            "may be used from 2026-01-01 until 2026-12-31, the readings are of 2027-02-01",
        ),
    ],
)
def test_what_may_be_in_already_or_may_not_be_used_is_asked(
    tmp_path: Path, lines: list[list[str]], said: dict[str, str], words: str
) -> None:
    valid = {"valid_from": date(2026, 1, 1), "valid_until": date(2026, 12, 31)}
    table = eirp(tmp_path, *lines, table=a_correction(set_up="bench 1", **valid), **said)
    assert words in questions(table)


def test_the_person_may_say_that_readings_are_raw(tmp_path: Path) -> None:
    table = taken(eirp(tmp_path, ["Path loss corrected: yes"], corrected="no"))
    assert low(table, "EIRP") == pytest.approx([43.1, 44.2, 45.6])


def test_a_header_that_says_corrected_is_asked_about(tmp_path: Path) -> None:
    said = {"column B": "eirp"}
    asked = questions(eirp(tmp_path, header="EIRP corrected (dBm)", **said))
    assert "B2: the header 'EIRP corrected (dBm)' says that its readings are corrected" in asked


@pytest.mark.parametrize("text", ["no", "off", "0 dB", "not applied"])
def test_a_correction_that_was_switched_off_is_no_doubt(tmp_path: Path, text: str) -> None:
    taken(eirp(tmp_path, ["Path loss correction", text]))


def test_what_a_file_says_is_recorded_and_not_added(tmp_path: Path) -> None:
    rows = [["Corrections", "CABLE-3"], [], ["f (GHz)", "EIRP (dBm)"], [28.0, 41.0]]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows), a_correction()))
    assert table.document is not None and low(table, "EIRP") == [41.0]
    assert (
        table.document.corrections == ("Corrections: CABLE-3, stated in B1",) and not table.document.applied
    )


def test_readings_that_were_corrected_before_are_asked_about(tmp_path: Path) -> None:
    """The bench exports once more, now with the cable in its readings, and somebody names the cable again."""
    rows = [["f (GHz)", "EIRP (dBm)"], [27.5, 40.0], [28.0, 41.0], [29.0, 42.0]]
    first = taken(
        one_table(book(tmp_path / "a.xlsx", rows), a_correction(), stated={**SAID, "correction": "CABLE-3"})
    )
    assert first.document is not None and first.columns is not None
    earlier = first.document.model_copy(update={"id": "EV-1"})
    snapshot = a_snapshot(*PROJECT, a_correction(), earlier, columns={"EV-1": first.columns})
    again = [["f (GHz)", "EIRP (dBm)"], [27.5, 43.1], [28.0, 44.2], [29.0, 45.6]]
    read = read_measurements(
        book(tmp_path / "b.xlsx", again),
        snapshot,
        load_dictionary(),
        stated={**SAID, "correction": "CABLE-3"},
    )
    assert "those of EV-1 after CABLE-3 was added" in questions(read.tables[0])


def test_it_is_never_extrapolated(tmp_path: Path) -> None:
    rows = [["f (GHz)", "EIRP (dBm)"], [26.0, 41.0], [28.0, 41.0]]
    path = book(tmp_path / "a.xlsx", rows)
    asked = questions(one_table(path, a_correction(), stated={**SAID, "correction": "CABLE-3"}))
    assert "CABLE-3 is known from 27 to 30 GHz, the readings need 26 to 28 GHz" in asked
    assert "never extrapolated" in asked


def test_without_a_frequency_it_is_asked(tmp_path: Path) -> None:
    rows = [["Vdd (V)", "EIRP (dBm)"], [5.0, 41.0]]
    path = book(tmp_path / "a.xlsx", rows)
    assert "states one" in questions(
        one_table(path, a_correction(), stated={**SAID, "correction": "CABLE-3"})
    )


def test_readings_in_watts_are_asked_about(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Output power (W)"], [28.0, 2.0]]
    path = book(tmp_path / "a.xlsx", rows)
    asked = questions(one_table(path, a_correction(), stated={**SAID, "correction": "CABLE-3"}))
    assert "CABLE-3 is in dB, the readings in W" in asked


def test_an_antenna_factor_makes_a_field_of_a_voltage(tmp_path: Path) -> None:
    """E in dBµV/m is U in dBµV plus the antenna factor in dB(1/m), by the definition of the factor (CISPR 16-1-4)."""
    rows = [["f (GHz)", "Field strength (dBuV)"], [28.0, 20.0]]
    path = book(tmp_path / "a.xlsx", rows)
    table = taken(
        one_table(path, a_correction("AF-1", unit="dB(1/m)"), stated={**SAID, "correction": "AF-1"})
    )
    assert table.document is not None and table.document.values[0].unit == "dBµV/m"
    assert low(table, "Field strength") == pytest.approx([23.2])
    assert "Field strength in dBµV" in questions(one_table(path))


def test_of_several_quantities_it_takes_the_one_it_is_for(tmp_path: Path) -> None:
    rows = [["f (GHz)", "EIRP (dBm)", "Gain (dB)"], [28.0, 41.0, 20.0]]
    path = book(tmp_path / "a.xlsx", rows)
    said = {**SAID, "correction": "CABLE-3"}
    assert "which of the columns CABLE-3 is for" in questions(one_table(path, a_correction(), stated=said))
    table = taken(one_table(path, a_correction(parameter="eirp"), stated=said))
    assert low(table, "EIRP") == pytest.approx([44.2]) and low(table, "Gain") == [20.0]


def test_a_mapping_may_name_them(tmp_path: Path) -> None:
    rows = [["f (GHz)", "EIRP (dBm)"], [28.0, 41.0]]
    mapping = 'format = 1\n[[table]]\ncorrections = ["CABLE-3"]\n'
    table = taken(one_table(book(tmp_path / "a.xlsx", rows), a_correction(), mapping=mapping))
    assert low(table, "EIRP") == pytest.approx([44.2])


def test_two_corrections_add(tmp_path: Path) -> None:
    more = a_correction("PAD-1", points=(CorrectionPoint(frequency_hz=1e9, added=10.0, u=0.1),
                                         CorrectionPoint(frequency_hz=40e9, added=10.0, u=0.1)))  # fmt: skip
    rows = [["f (GHz)", "EIRP (dBm)", "u EIRP (dB)"], [28.0, 41.0, 0.3]]
    path = book(tmp_path / "a.xlsx", rows)
    table = taken(one_table(path, a_correction(), more, stated={**SAID, "correction": "CABLE-3, PAD-1"}))
    assert table.columns is not None and low(table, "EIRP") == pytest.approx([54.2])
    assert table.columns.values["EIRP"].u is not None
    assert float(table.columns.values["EIRP"].u[0]) == pytest.approx(np.sqrt(0.3**2 + 0.4**2 + 0.1**2))
    assert table.columns.extra["EIRP as read"].word(0) == "41.0"


@given(st.lists(st.floats(27e9, 30e9), min_size=1, max_size=20))
def test_between_points_it_is_what_numpy_interpolates(hertz: list[float]) -> None:
    added, spread = at_frequencies(a_correction(), np.array(hertz))
    assert added.tolist() == pytest.approx(np.interp(hertz, [27e9, 28e9, 30e9], [3.0, 3.2, 4.0]).tolist())
    assert set(spread.tolist()) <= {0.3, 0.4}
