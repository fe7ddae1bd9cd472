"""All budgets of a project as one table: what each serves, and how it stands at nominal values."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from specflow.model.budget import Budget
from specflow.model.budget_outcome import BudgetOutcome
from specflow.model.report import Align, CellTone, ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.reports.figures import margin, text

BUDGET_COLUMNS = (
    ReportColumn(key="id", title="Budget", width=18),
    ReportColumn(key="title", title="Title", width=34),
    ReportColumn(key="revision", title="Revision", align=Align.RIGHT, width=9),
    ReportColumn(key="law", title="Law", width=20),
    ReportColumn(key="positions", title="Positions", align=Align.RIGHT, width=10),
    ReportColumn(key="serves", title="Serves", width=24),
    ReportColumn(key="requirement", title="Smallest margin of", width=18),
    ReportColumn(key="margin", title="Margin", align=Align.RIGHT, width=13),
    ReportColumn(key="worst", title="At", width=40),
)


def budgets_table(budgets: Sequence[Budget], outcomes: Mapping[str, BudgetOutcome | str]) -> ReportTable:
    """Return one row a budget; ``outcomes`` by id hold what it came to, or why it cannot be evaluated."""
    return ReportTable(
        key="budgets",
        title="Budgets",
        intro="Margins at nominal values, at the worst condition point, with the reserve taken off.",
        columns=BUDGET_COLUMNS,
        rows=tuple(_row(budget, outcomes[budget.id]) for budget in budgets),
    )


def _row(budget: Budget, outcome: BudgetOutcome | str) -> ReportRow:
    return ReportRow(
        id=budget.id,
        cells=(
            ReportCell(text=budget.id, origin=budget.origin),
            text(budget.title),
            ReportCell(text=str(budget.revision), number=budget.revision),
            text(budget.law.value),
            ReportCell(text=str(len(budget.chain)), number=len(budget.chain)),
            text(", ".join(budget.requirements)),
            *_standing(outcome),
        ),
    )


def _standing(outcome: BudgetOutcome | str) -> tuple[ReportCell, ...]:
    if isinstance(outcome, str):
        return text(""), text(""), ReportCell(text=outcome, tone=CellTone.BAD)
    if outcome.worst is None:
        return text(""), text(""), ReportCell(text="no limit is known at any point", tone=CellTone.DOUBTFUL)
    code, place = outcome.worst
    one = next(one for one in outcome.served if one.requirement.id == code)
    return text(code), margin(one.smallest_margin, one.margin_unit), text(outcome.places[place])
