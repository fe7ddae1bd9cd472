"""The app on the invented harbour project, and how tests wait until nothing more is to come."""

from __future__ import annotations

import asyncio
import functools
import time
from collections.abc import Awaitable, Callable

from textual.app import App
from textual.pilot import Pilot

from specflow.tui.app import PAUSE_SECONDS, BrowseApp
from specflow.workflows.browse import BrowseData, browse_data
from specflow.workflows.evaluate_project import Evaluation
from tests import harbour

SECONDS = 5  # a busy machine needs them; a card that cannot be made never comes


@functools.cache
def evaluation() -> Evaluation:
    """Return the project, judged once."""
    snapshot = harbour.snapshot()
    return Evaluation(snapshot, harbour.DICTIONARY, harbour.results(snapshot), harbour.AS_OF)


def an_app(
    load: Callable[[], BrowseData] | None = None, revision: Callable[[], int] | None = None
) -> BrowseApp:
    """Return the app, on the harbour project unless ``load`` brings another."""
    return BrowseApp(load or (lambda: browse_data(evaluation())), revision)


async def settle(pilot: Pilot[None]) -> None:
    """Wait until the project and the card under the cursor are shown, findings and all, and stay so for a moment."""
    end = time.monotonic() + SECONDS
    quiet = 0
    while quiet < 2 and time.monotonic() < end:
        await pilot.app.workers.wait_for_complete()
        await pilot.pause(PAUSE_SECONDS + 0.05)
        quiet = quiet + 1 if is_settled(pilot.app) else 0


def is_settled(app: App[None]) -> bool:
    """Whether nothing more is to come until the next key."""
    assert isinstance(app, BrowseApp)
    screen = app.browse
    if (
        screen.requirements.loading
        or screen.is_typing
        or any(one.group != "revision" and not one.is_finished for one in app.workers)
    ):
        return False
    card = screen.card_view.card
    if card is None:
        return not screen.requirements.chosen
    return card.id == screen.requirements.chosen and card.findings is not None


async def pressed(pilot: Pilot[None], *keys: str) -> None:
    """Press keys, and wait for what they bring."""
    await pilot.press(*keys)
    await settle(pilot)


def drive(
    scenario: Callable[[Pilot[None], BrowseApp], Awaitable[None]],
    app: BrowseApp | None = None,
    *,
    size: tuple[int, int] = (80, 24),
    at_once: bool = False,
) -> None:
    """Run the app without a terminal and let the scenario press its keys, at once or when all is shown."""

    async def run() -> None:
        made = app or an_app()
        async with made.run_test(size=size) as pilot:
            if not at_once:
                await settle(pilot)
            await scenario(pilot, made)

    asyncio.run(run())
