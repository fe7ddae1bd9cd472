"""The pictures of its budgets on the card of a requirement."""

from __future__ import annotations

from textual.pilot import Pilot

from specflow.reports.budget import titles
from specflow.reports.pictures import budget_pictures
from specflow.tui.app import BrowseApp
from specflow.tui.widgets.card_view import CardView
from specflow.tui.widgets.picture import LEAST_WIDTH, PictureView, drawn
from specflow.workflows.browse import browse_data
from specflow.workflows.evaluate_project import Evaluation
from tests import harbour, receiver
from tests.tui.browsing import an_app, drive

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
