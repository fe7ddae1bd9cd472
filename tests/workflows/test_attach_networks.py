"""Network files as a user sees them: attached, derived for the requirements, judged, traced to the line of the file.

The filter files are measurements that others published (origin in tests/data/README.md); the project about them is
invented.
"""

from __future__ import annotations

from collections.abc import Iterator
from datetime import date
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from specflow.errors import DocumentError
from specflow.model.conditions import Span
from specflow.model.declared import UncertaintyEntry
from specflow.model.derivation import Derivation
from specflow.model.evidence import EvidenceTable, Supersession
from specflow.model.verdict import RecordRef
from specflow.reports.origins import OriginFinder
from specflow.store import ProjectStore, create_project
from specflow.workflows.attach import AttachOptions, Decision, accept_attach, preview_attach
from specflow.workflows.derive import preview_derive
from specflow.workflows.derive_request import DeriveOptions
from specflow.workflows.evaluate_project import evaluate_project
from specflow.workflows.found_files import find_files
from specflow.workflows.trace import trace
from specflow.workflows.verify_files import FileState, verify_files
from tests.builders import (
    a_block,
    a_conditions_set,
    a_dimension,
    a_project,
    a_quantity,
    a_requirement,
    adding,
    an_activity,
    an_item,
    at_least,
    at_most,
)
from tests.conftest import noon

DATA = Path(__file__).parents[1] / "data"
ME = Decision("A. B.")
PORTS = {"port 1": "input", "port 2": "output"}
FILTER = {"block": "FIL", "item": "FIL-7", "temperature": "case", **PORTS}


def band(id: str, low: float, high: float, step: float, *more: Any) -> Any:
    frequency = a_dimension(
        span=Span(low=low, high=high, step=step), tolerance=0.0, text=f"{low} to {high} GHz step {step} GHz"
    )
    return a_conditions_set(id, frequency, *more)


PASS_BAND = band(
    "PASS", 1.0, 10.0, 0.1, a_dimension("temperature_case", "°C", values=(25.0, 125.0), tolerance=3.0)
)
PROJECT = (
    a_block("FIL", name="Low-pass filter"),
    an_item("FIL-7", block="FIL", serial="7"),
    PASS_BAND,
    a_requirement(
        "R-IL", block="FIL", quantity=a_quantity("insertion_loss"), limit=at_most(0.5), conditions="PASS"
    ),
    an_activity("R-IL"),
)


@pytest.fixture
def store(tmp_path: Path) -> Iterator[ProjectStore]:
    with create_project(tmp_path / "p.specflow", a_project(), clock=noon) as project:
        project.apply(adding(*PROJECT), by="A. B.")
        yield project


def attached(store: ProjectStore, path: Path, decision: Decision = ME, **stated: str) -> Any:
    return accept_attach(store, preview_attach(store, path, AttachOptions(stated=stated)), decision)


def status_of(store: ProjectStore, requirement: str) -> Any:
    return evaluate_project(store, date(2026, 5, 5)).results.of(requirement)


def test_an_insertion_loss_over_two_temperatures_is_proved_by_two_files(store: ProjectStore) -> None:
    first = attached(store, DATA / "lowpass_25c.s2p", **FILTER)
    assert list(first.tables) == ["EV-1", "EV-2"]
    half = status_of(store, "R-IL")
    attached(store, DATA / "lowpass_125c.s2p", **FILTER)
    whole = status_of(store, "R-IL")
    assert (half.k, half.n, whole.k, whole.n) == (1, 2, 2, 2)

    snapshot = store.load()
    raw, derived = snapshot.find(EvidenceTable, "EV-3"), snapshot.find(EvidenceTable, "EV-4")
    assert raw is not None and derived is not None
    assert [one.quantity.parameter for one in derived.values] == ["insertion_loss"]
    assert {one.quantity.parameter for one in raw.values} == {"scattering_db", "scattering_angle"}
    columns = snapshot.load_columns(["EV-4"])["EV-4"]
    at = {float(f): float(v) for f, v in zip(columns.conditions.numeric["frequency"],
                                             columns.values["insertion_loss"].low, strict=True)}  # fmt: skip
    # facts of the files as published, read independently: S21 at 1, 2, 4 and 10 GHz
    published = {1000.0: 0.0810, 2000.0: 0.1152, 4000.0: 0.1639, 10000.0: 0.3539}
    assert {f: round(at[f], 4) for f in published} == published
    [derivation] = [one for one in snapshot.all(Derivation) if one.inputs == ("EV-3",)]
    assert (derivation.law, derived.derivation, derivation.digests) == ("loss", derivation.id, (raw.digest,))


