"""Where the project stands: totals with their denominators, and one row a requirement."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Sequence

from specflow.model.base import code_key
from specflow.model.report import Align, CellTone, ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Results, Snapshot
from specflow.model.verdict import CloseOut, Compliance, Label, RequirementStatus
from specflow.reports.figures import COMPLIANCE_TONES, DASH, label_tone, margin, share, text

STATUS_COLUMNS = (
    ReportColumn(key="id", title="Requirement", width=16),
    ReportColumn(key="state", title="State", width=24),
    ReportColumn(key="proved", title="Proved", align=Align.RIGHT, width=10),
    ReportColumn(key="guarded_margin", title="Guarded margin", align=Align.RIGHT, width=14),
    ReportColumn(key="governed_at", title="Governed at", width=34),
    ReportColumn(key="title", title="Title", width=34),
    ReportColumn(key="block", title="Block", width=14),
    ReportColumn(key="limit", title="Limit", width=22),
)
SUMMARY_INTRO = (
    "Compliance says whether the limits are met, close-out whether the matter is closed and why: a waiver closes a "
    "requirement and never makes it compliant. Both count applicable requirements; those not applicable are of all. A "
    "point where one item proves and another fails is counted in both."
)


def status_table(
    snapshot: Snapshot, results: Results, requirements: Sequence[Requirement], depths: dict[str, int]
) -> ReportTable:
    """Return one row a requirement, in the order given; ``depths`` indents by id."""
    rows = tuple(
        _status_row(requirement, results.of(requirement.id), depths.get(requirement.id, 0))
        for requirement in requirements
    )
    return ReportTable(key="status", title="Status", columns=STATUS_COLUMNS, rows=rows)


def _status_row(requirement: Requirement, status: RequirementStatus, depth: int) -> ReportRow:
    governing = status.governing
    cells = (
        ReportCell(text=requirement.id),
        ReportCell(text=status.label.value, tone=label_tone(status.label)),
        ReportCell(text=share(status.k, status.n), number=float(status.k)),
        margin(governing.guarded_margin, governing.unit) if governing else text(""),
        text(_place(governing.words, governing.item)) if governing else text(""),
        text(requirement.title),
        text(requirement.block),
        text(requirement.limit.text),
    )
    return ReportRow(id=requirement.id, cells=cells, depth=depth)


def _place(words: str, item: str) -> str:
    return ", ".join(part for part in (words, f"item {item}" if item else "") if part)


def in_tree_order(snapshot: Snapshot) -> tuple[list[Requirement], dict[str, int]]:
    """Return all requirements, children under their first parent, and how deep each one stands."""
    depths: dict[str, int] = {}
    ordered: list[Requirement] = []

    def walk(requirement: Requirement, depth: int) -> None:
        if requirement.id in depths:
            return
        depths[requirement.id] = depth
        ordered.append(requirement)
        for child in snapshot.children_of.get(code_key(requirement.id), ()):
            walk(child, depth + 1)

    for requirement in snapshot.requirements:
        if not requirement.parents:
            walk(requirement, 0)
    for requirement in snapshot.requirements:
        walk(requirement, 0)
    return ordered, depths


def compliance_totals(results: Results, requirements: Iterable[Requirement]) -> ReportTable:
    """Return how many requirements stand where on the axis of compliance; not applicable ones are set apart."""
    statuses = [results.of(requirement.id) for requirement in requirements]
    counts = Counter(status.compliance for status in statuses)
    applicable = len(statuses) - counts[Compliance.NOT_APPLICABLE]
    rows = [
        _total_row(
            compliance.value,
            counts[compliance],
            applicable,
            COMPLIANCE_TONES.get(compliance, CellTone.DOUBTFUL),
        )
        for compliance in Compliance
        if compliance is not Compliance.NOT_APPLICABLE
    ]
    rows.append(
        _total_row(
            Compliance.NOT_APPLICABLE.value, counts[Compliance.NOT_APPLICABLE], len(statuses), CellTone.QUIET
        )
    )
    return ReportTable(
        key="compliance_totals",
        title="Compliance",
        columns=(
            ReportColumn(key="state", title="Compliance", width=24),
            ReportColumn(key="count", title="Requirements", align=Align.RIGHT),
        ),
        rows=tuple(rows),
    )


def close_out_totals(results: Results, requirements: Iterable[Requirement]) -> ReportTable:
    """Return open and closed with their reasons; waived rows are never counted as verified."""
    statuses = [results.of(requirement.id) for requirement in requirements]
    applicable = sum(status.compliance is not Compliance.NOT_APPLICABLE for status in statuses)
    counts = Counter((status.close_out, status.label) for status in statuses)
    order = {label: place for place, label in enumerate(Label)}
    rows = [
        _total_row(
            f"{close_out.value}: {label.value}" if close_out is CloseOut.OPEN else label.value,
            count,
            len(statuses) if label is Label.NOT_APPLICABLE else applicable,
            label_tone(label),
        )
        for (close_out, label), count in sorted(counts.items(), key=lambda pair: order[pair[0][1]])
    ]
    return ReportTable(
        key="close_out_totals",
        title="Close-out",
        columns=(
            ReportColumn(key="state", title="State", width=34),
            ReportColumn(key="count", title="Requirements", align=Align.RIGHT),
        ),
        rows=tuple(rows),
    )


def summary_table(results: Results, requirements: Sequence[Requirement]) -> ReportTable:
    """Return the totals of all axes as one table, each with its denominator; what is shown first."""
    axes = (
        ("Compliance", compliance_totals(results, requirements)),
        ("Close-out", close_out_totals(results, requirements)),
        ("Required points", points_totals(results, requirements)),
    )
    return ReportTable(
        key="summary",
        title="Summary",
        intro=SUMMARY_INTRO,
        columns=(
            ReportColumn(key="axis", title="Axis", width=18),
            ReportColumn(key="state", title="State", width=40),
            ReportColumn(key="count", title="Count", align=Align.RIGHT, width=14),
        ),
        rows=tuple(
            ReportRow(id=f"{axis}: {row.id}", cells=(ReportCell(text=axis), *row.cells))
            for axis, table in axes
            for row in table.rows
        ),
    )


def points_totals(results: Results, requirements: Iterable[Requirement]) -> ReportTable:
    """Return how many required points stand where, of all those of applicable requirements."""
    statuses = [results.of(requirement.id) for requirement in requirements]
    counted = [status for status in statuses if status.compliance is not Compliance.NOT_APPLICABLE]
    n = sum(status.n for status in counted)
    parts = (
        ("proved", sum(status.k for status in counted), CellTone.GOOD),
        ("failing", sum(status.n_failing for status in counted), CellTone.BAD),
        ("without evidence", sum(status.n_without_evidence for status in counted), CellTone.DOUBTFUL),
        ("undecided", sum(status.n_undecided for status in counted), CellTone.DOUBTFUL),
    )
    return ReportTable(
        key="points_totals",
        title="Required points",
        columns=(
            ReportColumn(key="state", title="State", width=34),
            ReportColumn(key="count", title="Points", align=Align.RIGHT),
        ),
        rows=tuple(_total_row(name, count, n, tone) for name, count, tone in parts),
    )


def points_sentence(results: Results, requirements: Iterable[Requirement]) -> str:
    """Return the total of required points, with every denominator said; the parts add up, or it is said why not."""
    statuses = [results.of(requirement.id) for requirement in requirements]
    counted = [status for status in statuses if status.compliance is not Compliance.NOT_APPLICABLE]
    k = sum(status.k for status in counted)
    n = sum(status.n for status in counted)
    failing = sum(status.n_failing for status in counted)
    without = sum(status.n_without_evidence for status in counted)
    undecided = sum(status.n_undecided for status in counted)
    twice = k + failing + without + undecided - n
    return (
        f"{k} of {n} required points proved, {failing} failing{_twice(twice)}, {without} without evidence, "
        f"{undecided} not decided (inconclusive or without credit) "
        f"({len(counted)} applicable requirements of {len(statuses)})"
    )


def _twice(number: int) -> str:
    """Say how many fails stand at points that another item's evidence counts for as well."""
    return f" ({number} of them at points where another item is counted too)" if number else ""


def _total_row(name: str, count: int, of: int, tone: CellTone) -> ReportRow:
    shown = tone if count else CellTone.QUIET
    return ReportRow(
        id=name,
        cells=(
            ReportCell(text=name, tone=shown),
            ReportCell(text=share(count, of) if of else DASH, number=float(count), tone=shown),
        ),
    )
