"""The line to type what to look for; the tree follows while one types."""

from __future__ import annotations

from typing import ClassVar

from textual.binding import Binding, BindingType
from textual.widgets import Input

from specflow.tui.messages import SearchChanged, SearchEnded


class SearchLine(Input):
    """Hidden until it is asked for."""

    DEFAULT_CSS = """
    SearchLine { display: none; height: 1; border: none; padding: 0 1; background: $panel; }
    SearchLine:focus { border: none; }
    SearchLine.shown { display: block; }
    """
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("escape", "give_up", "clear search"),
        Binding("enter", "submit", "keep filter"),
        Binding("down", "submit", "to the tree", show=False),
    ]
    KEY_HELP = (
        ("/", "look for words in ids, titles and states; the tree shows what has all of them"),
        ("enter", "keep the filter and go to the tree"),
        ("escape", "show everything again"),
    )

    def __init__(self) -> None:
        super().__init__(placeholder="id, title or state", select_on_focus=False)

    def open(self) -> None:
        """Show the line and type into it."""
        self.add_class("shown")
        self.focus()

    def close(self) -> None:
        """Hide the line and forget what was typed."""
        self.remove_class("shown")
        with self.prevent(Input.Changed):
            self.value = ""

    def on_input_changed(self, event: Input.Changed) -> None:
        """Tell the words as they are typed."""
        event.stop()
        self.post_message(SearchChanged(self.value.strip()))

    def on_input_submitted(self, event: Input.Submitted) -> None:
        """Keep the words."""
        event.stop()
        self.post_message(SearchEnded(kept=bool(self.value.strip())))

    def action_give_up(self) -> None:
        """Drop the words."""
        self.post_message(SearchEnded(kept=False))