def test_a_loss_is_traced_to_the_number_in_the_file(store: ProjectStore) -> None:
    attached(store, DATA / "lowpass_125c.s2p", **FILTER)
    told = [cell for row in trace(store, date(2026, 5, 5), "R-IL").rows for cell in row.cells]
    origins = [cell.origin for cell in told if cell.origin is not None and cell.origin.row]
    words = " ".join(cell.text for cell in told)
    assert "loss" in words and "S21 dB" in words
    # the governing loss is that at 10 GHz, 0.3539 dB: number 4 of its line
    number = (DATA / "lowpass_125c.s2p").read_text().splitlines()[413].split()[3]
    assert round(float(number), 4) == -0.3539
    assert any((one.row, one.column) == (414, 4) for one in origins), [str(one) for one in origins]


def test_the_preview_shows_what_is_derived_and_why(store: ProjectStore) -> None:
    preview = preview_attach(store, DATA / "lowpass_25c.s2p", AttachOptions(stated=FILTER))
    [planned] = preview.planned[0]
    assert (planned.plan.law, planned.plan.shown, planned.plan.why) == ("loss", "S21", "R-IL")
    shown = {one.header: (one.meaning, one.reason) for one in preview.measurements.tables[0].recognised}
    assert shown["port 1"] == ("input", "stated by the person")
    assert shown["temperature"] == ("temperature case = 25 °C for all rows", "stated in line 6")
    assert shown["input power"] == ("input level = 0 dBm for all rows", "stated in line 6")


def test_ports_are_asked_for_where_a_requirement_needs_them(store: ProjectStore) -> None:
    stated = {key: text for key, text in FILTER.items() if key not in PORTS}
    preview = preview_attach(store, DATA / "lowpass_25c.s2p", AttachOptions(stated=stated))
    [question] = preview.measurements.tables[0].questions
    assert "R-IL" in question.what and 'port 1=..."' in question.remedy
    with pytest.raises(DocumentError, match="1 question is open; nothing was stored"):
        accept_attach(store, preview, ME)
    raw_only = attached(store, DATA / "lowpass_25c.s2p", derive="none", **stated)
    assert list(raw_only.tables) == ["EV-1"]


def test_a_temperature_without_a_location_is_asked_for(store: ProjectStore) -> None:
    stated = {key: text for key, text in FILTER.items() if key != "temperature"}
    preview = preview_attach(store, DATA / "lowpass_125c.s2p", AttachOptions(stated=stated))
    assert [one.cell for one in preview.measurements.tables[0].questions] == ["line 6"]


def test_the_same_file_again_adds_nothing_until_a_requirement_speaks_of_more(store: ProjectStore) -> None:
    attached(store, DATA / "lowpass_25c.s2p", **FILTER)
    assert preview_attach(store, DATA / "lowpass_25c.s2p", AttachOptions(stated=FILTER)).is_unchanged
    more = a_requirement(
        "R-RL", block="FIL", quantity=a_quantity("return_loss", plane="input"), limit=at_least(15),
        conditions="PASS",
    )  # fmt: skip
    store.apply(adding(more), by="A. B.")
    preview = preview_attach(store, DATA / "lowpass_25c.s2p", AttachOptions(stated=FILTER))
    assert not preview.is_unchanged and preview.new_derived == 1 and not preview.new_tables
    assert list(accept_attach(store, preview, ME).tables) == ["EV-3"]
    columns = store.load().load_columns(["EV-3"])["EV-3"]
    place = int(np.flatnonzero(columns.conditions.numeric["frequency"] == 1000.0)[0])
    assert round(float(columns.values["return_loss"].low[place]), 4) == 24.5678


