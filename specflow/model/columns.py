"""Conditions of many rows at once, as arrays: the form in which points and records are compared.

Dimension names are canonical: ``frequency``, ``temperature_ambient``, ``theta`` ... (see ``conditions``).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

UNSTATED = -1


@dataclass(frozen=True, slots=True)
class TextColumn:
    """A column of words: ``codes`` (n,) int32 into ``labels``; -1 where the row states nothing."""

    codes: NDArray[np.int32]
    labels: tuple[str, ...]

    @classmethod
    def of(cls, words: Sequence[str | None]) -> TextColumn:
        """Build a column from words; None and "" are unstated."""
        labels: dict[str, int] = {}
        codes = np.fromiter(
            (labels.setdefault(word, len(labels)) if word else UNSTATED for word in words),
            np.int32,
            len(words),
        )
        return cls(codes, tuple(labels))

    def word(self, row: int) -> str:
        """Return the word of one row, "" where unstated."""
        code = int(self.codes[row])
        return "" if code == UNSTATED else self.labels[code]

    def take(self, rows: NDArray[np.intp]) -> TextColumn:
        """Return the rows asked for, in that order."""
        return TextColumn(self.codes[rows], self.labels)


@dataclass(frozen=True, slots=True)
class Spans:
    """What each row speaks for along one dimension: ``low`` to ``high`` with no gap above ``gap``; NaN for nothing.

    ``silent`` rows prove no part of a range, not even their own value (a peak of a list); None: there are none.
    ``undivided`` rows speak for a range only where they cover all of it: a ripple over each half is none of the whole.
    """

    low: NDArray[np.float64]
    high: NDArray[np.float64]
    gap: NDArray[np.float64]
    unit: str = ""
    silent: NDArray[np.bool_] | None = None
    undivided: NDArray[np.bool_] | None = None

    def take(self, rows: NDArray[np.intp]) -> Spans:
        """Return the rows asked for, in that order."""
        silent = None if self.silent is None else self.silent[rows]
        undivided = None if self.undivided is None else self.undivided[rows]
        return Spans(self.low[rows], self.high[rows], self.gap[rows], self.unit, silent, undivided)


@dataclass(frozen=True, slots=True)
class Columns:
    """Named columns of equal length.

    ``numeric``: float64 (n,), NaN where unstated, in ``units[name]``; ``text``: words. ``spans``: ranges that rows
    speak for as a whole (those of derived values), by dimension.
    """

    size: int
    numeric: Mapping[str, NDArray[np.float64]] = field(default_factory=dict)
    text: Mapping[str, TextColumn] = field(default_factory=dict)
    units: Mapping[str, str] = field(default_factory=dict)
    spans: Mapping[str, Spans] = field(default_factory=dict)

    @property
    def names(self) -> tuple[str, ...]:
        """The dimensions stated by these columns."""
        return (*self.numeric, *self.text)

    def take(self, rows: NDArray[np.intp]) -> Columns:
        """Return the rows asked for, in that order."""
        return Columns(
            len(rows),
            {name: values[rows] for name, values in self.numeric.items()},
            {name: column.take(rows) for name, column in self.text.items()},
            self.units,
            {name: spans.take(rows) for name, spans in self.spans.items()},
        )
