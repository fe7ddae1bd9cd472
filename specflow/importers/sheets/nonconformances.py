"""The sheet of nonconformances: what does not meet its limit, and what was decided about it."""

from __future__ import annotations

from typing import get_args

from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.sheet import MARK_COLUMN, Sheet, each_row
from specflow.model.decision import Nonconformance
from specflow.model.evidence import EvidenceTable
from specflow.model.requirement import Requirement
from specflow.model.sheet import SheetColumn, SheetLayout

_CLASSES: tuple[str, ...] = get_args(Nonconformance.model_fields["classification"].annotation)
_DISPOSITIONS: tuple[str, ...] = get_args(Nonconformance.model_fields["disposition"].annotation)
_STATES: tuple[str, ...] = get_args(Nonconformance.model_fields["state"].annotation)

LAYOUT = SheetLayout(
    noun="nonconformance",
    title="Nonconformances",
    aliases=("Nonconformance", "NCR", "NCRs", "Discrepancies"),
    intro="What does not meet its limit, and what was decided about it.",
    columns=(
        MARK_COLUMN,
        SheetColumn(
            key="id", title="ID", aliases=("NCR", "NCR ID", "Number"), required=True, example="NC-012"
        ),
        SheetColumn(
            key="requirement",
            title="Requirement",
            aliases=("Requirement ID", "Req ID"),
            guidance="ID of the requirement concerned.",
            example="TX-EIRP-1",
        ),
        SheetColumn(
            key="table",
            title="Evidence table",
            aliases=("Table", "Evidence"),
            guidance="ID of the evidence that shows it.",
        ),
        SheetColumn(
            key="description",
            title="Description",
            required=True,
            guidance="What was found.",
            example="EIRP 0.3 dB low at 30 GHz, hot",
            width=36,
        ),
        SheetColumn(
            key="classification",
            title="Class",
            aliases=("Classification",),
            guidance="Empty: minor.",
            choices=_CLASSES,
            example="minor",
        ),
        SheetColumn(
            key="disposition",
            title="Disposition",
            guidance="Empty while undecided.",
            choices=tuple(filter(None, _DISPOSITIONS)),
        ),
        SheetColumn(key="decided_by", title="Decided by", aliases=("Board",)),
        SheetColumn(key="decided_on", title="Decided on", aliases=("Date",), guidance="As 2026-03-31."),
        SheetColumn(key="state", title="State", guidance="Empty: open.", choices=_STATES, example="open"),
        SheetColumn(
            key="reverify",
            title="Re-verify",
            aliases=("Re-verification needed",),
            guidance="Whether it must be verified again. Empty: yes.",
            choices=("yes", "no"),
        ),
    ),
)


def build(row: SheetRow, intake: Intake) -> Nonconformance | None:
    """Make one nonconformance of one row."""
    return row.build(
        Nonconformance,
        id=row.subject,
        requirement=intake.reference(row, "requirement", Requirement),
        table=intake.reference(row, "table", EvidenceTable),
        description=row.needed("description"),
        classification=row.one_of("classification", _CLASSES, "minor"),
        disposition=row.one_of("disposition", _DISPOSITIONS, ""),
        decided_by=row.prose("decided_by"),
        decided_on=row.date("decided_on"),
        state=row.one_of("state", _STATES, "open"),
        reverify=row.yes("reverify", True),
        origin=row.origin("description"),
    )


SHEET = Sheet(LAYOUT, Nonconformance, each_row(build))
