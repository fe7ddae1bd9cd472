"""The help screen: all keys and marks, from the widgets that have them."""

from __future__ import annotations

from typing import ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import VerticalScroll
from textual.content import Content
from textual.screen import ModalScreen
from textual.widgets import Static

from specflow.model.card import PointState
from specflow.tui.tones import POINT_MARKS
from specflow.tui.widgets.card_view import CardView
from specflow.tui.widgets.divider import Divider
from specflow.tui.widgets.fact_list import FactList
from specflow.tui.widgets.margin_bar import GUARD, LIMIT, OUTSIDE
from specflow.tui.widgets.proof_grid import ProofGridView
from specflow.tui.widgets.requirement_tree import RequirementTree
from specflow.tui.widgets.search import SearchLine

NAME_WIDTH = 11
Keys = tuple[tuple[str, str], ...]

POINTS = {
    PointState.PROVED: "proved: a governing verdict that passes, from evidence with credit",
    PointState.FAILING: "failing: beyond the limit",
    PointState.UNDECIDED: "undecided: there is evidence, and it does not prove the point",
    PointState.WITHOUT_EVIDENCE: "without evidence: nothing is known of it",
}


class HelpScreen(ModalScreen[None]):
    """Keys and marks."""

    DEFAULT_CSS = """
    HelpScreen { align: center middle; }
    HelpScreen > VerticalScroll {
        width: 76; max-width: 100%; height: auto; max-height: 100%; border: round $primary; padding: 0 1;
        background: $surface; border-title-color: $primary; border-subtitle-color: $text-muted;
        scrollbar-size-vertical: 1;
    }
    HelpScreen .caution { margin-top: 1; color: $secondary; }
    """
    BINDINGS: ClassVar[list[BindingType]] = [Binding("escape,question_mark,q,enter", "dismiss", "close")]

    def __init__(self, keys: Keys, cautions: tuple[str, ...]) -> None:
        super().__init__()
        self._keys = keys
        self._cautions = cautions

    def compose(self) -> ComposeResult:
        with VerticalScroll() as box:
            box.border_title = "help"
            box.border_subtitle = "escape closes"
            for title, keys in self.sections():
                yield Divider(title)
                yield FactList(keys, name_width=NAME_WIDTH)
            for caution in self._cautions:
                yield Static(Content(caution), classes="caution")

    def sections(self) -> tuple[tuple[str, Keys], ...]:
        """Return titles, and keys or marks with what they mean."""
        marks = tuple((POINT_MARKS[state], words) for state, words in POINTS.items())
        bar = (f"{LIMIT} {GUARD} {OUTSIDE}", "limit, its guard band, and what lies outside")
        return (
            ("everywhere", self._keys),
            ("tree", RequirementTree.KEY_HELP),
            ("card", CardView.KEY_HELP),
            ("proof grid", ProofGridView.KEY_HELP),
            ("search", SearchLine.KEY_HELP),
            ("marks", (*marks, bar)),
        )
