"""Ranges that recorded rows speak for as a whole: those of values derived over a range of raw data."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from specflow.model.columns import Spans
from specflow.model.derivation import Covered
from specflow.model.evidence import EvidenceColumns


def speaking(covers: Sequence[Covered], columns: EvidenceColumns) -> EvidenceColumns:
    """Return the arrays of a derived table with the ranges that its rows speak for."""
    size = columns.conditions.size
    spans = {
        one.dimension: Spans(
            np.full(size, one.low),
            np.full(size, one.high),
            np.full(size, one.largest_gap),
            one.unit,
            undivided=None if one.in_parts else np.ones(size, bool),
        )
        for one in covers
    }
    return replace(columns, conditions=replace(columns.conditions, spans=spans))
