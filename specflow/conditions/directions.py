"""Directions on the sphere: two angles that are compared as one.

A direction is held as a unit vector, so that θ -45°, φ 180° *is* θ 45°, φ 0°, and at boresight φ is free. The
angle between two directions is 2·asin(|u - v| / 2), which keeps its accuracy for small angles where acos(u·v)
loses it.

Conventions. theta/phi: θ from the pole (boresight), φ about it. azimuth/elevation: elevation from the equator
towards the pole, azimuth about the pole. The two are different frames: they are never converted into one
another here.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.axes import EXACT_SLACK, MISSED, Codes, Extent, Floats
from specflow.conditions.dictionary import DirectionPair
from specflow.conditions.recorded import recorded_numbers
from specflow.conditions.search import nearest_values
from specflow.model.columns import Columns

ANGLE_UNIT = "deg"
_TURNED = 1e-6  # weight of the stated turn, far below any angle that matters
_FEW = 24  # directions up to which comparing with each is faster than searching


def direction_vectors(pair: DirectionPair, polar: Floats, turn: Floats) -> Floats:
    """Return unit vectors (n, 3) of directions in degrees; at the poles the turn may be unstated (NaN)."""
    theta = 90.0 - polar if pair.polar_from_equator else polar
    across, up = np.sin(np.radians(theta)), np.cos(np.radians(theta))
    free = np.abs(across) < 1e-12
    about = np.radians(np.where(free, 0.0, turn))
    return np.stack([across * np.cos(about), across * np.sin(about), up], axis=-1)


def angles_between(first: Floats, second: Floats) -> Floats:
    """Return the angle in degrees between unit vectors (..., 3)."""
    chord = np.sqrt(np.sum((first - second) ** 2, axis=-1))
    return np.asarray(np.degrees(2 * np.arcsin(np.minimum(chord / 2, 1.0))))


def folded(vectors: Floats) -> tuple[Floats, Floats]:
    """Return θ in 0..180° and φ in -180..180° of unit vectors."""
    across = np.hypot(vectors[:, 0], vectors[:, 1])
    return np.degrees(np.arctan2(across, vectors[:, 2])), np.degrees(np.arctan2(vectors[:, 1], vectors[:, 0]))


def wrapped(angles: Floats, centre: float) -> Floats:
    """Return angles within half a turn of ``centre``, in degrees."""
    return np.asarray(np.mod(angles - centre + 180.0, 360.0) - 180.0 + centre)


def _recorded(records: Columns, pair: DirectionPair) -> tuple[Floats, Floats] | None:
    polar = recorded_numbers(records, pair.polar, ANGLE_UNIT)
    if polar is None:
        return None
    turn = recorded_numbers(records, pair.turn, ANGLE_UNIT)
    return polar, np.full(records.size, np.nan) if turn is None else turn


@dataclass(frozen=True, eq=False)
class DirectionAxis:
    """Required directions: ``vectors`` (m, 3), ``polar`` and ``turn`` (m,) as typed, served within
    ``tolerance``.
    """

    pair: DirectionPair
    polar: Floats
    turn: Floats
    tolerance: float

    @property
    def names(self) -> tuple[str, ...]:
        return self.pair.polar, self.pair.turn

    @property
    def size(self) -> int:
        return len(self.polar)

    @cached_property
    def vectors(self) -> Floats:
        return direction_vectors(self.pair, self.polar, self.turn)

    @property
    def allowed(self) -> float:
        """The largest angle in degrees, rounding slack included."""
        return self.tolerance * (1 + EXACT_SLACK) + 1e-9

    @property
    def reach(self) -> float:
        return float(2 * np.sin(np.radians(min(self.allowed, 180.0)) / 2))

    def read(self, records: Columns) -> Floats | None:
        stated = _recorded(records, self.pair)
        return None if stated is None else direction_vectors(self.pair, *stated)

    def ends(self, codes: Codes) -> tuple[Columns, Columns]:
        values = {self.pair.polar: self.polar[codes], self.pair.turn: self.turn[codes]}
        same = Columns(len(codes), values, units=dict.fromkeys(values, ANGLE_UNIT))
        return same, same

    def weigh(self, seen: Floats, stride: int) -> tuple[Codes, NDArray[np.bool_] | None]:
        codes, crowded = self._nearest(seen)
        return np.where(codes < 0, MISSED, codes * stride), crowded

    def _nearest(self, seen: Floats) -> tuple[Codes, NDArray[np.bool_]]:
        if self.size > _FEW:
            return nearest_values(self, seen)
        angles = np.stack([angles_between(seen, vector) for vector in self.vectors], axis=-1)
        served = angles <= self.allowed
        count = served.sum(axis=-1)
        nearest = np.where(served, angles, np.inf).argmin(axis=-1)
        return np.where(count > 0, nearest, -1).astype(np.int64), count > 1

    def closeness(self, seen: Floats, codes: Codes) -> Floats:
        angles = angles_between(seen, self.vectors[codes])
        return np.asarray(np.where(angles <= self.allowed, angles / self.allowed, np.inf))

    def coordinates(self, seen: Floats) -> tuple[Floats, ...]:
        return seen[:, 0], seen[:, 1], seen[:, 2]

    def required_coordinates(self, codes: Codes) -> tuple[Floats, ...]:
        return self.coordinates(self.vectors[codes])


@dataclass(frozen=True, eq=False)
class CutAxis:
    """Cuts through the sphere: a range of one angle at required values (m,) of the other.

    A range of the polar angle runs along the great circle at each required turn (θ -60° to 60° at φ 0° goes
    through boresight); a range of the turn runs around the cone at each required polar angle. ``at`` are the
    required values of the other angle; a record serves the cut from which it is off by no more than
    ``tolerance``.
    """

    pair: DirectionPair
    at: Floats
    tolerance: float
    extent: Extent
    around: bool

    @property
    def names(self) -> tuple[str, ...]:
        return self.pair.polar, self.pair.turn

    @property
    def size(self) -> int:
        return len(self.at)

    @property
    def reach(self) -> float:
        return np.inf

    @property
    def allowed(self) -> float:
        """The largest angle off the cut in degrees, rounding slack included."""
        return self.tolerance * (1 + EXACT_SLACK) + 1e-9

    def read(self, records: Columns) -> Floats | None:
        """Return (n, 4): the unit vector and the stated turn."""
        stated = _recorded(records, self.pair)
        if stated is None:
            return None
        return np.column_stack([direction_vectors(self.pair, *stated), stated[1]])

    def ends(self, codes: Codes) -> tuple[Columns, Columns]:
        ranged, fixed = (
            (self.pair.turn, self.pair.polar) if self.around else (self.pair.polar, self.pair.turn)
        )
        units = {ranged: ANGLE_UNIT, fixed: ANGLE_UNIT}
        low, high = (
            Columns(len(codes), {ranged: np.full(len(codes), end), fixed: self.at[codes]}, units=units)
            for end in (self.extent.low, self.extent.high)
        )
        return low, high

    def weigh(self, seen: Floats, stride: int) -> tuple[Codes, NDArray[np.bool_] | None]:
        best = np.full(len(seen), np.inf)
        codes = np.full(len(seen), -1, np.int64)
        count = np.zeros(len(seen), np.int64)
        for code in range(self.size):
            distance = self.closeness(seen, np.full(len(seen), code))
            nearer = distance < best
            codes[nearer], best[nearer] = code, distance[nearer]
            count += np.isfinite(distance)
        return np.where(codes < 0, MISSED, codes * stride), (count > 1) & (best > _TURNED)

    def _turned_away(self, seen: Floats, codes: Codes) -> Floats:
        """Return 0..1: how far the stated turn is from that of a cut; 1 where nothing is stated."""
        if self.around:
            return np.zeros(len(seen))
        return np.nan_to_num(np.abs(wrapped(seen[:, 3] - self.at[codes], 0.0)) / 180.0, nan=1.0)

    def closeness(self, seen: Floats, codes: Codes) -> Floats:
        off = np.abs(self._off(seen, codes))
        along = self.along(seen, codes)
        low, high = self.extent.low - self.allowed, self.extent.high + self.allowed
        inside = (off <= self.allowed) & (along >= low) & (along <= high)
        # At boresight all cuts are equally near: the turn that was stated says on which one it was recorded.
        return np.asarray(
            np.where(inside, off / self.allowed + _TURNED * self._turned_away(seen, codes), np.inf)
        )

    def along(self, seen: Floats, codes: Codes) -> Floats:
        """Return where on the cut each direction lies, in degrees of the angle that is the range."""
        centre = (self.extent.low + self.extent.high) / 2
        if self.around:
            return wrapped(folded(seen)[1], centre)
        turn = np.radians(self.at[codes])
        outward = seen[:, 0] * np.cos(turn) + seen[:, 1] * np.sin(turn)
        theta = np.degrees(np.arctan2(outward, seen[:, 2]))
        return wrapped(90.0 - theta if self.pair.polar_from_equator else theta, centre)

    def _off(self, seen: Floats, codes: Codes) -> Floats:
        if self.around:
            theta = folded(seen)[0]
            return np.asarray((90.0 - theta if self.pair.polar_from_equator else theta) - self.at[codes])
        turn = np.radians(self.at[codes])
        return np.degrees(
            np.arcsin(np.clip(seen[:, 1] * np.cos(turn) - seen[:, 0] * np.sin(turn), -1.0, 1.0))
        )

    def coordinates(self, seen: Floats) -> tuple[Floats, ...]:
        return ()

    def required_coordinates(self, codes: Codes) -> tuple[Floats, ...]:
        return ()
