"""A budget as a worksheet that calculates: a reviewer follows the chain by hand, beside the tool's own values.

Every cell is made with its formula and the value that this has, so that a program which does not calculate shows it
too. Formulas hold numbers and references only.
"""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np

from specflow.model.budget_outcome import BudgetOutcome, QuantityOutcome, ServedOutcome
from specflow.model.formula_sheet import CellLook, FormulaCell, FormulaSheet
from specflow.reports.budget import budget_title, position_words
from specflow.reports.calculation_chain import ChainTable
from specflow.reports.calculation_grid import Grid, Term
from specflow.reports.calculation_points import put_points
from specflow.reports.calculation_quantities import quantity_term
from specflow.reports.figures import DASH

Named = Callable[[str], str]
_FAR = "1E+99"  # farther from a result than any limit
_CHOICE_ROW = 3
_FIRST_ROW = 5


def calculation_sheet(outcome: BudgetOutcome, place: int, named: Named) -> FormulaSheet:
    """Return the worksheet of a budget at one place of evaluation."""
    return _Sheet(outcome, place, named).made()


class _Sheet:
    """The worksheet while it is made."""

    def __init__(self, outcome: BudgetOutcome, place: int, named: Named) -> None:
        self.outcome = outcome
        self.place = place
        self.named = named
        self.grid = Grid(place)
        self._head()
        self.chain = ChainTable(outcome, place, named, self.grid, _FIRST_ROW)

    def made(self) -> FormulaSheet:
        """Finish the sheet."""
        self._results()
        choices = put_points(self.grid, self.outcome.places, _CHOICE_ROW, self.chain.row + 1)
        return FormulaSheet(
            title=f"Budget {self.outcome.budget.id}",
            widths=(7, 30, 28, *(14 for _ in range(24))),
            rows=tuple(tuple(row) for row in self.grid.rows),
            choices=choices,
        )

    def _head(self) -> None:
        budget, grid = self.outcome.budget, self.grid
        grid.text(0, 0, f"Budget {budget_title(self.outcome)}", CellLook.TITLE)
        grid.text(
            1,
            0,
            f"{budget.law.value}, revision {budget.revision}; the worst condition point is "
            f"{self.outcome.places[self.outcome.place]}. Cells on a light ground are given, the others are calculated "
            "from them in this sheet.",
            CellLook.NOTE,
        )
        grid.text(
            2,
            0,
            "Choose another condition point, or change a given value, to see what follows; what differs between points "
            "is changed in the table at the end. The tool's own values beside the formulas are fixed numbers.",
            CellLook.NOTE,
        )

    # Results

    def _results(self) -> None:
        self.chain.headers(
            "", "Result", "Requirement", "By hand", "Tool", "Difference", "Unit", "Lower limit", "Upper limit",
            "Margin by hand", "Margin, tool", "Difference", "Reserve",
        )  # fmt: skip
        for quantity in self.outcome.quantities:
            self._result(quantity)
        self.chain.row += 1
        self._so_far()

    def _result(self, quantity: QuantityOutcome) -> None:
        at, grid = self.chain.row, self.grid
        last = len(self.outcome.positions) - 1
        grid.text(at, 1, self.named(quantity.parameter))
        hand = self._by_hand(at, 3, quantity, last)
        name = f"{self.named(quantity.parameter)}, tool"
        tool = grid.by_point(at, 4, quantity.result, name, CellLook.TOOL, "0.0000")
        self._difference(at, 5, hand, tool)
        grid.text(at, 6, quantity.unit)
        for one in quantity.served:
            grid.text(self.chain.row, 2, one.requirement.id)
            if one.unit == quantity.unit:
                self._margin(hand, one)
            self.chain.row += 1
        self.chain.row += not quantity.served

    def _by_hand(self, at: int, column: int, quantity: QuantityOutcome, row: int) -> Term:
        """Put a quantity as a formula; where the sheet has none for it, say so."""
        term = quantity_term(self.chain, quantity.parameter, row)
        if term is not None:
            return self.grid.formula(at, column, term)
        self.grid.text(at, column, "not in this sheet", CellLook.NOTE)
        return Term("", math.nan)

    def _margin(self, hand: Term, one: ServedOutcome) -> None:
        """Put the limits of a requirement and its margin; where nothing is required at a point there is neither."""
        at, grid, code = self.chain.row, self.grid, one.requirement.id
        is_required = ~np.isnan(one.margin)
        lower, upper = (np.where(is_required, side, np.nan) for side in (one.lower, one.upper))
        low = grid.by_point(at, 7, lower, f"{code}, lower limit")
        high = grid.by_point(at, 8, upper, f"{code}, upper limit")
        kept = grid.number(at, 12, one.reserve)
        if not is_required.any() or math.isnan(hand.value):
            return
        sides, values = [], []
        for limit, side, text in (
            (low, lower, f"{hand.text}-{low.text}"),
            (high, upper, f"{high.text}-{hand.text}"),
        ):
            if not np.isfinite(side).any():
                continue
            is_everywhere = bool(np.isfinite(side).all())
            sides.append(text if is_everywhere else f"IF(ISNUMBER({limit.text}),{text},{_FAR})")
            apart = hand.value - limit.value if limit is low else limit.value - hand.value
            values.append(apart if math.isfinite(limit.value) else math.inf)
        text = f"MIN({','.join(sides)})-{kept.text}"
        if not is_required.all():
            text = f'IF(COUNT({low.text},{high.text})=0,"{DASH}",{text})'
        margin = grid.by_point(at, 10, one.margin, f"{code}, margin, tool", CellLook.TOOL, "0.0000")
        if is_required[self.place]:
            by_hand = grid.formula(at, 9, Term(text, min(values) - kept.value))
            self._difference(at, 11, by_hand, margin)
        else:
            grid.put(
                at, 9, FormulaCell(formula=f"={text}", text=DASH, look=CellLook.FORMULA, format="0.0000")
            )

    def _difference(self, row: int, column: int, hand: Term, tool: Term) -> None:
        if math.isfinite(tool.value) and math.isfinite(hand.value):
            term = Term(f"{hand.text}-{tool.text}", hand.value - tool.value)
            self.grid.formula(row, column, term, CellLook.DIFFERENCE, "0.0E+00")

    def _so_far(self) -> None:
        """Put the cumulative values by hand, the tool's and their difference, three columns a quantity."""
        titles = [f"{self.named(one.parameter)} [{one.unit}]" for one in self.outcome.quantities]
        self.chain.headers(
            "#", "Behind block", "", *(t for title in titles for t in (f"∑ {title}", "Tool", "Difference"))
        )
        for row, position in enumerate(self.outcome.positions):
            self.grid.number(self.chain.row, 0, position.order, CellLook.PLAIN, "0")
            self.grid.text(self.chain.row, 1, position_words(self.outcome, row))
            for number, one in enumerate(self.outcome.quantities):
                column = 3 + 3 * number
                hand = self._by_hand(self.chain.row, column, one, row)
                name = f"{titles[number]} behind {position.order}, tool"
                tool = self.grid.by_point(
                    self.chain.row, column + 1, one.cumulative[row], name, CellLook.TOOL, "0.0000"
                )
                self._difference(self.chain.row, column + 2, hand, tool)
            self.chain.row += 1
