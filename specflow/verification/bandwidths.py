"""Readings brought to the measurement bandwidth that a limit states for each of them (masks with bandwidths)."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.limits.conversion import unit_of
from specflow.limits.tree import walk_limit
from specflow.model.limit import Limit, Mask, MeasuredIn
from specflow.units import Unit
from specflow.verification.records import Records
from specflow.verification.spectrum import recorded_bandwidth, scales, shares

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
    records: Records,
    record: NDArray[np.intp],
    low: Floats,
    high: Floats,
    bandwidth_hz: Floats | None,
    unit: Unit,
) -> tuple[Floats, Floats, NDArray[np.bool_]]:
    """Return readings in the bandwidth of a limit in ``unit``, and where that cannot be had.

    It cannot where a record states no bandwidth, and where a reading would have to be scaled that is not in dB.
    """
    if bandwidth_hz is None:
        return low, high, np.zeros(low.shape, bool)
    source = records.source[record]
    stated = np.array([recorded_bandwidth(one.column) or np.nan for one in records.sources])[source]
    least, most = np.array([shares(one.column.spectrum) for one in records.sources]).reshape(-1, 2)[source].T
    asked = ~np.isnan(bandwidth_hz)
    with np.errstate(invalid="ignore"):
        step = np.where(asked, 10 * np.log10(bandwidth_hz / stated), 0.0)
    lost = np.isnan(step)
    step = np.where(lost, 0.0, step)
    if not (unit.is_log and scales(unit)):
        lost |= (step != 0) & (most > 0)
        step = np.zeros(step.shape)
    lower = np.where(step < 0, most, least) * step
    upper = np.where(step < 0, least, most) * step
    return low + lower, high + upper, lost
