"""The main screen: the tree of requirements on the left, the card of the one under the cursor on the right."""

from __future__ import annotations

from typing import ClassVar

from textual import events
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import Horizontal, Vertical
from textual.screen import Screen
from textual.timer import Timer
from textual.widgets import Footer

from specflow.model.card import Card
from specflow.tui.messages import CardWanted, RequirementChosen, SearchChanged, SearchEnded
from specflow.tui.screens.help import HelpScreen
from specflow.tui.widgets.card_view import CardView
from specflow.tui.widgets.heading import Heading
from specflow.tui.widgets.proof_grid import ProofGridView
from specflow.tui.widgets.requirement_tree import RequirementTree
from specflow.tui.widgets.search import SearchLine
from specflow.workflows.browse import BrowseData

TYPING_SECONDS = 0.12
WIDE = 110  # from this many columns on, the tree has room for titles


class BrowseScreen(Screen[None]):
    """Tree and card; keeps the filters, and asks the app for cards."""

    DEFAULT_CSS = """
    BrowseScreen #left { width: auto; }
    BrowseScreen CardView { width: 1fr; }
    """
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("slash", "search", "search", key_display="/"),
        Binding("o", "open_only", "open"),
        Binding("n", "next_failing", "failing"),
        Binding("v", "order", "order"),
        Binding("g", "grid", "grid"),
        Binding("question_mark", "help", "help", key_display="?"),
        Binding("q", "app.quit", "quit"),
        Binding("r", "app.reload", "load again", show=False),
        Binding("escape", "tree", "tree", show=False),
    ]
    KEY_HELP = (
        ("/", "search"),
        ("o", "show only what is open, or everything"),
        ("n", "to the next requirement that fails"),
        ("v", "order of the tree: by requirement, by block, by source"),
        ("g", "to the proof grid of the card; again: to its next one"),
        ("tab", "from the tree to the card, its grids, and back; escape: to the tree"),
        ("?", "this help"),
        ("r", "load the project again (it is done by itself when it changed)"),
        ("q", "quit"),
    )

    def __init__(self) -> None:
        super().__init__()
        self._data: BrowseData | None = None
        self._order = 0
        self._words = ""
        self._open_only = False
        self._typing: Timer | None = None

    def compose(self) -> ComposeResult:
        yield Heading()
        with Horizontal():
            with Vertical(id="left"):
                yield RequirementTree()
                yield SearchLine()
            yield CardView()
        yield Footer(show_command_palette=False)

    @property
    def requirements(self) -> RequirementTree:
        """The tree."""
        return self.query_one(RequirementTree)

    @property
    def card_view(self) -> CardView:
        """The card."""
        return self.query_one(CardView)

    @property
    def is_typing(self) -> bool:
        """Whether words were typed that the tree does not show yet."""
        return self._typing is not None

    def on_mount(self) -> None:
        """Begin in the tree."""
        self.requirements.loading = True
        self.requirements.focus()

    def on_resize(self, event: events.Resize) -> None:
        """Give the tree more room where there is more."""
        self.requirements.set_class(event.size.width >= WIDE, "wide")

    def show_data(self, data: BrowseData) -> None:
        """Show a project; what is under the cursor and filtered stays so."""
        self._data = data
        self.query_one(Heading).show(data)
        self.requirements.loading = False
        if not self.focused:
            self.requirements.focus()
        self._refresh_tree()

    def show_failure(self, words: str) -> None:
        """Say why there is nothing to show."""
        self.requirements.loading = False
        self.card_view.show_words(f"{words}\n\nr tries again, q quits.")

    def show_card(self, card: Card) -> None:
        """Show the card if it is still the one asked for."""
        if self.requirements.chosen.casefold() != card.id.casefold():
            return
        shown = self.card_view.card
        if (shown is None or shown.id != card.id) and self.card_view.focused_grid is not None:
            self.requirements.focus()  # the grid that had the keys goes away
        self.card_view.show(card)

    def _refresh_tree(self) -> None:
        if self._data is not None:
            outline = self._data.outlines[self._order % len(self._data.outlines)]
            self.requirements.show(outline, words=self._words, open_only=self._open_only)

    def on_requirement_chosen(self, message: RequirementChosen) -> None:
        """Ask the app for a card; say what to do where no requirement is under the cursor."""
        message.stop()
        # Posted, not bubbled: a message that a callback of the app has sent goes no further than to here.
        self.app.post_message(CardWanted(message.id))
        if not message.id:
            self.card_view.show_words(self._nothing_chosen())

    def _nothing_chosen(self) -> str:
        data = self._data
        if data is None:
            return ""
        if not any(entry.id for outline in data.outlines for entry in outline.entries):
            return "There are no requirements yet. specflow load WORKBOOK brings them in."
        if self.requirements.cursor_node is None:
            return "Nothing is left by the filter. Escape shows everything again."
        return f"{data.totals}\n\nChoose a requirement to see its card."

    def on_search_changed(self, message: SearchChanged) -> None:
        """Filter when the person pauses: setting a large tree anew takes longer than the next key."""
        self._words = message.words
        self._forget_typing()
        self._typing = self.set_timer(TYPING_SECONDS, self._filter)

    def _filter(self) -> None:
        """Filter by what was typed, unless that was done."""
        if self._typing is not None:
            self._forget_typing()
            self._refresh_tree()

    def on_search_ended(self, message: SearchEnded) -> None:
        """Go back to the tree, filtered or whole."""
        if message.kept:
            self._filter()
        else:
            self._forget_typing()
            self.query_one(SearchLine).close()
            self._words = ""
            self._refresh_tree()
        self.requirements.focus()

    def _forget_typing(self) -> None:
        if self._typing is not None:
            self._typing.stop()
            self._typing = None

    def action_search(self) -> None:
        """Type what to look for."""
        self.query_one(SearchLine).open()

    def action_open_only(self) -> None:
        """Show open requirements only, or all."""
        self._open_only = not self._open_only
        self._refresh_tree()

    def action_next_failing(self) -> None:
        """Go to the next requirement that fails."""
        if not self.requirements.go_to_next(lambda entry: entry.is_failing):
            self.notify("No requirement that is shown fails.")

    def action_order(self) -> None:
        """Show the tree in the next order."""
        self._order += 1
        self._refresh_tree()

    def action_grid(self) -> None:
        """Go to the proof grid; again, to the next one of the card."""
        grids = list(self.card_view.query(ProofGridView))
        if not grids:
            self.notify("There is no proof grid on this card.")
            return
        here = self.card_view.focused_grid
        self.card_view.go_to(grids[0 if here is None else (here + 1) % len(grids)])

    def action_tree(self) -> None:
        """Go back to the tree; from there, drop the filters."""
        if self.focused is self.requirements and (self._words or self._open_only):
            self._words, self._open_only = "", False
            self.query_one(SearchLine).close()
            self._refresh_tree()
        self.requirements.focus()

    def action_help(self) -> None:
        """Show all keys and marks."""
        cautions = tuple(self._data.cautions) if self._data is not None else ()
        self.app.push_screen(HelpScreen(self.KEY_HELP, cautions))
