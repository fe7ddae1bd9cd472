"""Findings as a table."""

from __future__ import annotations

from collections.abc import Sequence

from specflow.model.base import code_key
from specflow.model.finding import Finding, Severity
from specflow.model.report import CellTone, ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.reports.figures import text

SEVERITY_TONES = {
    Severity.ERROR: CellTone.BAD,
    Severity.WARNING: CellTone.DOUBTFUL,
    Severity.INFO: CellTone.QUIET,
}
FINDING_COLUMNS = (
    ReportColumn(key="severity", title="Severity", width=10),
    ReportColumn(key="rule", title="Rule", width=22),
    ReportColumn(key="subject", title="About", width=18),
    ReportColumn(key="message", title="What", width=60),
    ReportColumn(key="why", title="Why it matters", width=46),
    ReportColumn(key="remedy", title="What to do", width=46),
    ReportColumn(key="origin", title="Where", width=34),
)


def by_subject(findings: Sequence[Finding]) -> list[Finding]:
    """Return findings with those about one thing side by side; the things in the order in which they first occur."""
    together: dict[str, list[Finding]] = {}
    for finding in findings:
        together.setdefault(code_key(finding.subject), []).append(finding)
    return [finding for about in together.values() for finding in about]


def findings_table(findings: Sequence[Finding], title: str = "Findings") -> ReportTable:
    """Return the findings in the order given."""
    return ReportTable(
        key="findings",
        title=title,
        columns=FINDING_COLUMNS,
        rows=tuple(_row(finding) for finding in findings),
    )


def _row(finding: Finding) -> ReportRow:
    return ReportRow(
        id=finding.subject,
        cells=(
            ReportCell(text=finding.severity.value, tone=SEVERITY_TONES[finding.severity]),
            text(finding.rule),
            ReportCell(text=finding.subject, link=_link(finding)),
            text(finding.message),
            text(finding.why),
            text(finding.remedy),
            ReportCell(text=str(finding.origin or ""), origin=finding.origin),
        ),
    )


def _link(finding: Finding) -> str:
    return f"matrix/{finding.subject}" if finding.subject_kind == "requirement" else ""
