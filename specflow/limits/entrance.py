"""The entrance to the grammar of limits, which is loaded when the first limit is read: judging needs none of it."""

from __future__ import annotations

from specflow.model.limit import Limit
from specflow.model.parameter import Better, Parameter


def parse_limit(
    text: str, *, unit_hint: str = "", parameter: Parameter | None = None, better: Better | None = None
) -> Limit:
    """Read a limit as engineers write it.

    ``unit_hint`` or the parameter's unit serves numbers without a unit; ``better`` or the parameter's direction
    serves a value without one. Raises ExpressionError with the column (counted from 1) and what would help.
    """
    from specflow.limits import grammar

    return grammar.parse_limit(text, unit_hint=unit_hint, parameter=parameter, better=better)
