"""Which lines a law takes, and in which unit it takes them."""

from __future__ import annotations

from specflow.budgets.forms import (
    AS_IT_IS,
    CASCADE_ROLES,
    DOUBLE_SIDEBAND_ROLES,
    ERROR_VECTOR_ROLES,
    GAINS,
    LOSS,
    LOSSES,
    Role,
)
from specflow.errors import DocumentError, UnitError
from specflow.model.base import code_key
from specflow.model.budget import Budget, BudgetLine, Law
from specflow.parameters import Dictionary
from specflow.units import Converter, Kind, converter, parse_unit


def role_of(budget: Budget, line: BudgetLine, dictionary: Dictionary) -> Role:
    """Return what a line is for the law of its budget. DocumentError for a line that the law does not take."""
    key = code_key(line.parameter)
    if budget.law is Law.CASCADE:
        role = CASCADE_ROLES.get(key)
        if role is None:
            raise DocumentError(
                f"a cascade takes no {line.parameter}",
                where=f"budget {budget.id}, {line.place}",
                hint=f"it takes {', '.join(CASCADE_ROLES)}",
            )
        return DOUBLE_SIDEBAND_ROLES.get(key, role) if line.sideband == "DSB" else role
    if budget.law is Law.ROOT_SUM_OF_SQUARES and code_key(budget.quantity.parameter) == "evm":
        role = ERROR_VECTOR_ROLES.get(key)
        if role is None:
            raise DocumentError(
                f"{line.parameter} is no part of an error vector",
                where=f"budget {budget.id}, {line.place}",
                hint=f"its parts are {', '.join(ERROR_VECTOR_ROLES)}",
            )
        return role
    return _role_in_sum(budget, line, dictionary)


def _role_in_sum(budget: Budget, line: BudgetLine, dictionary: Dictionary) -> Role:
    """A term of a sum: a ratio in dB beside a quantity in dB, else the unit of the quantity itself."""
    parameter = dictionary.get(budget.quantity.parameter)
    assert parameter is not None  # checked before any line is read
    is_turned = budget.law is Law.SUM and _counts_against(line, budget)
    form = LOSS if is_turned else AS_IT_IS
    quantity = parse_unit(parameter.unit)
    own = parse_unit(line.unit)
    if budget.law is Law.SUM and quantity.is_log and own.kind is Kind.RATIO:
        return Role("amount", "dB", form)
    return Role("amount", parameter.unit, form)


def _counts_against(line: BudgetLine, budget: Budget) -> bool:
    """Whether a line is taken off: a loss among gains, a gain among losses."""
    if code_key(budget.quantity.parameter) in LOSSES:
        return code_key(line.parameter) in GAINS
    return code_key(line.parameter) in LOSSES


def to_role(line: BudgetLine, role: Role, dictionary: Dictionary, where: str) -> Converter:
    """Return the conversion of a line's values to the unit that the law takes. UnitError that names the line."""
    parameter = dictionary.get(line.parameter)
    factor = parameter.log_factor if parameter is not None else None
    try:
        own, wanted = parse_unit(line.unit), parse_unit(role.unit)
        if own.kind is Kind.RATIO and wanted.kind is Kind.RATIO and own.is_log and wanted.is_log:
            wanted = own  # dB, dBi and dBc count the same steps
        return converter(own, wanted, log_factor=factor)
    except UnitError as error:
        raise UnitError(
            f"{line.parameter} in {line.unit} cannot be taken in {role.unit}: {error.message}",
            where=where,
            hint=error.hint or f"write it in {role.unit}",
        ) from None
