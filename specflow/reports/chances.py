"""How many specimens meet each limit at each condition point, of a Monte Carlo run."""

from __future__ import annotations

import math

import numpy as np

from specflow.model.budget_outcome import BudgetOutcome, ChanceOutcome
from specflow.model.report import Align, ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.reports.figures import DASH, text

MOST_PLACES = 40


def chances_table(outcome: BudgetOutcome) -> ReportTable:
    """Return one row a condition point, over very many points those at which fewest specimens meet a limit."""
    least = np.fmin.reduce([one.probability for one in outcome.chances], initial=np.inf)
    told = np.sort(np.argsort(least, kind="stable")[:MOST_PLACES]) if outcome.chances else ()
    left = f"Of {len(outcome.places):,} condition points, the {MOST_PLACES} at which fewest do. "
    columns = (
        ReportColumn(key="place", title="Condition point", width=36),
        *(
            ReportColumn(key=one.requirement.id, title=one.requirement.id, align=Align.RIGHT, width=18)
            for one in outcome.chances
        ),
    )
    return ReportTable(
        key="chances",
        title="Specimens that meet a limit, point by point",
        intro=(left if len(outcome.places) > MOST_PLACES else "")
        + "One specimen stands at all points, so these may not be multiplied: the probability that it meets a limit "
        "everywhere stands above.",
        columns=columns,
        rows=tuple(_row(outcome, int(place)) for place in told),
    )


def _row(outcome: BudgetOutcome, place: int) -> ReportRow:
    words = outcome.places[place]
    return ReportRow(id=words, cells=(text(words), *(_share(one, place) for one in outcome.chances)))


def _share(one: ChanceOutcome, place: int) -> ReportCell:
    share = float(one.probability[place])
    return ReportCell(text=share_words(share), number=None if math.isnan(share) else 100.0 * share)


def share_words(share: float) -> str:
    """Return a share of specimens, short; never 100 % or 0 % where a specimen says otherwise."""
    if math.isnan(share):
        return DASH
    shown = f"{100.0 * share:.2f}"
    if shown == "100.00" and share < 1.0:
        return "more than 99.99 %"
    if shown == "0.00" and share > 0.0:
        return "less than 0.01 %"
    return f"{shown} %"
