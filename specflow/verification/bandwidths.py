"""Readings brought to the measurement bandwidth that a limit states for each of them (masks with bandwidths)."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.limits.conversion import unit_of
from specflow.limits.tree import walk_limit
from specflow.model.evidence import SpectrumKind
from specflow.model.limit import Limit, Mask, MeasuredIn
from specflow.verification.records import Records, Source

Floats = NDArray[np.float64]


def states_bandwidth(limit: Limit) -> bool:
    """Whether the limit itself says in which bandwidth it is measured (a density says so by its unit instead)."""
    if limit.unit and unit_of(limit.unit).bandwidth_hz is not None:
        return False
    return any(
        isinstance(node, MeasuredIn)
        or (isinstance(node, Mask) and any(segment.bandwidth is not None for segment in node.segments))
        for node in walk_limit(limit.tree)
    )


def in_bandwidth_of_limit(
    records: Records, record: NDArray[np.intp], low: Floats, high: Floats, bandwidth_hz: Floats | None
) -> tuple[Floats, Floats, NDArray[np.bool_]]:
    """Return readings in the bandwidth of the limit, and where that cannot be done because a record states none.

    Noise-like readings scale by 10·log10 of the ratio, discrete lines do not; of an unknown spectrum only the interval
    between the two is known.
    """
    if bandwidth_hz is None:
        return low, high, np.zeros(low.shape, bool)
    source = records.source[record]
    stated = np.array([_bandwidth(one) for one in records.sources])[source]
    with np.errstate(invalid="ignore"):
        step = 10 * np.log10(bandwidth_hz / stated)
    step = np.where(np.isnan(bandwidth_hz) | (step == 0), 0.0, step)
    least = np.array([_share(one, low_end=True) for one in records.sources])[source]
    most = np.array([_share(one, low_end=False) for one in records.sources])[source]
    lower_step = np.where(step < 0, most, least) * step
    upper_step = np.where(step < 0, least, most) * step
    lost = np.isnan(step)
    return low + np.where(lost, 0.0, lower_step), high + np.where(lost, 0.0, upper_step), lost


def _bandwidth(source: Source) -> float:
    own = source.column.quantity.bandwidth_hz
    return np.nan if own is None else own


def _share(source: Source, *, low_end: bool) -> float:
    """Return how much of the step counts: all for noise, none for a line; both are possible where it is not said."""
    known = {SpectrumKind.NOISE_LIKE: 1.0, SpectrumKind.DISCRETE: 0.0}
    return known.get(source.column.spectrum, 0.0 if low_end else 1.0)
