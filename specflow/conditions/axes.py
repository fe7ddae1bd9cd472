"""Axes: one dimension (or one direction) of a conditions set, compiled for matching.

An axis knows the required values in one unit, the interval of actual values that serves each of them, and
answers for whole columns at once which required value each record serves. Where several would do, the record
is *crowded*.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.dimensions import word_key
from specflow.conditions.recorded import recorded_numbers, recorded_words
from specflow.model.columns import Columns, TextColumn

Floats = NDArray[np.float64]
Codes = NDArray[np.int64]
Rows = NDArray[np.intp]

MISSED = -(1 << 41)
"""Weight of a record that serves no value of an axis: no sum of other weights (below 2**40) lifts it to 0."""

EXACT_SLACK = 1e-9
"""Relative slack on a tolerance, or on the value where it is exact: 0.1 + 0.2 is 0.3 as people write it."""
ROUNDING = 1e-14
"""Relative slack for the rounding of binary fractions and of one unit conversion."""


def slack(values: Floats, tolerances: Floats) -> Floats:
    """Return what is forgiven beyond each tolerance because decimals are held in binary."""
    size = np.abs(values)
    return np.asarray(
        np.where(tolerances > 0, EXACT_SLACK * tolerances, EXACT_SLACK * size) + ROUNDING * size
    )


class Axis(Protocol):
    """What matching asks of an axis; ``seen`` is whatever its own ``read`` returned for the records."""

    @property
    def names(self) -> tuple[str, ...]:
        """The dimensions it stands for."""

    @property
    def size(self) -> int:
        """How many required values it has."""

    def read(self, records: Columns) -> Floats | None:
        """Return the actual values, comparable with the required ones; None where no record states them."""

    def ends(self, codes: Codes) -> tuple[Columns, Columns]:
        """Return the required conditions of points with these codes: low ends and high ends (equal unless a
        range).
        """

    def weigh(self, seen: Floats, stride: int) -> tuple[Codes, NDArray[np.bool_] | None]:
        """Return ``stride`` times the nearest value served (or MISSED), and which records are crowded."""

    def closeness(self, seen: Floats, codes: Codes) -> Floats:
        """Return the distance of each actual from one required value in units of its tolerance; inf if not
        served.
        """

    def coordinates(self, seen: Floats) -> tuple[Floats, ...]:
        """Return the coordinates by which a search can sort actual values; none where no bound exists."""

    def required_coordinates(self, codes: Codes) -> tuple[Floats, ...]:
        """Return the same coordinates of required values."""

    @property
    def reach(self) -> float:
        """The farthest that an actual coordinate can be from a required one that it serves."""


@dataclass(frozen=True, slots=True)
class Extent:
    """A range as proof sees it: evidence must begin by ``start_by``, reach ``end_from``, and leave no larger
    gap.

    ``low`` and ``high`` are the ends as required. ``largest_gap`` is None for a range that is matched
    anywhere. With ``turn`` (360) the range is a full turn: it has no ends, and the gap across the start
    counts like any other.
    """

    low: float
    high: float
    start_by: float
    end_from: float
    largest_gap: float | None
    turn: float = 0.0


@dataclass(frozen=True, eq=False)
class NumericAxis:
    """Numbers: ``values`` (m,) ascending; value i is served by actuals from ``low[i]`` to ``high[i]``, slack
    included.

    ``scale`` is what distances are measured in, ``typed`` (m,) the values as they were required (with a
    ``period`` of 360° ``values`` are within one turn). With an ``extent`` the single interval is a whole
    range.
    """

    name: str
    unit: str
    values: Floats
    typed: Floats
    low: Floats
    high: Floats
    scale: float
    period: float = 0.0
    extent: Extent | None = None

    @property
    def names(self) -> tuple[str, ...]:
        return (self.name,)

    @property
    def size(self) -> int:
        return len(self.values)

    @cached_property
    def _images(self) -> tuple[Codes, Floats, Floats, Floats]:
        """The values with their neighbours one turn away, so that intervals across 0° need no special case."""
        codes = np.arange(self.size, dtype=np.int64)
        if not self.period or self.extent is not None:
            return codes, self.values, self.low, self.high
        turns = np.concatenate([np.full(self.size, turn * self.period) for turn in (-1, 0, 1)])
        codes = np.tile(codes, 3)
        order = np.argsort(self.values[codes] + turns, kind="stable")
        codes, turns = codes[order], turns[order]
        low, high = self.low[codes] + turns, self.high[codes] + turns
        kept = (high >= 0) & (low <= self.period)
        return codes[kept], (self.values[codes] + turns)[kept], low[kept], high[kept]

    @cached_property
    def _edges(self) -> Floats | None:
        """Low and high ends in turn, where the intervals do not overlap: one search finds the value served."""
        _, _, low, high = self._images
        edges = np.empty(2 * len(low))
        edges[0::2] = np.nextafter(low, -np.inf)
        edges[1::2] = high
        return edges if bool(np.all(edges[1:] > edges[:-1])) else None

    @cached_property
    def _tables(self) -> dict[int, Codes]:
        return {}

    def _table(self, stride: int) -> Codes:
        table = self._tables.get(stride)
        if table is None:
            codes = self._images[0]
            table = np.full(2 * len(codes) + 1, MISSED, np.int64)
            table[1::2] = codes * stride
            self._tables[stride] = table
        return table

    def read(self, records: Columns) -> Floats | None:
        actual = recorded_numbers(records, self.name, self.unit)
        if actual is None or not self.period:
            return actual
        start = 0.0 if self.extent is None else float(self.low[0])
        return start + np.mod(actual - start, self.period)

    def ends(self, codes: Codes) -> tuple[Columns, Columns]:
        units = {self.name: self.unit}
        if self.extent is None:
            same = Columns(len(codes), {self.name: self.typed[codes]}, units=units)
            return same, same
        low, high = (np.full(len(codes), end) for end in (self.extent.low, self.extent.high))
        return Columns(len(codes), {self.name: low}, units=units), Columns(
            len(codes), {self.name: high}, units=units
        )

    def along(self, seen: Floats, codes: Codes) -> Floats:
        return seen

    def weigh(self, seen: Floats, stride: int) -> tuple[Codes, NDArray[np.bool_] | None]:
        edges = self._edges
        if edges is not None:
            return self._table(stride).take(edges.searchsorted(seen)), None
        codes, values, low, high = self._images
        first = high.searchsorted(seen, "left")
        last = low.searchsorted(seen, "right") - 1
        above = np.clip(values.searchsorted(seen), first, np.maximum(last, first)).clip(0, len(values) - 1)
        below = np.clip(above - 1, np.minimum(first, len(values) - 1), None)
        with np.errstate(invalid="ignore"):
            nearest = np.where(seen - values[below] <= values[above] - seen, below, above)
        return np.where(last < first, MISSED, codes[nearest] * stride), last > first

    def closeness(self, seen: Floats, codes: Codes) -> Floats:
        offset = seen - self.values[codes]
        if self.period:
            offset = np.mod(offset + self.period / 2, self.period) - self.period / 2
        actual = self.values[codes] + offset
        inside = (actual >= self.low[codes]) & (actual <= self.high[codes])
        return np.asarray(np.where(inside, np.abs(offset) / self.scale, np.inf))

    @property
    def reach(self) -> float:
        return float(np.max(np.maximum(self.high - self.values, self.values - self.low)))

    def coordinates(self, seen: Floats) -> tuple[Floats, ...]:
        if not np.isfinite(self.reach) or self.size == 1:
            return ()
        if self.period:
            turn = seen * (2 * np.pi / self.period)
            radius = self.period / (2 * np.pi)
            return radius * np.cos(turn), radius * np.sin(turn)
        return (seen,)

    def required_coordinates(self, codes: Codes) -> tuple[Floats, ...]:
        return self.coordinates(self.values[codes])


@dataclass(frozen=True, eq=False)
class TextAxis:
    """Words: compared without case and outer blanks; known spellings of one meaning (H, horizontal) are one
    word.
    """

    name: str
    words: tuple[str, ...]

    @property
    def names(self) -> tuple[str, ...]:
        return (self.name,)

    @property
    def size(self) -> int:
        return len(self.words)

    @property
    def reach(self) -> float:
        return 0.0

    @cached_property
    def _codes(self) -> dict[str, int]:
        return {word_key(self.name, word): code for code, word in enumerate(self.words)}

    def read(self, records: Columns) -> Floats | None:
        column = recorded_words(records, self.name)
        if column is None:
            return None
        codes = [self._codes.get(word_key(self.name, label), np.nan) for label in column.labels]
        return np.array([*codes, np.nan])[column.codes]  # -1, unstated, takes the last place

    def ends(self, codes: Codes) -> tuple[Columns, Columns]:
        same = Columns(len(codes), text={self.name: TextColumn(codes.astype(np.int32), self.words)})
        return same, same

    def weigh(self, seen: Floats, stride: int) -> tuple[Codes, NDArray[np.bool_] | None]:
        served = seen == seen
        if served.all():
            return seen.astype(np.int64) * stride, None
        return np.where(served, np.nan_to_num(seen).astype(np.int64) * stride, MISSED), None

    def closeness(self, seen: Floats, codes: Codes) -> Floats:
        return np.asarray(np.where(seen == codes, 0.0, np.inf))

    def coordinates(self, seen: Floats) -> tuple[Floats, ...]:
        return (seen,) if self.size > 1 else ()

    def required_coordinates(self, codes: Codes) -> tuple[Floats, ...]:
        return self.coordinates(codes.astype(np.float64))
