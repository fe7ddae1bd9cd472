"""The sheet of allocations: which block requirement carries a share of which parent requirement."""

from __future__ import annotations

from typing import get_args

from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.sheet import MARK_COLUMN, Sheet, each_row
from specflow.model.budget import Allocation, Budget
from specflow.model.requirement import Requirement
from specflow.model.sheet import SheetColumn, SheetLayout

_STATES: tuple[str, ...] = get_args(Allocation.model_fields["state"].annotation)

LAYOUT = SheetLayout(
    noun="allocation",
    title="Allocations",
    aliases=("Allocation", "Flow-down", "Flowdown"),
    intro="Links from a parent requirement to the requirements on blocks that carry it.",
    columns=(
        MARK_COLUMN,
        SheetColumn(
            key="parent",
            title="Parent requirement",
            aliases=("Parent", "From"),
            required=True,
            guidance="ID of the requirement that is shared out.",
            example="TX-EIRP-1",
        ),
        SheetColumn(
            key="child",
            title="Child requirement",
            aliases=("Child", "To"),
            required=True,
            guidance="ID of the requirement that carries a share.",
            example="PA-PSAT-1",
        ),
        SheetColumn(
            key="id", title="ID", aliases=("Allocation ID",), guidance="Empty: parent > child.", width=18
        ),
        SheetColumn(
            key="budget", title="Budget", aliases=("Budget ID",), guidance="ID of the budget it comes from."
        ),
        SheetColumn(
            key="manual_reason",
            title="Manual: reason",
            aliases=("Manual reason", "Reason"),
            guidance="Why, if no budget gives it.",
            example="First split, before the budget exists",
            width=30,
        ),
        SheetColumn(
            key="state", title="State", guidance="Empty: proposed.", choices=_STATES, example="proposed"
        ),
        SheetColumn(key="given_by", title="Given by", aliases=("Giver",), example="Systems"),
        SheetColumn(key="taken_by", title="Taken by", aliases=("Taker",), example="RF team"),
        SheetColumn(key="agreed_on", title="Agreed on", aliases=("Date",), guidance="As 2026-03-31."),
    ),
)


def identify(row: SheetRow, intake: Intake) -> str:
    """The id, or parent and child."""
    code = row.text("id")
    return code or " > ".join(filter(None, (row.needed("parent"), row.needed("child"))))


def build(row: SheetRow, intake: Intake) -> Allocation | None:
    """Make one allocation of one row."""
    parent, child = (
        intake.link(row, column, Requirement, code) if (code := row.needed(column)) else ""
        for column in ("parent", "child")
    )
    budget = intake.reference(row, "budget", Budget)
    if budget is None and not row.prose("manual_reason"):
        row.fault(
            "manual_reason",
            "the allocation names no budget and no reason",
            "name the budget, or say why by hand",
        )
    requirement, source = intake.find(Requirement, parent), intake.find(Budget, budget)
    return row.build(
        Allocation,
        id=row.subject,
        parent=parent,
        parent_revision=requirement.revision if requirement else 1,
        child=child,
        budget=budget,
        budget_revision=source.revision if source else None,
        manual_reason=row.prose("manual_reason"),
        state=row.one_of("state", _STATES, "proposed"),
        given_by=row.prose("given_by"),
        taken_by=row.prose("taken_by"),
        agreed_on=row.date("agreed_on"),
        origin=row.origin("parent"),
    )


SHEET = Sheet(LAYOUT, Allocation, each_row(build), identify)
