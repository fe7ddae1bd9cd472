"""What is refused before a budget is evaluated: one message for each, with the place and what to do."""

from __future__ import annotations

import numpy as np

from specflow.budgets.chain import LineKey, Overrides, ReadLine, line_key
from specflow.budgets.forms import CASCADE_ROLES, LOSSES
from specflow.errors import CalculationError, DocumentError, UnitError
from specflow.model.base import code_key
from specflow.model.budget import Budget, BudgetLine, BudgetPosition, Law
from specflow.parameters import Dictionary
from specflow.units import format_value, parse_unit

_NOT_NEGATIVE = ("image_rejection", "rejection", "isolation", "dc_w", "allowed_rise")
_STATED_ONCE = ("noise_figure", "iip3", "iip2", "ip1db")


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
    _check_figures_once(budget, where)
    _check_source(budget, where)
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


def _check_figures_once(budget: Budget, where: str) -> None:
    """Refuse one figure of a position stated in two ways, of which only one could be taken."""
    if budget.law is not Law.CASCADE:
        return
    seen: dict[tuple[int, str], BudgetLine] = {}
    for line in budget.lines:
        role = CASCADE_ROLES.get(code_key(line.parameter))
        if role is None or role.figure not in _STATED_ONCE:
            continue
        first = seen.setdefault((line.position, role.figure), line)
        if first is not line:
            raise DocumentError(
                f"{line.parameter} says again what {first.parameter} of the position says",
                where=f"{where}, {line.place}",
                hint="keep one of the two",
            )


def _check_source(budget: Budget, where: str) -> None:
    """Refuse a source that does not stand at the input, and one beside an input level."""
    if budget.law is not Law.CASCADE:
        return
    first = min((position.order for position in budget.chain), default=0)
    for line in budget.lines:
        if code_key(line.parameter) != "output_power":
            continue
        if line.position != first:
            raise DocumentError(
                "a source stands at the input of a chain; behind it the level follows from the gains",
                where=f"{where}, {line.place}",
                hint="give the block its gain, or begin the chain with it",
            )
        if budget.input_level is not None:
            raise DocumentError(
                f"the budget has an input level of {budget.input_level:g} {budget.input_level_unit} besides the source",
                where=f"{where}, {line.place}",
                hint="keep one of the two",
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
    if line.sideband and code_key(line.parameter) not in ("noise_figure", "noise_temperature"):
        raise CalculationError(
            f"{line.sideband} is said of {line.parameter}; only the noise figure of a mixer has a sideband",
            where=place,
            hint="say it at the noise figure",
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
    if (name in LOSSES or read.role.figure in _NOT_NEGATIVE) and least < 0:
        raise CalculationError(
            f"{line.parameter} is {format_value(least)} {line.unit}",
            where=where,
            hint="a loss is a positive number of dB; a gain is given as gain"
            if name in LOSSES
            else "rejection, isolation, DC power and an allowed rise are positive numbers",
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
    if position.passive and name == "gain":
        most = float(read.convert(values).max())
        if most > 0:
            raise CalculationError(
                f"the passive block has a gain of {format_value(most)} dB",
                where=where,
                hint=f"a loss of {format_value(most)} dB is a gain of -{format_value(most)} dB; or it is not passive",
            )
