"""Readings near what the instrument shows with nothing connected: they are bounds, not values.

A signal as strong as the residual reads 3 dB above it (√2 times in a linear unit, powers adding), so a reading within
that distance says only that the quantity is not above it. Common practice, no source; it concerns quantities of
which less is better.
"""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.errors import UnitError
from specflow.model.base import code_key
from specflow.model.declared import UncertaintyEntry
from specflow.model.evidence import EvidenceColumns, ValueArrays
from specflow.model.parameter import Better
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary
from specflow.units import convert, parse_unit
from specflow.verification.records import SourceColumn

NEAR_DB = 10 * math.log10(2)
NEAR_RATIO = math.sqrt(2)


@dataclass(frozen=True, slots=True)
class Residuals:
    """Register lines that state a residual, by set-up and parameter."""

    lines: Mapping[tuple[str, str], Sequence[UncertaintyEntry]]

    @classmethod
    def of(cls, snapshot: Snapshot, dictionary: Dictionary) -> Residuals:
        """Collect the residuals of quantities of which less is better."""
        lines: dict[tuple[str, str], list[UncertaintyEntry]] = defaultdict(list)
        for entry in snapshot.all(UncertaintyEntry):
            parameter = dictionary.get(entry.parameter)
            if entry.residual is not None and parameter is not None and parameter.better is Better.LOWER:
                lines[code_key(entry.set_up), code_key(entry.parameter)].append(entry)
        return cls(dict(lines))

    def bounded(self, source: SourceColumn, columns: EvidenceColumns) -> ValueArrays:
        """Return the values of a source; those near the residual of its set-up are open downwards."""
        arrays = columns.values[source.column.name]
        if not self.lines or not source.table.set_up:
            return arrays
        key = code_key(source.table.set_up), code_key(source.column.quantity.parameter)
        near = np.zeros(len(arrays.low), bool)
        for entry in self.lines.get(key, ()):
            near |= _near(entry, source, arrays) & _in_frequency(entry, columns)
        if not near.any():
            return arrays
        return ValueArrays(np.where(near, -np.inf, arrays.low), arrays.high, arrays.u)


def _near(entry: UncertaintyEntry, source: SourceColumn, arrays: ValueArrays) -> NDArray[np.bool_]:
    unit = parse_unit(source.column.unit or "1")
    try:
        residual = convert(float(entry.residual or 0.0), parse_unit(entry.residual_unit or "1"), unit)
    except UnitError:
        return np.zeros(len(arrays.low), bool)
    return arrays.high <= (residual + NEAR_DB if unit.is_log else residual * NEAR_RATIO)


def _in_frequency(entry: UncertaintyEntry, columns: EvidenceColumns) -> NDArray[np.bool_]:
    values = columns.conditions.numeric.get("frequency")
    if values is None or (entry.frequency_from_hz is None and entry.frequency_to_hz is None):
        return np.ones(columns.conditions.size, bool)
    hertz = convert(values, parse_unit(columns.conditions.units.get("frequency", "Hz")), parse_unit("Hz"))
    low, high = entry.frequency_from_hz, entry.frequency_to_hz
    return (hertz >= (0.0 if low is None else low)) & (hertz <= (np.inf if high is None else high))
