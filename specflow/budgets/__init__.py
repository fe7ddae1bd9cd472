"""Budgets: what a chain of blocks gives at every required condition, how it spreads, and who eats the margin.

What may live here, in the order of a run:

- ``required`` where a budget is evaluated; ``own_conditions`` what each block meets there; ``interpolation``,
  ``traces``, ``line_values`` what a line comes to
- ``forms`` and ``roles`` what a line is for the law; ``checks`` what is refused; ``read`` and ``chain`` the budget read
- ``figures`` what the laws combine, and the way back for derivatives; ``outputs``, ``cascade``, ``sums``, ``laws`` the
  table of what each law gives
- ``margins`` limits; ``evaluate`` and ``result`` the nominal result

Formulas are the calculators'. Nothing here knows the store, evidence standing or how results are shown.
"""

from specflow.budgets.chain import Chain, LineKey, line_key
from specflow.budgets.evaluate import evaluate_budget
from specflow.budgets.laws import quantities
from specflow.budgets.required import Required, required_conditions
from specflow.budgets.result import BudgetResult, OutputResult, Served

__all__ = [
    "BudgetResult",
    "Chain",
    "LineKey",
    "OutputResult",
    "Required",
    "Served",
    "evaluate_budget",
    "line_key",
    "quantities",
    "required_conditions",
]
