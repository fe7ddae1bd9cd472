"""The compliance matrix: one row a requirement, with the number that governs it and the cell it stands in."""

from __future__ import annotations

from collections import Counter
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

MATRIX_COLUMNS = (
    ReportColumn(key="id", title="Requirement", width=16),
    ReportColumn(key="title", title="Title", width=34),
    ReportColumn(key="label", title="State", width=24),
    ReportColumn(key="tier", title="Tier", width=10),
    ReportColumn(key="parents", title="Parents", width=16),
    ReportColumn(key="block", title="Block", width=14),
    ReportColumn(key="source", title="Source", width=26),
    ReportColumn(key="quantity", title="Quantity", width=30),
    ReportColumn(key="limit", title="Limit as written", width=24),
    ReportColumn(key="limit_words", title="Limit in words", width=40),
    ReportColumn(key="conditions", title="Conditions set", width=16),
    ReportColumn(key="verification", title="Verification", width=34, explains="method, stage, tier"),
    ReportColumn(key="proved", title="Points proved", align=Align.RIGHT, width=13),
    ReportColumn(key="failing", title="Failing", align=Align.RIGHT, width=9),
    ReportColumn(key="missing", title="Without evidence", align=Align.RIGHT, width=10),
    ReportColumn(
        key="undecided", title="Undecided", align=Align.RIGHT, width=10, explains="evidence proves nothing"
    ),
    ReportColumn(key="verdict", title="Worst verdict", width=16),
    ReportColumn(key="value", title="Governing value", align=Align.RIGHT, width=14, explains="as recorded"),
    ReportColumn(key="margin", title="Margin", align=Align.RIGHT, width=12),
    ReportColumn(key="guarded_margin", title="Guarded margin", align=Align.RIGHT, width=12),
    ReportColumn(key="smallest_margin", title="Smallest margin", align=Align.RIGHT, width=12),
    ReportColumn(key="governed_at", title="Governed at", width=36),
    ReportColumn(key="item", title="Item", width=14),
    ReportColumn(key="evidence", title="Governing cell", width=44),
    ReportColumn(key="compliance", title="Compliance", width=18),
    ReportColumn(key="close_out", title="Close-out", width=34),
    ReportColumn(key="findings", title="Findings", align=Align.RIGHT, width=16),
    ReportColumn(key="owner", title="Owner", width=16),
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
    per_subject: dict[str, Counter[Severity]] = {}
    for finding in findings:
        per_subject.setdefault(code_key(finding.subject), Counter())[finding.severity] += 1
    rows = tuple(
        ReportRow(
            id=requirement.id,
            cells=(
                *_what_is_required(requirement, results.of(requirement.id), snapshot, dictionary),
                *_what_is_shown(results.of(requirement.id), finder),
                text(_count_words(per_subject.get(code_key(requirement.id), Counter()))),
                text(requirement.owner),
            ),
            depth=depths.get(requirement.id, 0),
        )
        for requirement in requirements
    )
    return ReportTable(
        key="matrix", title="Compliance matrix", intro=MATRIX_INTRO, columns=MATRIX_COLUMNS, rows=rows
    )


def governing_tables(results: Results, requirements: Sequence[Requirement]) -> set[str]:
    """Return the evidence tables in which governing records stand."""
    statuses = (results.of(requirement.id) for requirement in requirements)
    return {
        status.governing.record.table for status in statuses if status.governing and status.governing.record
    }


def _what_is_required(
    requirement: Requirement, status: RequirementStatus, snapshot: Snapshot, dictionary: Dictionary
) -> tuple[ReportCell, ...]:
    source = requirement.source
    activities = snapshot.activities_of.get(code_key(requirement.id), ())
    return (
        ReportCell(text=requirement.id, origin=requirement.origin, link=f"points/{requirement.id}"),
        text(requirement.title),
        text(status.label.value, label_tone(status.label)),
        text(requirement.tier.value),
        text(", ".join(requirement.parents) or requirement.derived_reason),
        text(requirement.block),
        text(" ".join(part for part in (source.document, source.issue, source.paragraph) if part)),
        text(quantity_words(requirement, dictionary)),
        text(requirement.limit.text),
        text(limit_words(requirement.limit)),
        text(requirement.conditions or ""),
        text(
            "; ".join(
                f"{activity.method.value}, {activity.stage.value}, {activity.tier.value}"
                for activity in activities
                if activity.planned
            )
        ),
    )


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


def bandwidth_words(hertz: float) -> str:
    """Return a bandwidth in the unit people use for its size."""
    for factor, unit in ((1e9, "GHz"), (1e6, "MHz"), (1e3, "kHz")):
        if hertz >= factor:
            return f"{hertz / factor:g} {unit}"
    return f"{hertz:g} Hz"


def _what_is_shown(status: RequirementStatus, finder: OriginFinder) -> tuple[ReportCell, ...]:
    governing = status.governing
    smallest = status.smallest_margin
    origin = finder.origin(governing.record) if governing else None
    return (
        ReportCell(text=share(status.k, status.n), number=float(status.k)),
        _count(status.n_failing, CellTone.BAD),
        _count(status.n_without_evidence, CellTone.DOUBTFUL),
        _count(status.n_undecided, CellTone.DOUBTFUL),
        text(status.verdict.words, verdict_tone(status.verdict)),
        finder.recorded(governing.record) if governing else text(""),
        margin(governing.margin, governing.unit) if governing else text(""),
        margin(governing.guarded_margin, governing.unit) if governing else text(""),
        margin(smallest.margin, smallest.unit) if smallest else text(""),
        text(governing.words if governing else ""),
        text(governing.item if governing else ""),
        ReportCell(text=str(origin or DASH), origin=origin),
        text(status.compliance.value, COMPLIANCE_TONES.get(status.compliance, CellTone.DOUBTFUL)),
        text(f"{status.close_out.value}: {status.close_out_reason}"),
    )


def _count(count: int, tone: CellTone) -> ReportCell:
    return ReportCell(text=str(count), number=float(count), tone=tone if count else CellTone.QUIET)


def _count_words(counts: Counter[Severity]) -> str:
    order = (Severity.ERROR, Severity.WARNING, Severity.INFO)
    return ", ".join(f"{counts[severity]} {severity.value}" for severity in order if counts[severity])
