"""Bounds of several limits as one: the looser or stricter of alternatives, and power sums."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from specflow.errors import ExpressionError
from specflow.limits.bounds import NO_FLAG, Bounds
from specflow.limits.conversion import Floats, conversion, convert_to, same_unit_spelling, unit_of
from specflow.limits.inputs import Flags
from specflow.limits.tree import walk_limit
from specflow.model.limit import LimitNode, OfQuantity, Stringency
from specflow.units import Kind

_NO_LOWER, _NO_UPPER = np.array([-np.inf]), np.array([np.inf])


def alternatives_of(rule: Stringency, bounds: Sequence[Bounds], members: Sequence[LimitNode]) -> Bounds:
    """Return the common bounds of alternatives in one unit.

    Raises ExpressionError when the members bound different quantities or have units that do not compare: then each
    member needs evidence of its own, and ``choose`` combines the outcomes.
    """
    unit = next((part.unit for part in bounds if part.unit), "")
    quantities = {
        part.quantity for member in members for part in walk_limit(member) if isinstance(part, OfQuantity)
    }
    other = [part.unit for part in bounds if part.unit and not _comparable(part.unit, unit)]
    if quantities or other:
        raise ExpressionError(
            "the alternatives bound different quantities", hint="evaluate each of them by itself"
        )
    return combined(rule, [in_unit(part, unit) for part in bounds], unit)


def _comparable(one: str, other: str) -> bool:
    """Tell whether bounds in two units bound the same kind of thing (10 dBm, 1 W)."""
    if same_unit_spelling(one, other):
        return True
    return unit_of(one).kind is unit_of(other).kind and conversion(one, other) is not None


def in_unit(bounds: Bounds, unit: str) -> Bounds:
    """Return the bounds converted to ``unit``; raises ExpressionError when that is impossible."""
    if not bounds.unit or same_unit_spelling(bounds.unit, unit):
        return bounds
    lower = None if bounds.lower is None else convert_to(bounds.lower, bounds.unit, unit)
    upper = None if bounds.upper is None else convert_to(bounds.upper, bounds.unit, unit)
    return replace(bounds, lower=lower, upper=upper, unit=unit)


def combined(rule: Stringency, bounds: Sequence[Bounds], unit: str) -> Bounds:
    """Combine bounds of one unit row by row; a member that does not apply to a row leaves it to the others."""
    lower, lower_strict = _side(rule, bounds, True)
    upper, upper_strict = _side(rule, bounds, False)
    applies, outside, unknown = NO_FLAG, ~NO_FLAG, NO_FLAG
    for part in bounds:
        applies = applies | part.applies
        outside = outside & part.outside
        unknown = unknown | (part.unknown & part.applies)
    widths = [part.bandwidth_hz for part in bounds if part.bandwidth_hz is not None]
    return Bounds(
        lower,
        upper,
        unit,
        lower_strict,
        upper_strict,
        applies,
        outside & ~applies,
        unknown,
        "; ".join(dict.fromkeys(part.why for part in bounds if part.why)),
        widths[0] if widths and len(widths) == len(bounds) else None,
    )


def _side(rule: Stringency, bounds: Sequence[Bounds], is_lower: bool) -> tuple[Floats | None, Flags]:
    """Combine one side. The stricter rule keeps every bound; the looser keeps a side only if all members bound it."""
    nothing = _NO_LOWER if is_lower else _NO_UPPER
    given = [part.lower if is_lower else part.upper for part in bounds]
    if all(values is None for values in given):
        return None, NO_FLAG
    # Larger is stricter for lower bounds, smaller for upper ones; work with "strictness" so that one rule serves.
    sign = 1.0 if is_lower else -1.0
    best: Floats = np.full(1, -np.inf if rule is Stringency.STRICTER else np.inf)
    strict: Flags = NO_FLAG
    for part, values in zip(bounds, given, strict=True):
        own = sign * (nothing if values is None else values)
        own = np.where(part.applies, own, -np.inf if rule is Stringency.STRICTER else np.inf)
        own_strict = (part.lower_strict if is_lower else part.upper_strict) & part.applies
        closer = own > best if rule is Stringency.STRICTER else own < best
        tie = (own == best) & (strict | own_strict if rule is Stringency.STRICTER else strict & own_strict)
        strict = np.where(own == best, tie, np.where(closer, own_strict, strict))
        best = np.maximum(best, own) if rule is Stringency.STRICTER else np.minimum(best, own)
    none_applies = np.isposinf(best) if rule is Stringency.LOOSER else np.isneginf(best)
    return np.where(none_applies, nothing, sign * best), strict


def power_sum_of(bounds: Sequence[Bounds], bandwidth_hz: float | None) -> Bounds:
    """Return the power sum of upper bounds in dB, scaled to one bandwidth when it is given.

    10 * log10(sum of 10^(L/10)). Scaling L + 10 * log10(B/B0) is right for a noise-like emission only, and is what
    3GPP TS 38.104 9.7.4.3 asks for between two sub-blocks. A member that does not apply adds nothing.
    """
    unit = bounds[0].unit
    if any(part.upper is None or part.lower is not None for part in bounds):
        raise ExpressionError("a power sum is taken of upper limits only")
    if not unit_of(unit).is_log or unit_of(unit).kind is Kind.BANDWIDTH_LOG:
        raise ExpressionError(f"a power sum is taken of levels in dB, not of values in {unit}")
    total = np.zeros(1)
    applies, outside, unknown, strict = NO_FLAG, ~NO_FLAG, NO_FLAG, NO_FLAG
    for part in bounds:
        level = _scaled(part, unit, bandwidth_hz)
        total = total + np.where(part.applies, 10 ** (level / 10), 0.0)
        applies, outside = applies | part.applies, outside & part.outside
        unknown, strict = unknown | part.unknown, strict | part.upper_strict
    width = bounds[0].bandwidth_hz if bandwidth_hz is None else np.array([bandwidth_hz])
    upper = np.where(applies, 10 * np.log10(np.where(applies, total, 1.0)), np.inf)
    return Bounds(None, upper, unit, NO_FLAG, strict, applies, outside & ~applies, unknown, "", width)


def _scaled(part: Bounds, unit: str, bandwidth_hz: float | None) -> Floats:
    upper = _NO_UPPER if part.upper is None else convert_to(part.upper, part.unit, unit)
    if bandwidth_hz is None:
        return upper
    if part.bandwidth_hz is None:
        raise ExpressionError(
            "a limit to be scaled has no measurement bandwidth", hint="add 'in 1 MHz' to it"
        )
    change: Floats = 10 * np.log10(bandwidth_hz / part.bandwidth_hz)
    return upper + change
