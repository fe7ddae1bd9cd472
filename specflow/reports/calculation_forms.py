"""How the value of a line becomes the figure that a law takes, as a formula of a spreadsheet with its value."""

from __future__ import annotations

import math

from specflow.model.budget_outcome import LineForm
from specflow.reports.calculation_grid import Term


def taken_term(form: LineForm, stated: Term) -> Term:
    """Return the figure of a line from the cell that states it."""
    cell, value = stated.text, stated.value
    match form:
        case LineForm.LOSS:
            return Term(f"(-{cell})", -value)
        case LineForm.TEMPERATURE:
            return Term(f"10*LOG10(1+{cell}/290)", 10.0 * math.log10(1.0 + value / 290.0))
        case LineForm.DOUBLE_SIDEBAND:
            return Term(f"({cell}+10*LOG10(2))", value + 10.0 * math.log10(2.0))
        case LineForm.SIGNAL_TO_ERROR:
            return Term(f"100*10^(-{cell}/20)", 100.0 * 10.0 ** (-value / 20.0))
        case LineForm.LEAKAGE:
            return Term(f"100*10^({cell}/20)", 100.0 * 10.0 ** (value / 20.0))
        case LineForm.PHASE_NOISE:
            error = 100.0 * math.sqrt(2.0 - 2.0 * math.exp(-(math.radians(value) ** 2) / 2.0))
            return Term(f"100*SQRT(2-2*EXP(-(RADIANS({cell})^2)/2))", error)
    return stated
