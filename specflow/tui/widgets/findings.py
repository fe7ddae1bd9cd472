"""The findings about one requirement."""

from __future__ import annotations

from collections.abc import Sequence

from textual.app import RenderResult
from textual.content import Content
from textual.geometry import Size
from textual.widget import Widget

from specflow.model.finding import Finding, Severity
from specflow.model.report import CellTone
from specflow.tui.tones import STYLES

TONES = {
    Severity.ERROR: CellTone.BAD,
    Severity.WARNING: CellTone.DOUBTFUL,
    Severity.INFO: CellTone.QUIET,
}


class FindingsView(Widget):
    """Each with its severity in a word, what, and what to do."""

    DEFAULT_CSS = """
    FindingsView { height: auto; }
    """

    def __init__(self, findings: Sequence[Finding]) -> None:
        super().__init__()
        self.findings = findings

    def get_content_height(self, container: Size, viewport: Size, width: int) -> int:
        """Return the lines of all findings as folded."""
        return len(finding_lines(self.findings, width))

    def render(self) -> RenderResult:
        return Content("\n").join(finding_lines(self.findings, self.size.width))


def finding_lines(findings: Sequence[Finding], width: int) -> list[Content]:
    """Set the findings, what to do under each."""
    lines: list[Content] = []
    for finding in findings:
        style = STYLES[TONES[finding.severity]]
        says = Content.assemble(
            (f"{finding.severity.value} ", style), (f"{finding.rule}: ", "bold"), finding.message
        )
        lines += says.wrap(width)
        if finding.remedy:
            folded = Content.styled(f"do: {finding.remedy}", "$secondary").wrap(max(width - 2, 10))
            lines += [Content("  ") + line for line in folded]
    return lines
