"""Proposed allocations and solutions as report tables and as data: what every front end shows."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from typing import Any

from specflow.budgets.closure import Closure
from specflow.model.report import CellTone, ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.reports.figures import margin, rounded, text
from specflow.workflows.allocate import AllocatePreview, Proposal


def proposals_table(preview: AllocatePreview) -> ReportTable:
    """Return one row a block requirement: what the block has now, what it is to keep, and why."""
    titles = ("Requirement", "Block", "Parameter", "Estimate", "Limit", "Now", "From", "By hand")
    return table(
        "allocations",
        f"Allocations from the budget {preview.budget.id} ({preview.way})",
        _intro(preview),
        titles,
        [_proposal_row(one) for one in preview.proposals],
    )


def _intro(preview: AllocatePreview) -> str:
    parts = [
        f"reserve kept back: {one.amount:g} {one.unit} of {one.parameter}, held by {one.holder}"
        for one in preview.budget.reserves
    ]
    parts += [f"binding: {one}" for one in preview.binding] if preview.strains else []
    return "\n".join(parts)


def _proposal_row(one: Proposal) -> ReportRow:
    allotment = one.allotment
    estimate = rounded(allotment.least)
    if allotment.most != allotment.least:
        estimate = f"{estimate} to {rounded(allotment.most)}"
    hand = f"{one.difference}: {one.reason}" if one.reason else ""
    return ReportRow(
        id=one.child.id,
        cells=(
            text(one.child.id),
            text(allotment.block),
            text(allotment.parameter),
            text(f"{estimate} {allotment.unit}"),
            text(one.given.text),
            text(one.before.text if one.before is not None else "new"),
            text(allotment.words),
            text(hand, CellTone.DOUBTFUL if hand else CellTone.PLAIN),
        ),
    )


def closure_table(closure: Closure) -> ReportTable:
    """Return one row a limit: what is left with every block at its worst allowed bound, where, and who stands where."""
    rows = [
        ReportRow(
            id=one.requirement,
            cells=(
                text(one.requirement),
                margin(one.smallest, one.unit),
                text(one.words),
                text(", ".join(one.stands)),
            ),
        )
        for one in closure.limits
    ]
    return table(
        "closure",
        "Closure: every block at its worst allowed bound",
        closure.sentence,
        ("Requirement", "Margin", "At", "Blocks at"),
        rows,
    )


def strains_table(preview: AllocatePreview) -> ReportTable:
    """Return how much harder each line becomes under the least effort."""
    rows = [
        ReportRow(
            id=one.line, cells=(text(one.line), text(f"{one.harder_db:+.2f} dB"), text(f"{one.effort:.3g}"))
        )
        for one in preview.strains
    ]
    intro = (
        "positive: harder than estimated; effort 1 is a block at its estimate, 10 dB harder ten times that"
    )
    return table("effort", "Effort", intro, ("Line", "Harder by", "Effort"), rows)


def outdated_table(preview: AllocatePreview) -> ReportTable:
    """Return the stored allocations that no longer follow, with the reasons."""
    rows = [plain_row(one.allocation, one.allocation, "; ".join(one.reasons)) for one in preview.outdated]
    intro = "accepting the proposals makes them follow again"
    return table("outdated", "Allocations that no longer follow", intro, ("Allocation", "Because"), rows)


def preview_tables(preview: AllocatePreview) -> list[ReportTable]:
    """Return all tables of a preview."""
    tables = [proposals_table(preview), closure_table(preview.closure)]
    if preview.outdated:
        tables.append(outdated_table(preview))
    return [*tables, strains_table(preview)] if preview.strains else tables


def preview_as_json(preview: AllocatePreview) -> dict[str, Any]:
    """Return a preview as data for scripts."""
    return {
        "budget": preview.budget.id,
        "way": preview.way,
        "allocations": [
            {
                "requirement": one.child.id,
                "parents": list(one.parents),
                "block": one.allotment.block,
                "parameter": one.allotment.parameter,
                "unit": one.allotment.unit,
                "low": _finite(one.allotment.low),
                "high": _finite(one.allotment.high),
                "proposed": one.proposed.text,
                "depends_on_conditions": one.allotment.at is not None,
                "limit": one.given.text,
                "before": one.before.text if one.before is not None else None,
                "is_shared": one.allotment.is_shared,
                "from": one.allotment.words,
                "reason": one.reason,
                "difference": one.difference,
            }
            for one in preview.proposals
        ],
        "closure": closure_as_json(preview.closure),
        "binding": list(preview.binding),
        "effort": [
            {"line": one.line, "harder_db": one.harder_db, "effort": one.effort} for one in preview.strains
        ],
        "reserves": [one.model_dump(mode="json") for one in preview.budget.reserves],
        "outdated": [
            {"allocation": one.allocation, "reasons": list(one.reasons)} for one in preview.outdated
        ],
        "notes": list(preview.notes),
        "changes": [
            change.model_dump(mode="json", include={"noun", "id", "action", "fields"})
            for change in preview.changes
        ],
    }


def closure_as_json(closure: Closure) -> dict[str, Any]:
    """Return a closure test as data: ``closes`` is null where it is not shown."""
    return {
        "closes": closure.closes,
        "sentence": closure.sentence,
        "missing": list(closure.missing),
        "limits": [
            {
                "requirement": one.requirement,
                "margin": _finite(one.smallest),
                "unit": one.unit,
                "at": one.words,
                "blocks_at": list(one.stands),
            }
            for one in closure.limits
        ],
    }


def _finite(value: float) -> float | None:
    return value if math.isfinite(value) else None


def table(key: str, title: str, intro: str, titles: Sequence[str], rows: Iterable[ReportRow]) -> ReportTable:
    """Return a table whose columns are called as their titles say."""
    columns = tuple(
        ReportColumn(key=name.casefold().replace(" ", "_"), title=name, width=18) for name in titles
    )
    return ReportTable(key=key, title=title, intro=intro, columns=columns, rows=tuple(rows))


def plain_row(id: str, *words: str) -> ReportRow:
    """Return a row of plain words."""
    return ReportRow(id=id, cells=tuple(ReportCell(text=one) for one in words))
