"""The compliance matrix: one row a requirement, with the number that governs it and the cell it stands in."""

from __future__ import annotations

from collections import Counter, defaultdict
from collections.abc import Mapping, Sequence

from specflow.limits import limit_words
from specflow.model.base import code_key
from specflow.model.finding import Finding, Severity
from specflow.model.report import Align, CellTone, ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Results, Snapshot
from specflow.model.verdict import RequirementStatus
from specflow.parameters import Dictionary
from specflow.reports.figures import (
    COMPLIANCE_TONES,
    DASH,
    label_tone,
    margin,
    share,
    text,
    verdict_tone,
)
from specflow.reports.origins import OriginFinder
from specflow.units import bandwidth_words

# What a board asks first stands first, and is what a narrow page prints: where it stands, why, and in which cell that
# can be looked up. What describes the requirement follows.
MATRIX_COLUMNS = (
    ReportColumn(key="id", title="Requirement", width=16),
    ReportColumn(key="title", title="Title", width=30),
    ReportColumn(key="label", title="State", width=20),
    ReportColumn(key="compliance", title="Compliance", width=16),
    ReportColumn(key="proved", title="Points proved", align=Align.RIGHT, width=10),
    ReportColumn(key="failing", title="Failing", align=Align.RIGHT, width=9),
    ReportColumn(key="without_evidence", title="Without evidence", align=Align.RIGHT, width=10),
    ReportColumn(
        key="undecided", title="Undecided", align=Align.RIGHT, width=11, explains="evidence proves nothing"
    ),
    ReportColumn(key="guarded_margin", title="Guarded margin", align=Align.RIGHT, width=11),
    ReportColumn(key="governed_at", title="Governed at", width=30),
    ReportColumn(key="item", title="Item", width=12),
    ReportColumn(key="evidence", title="Governing cell", width=36),
    ReportColumn(key="findings", title="Findings", width=22),
    ReportColumn(key="limit", title="Limit as written", width=30),
    ReportColumn(key="limit_words", title="Limit in words", width=56, detail=True),
    ReportColumn(
        key="value", title="Governing value", align=Align.RIGHT, width=14, explains="as recorded", detail=True
    ),
    ReportColumn(key="margin", title="Margin", align=Align.RIGHT, width=12, detail=True),
    ReportColumn(key="smallest_margin", title="Smallest margin", align=Align.RIGHT, width=12, detail=True),
    ReportColumn(key="verdict", title="Worst verdict", width=16, detail=True),
    ReportColumn(key="close_out", title="Close-out", width=30, detail=True),
    ReportColumn(key="quantity", title="Quantity", width=30, detail=True),
    ReportColumn(key="conditions", title="Conditions set", width=16, detail=True),
    ReportColumn(
        key="verification", title="Verification", width=34, explains="method, stage, tier", detail=True
    ),
    ReportColumn(key="block", title="Block", width=14, detail=True),
    ReportColumn(key="tier", title="Tier", width=10, detail=True),
    ReportColumn(key="parents", title="Parents", width=44, detail=True),
    ReportColumn(key="source", title="Source", width=52, detail=True),
    ReportColumn(key="owner", title="Owner", width=16, detail=True),
)

MATRIX_INTRO = (
    "Margins are distances to the limit, positive is good; guarded margins are after the guard band of the decision "
    "rule. The governing point is the worst verdict, then the smallest guarded margin. Points proved count required "
    "condition points by one item, never a mixture of items, unless the requirement says so."
)


def compliance_matrix(
    snapshot: Snapshot,
    results: Results,
    findings: Sequence[Finding],
    dictionary: Dictionary,
    requirements: Sequence[Requirement],
    depths: Mapping[str, int],
) -> ReportTable:
    """Return the matrix, in the order given."""
    finder = OriginFinder(snapshot)
    finder.fetch(governing_tables(results, requirements))
    about: dict[str, list[Finding]] = defaultdict(list)
    for finding in findings:
        about[code_key(finding.subject)].append(finding)
    rows: list[ReportRow] = []
    for requirement in requirements:
        status = results.of(requirement.id)
        cells = {
            **_where_it_stands(status, finder),
            "findings": _findings_cell(about.get(code_key(requirement.id), ())),
            **_what_is_required(requirement, snapshot, dictionary),
        }
        ordered = tuple(cells[column.key] for column in MATRIX_COLUMNS)
        rows.append(ReportRow(id=requirement.id, cells=ordered, depth=depths.get(requirement.id, 0)))
    return ReportTable(
        key="matrix", title="Compliance matrix", intro=MATRIX_INTRO, columns=MATRIX_COLUMNS, rows=tuple(rows)
    )


