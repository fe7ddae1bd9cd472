"""The trail: up to the system, down to file, sheet and cell."""

from __future__ import annotations

from collections.abc import Sequence

from textual.app import RenderResult
from textual.content import Content
from textual.geometry import Size
from textual.widget import Widget

from specflow.model.card import TrailStep
from specflow.tui.tones import STYLES

DEEPEST = 6  # cells of indentation; deeper steps are told apart by what they say


class TrailView(Widget):
    """The steps, indented by how far below the system they are; long ones are folded under themselves."""

    DEFAULT_CSS = """
    TrailView { height: auto; }
    """

    def __init__(self, steps: Sequence[TrailStep]) -> None:
        super().__init__()
        self.steps = steps

    def get_content_height(self, container: Size, viewport: Size, width: int) -> int:
        """Return the lines of all steps as folded."""
        return len(trail_lines(self.steps, width))

    def render(self) -> RenderResult:
        return Content("\n").join(trail_lines(self.steps, self.size.width))


def trail_lines(steps: Sequence[TrailStep], width: int) -> list[Content]:
    """Set the steps; the place of a number stands on a line of its own, to be read and typed."""
    top = min((step.depth for step in steps), default=0)
    lines: list[Content] = []
    for step in steps:
        indent = " " * min(2 * (step.depth - top), DEEPEST)
        arrow = "◆ " if step.depth == 0 else "↑ " if step.depth < 0 else "└ "
        name = f"{step.id} " if step.id and step.kind != "point" else ""
        says = Content.assemble((name, "bold"), (step.text, STYLES[step.tone]))
        folded = says.wrap(max(width - len(indent) - 2, 10)) or [Content("")]
        lines.append(Content.assemble(indent, (arrow, "$primary"), folded[0]))
        lines.extend(Content.assemble(f"{indent}  ", rest) for rest in folded[1:])
        if step.origin is not None and step.depth >= 0:
            lines.append(Content.styled(f"{indent}  {step.origin}", "$secondary"))
    return lines
