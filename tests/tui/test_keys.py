"""What the keys do, and what the app shows then."""

from __future__ import annotations

import threading
from collections.abc import Callable
from dataclasses import replace
from datetime import date
from pathlib import Path

import pytest
from textual.pilot import Pilot

from specflow.errors import StoreError
from specflow.model.card import PointState
from specflow.model.finding import Finding
from specflow.model.outline import Outline
from specflow.tui import app as app_module
from specflow.tui.app import BrowseApp
from specflow.tui.screens import browse as browse_module
from specflow.tui.screens.help import HelpScreen
from specflow.tui.widgets.proof_grid import Place, ProofGridView
from specflow.tui.widgets.requirement_tree import RequirementTree
from specflow.workflows.browse import BrowseData, Browsing, browse_data
from specflow.workflows.evaluate_project import Evaluation
from tests import harbour
from tests.builders import a_project, a_snapshot, adding
from tests.tui.browsing import an_app, drive, evaluation, pressed, settle


def card_of(app: BrowseApp) -> str:
    """Return the id of the card that is shown, "" without one."""
    card = app.browse.card_view.card
    return card.id if card else ""


def shown(app: BrowseApp) -> list[str]:
    """Return the requirements in the tree, from top to bottom."""
    nodes = app.browse.requirements.all_lines()
    return [node.data.id for node in nodes if node.data and node.data.id]


def screen_text(app: BrowseApp) -> str:
    """Return what stands on the screen."""
    strips = app.screen._compositor.render_strips()
    return "\n".join("".join(segment.text for segment in strip) for strip in strips)


def card_words(app: BrowseApp) -> str:
    """Return what stands in place of a card, whatever way it is folded."""
    lines = [line.split("││", 1)[-1].strip("│ ") for line in screen_text(app).splitlines()]
    return " ".join(line for line in lines if line)


def test_the_first_requirement_is_shown_at_the_start() -> None:
    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        assert shown(app) == ["SYS-1", "PA-1", "PA-2", "PA-3", "PA-4", "SYS-2", "LNA-1", "LNA-2"]
        assert card_of(app) == "SYS-1"

    drive(scenario)


def test_the_card_follows_the_cursor() -> None:
    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        await pressed(pilot, "down", "down")
        assert card_of(app) == "PA-2"
        await pressed(pilot, "k")
        assert card_of(app) == "PA-1"

    drive(scenario)


def test_n_goes_to_the_next_requirement_that_fails() -> None:
    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        await pressed(pilot, "n")
        assert card_of(app) == "PA-1"
        await pressed(pilot, "down", "n")
        assert card_of(app) == "PA-1", "from the last one it goes on from the top"

    drive(scenario)


def test_search_filters_by_all_words_and_keeps_what_stands_above() -> None:
    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        await pressed(pilot, "slash", *"gain lna")
        assert shown(app) == ["SYS-2", "LNA-2"]
        assert card_of(app) == "LNA-2", "the first hit, not what it stands under"
        await pressed(pilot, "enter")
        assert app.focused is app.browse.requirements
        await pressed(pilot, "escape")
        assert len(shown(app)) == 8 and card_of(app) == "LNA-2"

    drive(scenario)


def test_states_can_be_searched_for() -> None:
    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        await pressed(pilot, "slash", *"partially")
        assert [id for id in shown(app) if not id.startswith("SYS")] == ["PA-2", "LNA-1"]

    drive(scenario)


def test_a_search_without_hits_says_so() -> None:
    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        await pressed(pilot, "slash", *"zzz")
        assert shown(app) == [] and card_of(app) == ""
        assert "Nothing is left by the filter" in card_words(app)
        await pressed(pilot, "escape")
        assert len(shown(app)) == 8 and card_of(app) == "SYS-1"

    drive(scenario)


def test_keys_typed_into_the_search_are_text() -> None:
    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        await pressed(pilot, "slash", "n", "o", "q")
        assert app.is_running and app.browse.query_one("SearchLine").value == "noq"  # type: ignore[attr-defined]

    drive(scenario)


