"""The sheets of what a board decides beside waivers: approvals, dispositions of findings, declared splits."""

from __future__ import annotations

from typing import get_args

from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.sheet import MARK_COLUMN, Sheet, each_row
from specflow.model.baseline import Baseline
from specflow.model.decision import Approval, DeclaredSplit, Disposition
from specflow.model.requirement import Requirement
from specflow.model.sheet import SheetColumn, SheetLayout

_DECISIONS: tuple[str, ...] = get_args(Approval.model_fields["decision"].annotation)

_REQUIREMENT = SheetColumn(
    key="requirement",
    title="Requirement",
    aliases=("Requirement ID", "Req ID"),
    required=True,
    guidance="ID of the requirement.",
    example="TX-EIRP-1",
)
_BY = SheetColumn(
    key="by",
    title="By",
    aliases=("Decided by", "Name"),
    required=True,
    guidance="Who.",
    example="A. Reviewer (invented)",
    width=22,
)
_ON = SheetColumn(
    key="on",
    title="On",
    aliases=("Date", "Decided on"),
    required=True,
    guidance="As 2026-03-31.",
    example="2026-03-31",
)
_REASON = SheetColumn(
    key="reason",
    title="Reason",
    aliases=("Justification",),
    required=True,
    guidance="Why.",
    example="Agreed at the review",
    width=34,
)


def _id(example: str) -> SheetColumn:
    return SheetColumn(key="id", title="ID", aliases=("Number", "Identifier"), required=True, example=example)


APPROVALS = SheetLayout(
    noun="approval",
    title="Approvals",
    aliases=("Approval", "Board decisions"),
    intro="Decisions of the board on requirements, recorded on top of what is computed.",
    columns=(
        MARK_COLUMN,
        _id("AP-001"),
        _REQUIREMENT,
        SheetColumn(
            key="decision",
            title="Decision",
            required=True,
            guidance="closed or kept open.",
            choices=_DECISIONS,
            example="closed",
        ),
        _BY,
        SheetColumn(key="role", title="Role", example="Review chair"),
        _ON,
        SheetColumn(key="baseline", title="Baseline", guidance="ID of the baseline that was looked at."),
        SheetColumn(key="note", title="Note", aliases=("Notes", "Remarks"), width=28),
    ),
)

DISPOSITIONS = SheetLayout(
    noun="disposition",
    title="Dispositions",
    aliases=("Disposition",),
    intro="Reasoned decisions about findings: which rule, about what, why, who and when.",
    columns=(
        MARK_COLUMN,
        _id("D-001"),
        SheetColumn(
            key="rule",
            title="Rule",
            required=True,
            guidance="Code of the rule that reports the finding.",
            example="conflicting-evidence",
            width=22,
        ),
        SheetColumn(
            key="subject",
            title="Subject",
            aliases=("About",),
            required=True,
            guidance="ID that the finding is about.",
            example="TX-EIRP-1",
        ),
        _REASON,
        _BY,
        _ON,
        SheetColumn(key="expires_on", title="Expires on", aliases=("Expiry",), guidance="As 2026-12-31."),
    ),
)

SPLITS = SheetLayout(
    noun="declared_split",
    title="Declared splits",
    aliases=("Declared split", "Partial compliance"),
    intro="Known shortfalls on part of the scope, declared: what makes a requirement partially compliant.",
    columns=(
        MARK_COLUMN,
        _id("DS-001"),
        _REQUIREMENT,
        SheetColumn(
            key="scope_not_met",
            title="Scope not met",
            required=True,
            guidance="The part that is not met, as an expression over conditions.",
            example="frequency > 29.75 GHz",
            width=28,
        ),
        _REASON,
        _BY,
        _ON,
    ),
)


def approval(row: SheetRow, intake: Intake) -> Approval | None:
    """Make one approval of one row."""
    requirement = _requirement(row, intake)
    known = intake.find(Requirement, requirement)
    row.needed("decision")
    return row.build(
        Approval,
        id=row.subject,
        requirement=requirement,
        requirement_revision=known.revision if known else 1,
        decision=row.one_of("decision", _DECISIONS, "kept open"),
        by=row.needed("by"),
        role=row.prose("role"),
        on=row.day("on"),
        baseline=intake.reference(row, "baseline", Baseline),
        note=row.prose("note"),
        origin=row.origin("decision"),
    )


def disposition(row: SheetRow, intake: Intake) -> Disposition | None:
    """Make one disposition of one row."""
    return row.build(
        Disposition,
        id=row.subject,
        rule=row.needed("rule"),
        subject=row.needed("subject"),
        reason=row.needed("reason"),
        by=row.needed("by"),
        on=row.day("on"),
        expires_on=row.date("expires_on"),
        origin=row.origin("reason"),
    )


def split(row: SheetRow, intake: Intake) -> DeclaredSplit | None:
    """Make one declared split of one row."""
    return row.build(
        DeclaredSplit,
        id=row.subject,
        requirement=_requirement(row, intake),
        scope_not_met=row.needed("scope_not_met"),
        reason=row.needed("reason"),
        by=row.needed("by"),
        on=row.day("on"),
        origin=row.origin("scope_not_met"),
    )


def _requirement(row: SheetRow, intake: Intake) -> str:
    code = row.needed("requirement")
    return intake.link(row, "requirement", Requirement, code) if code else ""


SHEETS = (
    Sheet(APPROVALS, Approval, each_row(approval)),
    Sheet(DISPOSITIONS, Disposition, each_row(disposition)),
    Sheet(SPLITS, DeclaredSplit, each_row(split)),
)
