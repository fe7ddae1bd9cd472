"""The level in front of each position, as the lines of a chain are read from its input on."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.paths import groups_of, joined_gain, last_row
from specflow.model.budget import BudgetPosition

Floats = NDArray[np.float64]


class Levels:
    """Levels in dBm, (n,): ``start`` at the input of the chain, None where nothing drives it.

    Parallel paths are each fed by an equal share of the level in front of them.
    """

    def __init__(self, positions: Sequence[BudgetPosition], start: Floats | None) -> None:
        self.start = start
        self._now = start
        self._gains: dict[int, Floats] = {}
        self._group = {row: group for group in groups_of(positions) for path in group for row in path}

    def before(self, row: int) -> Floats | None:
        """Return the level in front of a position; of one in a path, its share behind the earlier ones of its path."""
        if self._now is None or row not in self._group:
            return self._now
        group = self._group[row]
        path = next(rows for rows in group if row in rows)
        level = self._now - 10.0 * math.log10(len(group))
        for earlier in path[: path.index(row)]:
            level = level + self._gains[earlier]
        return level

    def passed(self, row: int, gain: Floats) -> None:
        """Note the gain in dB of a position."""
        self._gains[row] = gain
        if self._now is None:
            return
        if row not in self._group:
            self._now = self._now + gain
        elif row == last_row(self._group[row]):
            paths = [np.sum([self._gains[one] for one in rows], axis=0) for rows in self._group[row]]
            self._now = self._now + joined_gain(paths)
