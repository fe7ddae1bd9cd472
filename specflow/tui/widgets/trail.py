"""The trail: up to the system, down to file, sheet and cell."""

from __future__ import annotations

from collections.abc import Sequence

from textual.content import Content
from textual.widgets import Static

from specflow.model.card import TrailStep
from specflow.tui.tones import STYLES


class TrailView(Static):
    """One step a line or two, indented by how far below the system it is."""

    DEFAULT_CSS = """
    TrailView { height: auto; }
    """

    def __init__(self, steps: Sequence[TrailStep]) -> None:
        super().__init__(Content("\n").join(trail_lines(steps)))


def trail_lines(steps: Sequence[TrailStep]) -> list[Content]:
    """Set the steps; the place of a number stands on a line of its own, to be read and typed."""
    top = min((step.depth for step in steps), default=0)
    lines = []
    for step in steps:
        indent = "  " * (step.depth - top)
        arrow = "◆ " if step.depth == 0 else "↑ " if step.depth < 0 else "└ "
        name = f"{step.id} " if step.id and step.kind != "point" else ""
        lines.append(
            Content.assemble(indent, (arrow, "$primary"), (name, "bold"), (step.text, STYLES[step.tone]))
        )
        if step.origin is not None and step.depth >= 0:
            lines.append(Content.styled(f"{indent}  {step.origin}", "$text-muted"))
    return lines
