"""Where no block can be: losses, noise figures and temperatures below 0, gain of a passive block above 0 dB."""

from __future__ import annotations

import math

from specflow.budgets.forms import LOSSES, Role
from specflow.model.base import code_key
from specflow.model.budget_line import BudgetLine
from specflow.units import Converter, converter

_FROM_ZERO = ("noise_figure", "source_k", "image_rejection", "rejection", "isolation", "dc_w", "allowed_rise")


def physical_ends(
    line: BudgetLine, role: Role, convert: Converter, *, is_passive: bool
) -> tuple[float, float]:
    """Return the lowest and the highest value that a line can have in its own unit, ±inf where there is no end."""
    name = code_key(line.parameter)
    if role.figure in _FROM_ZERO or name in LOSSES:
        return _zero(convert), math.inf
    if name == "gain" and is_passive:
        return -math.inf, _zero(convert)
    return -math.inf, math.inf


def _zero(convert: Converter) -> float:
    """Return 0 in the unit of the law in the line's own unit."""
    if convert.is_identity:
        return 0.0
    return float(converter(convert.target, convert.source, log_factor=10)(0.0))
