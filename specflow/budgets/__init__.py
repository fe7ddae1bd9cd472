"""Budgets: what a chain of blocks gives at every required condition, how it spreads, and who eats the margin.

What may live here, in the order of a run:

- ``required`` where a budget is evaluated; ``own_conditions`` what each block meets there; ``interpolation``,
  ``traces``, ``line_values`` what a line comes to
- ``forms`` and ``roles`` what a line is for the law; ``checks``, ``sidebands``, ``further``, ``physical`` what is
  refused; ``read`` and ``chain`` the budget read
- ``paths``, ``image`` what parallel paths and image noise make of figures; ``figures`` what the laws combine, and the
  way back for derivatives; ``outputs`` what a law gives, ``cascade`` (with ``cascade_level``, ``cascade_noise``,
  ``cascade_distortion``, ``cascade_dc``, ``cascade_interference``) and ``sums`` the tables of it, ``laws`` what they
  need
- ``margins`` limits; ``evaluate`` and ``result`` the nominal result; ``slopes`` and ``shares`` of it
- ``spread`` what tolerances say; ``corners`` worst cases, ``root_sum`` RSS; ``draws``, ``specimens`` and ``trials``
  Monte Carlo
- backwards: ``probe`` a budget evaluated again and again; ``solve`` one unknown (``bracketing``, ``closed_form``,
  ``inverse_figures``); ``allotment`` what a block may have, ``apportion`` shares (``contribution``, ``growth``,
  ``plain_shares``), ``effort`` the least of it; ``children`` what requirements on blocks allow, ``allowed`` the worst
  allowed corner, ``closure`` the test of it; ``serving``, ``following`` links that hold
- as known: ``knowledge`` the best source of a line, ``as_known`` the budget with it, ``reallocation`` after a miss
- ``trial`` before and after a change

Formulas are the calculators'. Nothing here knows the store, the standing of evidence or how results are shown.

    result = evaluate_budget(budget, snapshot, dictionary)
    worst_case(...), rss(...), monte_carlo(..., trials=..., seed=...)      # the same three arguments first
    slopes_of(result), shares_of(result)
"""

from specflow.budgets.chain import Chain, LineKey, Overrides, ReadLine, line_key
from specflow.budgets.corners import OutputRange, WorstCase, worst_case
from specflow.budgets.evaluate import evaluate_budget
from specflow.budgets.laws import quantities
from specflow.budgets.ranges import ServedRange
from specflow.budgets.required import Required, required_conditions
from specflow.budgets.result import BudgetResult, OutputResult
from specflow.budgets.root_sum import OutputRss, Rss, rss
from specflow.budgets.shares import OutputShares, shares_of
from specflow.budgets.slopes import OutputSlopes, slopes_of
from specflow.budgets.trials import (
    MonteCarloResult,
    OutputChance,
    Probability,
    ServedChance,
    monte_carlo,
)

__all__ = [
    "BudgetResult",
    "Chain",
    "LineKey",
    "MonteCarloResult",
    "OutputChance",
    "OutputRange",
    "OutputResult",
    "OutputRss",
    "OutputShares",
    "OutputSlopes",
    "Overrides",
    "Probability",
    "ReadLine",
    "Required",
    "Rss",
    "ServedChance",
    "ServedRange",
    "WorstCase",
    "evaluate_budget",
    "line_key",
    "monte_carlo",
    "quantities",
    "required_conditions",
    "rss",
    "shares_of",
    "slopes_of",
    "worst_case",
]
