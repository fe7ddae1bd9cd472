"""Margins: results held against the limits of the requirements that a budget serves."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.outputs import Output
from specflow.budgets.required import Required
from specflow.errors import DocumentError, UnitError
from specflow.limits import LimitContext, evaluate_limit
from specflow.model.base import code_key
from specflow.model.budget import Budget
from specflow.model.budget_outcome import ServedOutcome
from specflow.model.declared import DeclaredValue
from specflow.model.parameter import Parameter
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary
from specflow.units import Converter, Quantity, convert, converter, format_unit, parse_unit, tolerance_unit

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Bar:
    """The limit of one requirement at every place of evaluation, and the way of a result into its unit."""

    requirement: Requirement
    convert: Converter
    unit: str
    margin_unit: str
    lower: Floats
    upper: Floats
    required: NDArray[np.bool_]
    reserve: float
    reserve_holder: str
    why: str

    def margin(self, result: Floats, slice_: slice = slice(None)) -> Floats:
        """Return the distance to the limit less the reserve, NaN where nothing is required.

        ``result`` (n, ...) is in the unit of the law; further axes (trials) are kept.
        """
        values = result if self.convert.is_identity else self.convert(result)
        shape = (-1,) + (1,) * (values.ndim - 1)
        lower, upper = self.lower[slice_].reshape(shape), self.upper[slice_].reshape(shape)
        with np.errstate(invalid="ignore"):  # no result (-inf dBm) against no bound: the other side decides
            margin = np.fmin(upper - values, values - lower)
        margin -= self.reserve
        missing = ~self.required[slice_]
        if missing.any():
            margin[missing] = np.nan
        return margin

    def held(self, result: Floats) -> ServedOutcome:
        """Return the requirement held against a result (n,)."""
        margin = self.margin(result)
        known = np.flatnonzero(~np.isnan(margin))
        worst = int(known[np.argmin(margin[known])]) if len(known) else -1
        return ServedOutcome(
            self.requirement,
            self.unit,
            self.margin_unit,
            self.lower,
            self.upper,
            result if self.convert.is_identity else self.convert(result),
            margin,
            self.reserve,
            self.reserve_holder,
            worst,
            self.why,
        )


def bars_of(
    output: Output,
    budget: Budget,
    requirements: list[Requirement],
    required: Required,
    snapshot: Snapshot,
    dictionary: Dictionary,
) -> tuple[Bar, ...]:
    """Return the limits on one output. DocumentError where no limit holds anywhere, UnitError where units differ."""
    return tuple(
        _bar(output, budget, one, required, snapshot, dictionary)
        for one in requirements
        if code_key(one.quantity.parameter) == code_key(output.parameter)
    )


def _bar(
    output: Output,
    budget: Budget,
    requirement: Requirement,
    required: Required,
    snapshot: Snapshot,
    dictionary: Dictionary,
) -> Bar:
    where = f"budget {budget.id}, requirement {requirement.id}"
    context = LimitContext(required.columns, declared_values(snapshot), required.size)
    bounds = evaluate_limit(requirement.limit, context).spread(required.size)
    unit = bounds.unit or output.unit
    step = _to_limit(output, unit, budget, dictionary.get(output.parameter), where)
    lower = np.full(required.size, -np.inf) if bounds.lower is None else np.array(bounds.lower)
    upper = np.full(required.size, np.inf) if bounds.upper is None else np.array(bounds.upper)
    known = bounds.applies & ~bounds.unknown & ~(np.isnan(lower) | np.isnan(upper))
    known &= np.isfinite(lower) | np.isfinite(upper)
    if not known.any() and not bounds.unknown.any():
        raise DocumentError(
            "the limit asks for nothing at any condition of the budget",
            where=where,
            hint="serve a requirement with a limit, or correct the conditions set",
        )
    difference = tolerance_unit(parse_unit(unit))
    amount, holder = _reserve(budget, output, format_unit(difference), where)
    why = bounds.why if bounds.unknown.any() else ""
    return Bar(requirement, step, unit, format_unit(difference), lower, upper, known, amount, holder, why)


def _to_limit(
    output: Output, unit: str, budget: Budget, parameter: Parameter | None, where: str
) -> Converter:
    factor = parameter.log_factor if parameter is not None else None
    try:
        own, limit = parse_unit(output.unit), parse_unit(unit)
        if own.is_log and limit.is_log and own.kind is limit.kind and own.bandwidth_hz is None:
            limit = replace(limit, gauge=own.gauge)
        return converter(own, limit, log_factor=factor)
    except UnitError as error:
        raise UnitError(
            f"the budget gives {output.parameter} in {output.unit}, the limit is in {unit}: {error.message}",
            where=where,
            hint=error.hint or "write the limit in a unit of the same kind",
        ) from None


def _reserve(budget: Budget, output: Output, unit: str, where: str) -> tuple[float, str]:
    reserve = next(
        (one for one in budget.reserves if code_key(one.parameter) == code_key(output.parameter)), None
    )
    if reserve is None:
        return 0.0, ""
    try:
        amount = convert(reserve.amount, parse_unit(reserve.unit), parse_unit(unit), difference=True)
    except UnitError as error:
        raise UnitError(
            f"the reserve in {reserve.unit}: {error.message}", where=where, hint=f"give the reserve in {unit}"
        ) from None
    return float(amount), reserve.holder


def declared_values(snapshot: Snapshot) -> Mapping[str, Quantity]:
    """Return declared values by name, for limits that refer to them; one in no known unit stays undeclared."""
    found: dict[str, Quantity] = {}
    for value in snapshot.all(DeclaredValue):
        try:
            found[value.name] = Quantity(value.value, parse_unit(value.unit or "1"))
        except UnitError:
            continue  # the limit says that the name is not declared
    return found
