"""The card of one requirement: everything about it, from its limit to the cell its number stands in."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import VerticalScroll
from textual.content import Content
from textual.widget import Widget
from textual.widgets import Static

from specflow.model.card import Card
from specflow.model.finding import Finding
from specflow.tui.widgets.divider import Divider
from specflow.tui.widgets.fact_list import FactList
from specflow.tui.widgets.findings import FindingsView
from specflow.tui.widgets.margin_bar import MarginBarView
from specflow.tui.widgets.picture import PictureView
from specflow.tui.widgets.proof_grid import ProofGridView
from specflow.tui.widgets.proved_line import ProvedLine
from specflow.tui.widgets.trail import TrailView


class CardView(VerticalScroll):
    """Shows one card at a time; scrolls."""

    DEFAULT_CSS = """
    CardView {
        border: round $surface-lighten-2; padding: 0 1; border-title-color: $primary; background: $background;
        scrollbar-size-vertical: 1;
    }
    CardView:focus { border: round $primary; }
    CardView:focus-within { border: round $primary; }
    CardView.tone-good { border-title-color: $success; }
    CardView.tone-doubtful { border-title-color: $warning; }
    CardView.tone-bad { border-title-color: $error; border-title-style: bold; }
    CardView > .title { text-style: bold; }
    CardView > .text { height: auto; }
    CardView > .caution { border-left: thick $warning; padding-left: 1; margin-top: 1; height: auto; }
    """
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("j", "scroll_down", "down", show=False),
        Binding("k", "scroll_up", "up", show=False),
    ]
    KEY_HELP = (("↑ ↓ page", "scroll the card"),)

    def __init__(self) -> None:
        super().__init__()
        self.card: Card | None = None
        self._words = ""
        self._place = 0

    def show(self, card: Card) -> None:
        """Show a card from its top; the same card again keeps its place."""
        again = self.card is not None and self.card.id == card.id
        self._place = round(self.scroll_offset.y) if again else 0
        self.card = card
        self.refresh(recompose=True)

    def show_words(self, words: str) -> None:
        """Show a sentence where there is no card."""
        self.card = None
        self._words = words
        self.refresh(recompose=True)

    def compose(self) -> ComposeResult:
        if self.card is None:
            yield Static(Content(self._words), classes="text")
        else:
            yield from _parts(self.card)

    async def recompose(self) -> None:
        """Set the parts anew; the grid that had the keys keeps them."""
        kept = self.focused_grid
        await super().recompose()
        card = self.card
        self.border_title = f"{card.id} · {card.label}" if card is not None else ""
        self.set_classes(f"tone-{card.tone.value or 'plain'}" if card is not None else "")
        grids = list(self.query(ProofGridView))
        if kept is not None and grids:
            grids[min(kept, len(grids) - 1)].focus(scroll_visible=False)
        if self._place:
            self.call_after_refresh(self.scroll_to, y=self._place, animate=False)
        else:  # at once: later it would undo where a key has gone meanwhile
            self.scroll_to(y=0, animate=False, immediate=True)

    def go_to(self, grid: ProofGridView) -> None:
        """Give a grid the keys and bring it into view, at once: of two quick keys the second has to win."""
        grid.focus(scroll_visible=False)
        self.scroll_to_widget(grid, animate=False, immediate=True)

    @property
    def focused_grid(self) -> int | None:
        """The number of the grid that has the keys, None when none has."""
        grids = list(self.query(ProofGridView))
        return next((place for place, grid in enumerate(grids) if grid.has_focus), None)


def _parts(card: Card) -> Iterator[Widget]:
    yield Static(Content(card.title), classes="title")
    yield Static(Content(card.limit_words), classes="text")
    yield ProvedLine(card.k, card.n, card.proved)
    if card.bar is not None:
        yield Divider("margin bar")
        yield MarginBarView(card.bar)
    if card.grids:
        yield Divider("proof grid")
        for grid in card.grids:
            yield ProofGridView(grid)
    if card.remarks:
        yield Divider("remarks")
        yield Static(Content("\n").join([Content(f"• {remark}") for remark in card.remarks]), classes="text")
    yield Divider("facts")
    yield FactList((*card.facts, ("As written", card.limit_text)))
    if card.pictures:
        yield Divider("predicted by its budgets")
        for picture in card.pictures:
            yield PictureView(picture)
    if card.traces:
        yield Divider("raw data")
        for picture in card.traces:
            yield PictureView(picture)
    yield Divider("trail")
    yield TrailView(card.trail)
    yield from _findings(card.findings)
    for caution in card.cautions:
        yield Static(Content(f"Caution. {caution}"), classes="caution")


def _findings(findings: Sequence[Finding] | None) -> Iterator[Widget]:
    if findings is None:
        yield Divider("findings")
        yield Static(Content("the rules are running ..."), classes="text")
        return
    yield Divider(f"findings ({len(findings)})")
    yield FindingsView(findings) if findings else Static(Content("none"), classes="text")