def test_a_file_that_replaces_another_replaces_what_was_derived_from_it(
    store: ProjectStore, tmp_path: Path
) -> None:
    path = tmp_path / "filter.s2p"
    path.write_text("# GHz S DB R 50\n1 -20 0 -0.3 0 -0.3 0 -20 0\n10 -20 0 -0.4 0 -0.4 0 -20 0\n")
    stated = {**FILTER, "temperature_case": "25 °C"}
    attached(store, path, **stated)
    path.write_text("# GHz S DB R 50\n1 -20 0 -0.2 0 -0.2 0 -20 0\n10 -20 0 -0.4 0 -0.4 0 -20 0\n")
    attached(store, path, Decision("A. B.", supersedes=("EV-1",)), **stated)
    steps = {(one.earlier, one.later) for one in store.load().all(Supersession)}
    assert steps == {("EV-1", "EV-3"), ("EV-2", "EV-4")}


def test_a_network_is_verified_against_its_file(store: ProjectStore, tmp_path: Path) -> None:
    path = tmp_path / "three.s3p"
    rows = "{f} 0.5 0 0.25 0 0.125 0\n0.25 0 0.5 0 0.1 0\n0.125 0 0.1 0 0.5 0\n"
    path.write_text("# GHz S RI R 50\n" + rows.format(f=1) + rows.format(f=2))
    attached(store, path, block="FIL", item="FIL-7", derive="none")
    origin = OriginFinder(store.load()).origin(RecordRef("EV-1", "S32 real", 1))
    assert origin is not None and (origin.row, origin.column) == (
        7,
        3,
    )  # the third line of the second frequency
    asks_more = a_requirement(
        "R-AI", block="FIL", quantity=a_quantity("amplitude_imbalance"), limit=at_most(0.5), conditions="PASS"
    )
    store.apply(adding(asks_more), by="A. B.")  # its ports are not named: no matter here
    [same] = verify_files(store).checks
    assert same.state is FileState.UNCHANGED
    lines = path.read_text().splitlines()
    lines[2] = "0.25 0 0.5 0 0.1 7"
    path.write_text("\n".join(lines))
    [changed] = verify_files(store).checks
    assert [one.cell for one in changed.tables[0].differences] == ["F3"]
    assert "three.s3p" in [file.name for file in find_files([tmp_path]).files]


def test_the_register_gives_derived_quantities_their_uncertainty(store: ProjectStore) -> None:
    line = UncertaintyEntry(
        id="U-1", set_up="VNA-2", parameter="insertion_loss", standard_uncertainty=0.04, unit="dB",
        frequency_from_hz=1e9, frequency_to_hz=2e10,
    )  # fmt: skip
    store.apply(adding(line), by="A. B.")
    attached(store, DATA / "lowpass_25c.s2p", set_up="VNA-2", **FILTER)
    snapshot = store.load()
    table = snapshot.find(EvidenceTable, "EV-2")
    arrays = snapshot.load_columns(["EV-2"])["EV-2"]
    assert table is not None and table.values[0].uncertainty_from == "register U-1"
    u, hertz = arrays.values["insertion_loss"].u, arrays.conditions.numeric["frequency"] * 1e6
    assert u is not None
    inside = (hertz >= 1e9) & (hertz <= 2e10)
    assert (u[inside] == 0.04).all() and np.isnan(u[~inside]).all()
    with pytest.raises(DocumentError, match="does not say of which entries"):
        attached(store, DATA / "lowpass_125c.s2p", uncertainty="0.1 dB (k=2)", **FILTER)