def test_v_shows_the_same_requirements_by_block_and_by_source() -> None:
    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        await pressed(pilot, "n", "v")
        assert app.browse.requirements.border_title == "by block"
        assert shown(app) == ["SYS-1", "SYS-2", "LNA-1", "LNA-2", "PA-1", "PA-2", "PA-3", "PA-4"]
        assert card_of(app) == "PA-1", "the cursor stays on its requirement"
        await pressed(pilot, "v")
        assert app.browse.requirements.border_title == "by source" and len(shown(app)) == 8
        await pressed(pilot, "v")
        assert app.browse.requirements.border_title == "by requirement"

    drive(scenario)


def test_the_proof_grid_says_the_point_under_its_cursor() -> None:
    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        await pressed(pilot, "n", "g")
        grid = app.focused
        assert isinstance(grid, ProofGridView)
        assert grid.cell is not None and grid.cell.state is PointState.WITHOUT_EVIDENCE, (
            "it begins at what is open"
        )
        await pressed(pilot, "up", "left", "left", "left")
        assert grid.cursor == Place(0, 0) and grid.cell.words == "27.5 GHz, -40 °C ambient"
        assert "pa_bench.xlsx · Bench 1 · D10" in screen_text(app)
        await pressed(pilot, "end", "down")
        assert grid.cursor == Place(1, 2)

    drive(scenario, size=(120, 40))


def test_g_goes_from_grid_to_grid_and_x_from_open_point_to_open_point() -> None:
    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        await pressed(pilot, "n", "g", "g")
        grid = app.focused
        assert isinstance(grid, ProofGridView) and grid.grid.title == "item PA-A: 4 of 9 proved"
        seen = []
        for _ in range(5):
            assert grid.cell is not None and grid.cell.state is not PointState.PROVED
            seen.append((grid.cursor.row, grid.cursor.column))
            await pressed(pilot, "x")
        assert sorted(seen) == [(0, 2), (1, 0), (2, 0), (2, 1), (2, 2)]

    drive(scenario)


def test_o_leaves_what_is_open() -> None:
    def load() -> BrowseData:
        data = browse_data(evaluation())
        closed = [
            outline.model_copy(
                update={
                    "entries": tuple(
                        entry.model_copy(update={"is_open": entry.id == "PA-3"}) for entry in outline.entries
                    )
                }
            )
            for outline in data.outlines
        ]
        return replace(data, revision=1, outlines=closed)

    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        await pressed(pilot, "o")
        assert shown(app) == ["SYS-1", "PA-3"]
        await pressed(pilot, "o")
        assert len(shown(app)) == 8

    drive(scenario, an_app(load))


def test_branches_close_and_open() -> None:
    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        await pressed(pilot, "left", "down")
        assert card_of(app) == "SYS-2", "what is closed is passed over"
        await pressed(pilot, "up", "right", "right")
        assert card_of(app) == "PA-1"
        await pressed(pilot, "left")
        assert card_of(app) == "SYS-1"

    drive(scenario)


def test_help_lists_every_key_that_is_bound() -> None:
    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        await pressed(pilot, "question_mark")
        assert isinstance(app.screen, HelpScreen)
        said = {key for _, keys in app.screen.sections() for key, _ in keys}
        for binding in app.browse.BINDINGS:
            if binding.show:  # type: ignore[union-attr]
                assert (binding.key_display or binding.key) in said  # type: ignore[union-attr]
        await pressed(pilot, "end")
        assert "not a certificate" in screen_text(app)
        await pressed(pilot, "escape")
        assert not isinstance(app.screen, HelpScreen)

    drive(scenario)


def test_every_key_of_the_footer_fits_80_columns() -> None:
    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        for keys in ((), ("n", "g")):
            await pressed(pilot, *keys)
            last = screen_text(app).splitlines()[-1]
            for words in ("search", "open", "failing", "order", "grid", "help", "quit"):
                assert words in last

    drive(scenario)


def test_every_state_is_told_in_words_in_the_tree_and_on_the_card() -> None:
    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        await pressed(pilot, "n")
        text = screen_text(app)
        for word in (
            "planned",
            "FAILING",
            "partial",
            "TBD",
            "no plan",
            "marginal",
            "8 of 9 proved, 4 failing",
        ):
            assert word in text

    drive(scenario)


