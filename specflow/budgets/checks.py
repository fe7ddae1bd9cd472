"""What is refused before a budget is evaluated: one message for each, with the place and what to do."""

from __future__ import annotations

import numpy as np

from specflow.budgets.chain import LineKey, Overrides, ReadLine, line_key
from specflow.errors import CalculationError, DocumentError, UnitError
from specflow.model.base import code_key
from specflow.model.budget import Budget, BudgetLine, BudgetPosition
from specflow.parameters import Dictionary
from specflow.units import format_value, parse_unit


def check_readable(budget: Budget, dictionary: Dictionary, values: Overrides | None) -> None:
    """Refuse a budget without lines, unknown parameters, missing units and values for lines that are not there."""
    where = f"budget {budget.id}"
    if not budget.lines:
        raise DocumentError("the budget has no lines", where=where, hint="give each position its figures")
    if dictionary.get(budget.quantity.parameter) is None:
        raise DocumentError(
            f"the parameter {budget.quantity.parameter} of the budget is not known",
            where=where,
            hint="take one of the dictionary, or add it to the project",
        )
    for line in budget.lines:
        _check_document(line, where, dictionary)
    groups = {code_key(line.correlation_group) for line in budget.lines if line.correlation_group}
    for name in (name for one in budget.correlations for name in (one.first, one.second)):
        if code_key(name) not in groups:
            raise DocumentError(
                f"no line is in the correlation group {name}",
                where=where,
                hint="give the lines that move together that group, or take the correlation out",
            )
    known = {line_key(line) for line in budget.lines}
    strange: list[LineKey] = [key for key in values or {} if key not in known]
    if strange:
        raise DocumentError(
            f"a value is given for {strange[0][1]} at position {strange[0][0]}, where the budget has no such line",
            where=where,
            hint="add the line first, or correct position and parameter",
        )


def _check_document(line: BudgetLine, where: str, dictionary: Dictionary) -> None:
    place = f"{where}, {line.place}"
    if dictionary.get(line.parameter) is None:
        hint = "say iip3 or oip3: an intercept belongs to a port" if "ip3" in code_key(line.parameter) else ""
        raise DocumentError(
            f"the parameter {line.parameter} is not known",
            where=place,
            hint=hint or "take one of the dictionary, or add it to the project",
        )
    if not line.unit.strip():
        raise UnitError("the line has no unit", where=place, hint="write the unit, or 1 for a plain number")
    try:
        parse_unit(line.unit)
    except UnitError as error:
        raise UnitError(error.message, where=place, hint=error.hint or "correct the unit") from None
    if line.sideband == "DSB":
        raise CalculationError(
            "a double-sideband noise figure stands where the cascade takes a single-sideband one",
            where=place,
            hint="give the single-sideband figure: 3.01 dB more for a mixer alone whose image noise counts",
        )


def check_line(read: ReadLine, position: BudgetPosition, where: str) -> None:
    """Refuse figures that the line's parameter cannot have: losses, noise figures and temperatures below 0."""
    values, line = read.values, read.line
    if not np.isfinite(values).all():
        raise CalculationError(
            f"{line.parameter} has a value that is no number", where=where, hint="give a number"
        )
    least = float(values.min())
    name = code_key(line.parameter)
    if read.role.form.rises < 0 and read.role.figure == "gain" and least < 0:
        raise CalculationError(
            f"{line.parameter} is {format_value(least)} {line.unit}",
            where=where,
            hint="a loss is a positive number of dB; a gain is given as gain",
        )
    if name in ("noise_figure", "noise_temperature", "antenna_noise_temperature"):
        inner = read.convert(np.atleast_1d(least))
        if float(inner[0]) < 0:
            what = "below 0 K" if name != "noise_figure" else "below 0 dB"
            raise CalculationError(
                f"{line.parameter} is {format_value(least)} {line.unit}, {what}",
                where=where,
                hint="temperatures are absolute; no stage improves the signal-to-noise ratio",
            )
    if position.passive and read.role.figure == "gain":
        most = float(read.figure(values).max())
        if most > 0:
            raise CalculationError(
                f"the passive block has a gain of {format_value(most)} dB",
                where=where,
                hint=f"a loss of {format_value(most)} dB is a gain of -{format_value(most)} dB; or it is not passive",
            )
