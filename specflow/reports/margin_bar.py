"""The margin bar as data: limit, guard band and spread of results on one axis."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from specflow.model.card import BarAxis, MarginBar
from specflow.model.report import CellTone
from specflow.model.requirement import Requirement
from specflow.model.verdict import PointResults, RequirementStatus
from specflow.reports.figures import CLOSENESS, margin, rounded, with_unit

Floats = NDArray[np.float64]


def margin_bar(requirement: Requirement, status: RequirementStatus) -> MarginBar | None:
    """Return the bar over all activities and items, None without evidence.

    Over values where one limit holds at all points; over margins (the limit at 0) where it differs between points.
    """
    known = [
        (found, found.table >= 0)
        for activity in status.activities
        for found in activity.items.values()
        if (found.table >= 0).any()
    ]
    if not known:
        return None
    lower = _several([found.lower[places] for found, places in known])
    upper = _several([found.upper[places] for found, places in known])
    guard = max(_widest_guard(found, places) for found, places in known)
    tone = _tone(known)
    if len(lower) > 1 or len(upper) > 1:
        return _over_margins(status.unit, [found.margin[places] for found, places in known], guard, tone)
    return _over_values(
        requirement.limit.unit,
        status.unit,
        float(lower[0]) if len(lower) else None,
        float(upper[0]) if len(upper) else None,
        guard,
        np.concatenate([found.value_low[places] for found, places in known]),
        np.concatenate([found.value_high[places] for found, places in known]),
        tone,
    )


def _tone(known: Sequence[tuple[PointResults, NDArray[np.bool_]]]) -> CellTone:
    if any((found.margin[places] < -CLOSENESS).any() for found, places in known):
        return CellTone.BAD
    if any((found.guarded_margin[places] < -CLOSENESS).any() for found, places in known):
        return CellTone.DOUBTFUL
    return CellTone.GOOD


def _several(parts: Sequence[Floats]) -> Floats:
    values = np.concatenate(parts)
    return np.unique(values[np.isfinite(values)])


def _widest_guard(found: PointResults, places: NDArray[np.bool_]) -> float:
    bands = found.margin[places] - found.guarded_margin[places]
    bands = bands[np.isfinite(bands)]
    return max(float(bands.max()), 0.0) if len(bands) else 0.0


def _over_margins(unit: str, parts: Sequence[Floats], guard: float, tone: CellTone) -> MarginBar | None:
    margins = np.concatenate(parts)
    margins = margins[np.isfinite(margins)]
    if not len(margins):
        return None
    least, greatest = float(margins.min()), float(margins.max())
    low, high = margin(least, unit).text, margin(greatest, unit).text
    words = [f"margin {low} to {high}, the limit differs from point to point", *_guard_words(guard, unit)]
    return MarginBar(
        axis=BarAxis.MARGIN,
        unit=unit,
        lower=0.0,
        lower_text="limit",
        guard=guard,
        least=least,
        greatest=greatest,
        least_text=low,
        greatest_text=high,
        words="; ".join(words),
        tone=tone,
    )


def _over_values(
    unit: str,
    tolerance: str,
    lower: float | None,
    upper: float | None,
    guard: float,
    low: Floats,
    high: Floats,
    tone: CellTone,
) -> MarginBar | None:
    finite = np.concatenate([low[np.isfinite(low)], high[np.isfinite(high)]])
    if not len(finite):
        return None
    least, greatest = float(finite.min()), float(finite.max())
    texts = [with_unit(least, unit), with_unit(greatest, unit)]
    spread = texts[0] if least == greatest else f"{rounded(least)} to {texts[1]}"
    words = [f"results {spread}", *(["no limit at these points"] if lower is None and upper is None else [])]
    return MarginBar(
        unit=unit,
        lower=lower,
        upper=upper,
        guard=guard,
        least=least,
        greatest=greatest,
        lower_text="" if lower is None else with_unit(lower, unit),
        upper_text="" if upper is None else with_unit(upper, unit),
        least_text=texts[0],
        greatest_text=texts[1],
        words="; ".join([*words, *_guard_words(guard, tolerance)]),
        tone=tone,
    )


def _guard_words(guard: float, unit: str) -> list[str]:
    return [f"guard band {with_unit(guard, unit)}"] if guard > CLOSENESS else []
