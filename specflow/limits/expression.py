"""Expressions for everybody: parse, evaluate, name the inputs. Limits, applicability and filters share them."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from specflow.errors import ExpressionError
from specflow.limits.expression_shape import expression_names, is_condition
from specflow.limits.expression_value import operand, truth
from specflow.limits.inputs import Flags, Inputs
from specflow.model.columns import Columns, TextColumn
from specflow.model.expression import Expression
from specflow.units import Quantity

Given = float | int | str | Quantity | None

__all__ = [
    "Given",
    "evaluate_condition",
    "evaluate_expression",
    "expression_names",
    "is_condition",
    "parse_condition",
    "parse_expression",
]


def parse_expression(text: str) -> Expression:
    """Read an expression; raises ExpressionError with the column of the fault."""
    # Evaluating needs no grammar; status, which reads no text, does not wait for it.
    from specflow.limits.expression_grammar import read_choice
    from specflow.limits.reader import Reader

    reader = Reader(text)
    if reader.done():
        reader.fail("the expression is empty")
    node = read_choice(reader)
    if not reader.done():
        reader.fail(f"nothing can be made of {reader.rest!r}")
    return node


def parse_condition(text: str) -> Expression:
    """Read an expression that is true or false; raises ExpressionError for one that is a value."""
    node = parse_expression(text)
    if not is_condition(node):
        raise ExpressionError(
            "a value stands where a condition belongs", hint="compare it: frequency >= 27.5 GHz"
        )
    return node


def evaluate_condition(node: Expression, given: Columns | Mapping[str, Given]) -> tuple[Flags, Flags]:
    """Return where the condition holds and where it is known, both of the size of the columns (1 for a mapping)."""
    inputs = _inputs(given)
    found = truth(node, inputs)
    size = inputs.columns.size
    return np.broadcast_to(found.true, (size,)), np.broadcast_to(found.known, (size,))


def evaluate_expression(
    node: Expression, given: Columns | Mapping[str, Given]
) -> NDArray[np.float64] | Flags | float | bool:
    """Evaluate on columns (an array comes back) or on one mapping of names (a scalar comes back).

    Where an input is not stated a value is NaN and a condition False; ``evaluate_condition`` tells the difference.
    Raises ExpressionError when units do not fit.
    """
    if is_condition(node):
        true, _ = evaluate_condition(node, given)
        return true if isinstance(given, Columns) else bool(true[0])
    inputs = _inputs(given)
    values = np.broadcast_to(operand(node, inputs).values, (inputs.columns.size,))
    return values if isinstance(given, Columns) else float(values[0])


def _inputs(given: Columns | Mapping[str, Given]) -> Inputs:
    if isinstance(given, Columns):
        return Inputs(given)
    numeric = {
        name: np.array([float(value)]) for name, value in given.items() if isinstance(value, int | float)
    }
    text = {name: TextColumn.of([value]) for name, value in given.items() if isinstance(value, str)}
    declared = {name: value for name, value in given.items() if isinstance(value, Quantity)}
    return Inputs(Columns(1, numeric, text), declared)
