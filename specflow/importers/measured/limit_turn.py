"""The turn that a limit on an angle is meant in: 180 ± 5 deg is met by -179 deg, which are 181 deg there."""

from __future__ import annotations

from specflow.model.expression import Expression, Negative, Number
from specflow.model.limit import Between, LimitNode, Tolerance


def turn_of(limit: LimitNode) -> str:
    """Return the middle of a two-sided limit in degrees beyond a quarter turn ("180 deg"), "" for any other."""
    if not isinstance(limit, Tolerance | Between) or limit.unit != "deg":
        return ""
    parts = (limit.nominal,) if isinstance(limit, Tolerance) else (limit.lower, limit.upper)
    figures = [figure for one in parts if (figure := _plain_figure(one)) is not None]
    if len(figures) < len(parts):
        return ""
    middle = sum(figures) / len(figures)
    return f"{middle:.10g} deg" if abs(middle) > 90.0 else ""


def _plain_figure(expression: Expression | None) -> float | None:
    """The value of a number in the unit of its limit, None for anything else."""
    if isinstance(expression, Negative):
        inner = _plain_figure(expression.operand)
        return None if inner is None else -inner
    is_plain = isinstance(expression, Number) and expression.unit in ("", "deg")
    return float(expression.text) if is_plain and isinstance(expression, Number) else None
