"""Raw data as pictures: which readings, with the limit where it is one on them, and the derived result."""

from __future__ import annotations

from collections.abc import Iterator
from datetime import date
from pathlib import Path

import numpy as np
import pytest

from specflow.exporters.svg import svg
from specflow.model.picture import TracePicture
from specflow.reports.origins import OriginFinder
from specflow.reports.picture_text import picture_lines
from specflow.reports.trace_pictures import MOST_PLACES, trace_pictures
from specflow.store import ProjectStore, create_project
from specflow.workflows.derive import DeriveOptions, accept_derive, preview_derive
from specflow.workflows.evaluate_project import evaluate_project
from specflow.workflows.export import export_report
from tests.builders import (
    a_block,
    a_conditions_set,
    a_project,
    a_quantity,
    a_requirement,
    adding,
    an_evidence_file,
    an_item,
    at_least,
    at_most,
)
from tests.derive.deriving import a_trace
from tests.workflows.test_derive import BAND, OVER, WARM, gain_trace

DAY = date(2026, 6, 1)


@pytest.fixture
def store(tmp_path: Path) -> Iterator[ProjectStore]:
    """A gain trace that a limit on gain (R-2) is held against, and a ripple derived from it (R-1)."""
    table, columns = gain_trace()
    documents = (
        a_block(),
        an_item(),
        a_conditions_set("CS", WARM, BAND),
        a_requirement("R-1", quantity=a_quantity("gain_flatness"), limit=at_most(1.2)),
        a_requirement("R-2", limit=at_least(20)),
        an_evidence_file(),
    )
    with create_project(tmp_path / "p.specflow", a_project()) as project:
        project.apply(adding(*documents, table), columns={"T-1": columns}, by="A. B.")
        options = DeriveOptions("ripple", ("T-1",), over=(OVER,), requirement="R-1")
        accept_derive(project, preview_derive(project, options), by="A. B.")
        yield project


def drawn(store: ProjectStore, requirement: str) -> TracePicture:
    evaluation = evaluate_project(store, DAY)
    snapshot = evaluation.snapshot
    [one] = [one for one in snapshot.requirements if one.id == requirement]
    [picture] = trace_pictures(one, evaluation.results.of(requirement), snapshot, OriginFinder(snapshot))
    return picture


def test_readings_are_drawn_with_the_limit_on_them(store: ProjectStore) -> None:
    picture = drawn(store, "R-2")
    assert [(line.name, line.look) for line in picture.lines] == [
        ("item LNA-1, +85 °C ambient", "reading"),
        ("item LNA-1, +25 °C ambient", "reading"),
        ("lower limit", "bound"),
    ]
    raw = store.load().load_columns(["T-1"])["T-1"]
    assert list(picture.lines[1].y) == raw.values["Gain"].low[:26].tolist()
    assert set(picture.lines[2].y) == {20.0}
    assert picture.marks == ()


def test_behind_a_derived_value_stands_the_raw_data_with_a_mark(store: ProjectStore) -> None:
    picture = drawn(store, "R-1")
    assert [line.look for line in picture.lines] == ["reading", "reading"]  # the limit is one on the ripple
    assert picture.marks[0].text == "1.00 dB, least at 18.3 GHz, greatest at 19.4 GHz"
    assert picture.marks[0].x == 19.4
    assert "Derived: ripple of Gain over frequency" in picture.words


def test_the_page_shows_the_raw_data_and_the_terminal_too(store: ProjectStore) -> None:
    page = export_report(store, DAY, "html").content.decode()
    assert page.count("<polyline") == 5  # two traces for R-1; two and the limit for R-2
    assert "R-1: gain of T-1 along frequency" in page
    text = picture_lines(drawn(store, "R-2"), 70)
    assert max(map(len, text)) <= 70
    assert any("╌╌╌" in line for line in text) and "╌ lower limit" in text


def test_a_drawing_of_words_that_look_like_markup_is_safe(store: ProjectStore) -> None:
    picture = drawn(store, "R-2")
    odd = picture.lines[0].model_copy(update={"name": "<script>alert(1)</script>"})
    markup = svg(picture.model_copy(update={"lines": (odd, *picture.lines[1:])}), "p")
    assert "<script>" not in markup and "&lt;script&gt;" in markup


def test_of_many_readings_the_extremes_of_each_stretch_are_drawn(tmp_path: Path) -> None:
    frequency = np.linspace(17.7, 20.2, 20_001)
    gain = 22 + np.sin(frequency)
    gain[12_345] = 20.5  # a notch of one reading must stay visible
    table, columns = a_trace("T-1", {"Gain": gain.tolist()}, frequency=frequency.tolist())
    documents = (
        a_block(),
        an_item(),
        a_conditions_set("CS", BAND),
        a_requirement("R-2", limit=at_least(20)),
        an_evidence_file(),
    )
    with create_project(tmp_path / "many.specflow", a_project()) as store:
        store.apply(adding(*documents, table), columns={"T-1": columns}, by="A. B.")
        line = drawn(store, "R-2").lines[0]
    assert len(line.x) <= MOST_PLACES + 2
    assert min(line.y) == 20.5
