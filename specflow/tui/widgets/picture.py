"""A picture drawn with text: levels along a chain, contributions, a distribution against the limit, raw readings."""

from __future__ import annotations

from textual.app import RenderResult
from textual.content import Content
from textual.geometry import Size
from textual.widget import Widget

from specflow.model.picture import Picture
from specflow.reports.picture_text import SIGNS, picture_lines

LEAST_WIDTH = 48
_STYLES = {
    SIGNS["signal"]: "$primary",
    SIGNS["noise"]: "$warning",
    SIGNS["bound"]: "$secondary",
    "┼": "bold $error",
    "╌": "$error",
    "◆": "bold $warning",
}
_BLOCKS = frozenset("▏▎▍▌▋▊▉█▁▂▃▄▅▆▇")


class PictureView(Widget):
    """One picture with its title; as wide as there is room."""

    DEFAULT_CSS = """
    PictureView { height: auto; margin-bottom: 1; }
    """

    def __init__(self, picture: Picture) -> None:
        super().__init__()
        self.picture = picture

    def get_content_height(self, container: Size, viewport: Size, width: int) -> int:
        """Return the lines it takes."""
        return len(drawn(self.picture, width))

    def render(self) -> RenderResult:
        return Content("\n").join(drawn(self.picture, self.size.width))


def drawn(picture: Picture, width: int) -> list[Content]:
    """Draw a picture ``width`` cells wide: the title folded, marks and blocks in the colours of the theme."""
    title, *lines = picture_lines(picture, max(width, LEAST_WIDTH))
    return [*Content.styled(title, "bold").wrap(max(width, 10)), *(_coloured(line) for line in lines)]


def _coloured(line: str) -> Content:
    """Colour runs of like marks; names and numbers stay as they are."""
    found = Content("")
    run, style = "", ""
    for sign in line:
        own = "$primary" if sign in _BLOCKS else _STYLES.get(sign, "")
        if own != style:
            found += Content.styled(run, style)
            run, style = "", own
        run += sign
    return found + Content.styled(run, style)
