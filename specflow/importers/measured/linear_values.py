"""Powers and amplitudes in linear units: what has no level is rejected by cell, a zero is said."""

from __future__ import annotations

import numpy as np

from specflow.importers.measured.column import ColumnMeaning
from specflow.importers.measured.readings import Numbers
from specflow.importers.measured.work import TableWork
from specflow.units import parse_unit


def doubt_linear(work: TableWork, meaning: ColumnMeaning, numbers: Numbers) -> None:
    """Reject negative readings of a quantity that has a level (power, amplitude, their ratios); say how many are 0."""
    parameter = meaning.parameter
    if parameter is None or parse_unit(meaning.unit or "1").is_log:
        return
    if parameter.log_factor is None and not parameter.key.endswith("noise_temperature"):
        return
    reason = f"{parameter.title} in {meaning.unit} cannot be negative: an offset of the instrument, or a wrong sign"
    negative = np.flatnonzero(np.isfinite(numbers.high) & (numbers.high < 0))
    for place in negative.tolist():
        work.rejects.add(int(work.rows[place]), meaning.column, float(numbers.low[place]), reason)
        numbers.drop(place)
    zeros = np.flatnonzero((numbers.low == 0) & (numbers.high == 0))
    if len(zeros):
        count = f"{len(zeros)} readings are" if len(zeros) > 1 else "a reading is"
        work.notes.append(
            f"{meaning.header.line}: {count} 0 {meaning.unit} (row {int(work.rows[zeros[0]])}): nothing there, or "
            "below the resolution; as a level it lies below every limit"
        )
