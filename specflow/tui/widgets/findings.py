"""The findings about one requirement."""

from __future__ import annotations

from collections.abc import Sequence

from textual.content import Content
from textual.widgets import Static

from specflow.model.finding import Finding, Severity
from specflow.model.report import CellTone
from specflow.tui.tones import STYLES

TONES = {
    Severity.ERROR: CellTone.BAD,
    Severity.WARNING: CellTone.DOUBTFUL,
    Severity.INFO: CellTone.QUIET,
}


class FindingsView(Static):
    """Each with its severity in a word, what, and what to do."""

    DEFAULT_CSS = """
    FindingsView { height: auto; }
    """

    def __init__(self, findings: Sequence[Finding]) -> None:
        super().__init__(Content("\n").join(finding_lines(findings)))


def finding_lines(findings: Sequence[Finding]) -> list[Content]:
    """Set the findings, two lines each."""
    lines = []
    for finding in findings:
        style = STYLES[TONES[finding.severity]]
        lines.append(
            Content.assemble(
                (f"{finding.severity.value} ", style), (f"{finding.rule}: ", "bold"), finding.message
            )
        )
        if finding.remedy:
            lines.append(Content.styled(f"  do: {finding.remedy}", "$text-muted"))
    return lines
