"""Numbers that instruments and their programs write where there is no reading.

9.9E37 and 9.91E37 are those of SCPI-1999, volume 1, 7.2.1. The others are common practice, no source: the smallest and
the greatest whole number of 16 and 32 bits, bare or scaled (-2147.48), and runs of nines (-999, 999.9, 9999).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.errors import UnitError
from specflow.importers.measured.cells import Rows
from specflow.importers.measured.rejects import Rejects
from specflow.importers.measured.tables import FoundTable
from specflow.units import Blank, parse_reading

NO_NUMBER = 9.9e37
_NO_NUMBER_REASON = "a placeholder of the instrument, no number"
_REASON = (
    "written by instruments where there is no reading, and far from the other readings of the column "
    "(keep_placeholders = true in a mapping reads it)"
)
_NEAR = 0.5
_NOTHING = ("nothing written", "not measured", "not available", "not applicable")
_WHOLE = (2147483648, 2147483647)
_SCALES = (0, 3, 4, 5, 6, 7)
_DECIMALS = (2, 3, 4, 6)


def _marks() -> frozenset[float]:
    scaled = {
        round(whole / 10**scale, digits) for whole in _WHOLE for scale in _SCALES for digits in _DECIMALS
    }
    nines = {float(f"{'9' * count}{rest}") for count in range(3, 8) for rest in ("", ".9", ".99", ".999")}
    return frozenset(one for one in (*scaled, *nines, 32768.0, 32767.0) if one >= 999)


_MARKS = np.array(sorted(_marks()))


def without_placeholders(
    low: NDArray[np.float64], column: int, rows: Rows, rejects: Rejects
) -> NDArray[np.float64]:
    """Reject the placeholders among plain numbers; returns the numbers, or a copy with NaN in the place of these.

    One that has a reading of its sign within half of its size beside it (998 mA, 999 mA) is a reading; where the
    mapping keeps placeholders all are, but for those of SCPI.
    """
    with np.errstate(invalid="ignore"):
        size = np.abs(low)
        if not (size >= _MARKS[0]).any():
            return low
        low = _without(low, size >= NO_NUMBER, column, rows, rejects, _NO_NUMBER_REASON)
    return low if rejects.keep_placeholders else _without(low, _alone(low), column, rows, rejects, _REASON)


def only_mark(table: FoundTable, column: int) -> str:
    """Say that a column holds one placeholder and nothing else: "-2147.48 in all 401 rows"; "" for any other column.

    Words for nothing count ("---"); an overload is a reading that was lost. A single row says too little.
    """
    cells = table.cells(column)
    ends = cells.numbers_at(table.rows[[0, -1]]) if len(table.rows) else cells.numbers[:0]
    if np.isfinite(ends).all() and (ends != ends[:1]).any():
        return ""  # two readings are enough to tell; a column may have a million
    numbers = cells.numbers_at(table.rows)
    there = cells.filled[table.rows - cells.first]
    if np.count_nonzero(there) < 2:
        return ""
    if not np.isnan(numbers[there]).any():
        first = float(numbers[there][0])
        if (numbers[there] != first).any() or not (abs(first) in _MARKS or abs(first) >= NO_NUMBER):
            return ""
        return f"{first:.12g} in all {np.count_nonzero(there)} rows"
    if not np.isnan(numbers[there]).all():
        return ""
    words = {str(value).strip() for value in cells.distinct} - {""}
    if len(words) != 1:
        return ""
    word = words.pop()
    try:
        blank = parse_reading(word)
    except UnitError:
        return ""
    is_nothing = isinstance(blank, Blank) and blank.reason in _NOTHING
    return f"{word!r} in all {np.count_nonzero(there)} rows" if is_nothing else ""


def _alone(low: NDArray[np.float64]) -> NDArray[np.bool_]:
    """Which numbers are marks without a reading near."""
    alone = np.zeros(len(low), bool)
    known = low[np.isfinite(low)]
    marks = [
        one
        for one in (*_MARKS.tolist(), *(-_MARKS).tolist())
        if known.size and known.min() <= one <= known.max()
    ]
    present = [one for one in marks if (known == one).any()]
    if not present:
        return alone
    readings = known[~np.isin(known, present)]
    for one in present:
        same_sign = np.abs(readings[(readings > 0) == (one > 0)])
        near = (same_sign >= abs(one) * _NEAR) & (same_sign <= abs(one) / _NEAR)
        if not near.any():
            alone |= low == one
    return alone


def _without(
    low: NDArray[np.float64], which: NDArray[np.bool_], column: int, rows: Rows, rejects: Rejects, reason: str
) -> NDArray[np.float64]:
    for place in np.flatnonzero(which).tolist():
        rejects.add(int(rows[place]), column, float(low[place]), reason)
    return np.where(which, np.nan, low) if which.any() else low
