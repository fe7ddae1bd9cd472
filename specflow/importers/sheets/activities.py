"""The sheet of activities: planned verifications, for requirements that need more than the shorthand columns say."""

from __future__ import annotations

from collections.abc import Sequence

from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.sheet import MARK_COLUMN, Sheet
from specflow.model.base import code_key
from specflow.model.block import HardwareType, Tier
from specflow.model.requirement import Activity, Method, Requirement, Stage
from specflow.model.sheet import SheetColumn, SheetLayout

LAYOUT = SheetLayout(
    noun="activity",
    title="Activities",
    aliases=("Activity", "Verification activities", "Verification plan"),
    intro="Planned verifications: one method at one stage a row. A requirement may have several; all must succeed.",
    columns=(
        MARK_COLUMN,
        SheetColumn(
            key="id",
            title="ID",
            aliases=("Activity ID", "Activity", "Identifier"),
            guidance="Empty: the requirement's id with /A1, /A2 ... in the order of the rows.",
            example="TX-EIRP-1/A1",
        ),
        SheetColumn(
            key="requirement",
            title="Requirement",
            aliases=("Requirement ID", "Req ID", "Req"),
            required=True,
            guidance="ID of the requirement that it verifies.",
            example="TX-EIRP-1",
        ),
        SheetColumn(
            key="method",
            title="Method",
            aliases=("Verification method",),
            required=True,
            guidance="How it is verified.",
            choices=tuple(Method),
            example="test",
        ),
        SheetColumn(
            key="stage",
            title="Stage",
            aliases=("Verification stage", "Phase"),
            guidance="Empty: qualification.",
            choices=tuple(Stage),
            example="qualification",
        ),
        SheetColumn(
            key="tier",
            title="Tier",
            guidance="Where it is done. Empty: the tier of the requirement.",
            choices=tuple(Tier),
            example="system",
            width=12,
        ),
        SheetColumn(
            key="criteria",
            title="Success criteria",
            aliases=("Criteria", "Pass criteria"),
            guidance="What must be seen besides the limit.",
            example="All beams locked during the sweep",
            width=30,
        ),
        SheetColumn(
            key="credit_from",
            title="Hardware",
            aliases=("Credit from", "Hardware type"),
            guidance="The least representative hardware that gives credit. Empty: engineering.",
            choices=tuple(HardwareType),
            example="qualification",
        ),
        SheetColumn(key="responsible", title="Responsible", aliases=("Owner",), example="Test team"),
        SheetColumn(
            key="gate",
            title="Gate",
            aliases=("Review", "Planned gate"),
            guidance="Review that it is due for.",
            example="CDR",
        ),
        SheetColumn(key="procedure", title="Procedure", aliases=("Procedure number",), example="TP-017"),
        SheetColumn(
            key="procedure_revision", title="Procedure revision", aliases=("Procedure issue",), example="2"
        ),
        SheetColumn(
            key="facility", title="Facility", aliases=("Place", "Laboratory"), example="Far-field range A"
        ),
        SheetColumn(
            key="planned",
            title="Planned",
            guidance="no: known to be needed, not planned yet. Empty: yes.",
            choices=("yes", "no"),
            width=10,
        ),
        SheetColumn(key="note", title="Note", aliases=("Notes", "Remarks", "Comment"), width=28),
    ),
)


def identify(row: SheetRow, intake: Intake) -> str:
    """The id, or the next free one of the requirement."""
    code = row.text("id")
    if code:
        return code
    requirement = row.needed("requirement")
    return intake.free_code(Activity, f"{requirement}/A") if requirement else ""


def build(row: SheetRow, intake: Intake) -> Activity | None:
    """Make one activity of one row."""
    code = row.needed("requirement")
    spelled = intake.link(row, "requirement", Requirement, code) if code else ""
    requirement = intake.find(Requirement, spelled) if spelled else None
    row.needed("method")
    return row.build(
        Activity,
        id=row.subject,
        requirement=spelled,
        requirement_revision=_planned_for(row, requirement, intake) if requirement else 1,
        method=row.choice("method", Method, Method.TEST),
        stage=row.choice("stage", Stage, Stage.QUALIFICATION),
        tier=row.choice("tier", Tier, requirement.tier if requirement else Tier.SYSTEM),
        criteria=row.prose("criteria"),
        credit_from=row.choice("credit_from", HardwareType, HardwareType.ENGINEERING),
        responsible=row.prose("responsible"),
        gate=row.prose("gate"),
        procedure=row.text("procedure"),
        procedure_revision=row.text("procedure_revision"),
        facility=row.prose("facility"),
        planned=row.yes("planned", True),
        note=row.prose("note"),
        origin=row.origin("requirement"),
    )


def _planned_for(row: SheetRow, requirement: Requirement, intake: Intake) -> int:
    """Return the revision of the requirement that the row is planned for.

    A new plan is for the requirement as it will be; one that stands was made for what is stored, and is to be looked
    through and loaded again when the same workbook changes its requirement.
    """
    known = intake.snapshot.find(Activity, row.subject)
    stored = intake.snapshot.find(Requirement, requirement.id)
    if known is None or stored is None or code_key(known.requirement) != code_key(requirement.id):
        return intake.due_revision(requirement)
    return stored.revision


def read(rows: Sequence[SheetRow], intake: Intake) -> None:
    """Add one activity a row. One that its requirement's own row had planned is now planned here."""
    for row in rows:
        activity = build(row, intake)
        if activity is None or not row.sound:
            continue
        known = intake.snapshot.find(Activity, activity.id)
        taken_over = {"planned"} if known is not None and known.shorthand else set()
        intake.add(activity, row.stated() | taken_over | {"requirement_revision", "shorthand"})


SHEET = Sheet(LAYOUT, Activity, read, identify)
