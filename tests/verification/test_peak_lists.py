"""Lists of peaks against a limit over a range: what was scanned proves, what is listed can fail. All invented."""

from __future__ import annotations

from datetime import date
from pathlib import Path
from typing import Any

import pytest

from specflow.conditions import make_conditions_set, parse_dimension
from specflow.limits import parse_limit
from specflow.model.correction import Correction
from specflow.model.verdict import RequirementStatus
from specflow.parameters import load_dictionary
from specflow.verification import evaluate
from tests.builders import a_block, a_quantity, a_requirement, a_snapshot, an_activity, an_item
from tests.importers.measured.make import SAID, book, one_table, questions, taken

HEADERS = ["No", "Frequency (MHz)", "Level (dBm)", "Type"]
SCAN = [["Scanned range", "30 MHz to 1 GHz"], ["RBW", "100 kHz"], ["Noise floor", "-85 dBm"], []]
PEAKS = [[1, 100, -60, "discrete"], [2, 200, -62, "noise-like"], [3, 300, -63, ""]]


def status(
    path: Path, rows: list[list[Any]], *, limit: str = "<= -50 dBm", bandwidth_hz: float = 100e3, **said: str
) -> RequirementStatus:
    """The status of a limit on spurious emissions from 30 MHz to 1 GHz with this list as its only evidence."""
    quantity = a_quantity("spurious_emission", bandwidth_hz=bandwidth_hz)
    conditions = make_conditions_set("CS", [parse_dimension("frequency: 30 MHz to 1000 MHz step 1 MHz")])
    requirement = a_requirement(quantity=quantity, limit=parse_limit(limit), conditions="CS")
    documents = (a_block(), an_item(), requirement, conditions, an_activity())
    stated = {**SAID, "column C": "spurious_emission", **said}
    table = taken(
        one_table(book(path / "a.xlsx", [["Peak list"], *rows]), conditions, requirement, stated=stated)
    )
    assert table.document is not None and table.columns is not None
    document = table.document.model_copy(update={"id": "EV-1", "accepted_by": "A. Invented"})
    snapshot = a_snapshot(*documents, document, columns={"EV-1": table.columns})
    return evaluate(snapshot, load_dictionary(), as_of=date(2026, 6, 1)).of(requirement.id)


def proved(found: RequirementStatus) -> bool:
    (activity,) = found.activities
    return any(results.proved.all() for results in activity.items.values())


def failed(found: RequirementStatus) -> bool:
    return found.label.value == "failing"


def test_a_scan_of_the_range_with_peaks_and_floor_under_the_limit_proves_it(tmp_path: Path) -> None:
    found = status(tmp_path, [*SCAN, HEADERS, *PEAKS])
    assert proved(found) and not failed(found)


@pytest.mark.parametrize(
    "head",
    [
        [],  # nothing is said of a scan
        [*SCAN[:2], []],  # no floor
        [["Scanned range", "30 MHz to 900 MHz"], *SCAN[1:]],
        [["Scanned range", "40 MHz to 1 GHz"], *SCAN[1:]],
        [*SCAN[:2], ["Noise floor", "-45 dBm"], []],  # what is above the limit may hide under the floor
    ],
)
def test_without_a_full_scan_down_to_below_the_limit_it_proves_nothing(
    tmp_path: Path, head: list[Any]
) -> None:
    rbw = {} if any(line[:1] == ["RBW"] for line in head) else {"bandwidth": "100 kHz"}
    found = status(tmp_path, [*head, HEADERS, *PEAKS], **rbw)
    assert not proved(found) and not failed(found)


def test_a_dense_list_is_no_sweep(tmp_path: Path) -> None:
    peaks = [[number, 30 + number, -70, "discrete"] for number in range(971)]
    assert not proved(status(tmp_path, [["RBW", "100 kHz"], [], HEADERS, *peaks]))


@pytest.mark.parametrize("head", [SCAN, [["RBW", "100 kHz"], []]])
def test_one_peak_above_the_limit_fails_with_a_scan_and_without(tmp_path: Path, head: list[Any]) -> None:
    found = status(tmp_path, [*head, HEADERS, *PEAKS, [4, 400, -49, "discrete"]])
    assert failed(found) and not proved(found)


def test_two_scans_complete_each_other(tmp_path: Path) -> None:
    scans = [
        ["Scanned range", "30 MHz to 500 MHz (floor -85 dBm); 500 MHz to 1 GHz (floor -80 dBm)"],
        SCAN[1],
        [],
    ]
    assert proved(status(tmp_path, [*scans, HEADERS, *PEAKS]))


@pytest.mark.parametrize(
    ("level", "kind", "limit_in", "expected"),
    [
        (-49.0, "discrete", 10e3, "fails"),  # a line does not scale with bandwidth
        (-49.0, "noise-like", 10e3, "proves"),  # noise in a tenth of the bandwidth is 10 dB less: -59 dBm
        (-49.0, "", 10e3, "neither"),  # between -59 and -49 dBm: part of it meets the limit
        (-55.0, "discrete", 1e6, "proves"),
        (-55.0, "noise-like", 1e6, "fails"),  # ten times the bandwidth: -45 dBm
        (-55.0, "", 1e6, "neither"),
    ],
)
def test_lines_do_not_scale_with_bandwidth_and_noise_does(
    tmp_path: Path, level: float, kind: str, limit_in: float, expected: str
) -> None:
    """10·log10 of the ratio of bandwidths for noise, nothing for a line: common practice, no source."""
    found = status(tmp_path, [*SCAN, HEADERS, [1, 100, level, kind]], bandwidth_hz=limit_in)
    assert (proved(found), failed(found)) == {
        "proves": (True, False), "fails": (False, True), "neither": (False, False)
    }[expected]  # fmt: skip


def test_a_line_may_hide_under_a_floor_and_does_not_scale(tmp_path: Path) -> None:
    """Floor -85 dBm in 100 kHz against -90 dBm in 10 kHz: noise would be at -95 dBm, a line may be at -85 dBm."""
    found = status(
        tmp_path, [*SCAN, HEADERS, [1, 100, -99, "discrete"]], limit="<= -90 dBm", bandwidth_hz=10e3
    )
    assert not proved(found) and not failed(found)


def test_a_correction_raises_the_floor_by_the_most_it_adds(tmp_path: Path) -> None:
    points = ((30e6, 1.0), (500e6, 4.0), (1e9, 3.0))
    cable = Correction(id="C-1", points=[{"frequency_hz": hertz, "added": added} for hertz, added in points])
    rows = [["Peak list"], *SCAN, [*HEADERS, "P/F"], [1, 30, -60, "discrete", "PASS"]]
    stated = {**SAID, "column C": "spurious_emission", "correction": "C-1"}
    table = taken(one_table(book(tmp_path / "a.xlsx", rows), cable, stated=stated))
    assert table.document is not None and table.columns is not None and table.document.peaks is not None
    assert table.document.peaks.scans[0].floor == -81.0
    peak, floor = table.columns.values.values()
    assert (peak.low[0], floor.high[1]) == (-59.0, -81.0)
    assert (
        table.columns.extra["P/F"].word(1) == ""
        and table.columns.extra["Level (discrete) as read"].word(1) == ""
    )
    short = Correction(
        id="C-1", points=[{"frequency_hz": 30e6, "added": 1.0}, {"frequency_hz": 900e6, "added": 1.0}]
    )
    asked = questions(one_table(book(tmp_path / "b.xlsx", rows), short, stated=stated))
    assert "C-1 does not reach over the scan from 30 to 1000 MHz" in asked
