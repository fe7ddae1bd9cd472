"""k of n proved: as a bar and in words."""

from __future__ import annotations

from textual.app import RenderResult
from textual.content import Content
from textual.geometry import Size
from textual.widget import Widget

MOST_CELLS = 40


class ProvedLine(Widget):
    """A bar of the share of points proved; the words say the counts, failing and without evidence apart."""

    DEFAULT_CSS = """
    ProvedLine { height: auto; }
    """

    def __init__(self, k: int, n: int, words: str) -> None:
        super().__init__()
        self.k, self.n, self.words = k, n, words

    def get_content_height(self, container: Size, viewport: Size, width: int) -> int:
        """Return the bar's line and those of the words."""
        return 1 + len(Content(self.words).wrap(width))

    def render(self) -> RenderResult:
        width = min(self.size.width, MOST_CELLS)
        # Neither full nor empty unless it is so: 999 of 1000 leaves a gap to be seen.
        filled = self.k * width // self.n if self.n else 0
        if self.k:
            filled = max(filled, 1)
        bar = Content.assemble(("▰" * filled, "$success"), ("▱" * (width - filled), "$secondary"))
        return Content("\n").join([bar, Content(self.words)])
