"""The rules as tables: all of them in a line each, and one of them explained."""

from __future__ import annotations

from collections.abc import Sequence

from specflow.model.finding import RuleDescription
from specflow.model.nouns import NOUN_BY_NAME
from specflow.model.report import ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.reports.figures import text
from specflow.reports.findings import SEVERITY_TONES

CATALOGUE_COLUMNS = (
    ReportColumn(key="rule", title="Rule", width=26),
    ReportColumn(key="severity", title="Severity", width=10),
    ReportColumn(key="about", title="About", width=18),
    ReportColumn(key="reports", title="Reports", width=60),
)
RULE_COLUMNS = (
    ReportColumn(key="part", title="", width=10),
    ReportColumn(key="text", title="", width=100),
)


def catalogue_table(rules: Sequence[RuleDescription]) -> ReportTable:
    """Return one row a rule, in the order given; the severity is the one a project has that sets no other."""
    return ReportTable(
        key="rules",
        title="Rules",
        columns=CATALOGUE_COLUMNS,
        rows=tuple(
            ReportRow(
                id=rule.code, cells=(text(rule.code), severity_cell(rule), about(rule), text(rule.title))
            )
            for rule in rules
        ),
    )


def rule_table(rule: RuleDescription) -> ReportTable:
    """Return what a rule reports, why, an example that it reports and one that it does not, and what to do."""
    rows = (
        ("Severity", severity_cell(rule)),
        ("About", about(rule)),
        ("Why", text(rule.why)),
        ("Reported", text(rule.fails)),
        ("Silent", text(rule.passes)),
        ("Do", text(rule.remedy)),
    )
    return ReportTable(
        key="rule",
        title=rule.code,
        intro=rule.title,
        columns=RULE_COLUMNS,
        rows=tuple(ReportRow(id=part, cells=(text(part), cell)) for part, cell in rows),
    )


def import_finding_table(code: str, meaning: str) -> ReportTable:
    """Return what a finding of loading or attaching means; it is no rule, so it cannot be weighed."""
    when = "while a file is loaded or attached, with its cell; no severity of the project changes it"
    return ReportTable(
        key="rule",
        title=code,
        intro=meaning,
        columns=RULE_COLUMNS,
        rows=(ReportRow(id="Reported", cells=(text("Reported"), text(when))),),
    )


def severity_cell(rule: RuleDescription) -> ReportCell:
    """Return the severity in its tone."""
    return ReportCell(text=rule.severity.value, tone=SEVERITY_TONES[rule.severity])


def about(rule: RuleDescription) -> ReportCell:
    """Return what people call the noun that the rule looks at."""
    return text(NOUN_BY_NAME[rule.noun].title)
