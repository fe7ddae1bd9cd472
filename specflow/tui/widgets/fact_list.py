"""Names and values, one pair a line."""

from __future__ import annotations

from collections.abc import Sequence

from textual.app import RenderResult
from textual.content import Content
from textual.geometry import Size
from textual.widget import Widget


class FactList(Widget):
    """Values stand below each other; long ones are folded under themselves."""

    DEFAULT_CSS = """
    FactList { height: auto; }
    """

    def __init__(self, facts: Sequence[tuple[str, str]], name_width: int = 0) -> None:
        super().__init__()
        self.facts = facts
        self.name_width = name_width or max((len(name) for name, _ in facts), default=0) + 2

    def get_content_height(self, container: Size, viewport: Size, width: int) -> int:
        """Return the lines of all values as folded."""
        return len(fact_lines(self.facts, self.name_width, width))

    def render(self) -> RenderResult:
        return Content("\n").join(fact_lines(self.facts, self.name_width, self.size.width))


def fact_lines(facts: Sequence[tuple[str, str]], name_width: int, width: int) -> list[Content]:
    """Set the pairs in ``width`` cells."""
    lines: list[Content] = []
    for name, value in facts:
        folded = Content(value).wrap(max(width - name_width, 10)) or [Content("")]
        lines.append(Content.styled(f"{name:<{name_width}}", "$secondary") + folded[0])
        lines.extend(Content(" " * name_width) + rest for rest in folded[1:])
    return lines
