"""What an edit of a budget does: result and margin of every requirement served, before and after."""

from __future__ import annotations

import math

from specflow.model.budget_outcome import BudgetOutcome, ServedOutcome
from specflow.model.report import Align, CellTone, ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.reports.budget import Named
from specflow.reports.figures import margin, number, rounded, text

MOVED_COLUMNS = (
    ReportColumn(key="requirement", title="Requirement", width=18),
    ReportColumn(key="quantity", title="Quantity", width=24),
    ReportColumn(key="before", title="Result before", align=Align.RIGHT, width=14),
    ReportColumn(key="after", title="after", align=Align.RIGHT, width=14),
    ReportColumn(key="margin_before", title="Margin before", align=Align.RIGHT, width=14),
    ReportColumn(key="margin_after", title="after", align=Align.RIGHT, width=14),
    ReportColumn(key="change", title="Change", align=Align.RIGHT, width=12),
    ReportColumn(key="worst", title="Worst at", width=40),
)


def margins_moved(before: BudgetOutcome, after: BudgetOutcome, named: Named) -> ReportTable:
    """Return one row a served requirement, each at its worst place before and after, nominal."""
    old = {one.requirement.id: one for one in before.served}
    rows = [
        _row(old[one.requirement.id], one, named(quantity.parameter), after)
        for quantity in after.quantities
        for one in quantity.served
    ]
    return ReportTable(key="moved", title="What it does", columns=MOVED_COLUMNS, rows=tuple(rows))


def _row(old: ServedOutcome, new: ServedOutcome, quantity: str, after: BudgetOutcome) -> ReportRow:
    step = new.smallest_margin - old.smallest_margin
    return ReportRow(
        id=new.requirement.id,
        cells=(
            ReportCell(text=new.requirement.id),
            text(quantity),
            _result(old),
            _result(new),
            margin(old.smallest_margin, old.margin_unit),
            margin(new.smallest_margin, new.margin_unit),
            _change(step, new.margin_unit),
            text(after.places[new.worst] if new.worst >= 0 else new.why),
        ),
    )


def _result(one: ServedOutcome) -> ReportCell:
    return number(float(one.result[one.worst]) if one.worst >= 0 else math.nan, one.unit)


def _change(step: float, unit: str) -> ReportCell:
    if math.isnan(step):
        return text("")
    plain = 0.0 if abs(step) < 1e-9 else step
    sign = "+" if plain > 0 else ""
    tone = CellTone.DOUBTFUL if plain < 0 else CellTone.PLAIN
    return ReportCell(text=f"{sign}{rounded(plain, 2)} {unit}".strip(), number=plain, tone=tone)
