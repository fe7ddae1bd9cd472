"""The app on the invented harbour project, and how tests wait until nothing more is to come."""

from __future__ import annotations

import asyncio
import functools
from collections.abc import Awaitable, Callable

from textual.pilot import Pilot

from specflow.tui.app import PAUSE_SECONDS, BrowseApp
from specflow.workflows.browse import BrowseData, browse_data
from specflow.workflows.evaluate_project import Evaluation
from tests import harbour


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
    """Wait until the project and the card under the cursor are shown."""
    for _ in range(3):
        await pilot.app.workers.wait_for_complete()
        await pilot.pause(PAUSE_SECONDS + 0.05)


async def pressed(pilot: Pilot[None], *keys: str) -> None:
    """Press keys, and wait for what they bring."""
    await pilot.press(*keys)
    await settle(pilot)


def drive(
    scenario: Callable[[Pilot[None], BrowseApp], Awaitable[None]],
    app: BrowseApp | None = None,
    *,
    size: tuple[int, int] = (80, 24),
) -> None:
    """Run the app without a terminal and let the scenario press its keys."""

    async def run() -> None:
        made = app or an_app()
        async with made.run_test(size=size) as pilot:
            await settle(pilot)
            await scenario(pilot, made)

    asyncio.run(run())