def governing_tables(results: Results, requirements: Sequence[Requirement]) -> set[str]:
    """Return the evidence tables in which governing records stand."""
    statuses = (results.of(requirement.id) for requirement in requirements)
    return {
        status.governing.record.table for status in statuses if status.governing and status.governing.record
    }


def _what_is_required(
    requirement: Requirement, snapshot: Snapshot, dictionary: Dictionary
) -> dict[str, ReportCell]:
    source = requirement.source
    activities = snapshot.activities_of.get(code_key(requirement.id), ())
    planned = (
        f"{activity.method.value}, {activity.stage.value}, {activity.tier.value}"
        for activity in activities
        if activity.planned
    )
    return {
        "id": ReportCell(text=requirement.id, origin=requirement.origin, link=f"points/{requirement.id}"),
        "title": text(requirement.title),
        "tier": text(requirement.tier.value),
        "parents": text(", ".join(requirement.parents) or requirement.derived_reason),
        "block": text(requirement.block),
        "source": text(" ".join(part for part in (source.document, source.issue, source.paragraph) if part)),
        "quantity": text(quantity_words(requirement, dictionary)),
        "limit": text(requirement.limit.text),
        "limit_words": text(limit_words(requirement.limit)),
        "conditions": text(requirement.conditions or ""),
        "verification": text("; ".join(planned)),
        "owner": text(requirement.owner),
    }


def quantity_words(requirement: Requirement, dictionary: Dictionary) -> str:
    """Return what the requirement limits: parameter, plane, statistic, bandwidth, polarisation."""
    quantity = requirement.quantity
    parameter = dictionary.get(quantity.parameter)
    parts = [parameter.title if parameter else quantity.parameter]
    if quantity.plane:
        parts.append(f"at {quantity.plane}")
    if quantity.statistic:
        parts.append(quantity.statistic)
    if quantity.bandwidth_hz:
        parts.append(f"in {bandwidth_words(quantity.bandwidth_hz)}")
    if quantity.polarisation:
        parts.append(quantity.polarisation)
    return ", ".join(parts)


def _where_it_stands(status: RequirementStatus, finder: OriginFinder) -> dict[str, ReportCell]:
    governing = status.governing
    smallest = status.smallest_margin
    origin = finder.origin(governing.record) if governing else None
    return {
        "label": text(status.label.value, label_tone(status.label)),
        "compliance": text(
            status.compliance.value, COMPLIANCE_TONES.get(status.compliance, CellTone.DOUBTFUL)
        ),
        "proved": ReportCell(text=share(status.k, status.n), number=float(status.k)),
        "failing": _count(status.n_failing, CellTone.BAD),
        "without_evidence": _count(status.n_without_evidence, CellTone.DOUBTFUL),
        "undecided": _count(status.n_undecided, CellTone.DOUBTFUL),
        "verdict": text(status.verdict.words, verdict_tone(status.verdict)),
        "value": finder.recorded(governing.record) if governing else text(""),
        "margin": margin(governing.margin, governing.unit) if governing else text(""),
        "guarded_margin": margin(governing.guarded_margin, governing.unit) if governing else text(""),
        "smallest_margin": margin(smallest.margin, smallest.unit) if smallest else text(""),
        "governed_at": text(governing.words if governing else ""),
        "item": text(governing.item if governing else ""),
        "evidence": ReportCell(text=str(origin or DASH), origin=origin),
        "close_out": text(f"{status.close_out.value}: {status.close_out_reason}"),
    }


def _count(count: int, tone: CellTone) -> ReportCell:
    return ReportCell(text=str(count), number=float(count), tone=tone if count else CellTone.QUIET)


def _findings_cell(findings: Sequence[Finding]) -> ReportCell:
    """Return how many findings there are of each severity; the cell leads to the first of them."""
    if not findings:
        return text("")
    counts = Counter(finding.severity for finding in findings)
    order = (Severity.ERROR, Severity.WARNING, Severity.INFO)
    words = ", ".join(_counted(counts[severity], severity) for severity in order if counts[severity])
    return ReportCell(text=words, link=f"findings/{findings[0].subject}")


def _counted(count: int, severity: Severity) -> str:
    several = count > 1 and severity is not Severity.INFO
    return f"{count} {severity.value}{'s' * several}"
