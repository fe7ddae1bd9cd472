"""A list of peaks as records: its peaks can fail a limit, the floors of its scans speak for the ranges scanned.

A list proves a limit over a range where the scans cover it, their floors meet the limit, and so does every peak: peaks
and floors are judged like any reading (a floor is "less than", of unknown spectrum, in the bandwidth of its scan), and
``conditions.proves`` decides on the range.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from specflow.model.columns import UNSTATED, Spans
from specflow.model.evidence import EvidenceColumns
from specflow.model.source_statement import LIST_COLUMN, PEAK, PeakList

AXIS = "frequency"


def scanned(peaks: PeakList, columns: EvidenceColumns) -> EvidenceColumns:
    """Return the arrays of a list with what its rows speak for: a floor for its scan, a peak for no part of a range."""
    words = columns.extra.get(LIST_COLUMN)
    size = columns.conditions.size
    spans = Spans(
        np.full(size, np.nan), np.full(size, np.nan), np.full(size, np.nan), "Hz", np.ones(size, bool)
    )
    if words is None or not peaks.scans:
        return _with(columns, spans)
    assert spans.silent is not None
    unit = peaks.scans[0].unit
    for code, label in enumerate(words.labels):
        if label == PEAK or not label.isdecimal():
            continue
        scan = peaks.scans[int(label) - 1]
        rows = words.codes == code
        spans.low[rows], spans.high[rows], spans.gap[rows], spans.silent[rows] = (
            scan.low,
            scan.high,
            0.0,
            False,
        )
    spans.silent[words.codes == UNSTATED] = True
    return _with(columns, replace(spans, unit=unit))


def _with(columns: EvidenceColumns, spans: Spans) -> EvidenceColumns:
    return replace(columns, conditions=replace(columns.conditions, spans={AXIS: spans}))
