"""A line with a title, between the parts of a card."""

from __future__ import annotations

from textual.app import RenderResult
from textual.content import Content
from textual.widget import Widget


class Divider(Widget):
    """One line, as wide as there is room."""

    DEFAULT_CSS = """
    Divider { height: 1; }
    """

    def __init__(self, title: str) -> None:
        super().__init__()
        self.title = title

    def render(self) -> RenderResult:
        rest = max(self.size.width - len(self.title) - 4, 0)
        line = "$surface-lighten-3"
        return Content.assemble(("── ", line), (self.title, "$primary"), (f" {'─' * rest}", line))
