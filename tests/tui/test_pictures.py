"""The pictures of its budgets on the card of a requirement."""

from __future__ import annotations

import numpy as np
from textual.pilot import Pilot

from specflow.model.columns import Columns, TextColumn
from specflow.model.derivation import Covered, Derivation, InputColumn
from specflow.model.evidence import AT_COLUMN, EvidenceColumns, ValueArrays
from specflow.parameters import load_dictionary
from specflow.reports.budget import titles
from specflow.reports.pictures import budget_pictures
from specflow.tui.app import BrowseApp
from specflow.tui.widgets.card_view import CardView
from specflow.tui.widgets.picture import LEAST_WIDTH, PictureView, drawn
from specflow.verification import evaluate
from specflow.workflows.browse import browse_data
from specflow.workflows.evaluate_project import Evaluation
from tests import harbour, receiver
from tests.builders import (
    a_block,
    a_quantity,
    a_requirement,
    a_snapshot,
    a_value_column,
    an_evidence_file,
    an_item,
    at_most,
)
from tests.tui.browsing import an_app, drive
from tests.workflows.test_derive import DAY, gain_trace

OUTCOME = receiver.outcome()
PICTURES = budget_pictures(OUTCOME, OUTCOME.place, titles(receiver.DICTIONARY))


def test_a_picture_is_drawn_as_wide_as_there_is_room_and_no_narrower_than_it_can_be_read() -> None:
    for picture in PICTURES:
        for width in (20, LEAST_WIDTH, 100):
            assert max(len(line.plain) for line in drawn(picture, width)) <= max(width, LEAST_WIDTH)


def test_marks_have_the_colours_of_the_theme() -> None:
    levels = drawn(PICTURES[0], 80)
    assert any(span.style == "$warning" for line in levels for span in line.spans)
    assert any(span.style == "$primary" for line in drawn(PICTURES[1], 80) for span in line.spans)


def test_the_card_of_a_served_requirement_shows_what_is_predicted() -> None:
    snapshot = receiver.receiver_project()
    evaluation = Evaluation(snapshot, receiver.DICTIONARY, harbour.results(snapshot), harbour.AS_OF)
    data = browse_data(evaluation)
    card = data.card("R-noise_figure")
    facts = dict(card.facts)
    assert "nominal" in facts["Predicted by B-RX"] and "sampling only" in facts["Probability by B-RX"]
    assert [one.kind for one in card.pictures].count("distribution") == 1

    async def look(pilot: Pilot[None], app: BrowseApp) -> None:
        shown = app.screen.query_one(CardView).card
        views = list(app.screen.query(PictureView))
        assert shown is not None and [view.picture for view in views] == list(shown.pictures)
        assert len(views) == 6
        assert all(view.size.height == len(drawn(view.picture, view.size.width)) for view in views)

    drive(look, an_app(lambda: data), size=(140, 50))


def test_the_card_of_a_derived_result_shows_the_raw_data_and_the_derivation() -> None:
    table, columns = gain_trace()
    ripple = table.model_copy(
        update={
            "id": "EV-1",
            "rows": 1,
            "values": (a_value_column("gain_flatness", quantity=a_quantity("gain_flatness")),),
            "conditions": (),
            "derivation": "DV-1",
            "covers": (Covered(dimension="frequency", low=17.7, high=20.2, largest_gap=0.1, unit="GHz"),),
        }
    )
    derivation = Derivation(
        id="DV-1",
        law="ripple",
        inputs=("T-1",),
        digests=(table.digest,),
        columns=(InputColumn(role="value", table="T-1", column="Gain"),),
        over=("frequency 17.7..20.2 GHz",),
        gives=a_quantity("gain_flatness"),
        unit="dB",
    )
    result = EvidenceColumns(
        Columns(1),
        {"gain_flatness": ValueArrays(np.array([1.0]), np.array([1.0]))},
        np.array([19], np.int32),
        TextColumn.of(["LNA-1"]),
        extra={AT_COLUMN: TextColumn.of(["least at 18.3 GHz, greatest at 19.4 GHz"])},
    )
    flat = a_requirement("R-1", quantity=a_quantity("gain_flatness"), limit=at_most(1.2), conditions=None)
    snapshot = a_snapshot(
        a_block(),
        an_item(),
        an_evidence_file(),
        table,
        ripple,
        derivation,
        flat,
        columns={"T-1": columns, "EV-1": result},
    )
    dictionary = load_dictionary()
    data = browse_data(Evaluation(snapshot, dictionary, evaluate(snapshot, dictionary, as_of=DAY), DAY))
    card = data.card("R-1")
    [picture] = card.traces
    assert [step.id for step in card.trail if step.kind in ("derivation", "input")] == ["DV-1", "T-1"]
    lines = drawn(picture, 80)
    assert any("◆ 1 dB, least at 18.3 GHz" in line.plain for line in lines)
    assert any(span.style == "bold $warning" for line in lines for span in line.spans)

    async def look(pilot: Pilot[None], app: BrowseApp) -> None:
        views = list(app.screen.query(PictureView))
        assert [view.picture for view in views] == [picture]

    drive(look, an_app(lambda: data), size=(140, 60))
