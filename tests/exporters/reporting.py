"""The compliance report of the invented harbour project, with some text that could do harm in a spreadsheet."""

from __future__ import annotations

from specflow.model.finding import Finding, Severity
from specflow.model.report import Report, ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.reports.about import about_table, cautions
from specflow.reports.evidence import evidence_table
from specflow.reports.findings import by_subject, findings_table
from specflow.reports.matrix import compliance_matrix
from specflow.reports.points import points_table
from specflow.reports.status import in_tree_order, summary_table
from tests import harbour

HOSTILE = '=HYPERLINK("http://invented.invalid","click")'


def harbour_report() -> Report:
    """Return all six tables."""
    snapshot = harbour.snapshot()
    results = harbour.results(snapshot)
    ordered, depths = in_tree_order(snapshot)
    findings = [
        Finding(
            rule="failing", severity=Severity.ERROR, subject="PA-1", message=HOSTILE, remedy="<b>mend</b>"
        ),
        Finding(rule="tbd-left", severity=Severity.WARNING, subject="PA-4", message="+49 is no number"),
    ]
    return Report(
        title="Harbour terminal: compliance",
        subtitle=f"judged as of {results.as_of}",
        cautions=cautions(snapshot, harbour.DICTIONARY),
        tables=(
            summary_table(results, ordered),
            compliance_matrix(snapshot, results, findings, harbour.DICTIONARY, ordered, depths),
            points_table(snapshot, results, ordered),
            evidence_table(snapshot, results),
            findings_table(by_subject(findings)),
            # The versions of libraries differ from machine to machine; the golden page must not.
            without_versions(about_table(snapshot, results, harbour.DICTIONARY)),
        ),
    )


def without_versions(about: ReportTable) -> ReportTable:
    """Return the table without what depends on this machine."""
    kept = ("Project", "Judged", "Evidence", "Input", "Caution")
    return about.model_copy(update={"rows": tuple(row for row in about.rows if row.id.startswith(kept))})


def small_report(*cells: ReportCell) -> Report:
    """Return a report of one table of one row."""
    columns = tuple(ReportColumn(key=f"c{place}", title=f"C{place}") for place in range(len(cells)))
    table = ReportTable(key="t", title="T", columns=columns, rows=(ReportRow(id="r", cells=cells),))
    return Report(title="Small", tables=(table,))