def test_a_project_without_requirements_says_what_to_do() -> None:
    empty = a_snapshot(a_project(name="Empty"))
    data = browse_data(Evaluation(empty, harbour.DICTIONARY, harbour.results(empty), harbour.AS_OF))

    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        assert "specflow load WORKBOOK brings them in" in card_words(app)
        await pressed(pilot, "n", "g", "v", "o", "slash", "a", "escape", "down")
        assert app.is_running

    drive(scenario, an_app(lambda: data))


def test_what_others_store_is_shown_by_itself(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(app_module, "POLL_SECONDS", 0.1)
    with harbour.make_store(tmp_path / "harbour.specflow") as store:
        browsing = Browsing(store, date(2026, 6, 1))

        async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
            await pressed(pilot, "n")
            one = harbour.requirement("PA-9", "One more", ">= 3 dB", "gain", "PA", parents=("SYS-1",))
            store.apply(adding(one), by="transmit lead")
            for _ in range(100):
                await settle(pilot)
                if "PA-9" in shown(app):
                    break
            assert "PA-9" in shown(app) and card_of(app) == "PA-1", "the cursor stays where it was"

        drive(scenario, an_app(browsing.load, browsing.revision))


def test_a_project_that_cannot_be_read_is_told_and_can_be_tried_again() -> None:
    failing = [True]

    def load() -> BrowseData:
        if failing:
            failing.pop()
            raise StoreError("the project is locked", hint="try again")
        return browse_data(evaluation())

    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        assert "the project is locked. try again r tries again" in card_words(app)
        await pressed(pilot, "r")
        assert card_of(app) == "SYS-1"

    drive(scenario, an_app(load))


def test_cards_are_made_in_threads_and_only_for_what_is_looked_at() -> None:
    made: list[tuple[str, bool]] = []
    data = browse_data(evaluation())

    def card(code: str) -> object:
        made.append((code, threading.current_thread() is threading.main_thread()))
        return data.card(code)

    watched = replace(data, card=card)  # type: ignore[arg-type]

    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        assert [code for code, _ in made] == ["SYS-1"]
        for _ in range(4):
            app.browse.requirements.action_cursor_down()
        await settle(pilot)
        assert card_of(app) == "PA-4"
        assert [code for code, _ in made] == ["SYS-1", "PA-4"], "none of what the cursor runs over"
        assert not any(in_main for _, in_main in made)

    drive(scenario, an_app(lambda: watched))


def test_a_card_is_shown_before_the_rules_ran_and_gets_its_findings_later() -> None:
    go = threading.Event()
    data = browse_data(evaluation())

    def findings(code: str) -> tuple[Finding, ...]:
        assert go.wait(30)
        return data.findings(code)

    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        async def until(done: Callable[[], bool]) -> None:
            for _ in range(200):
                if done():
                    return
                await pilot.pause(0.05)
            raise AssertionError(screen_text(app))

        await until(lambda: card_of(app) == "SYS-1")
        card = app.browse.card_view.card
        assert card is not None and card.findings is None
        go.set()
        await until(lambda: app.browse.card_view.card is not card)
        filled = app.browse.card_view.card
        assert filled is not None and filled.findings == data.findings("SYS-1") != ()
        await pressed(pilot, "n")
        shown_now = app.browse.card_view.card
        assert shown_now is not None and shown_now.findings == data.findings("PA-1")

    drive(scenario, an_app(lambda: replace(data, findings=findings)), at_once=True)


def test_a_large_tree_is_set_anew_once_for_many_keys(monkeypatch: pytest.MonkeyPatch) -> None:
    drawn: list[str] = []
    show = RequirementTree.show

    def counted(self: RequirementTree, outline: Outline, *, words: str = "", open_only: bool = False) -> None:
        drawn.append(words)
        show(self, outline, words=words, open_only=open_only)

    monkeypatch.setattr(RequirementTree, "show", counted)
    monkeypatch.setattr(browse_module, "TYPING_SECONDS", 1.0)

    async def scenario(pilot: Pilot[None], app: BrowseApp) -> None:
        await pilot.press("slash", *"gain lna", "enter")
        await settle(pilot)
        assert drawn == ["", "gain lna"], "enter does not wait for the pause"
        assert shown(app) == ["SYS-2", "LNA-2"]

    drive(scenario)
