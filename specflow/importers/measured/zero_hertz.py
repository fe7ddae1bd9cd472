"""A sweep that begins at 0 Hz: what an analyser shows there is as a rule its own local oscillator."""

from __future__ import annotations

import numpy as np

from specflow.importers.measured.work import TableWork
from specflow.model.columns import Columns


def note_zero_hertz(work: TableWork, conditions: Columns) -> list[str]:
    """Say that an instrument's sweep has readings at 0 Hz (common practice, no source); they are kept as they stand."""
    frequency = conditions.numeric.get("frequency")
    if not work.stated.of_instrument or frequency is None or len(frequency) < 2:
        return []
    rows = work.rows[np.flatnonzero(frequency[: len(work.rows)] == 0)]
    if not len(rows):
        return []
    where = f"row {int(rows[0])}" + (f" and {len(rows) - 1} more" if len(rows) > 1 else "")
    return [f"{where} is at 0 Hz, where an analyser shows its own local oscillator: it was read as it stands"]
