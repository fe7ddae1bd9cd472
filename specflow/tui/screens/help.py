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
from specflow.tui.tones import POINT_MARKS, POINT_STYLES
from specflow.tui.widgets.card_view import CardView
from specflow.tui.widgets.margin_bar import GUARD, LIMIT, OUTSIDE
from specflow.tui.widgets.proof_grid import ProofGridView
from specflow.tui.widgets.requirement_tree import RequirementTree
from specflow.tui.widgets.search import SearchLine

Keys = tuple[tuple[str, str], ...]

POINTS = {
    PointState.PROVED: "proved: a governing verdict that passes, from evidence with credit",
    PointState.FAILING: "failing: beyond the limit",
    PointState.DOUBTFUL: "doubtful: there is evidence, and it does not prove the point",
    PointState.MISSING: "missing: nothing is known of it",
}


class HelpScreen(ModalScreen[None]):
    """Keys and marks."""

    DEFAULT_CSS = """
    HelpScreen { align: center middle; }
    HelpScreen > VerticalScroll {
        width: 76; max-width: 100%; height: auto; max-height: 100%; border: round $primary; padding: 0 1;
        background: $surface; border-title-color: $primary; border-subtitle-color: $text-muted;
    }
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
            yield Static(Content("\n").join(self._lines()))

    def _lines(self) -> list[Content]:
        lines = _section("everywhere", self._keys)
        lines += _section("tree", RequirementTree.KEY_HELP)
        lines += _section("card", CardView.KEY_HELP)
        lines += _section("proof grid", ProofGridView.KEY_HELP)
        lines += _section("search", SearchLine.KEY_HELP)
        lines.append(Content.styled("marks", "bold $primary"))
        lines += [
            Content.assemble((f"  {POINT_MARKS[state]}         ", POINT_STYLES[state]), words)
            for state, words in POINTS.items()
        ]
        lines.append(Content(f"  {LIMIT} {GUARD} {OUTSIDE}     limit, its guard band, and what lies outside"))
        lines.append(Content(""))
        lines += [Content.styled(caution, "$secondary") for caution in self._cautions]
        return lines


def _section(title: str, keys: Keys) -> list[Content]:
    lines = [Content.styled(title, "bold $primary")]
    return lines + [Content.assemble((f"  {key:<10}", "bold"), words) for key, words in keys]