def test_active_reflection_over_scan_is_derived_from_all_entries_and_again(store: ProjectStore) -> None:
    scan = a_dimension("scan_theta", "deg", values=(-60.0, -30.0, 0.0, 30.0, 60.0), tolerance=0.0)
    frequency = a_dimension(
        span=Span(low=3.6, high=3.8, step=0.02), tolerance=0.0, text="3.6 to 3.8 GHz step 0.02 GHz"
    )
    conditions = a_conditions_set("ARRAY", frequency, scan)
    requirement = a_requirement(
        "R-AR", block="FIL", quantity=a_quantity("active_reflection"), limit=at_most(10), conditions="ARRAY"
    )
    store.apply(adding(conditions, requirement, an_activity("R-AR")), by="A. B.")
    said = {"block": "FIL", "item": "FIL-7", "spacing": "40 mm", "reference": "comments", **PORTS}
    done = attached(store, DATA / "ten_port_sim.s10p", **said)
    assert list(done.tables) == ["EV-1", "EV-2", "EV-3"]  # raw, active reflection, insertion loss
    snapshot = store.load()
    columns = snapshot.load_columns(["EV-2"])["EV-2"]
    assert columns.conditions.size == 11 * 5 and columns.conditions.units["scan_theta"] == "deg"
    status = status_of(store, "R-AR")
    assert (status.k, status.n) == (5, 5)

    [derivation] = [one for one in snapshot.all(Derivation) if one.law == "active reflection"]
    said = {one.name: one.text for one in derivation.settings}
    options = DeriveOptions(
        "active reflection", ["EV-1"], (), derivation.over, settings=said, requirement="R-AR"
    )
    again = preview_derive(store, options)
    assert again.is_unchanged and again.stored_as == "EV-2"


def test_a_trace_says_the_reference_impedance_and_the_conditions_with_their_values(
    store: ProjectStore,
) -> None:
    """A gain means something between stated impedances only, and a condition of the header stands in no column."""
    attached(store, DATA / "lowpass_125c.s2p", **FILTER, input_level="-30 dBm")
    rows = {code: trace(store, date(2026, 5, 5), code).rows for code in ("R-IL", "EV-1")}
    of_requirement, of_table = (
        [cell.text for row in rows[code] for cell in row.cells] for code in ("R-IL", "EV-1")
    )
    title = "scattering parameters of 2 ports at 50 ohm"
    assert any(text.endswith(title) and "rows of lowpass_125c.s2p" in text for text in of_requirement)
    assert any("rows for block FIL" in text and title in text for text in of_table)
    for texts in (of_requirement, of_table):
        assert any(text.startswith("temperature case 125 °C, stated") for text in texts)
        assert any(text.startswith("input level -30 dBm, stated by the person") for text in texts)


def test_a_differential_gain_is_derived_from_a_file_of_single_ports(
    store: ProjectStore, tmp_path: Path
) -> None:
    """Two equal lines of 6 dB: that of the pair; the words of the derivation name the table by its ends."""
    rows = "".join(
        f"{k} 0.1 0 0.1 0 0.1 0 0.1 0\n2.1 0 0.1 0 0.1 0 0.1 0\n0.1 0 0.1 0 0.1 0 0.1 0\n0.1 0 0.1 0 2.1 0 0.1 0\n"
        for k in range(1, 11)
    )
    path = tmp_path / "pair.s4p"
    path.write_text(f"# GHz S MA R 50\n{rows}")
    wanted = a_requirement(
        "R-DD", block="FIL", quantity=a_quantity("gain"), limit=at_least(6), conditions="TEN"
    )
    band_of_ten = a_conditions_set("TEN", a_dimension(span=Span(low=1.0, high=10.0, step=1.0), tolerance=0.0))
    store.apply(adding(band_of_ten, wanted, an_activity("R-DD")), by="A. B.")
    attached(store, path, block="FIL", item="FIL-7", derive="none")
    options = DeriveOptions(
        "mode gain", ("EV-1",), settings={"input": "D1,3", "output": "D2,4"}, requirement="R-DD"
    )
    preview = preview_derive(store, options)
    assert preview.derivation.words == (
        "mode gain of S11 magnitude ... S44 angle (32 columns) (input D1,3, output D2,4)"
    )
    assert preview.derived.columns.values["gain"].low == pytest.approx(20 * np.log10(2.0))
