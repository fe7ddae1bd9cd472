"""The sheet of waivers and deviations."""

from __future__ import annotations

from typing import get_args

from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.items import known_items
from specflow.importers.sheets.limit_cells import limit_cell
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.sheet import MARK_COLUMN, Sheet, each_row
from specflow.limits import limit_difference, limit_words
from specflow.model.decision import Nonconformance, Waiver
from specflow.model.limit import Limit
from specflow.model.requirement import Requirement
from specflow.model.sheet import SheetColumn, SheetLayout

_KINDS: tuple[str, ...] = get_args(Waiver.model_fields["kind"].annotation)
_STATES: tuple[str, ...] = get_args(Waiver.model_fields["state"].annotation)

LAYOUT = SheetLayout(
    noun="waiver",
    title="Waivers",
    aliases=("Waiver", "Deviations", "Waivers and deviations", "Concessions"),
    intro="Bounded, approved, expiring acceptances of a shortfall. A waiver closes a row; it never makes it compliant.",
    columns=(
        MARK_COLUMN,
        SheetColumn(key="id", title="ID", aliases=("Waiver ID", "Number"), required=True, example="W-003"),
        SheetColumn(
            key="kind",
            title="Kind",
            guidance="deviation before production, waiver after. Empty: waiver.",
            choices=_KINDS,
            example="waiver",
        ),
        SheetColumn(
            key="requirement",
            title="Requirement",
            aliases=("Requirement ID", "Req ID"),
            required=True,
            guidance="ID of the requirement that is not met.",
            example="TX-EIRP-1",
        ),
        SheetColumn(
            key="requirement_revision",
            title="Requirement revision",
            guidance="Revision that it was written against. Empty: the present one.",
            width=12,
        ),
        SheetColumn(
            key="items",
            title="Items",
            aliases=("Serials",),
            guidance="Items or serials it holds for, separated by commas. Empty: all.",
        ),
        SheetColumn(
            key="conditions", title="Conditions", guidance="Where it holds. Empty: everywhere.", width=24
        ),
        SheetColumn(
            key="permitted",
            title="Permitted limit",
            aliases=("Permitted", "Permitted value"),
            required=True,
            guidance="The limit that must still be met, written as on the sheet Requirements.",
            example=">= 44.5 dBm",
            width=18,
        ),
        SheetColumn(
            key="reason",
            title="Reason",
            aliases=("Justification",),
            required=True,
            guidance="Why it is asked for.",
            example="Output stage of the first build",
            width=30,
        ),
        SheetColumn(key="effect", title="Effect", guidance="On parents and interfaces.", width=24),
        SheetColumn(key="requester", title="Requested by", aliases=("Requester",), example="RF systems"),
        SheetColumn(key="approver", title="Approved by", aliases=("Approver",), example=""),
        SheetColumn(
            key="requested_on", title="Requested on", aliases=("Request date",), guidance="As 2026-03-31."
        ),
        SheetColumn(
            key="decided_on", title="Decided on", aliases=("Decision date",), guidance="As 2026-03-31."
        ),
        SheetColumn(
            key="expires_on", title="Expires on", aliases=("Expiry", "Expiry date"), guidance="As 2026-12-31."
        ),
        SheetColumn(
            key="state", title="State", guidance="Empty: requested.", choices=_STATES, example="requested"
        ),
        SheetColumn(
            key="nonconformance",
            title="Nonconformance",
            aliases=("NCR",),
            guidance="ID on the sheet Nonconformances.",
        ),
    ),
)


def build(row: SheetRow, intake: Intake) -> Waiver | None:
    """Make one waiver of one row."""
    code = row.needed("requirement")
    spelled = intake.link(row, "requirement", Requirement, code) if code else ""
    requirement = intake.find(Requirement, spelled) if spelled else None
    parameter = intake.dictionary.get(requirement.quantity.parameter) if requirement else None
    permitted = limit_cell(row, intake, "permitted", parameter)
    state = row.one_of("state", _STATES, "requested")
    if state == "approved" and not row.prose("approver"):
        row.fault(
            "approver",
            "an approved waiver names nobody who approved it",
            "name the approver, or set another state",
        )
    if permitted is not None and requirement is not None:
        _say_what_is_waived(row, intake, permitted, requirement)
    return row.build(
        Waiver,
        id=row.subject,
        kind=row.one_of("kind", _KINDS, "waiver"),
        requirement=spelled,
        requirement_revision=row.whole("requirement_revision", _revision(row, intake, requirement), least=1),
        items=known_items(row, "items", row.words("items"), intake),
        conditions=row.text("conditions"),
        permitted="" if permitted is None else permitted.text,
        reason=row.needed("reason"),
        effect=row.prose("effect"),
        requester=row.prose("requester"),
        approver=row.prose("approver"),
        requested_on=row.date("requested_on"),
        decided_on=row.date("decided_on"),
        expires_on=row.date("expires_on"),
        state=state,
        nonconformance=intake.reference(row, "nonconformance", Nonconformance),
        origin=row.origin("permitted"),
    )


def _say_what_is_waived(row: SheetRow, intake: Intake, permitted: Limit, requirement: Requirement) -> None:
    """Say the permitted limit back, and against the limit itself; one that waives nothing is doubtful."""
    parameter = intake.dictionary.get(requirement.quantity.parameter)
    change = limit_difference(requirement.limit, permitted)
    intake.echo(row.subject, "; ".join(filter(None, (limit_words(permitted, parameter), change))))
    if not change:
        why = "is the limit itself"
    elif "tightened" in change and "relaxed" not in change:
        why = f"is stricter than the limit ({change})"
    else:
        return
    intake.note(
        row,
        "permitted",
        f"the permitted limit {permitted.text!r} {why} of {requirement.id}, so nothing is waived",
        "write the limit that must still be met, which is looser than that of the requirement",
        rule="workbook-waives-nothing",
    )


def _revision(row: SheetRow, intake: Intake, requirement: Requirement | None) -> int:
    """A waiver that is loaded again stays with the revision that it was written against."""
    known = intake.snapshot.find(Waiver, row.subject)
    if known is not None:
        return known.requirement_revision
    return requirement.revision if requirement else 1


SHEET = Sheet(LAYOUT, Waiver, each_row(build))
