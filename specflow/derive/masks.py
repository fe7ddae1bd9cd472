"""Law of a mask: by how much a trace exceeds it at worst, its allowances taken into account."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.words import value_words
from specflow.derive.law import Law, Outcome, Setting, single
from specflow.derive.samples import Samples
from specflow.errors import CalculationError
from specflow.limits import LimitContext, evaluate_limit, parse_limit
from specflow.limits.conversion import unit_of
from specflow.limits.tree import limit_inputs
from specflow.model.columns import Columns
from specflow.model.limit import Allowance, Allowed, Limit, Mask
from specflow.units import converter, tolerance_unit

Floats = NDArray[np.float64]


def mask_excess(samples: Samples) -> Outcome:
    """Return by how much the readings exceed a mask at worst; 0 or below where it is kept.

    Formula: e = value - upper bound (lower bound - value) at each reading, in the tolerance unit. Without an allowance
    the greatest e. Where a share s of the n readings may exceed by up to x: the greater of the greatest e less x, and
    of the (⌊s·n⌋ + 1)-th greatest e; that is the least by which the mask would have to move to be kept.
    Valid: a limit that depends on nothing but the axis; readings that no piece of the mask reaches are not judged, and
    that is told. The uncertainty is that of the governing reading.
    Source: definition; allowances as limits state them ("10 % of samples may exceed by 3 dB").
    """
    limit = _limit(samples)
    target = unit_of(limit.unit or "1")
    values = np.asarray(converter(samples.unit(), target)(samples.value()), np.float64)
    places = Columns(samples.size, {samples.axis: samples.along}, units={samples.axis: samples.axis_unit})
    bounds = evaluate_limit(limit, LimitContext(places)).spread(samples.size)
    if bounds.unknown.any():
        raise CalculationError(f"the mask cannot be evaluated: {bounds.why}", where=limit.text)
    over = np.full(samples.size, -np.inf)
    if bounds.upper is not None:
        over = np.maximum(over, values - bounds.upper)
    if bounds.lower is not None:
        over = np.maximum(over, bounds.lower - values)
    judged = np.flatnonzero(bounds.applies & np.isfinite(over))
    if not len(judged):
        raise CalculationError("no reading lies where the mask asks for something", where=limit.text)
    order = judged[np.argsort(-over[judged], kind="stable")]
    value, row = _moved(over, order, _allowances(limit))
    left = samples.size - len(judged)
    notes = (f"{left} readings lie where the mask asks for nothing",) if left else ()
    readings = samples.values["value"]
    u = None if readings.u is None or readings.unit != limit.unit else float(readings.u[row])
    at = value_words(samples.axis, float(samples.along[row]), samples.axis_unit)
    unit = str(tolerance_unit(target))
    return single(value, unit, row, at=at, u=u, u_rule="that of the governing reading", notes=notes)


def _limit(samples: Samples) -> Limit:
    limit = parse_limit(samples.word("limit"), unit_hint=samples.values["value"].unit)
    others = sorted(limit_inputs(limit) - {samples.axis})
    if others:
        raise CalculationError(
            f"the limit depends on {', '.join(others)}, the range is over {samples.axis}",
            where=limit.text,
            hint="state the mask over the axis alone",
        )
    return limit


def _allowances(limit: Limit) -> Sequence[Allowance]:
    if isinstance(limit.tree, Allowed):
        return (limit.tree.allowance,)
    return limit.tree.allowances if isinstance(limit.tree, Mask) else ()


def _moved(over: Floats, order: NDArray[np.intp], allowances: Sequence[Allowance]) -> tuple[float, int]:
    """Return by how much the mask would have to move, and the reading that says so; ``order``: greatest first."""
    best, governing = float(over[order[0]]), int(order[0])
    for allowance in allowances:
        share = allowance.share.value / (100 if allowance.share.unit == "%" else 1)
        free = min(math.floor(share * len(order) + 1e-9), len(order) - 1)
        ordinary, extreme = float(over[order[free]]), float(over[order[0]]) - allowance.excess.value
        if max(ordinary, extreme) < best:
            best = max(ordinary, extreme)
            governing = int(order[free] if ordinary >= extreme else order[0])
    return best, governing


MASK_LAWS: tuple[Law, ...] = (
    Law(
        "mask excess",
        "by how much a trace exceeds a mask at worst",
        mask_excess,
        settings=(
            Setting("limit", "the mask as limits are written, over the axis of the range", is_text=True),
        ),
        takes_repeats=True,
    ),
)
