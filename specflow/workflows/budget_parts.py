"""The parts of a compliance report that tell of budgets: tables, pictures, and worksheets that calculate."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from specflow.model.budget import Budget
from specflow.model.budget_outcome import BudgetOutcome
from specflow.model.formula_sheet import FormulaSheet
from specflow.model.report import ReportPicture, ReportTable
from specflow.reports.budget import Named, assumptions, cumulative_table, slopes_table, titles, ways_table
from specflow.reports.budget_list import budgets_table
from specflow.reports.calculation_sheet import calculation_sheet
from specflow.reports.pictures import budget_pictures
from specflow.workflows.evaluate_project import Evaluation
from specflow.workflows.show_budget import outcomes_of


@dataclass(frozen=True, slots=True)
class BudgetParts:
    """What budgets add to a report."""

    tables: tuple[ReportTable, ...] = ()
    pictures: tuple[ReportPicture, ...] = ()
    sheets: tuple[FormulaSheet, ...] = ()


def budget_parts(evaluation: Evaluation, *, for_workbook: bool) -> BudgetParts:
    """Return the list of budgets, then of each that can be evaluated what it comes to where it is worst.

    In a workbook each budget is a worksheet that calculates; elsewhere it is tables with pictures above them.
    """
    snapshot, dictionary = evaluation.snapshot, evaluation.dictionary
    budgets = snapshot.all(Budget)
    outcomes = outcomes_of(budgets, snapshot, dictionary)
    named = titles(dictionary)
    known = [outcome for outcome in outcomes.values() if isinstance(outcome, BudgetOutcome)]
    listed = (budgets_table(budgets, outcomes), *_tolerances(known, named))
    if for_workbook:
        sheets = tuple(calculation_sheet(outcome, outcome.place, named) for outcome in known)
        return BudgetParts(tables=listed, sheets=sheets)
    tables = [*listed]
    pictures: list[ReportPicture] = []
    for outcome in known:
        chain, slopes = _keyed(outcome, named)
        tables.extend((chain, slopes))
        drawn = budget_pictures(outcome, outcome.place, named)
        pictures.extend(ReportPicture(table=chain.key, picture=picture) for picture in drawn)
    return BudgetParts(tables=tuple(tables), pictures=tuple(pictures))


def _tolerances(known: Sequence[BudgetOutcome], named: Named) -> Iterator[ReportTable]:
    """Give the ways of treating tolerances of all budgets as one table."""
    found = [ways_table(outcome, named) for outcome in known]
    if found:
        rows = tuple(row for table in found for row in table.rows)
        title = "Budget tolerances"
        update = {"rows": rows, "title": title, "key": "budget-tolerances", "intro": assumptions(known)}
        yield found[0].model_copy(update=update)


def _keyed(outcome: BudgetOutcome, named: Named) -> tuple[ReportTable, ReportTable]:
    code = outcome.budget.id
    chain = cumulative_table(outcome, outcome.place, named)
    slopes = slopes_table(outcome, outcome.place, named)
    where = f"At {outcome.places[outcome.place]}, the worst condition point. "
    return (
        chain.model_copy(
            update={"key": f"budget-{code}", "title": f"Budget {code}", "intro": where + chain.intro}
        ),
        slopes.model_copy(
            update={"key": f"budget-{code}-lines", "title": f"Lines of {code}", "intro": where + slopes.intro}
        ),
    )
