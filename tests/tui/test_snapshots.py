"""How it looks, at the smallest terminal it is made for and at a comfortable one.

A change of look is a decision: look at the report that a failing test names, then
``pytest tests/tui --snapshot-update``.
"""

from __future__ import annotations

from collections.abc import Callable
from importlib.metadata import version
from typing import Any

import pytest
from textual.pilot import Pilot

from specflow.tui.widgets.search import SearchLine
from tests.tui.browsing import an_app, pressed, settle

MADE_WITH = "8.2.8"
pytestmark = pytest.mark.skipif(
    version("textual") != MADE_WITH,
    reason=f"the pictures were made with textual {MADE_WITH}; another version draws details in its own way",
)
SIZES = {"80x24": (80, 24), "120x40": (120, 40)}
VIEWS: dict[str, tuple[str, ...]] = {
    "system": (),
    "failing": ("n",),
    "grid": ("n", "g", "g", "x"),
    "range": ("end", "up"),
    "search": ("slash", *"gain"),
    "by-block": ("v",),
    "help": ("question_mark",),
    "end-of-card": ("n", "tab", "end"),
}


@pytest.mark.parametrize("size", SIZES.values(), ids=SIZES.keys())
@pytest.mark.parametrize("keys", VIEWS.values(), ids=VIEWS.keys())
def test_it_looks_as_it_did(
    keys: tuple[str, ...], size: tuple[int, int], snap_compare: Callable[..., Any]
) -> None:
    async def view(pilot: Pilot[None]) -> None:
        await settle(pilot)
        pilot.app.screen.query_one(SearchLine).cursor_blink = False
        await pressed(pilot, *keys)

    assert snap_compare(an_app(), terminal_size=size, run_before=view)


def test_without_colours_it_says_the_same(
    snap_compare: Callable[..., Any], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("NO_COLOR", "1")

    async def view(pilot: Pilot[None]) -> None:
        await settle(pilot)
        await pressed(pilot, "n")

    assert snap_compare(an_app(), terminal_size=SIZES["80x24"], run_before=view)
