"""Expanding a conditions set into required points."""

from __future__ import annotations

import weakref
from dataclasses import dataclass
from math import prod
from typing import Any

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.axes import Axis
from specflow.conditions.build import axis_columns, listed_axes, single_axis
from specflow.conditions.dimensions import direction_pair
from specflow.conditions.exclusions import excluded_points
from specflow.conditions.points import Points
from specflow.errors import ConditionsError
from specflow.model.conditions import Combination, ConditionsSet, Dimension, MatchingRule, Need

MOST_POINTS = 1_000_000


@dataclass(frozen=True, slots=True)
class Slot:
    """Axes that vary together: ``codes`` (axes, rows) are the rows of a list, or one axis by itself."""

    axes: tuple[Axis, ...]
    codes: NDArray[np.int64]


def expand(conditions: ConditionsSet, *, most: int = MOST_POINTS) -> Points:
    """Expand a set into its required points, in the order of its dimensions with the last one fastest.

    A dimension that is a range stays a range: each combination of the others with it is one point. Only one dimension
    may be a range, because ends and gaps are defined along a line; a second one is refused.

    ConditionsError, before anything is allocated, when there would be more than ``most`` points; it names the factors.
    """
    _refuse_too_many(conditions, most)
    _refuse_two_ranges(conditions)
    slots = [_slot(conditions, group) for group in _groups(conditions)]
    axes = tuple(axis for slot in slots for axis in slot.axes)
    shape = [slot.codes.shape[1] for slot in slots]
    rows = np.indices(shape).reshape(len(slots), prod(shape)) if slots else np.zeros((0, 1), np.int64)
    codes = _codes(slots, rows)
    low, high = axis_columns(axes, codes)
    if conditions.exclusions:
        taken, counts = excluded_points(conditions, low)
        kept = np.flatnonzero(~taken)
        codes, low, high = codes[:, kept], low.take(kept), high.take(kept)
    else:
        counts = ()
    if codes.shape[1] == 0:
        raise ConditionsError("the exclusions leave no point to prove", where=str(conditions.id))
    return Points(conditions, codes.shape[1], axes, codes, low, high, _steps(conditions), counts)


_compiled: dict[int, tuple[weakref.ref[ConditionsSet], Points]] = {}


def compile_points(conditions: ConditionsSet) -> Points:
    """Return the expanded set, expanded once for each document object (documents are frozen)."""
    known = _compiled.get(id(conditions))
    if known is not None and known[0]() is conditions:
        return known[1]
    points = expand(conditions.model_copy())  # a copy: the points must not keep alive what they are kept for
    key = id(conditions)

    def forget(_: weakref.ref[ConditionsSet], known: dict[int, Any] = _compiled) -> None:
        known.pop(key, None)

    _compiled[key] = (weakref.ref(conditions, forget), points)
    return points


def point_count(conditions: ConditionsSet) -> int:
    """Return how many combinations the set asks for, before exclusions and merged directions."""
    return prod(count for _, count in _factors(conditions))


def _required(conditions: ConditionsSet) -> list[Dimension]:
    return [one for one in conditions.dimensions if one.need is Need.REQUIRED]


def _value_count(conditions: ConditionsSet, dimension: Dimension) -> int:
    corners = conditions.combination is Combination.CORNERS
    if dimension.span is not None:
        return 2 if corners and dimension.rule is not MatchingRule.ANYWHERE else 1
    if dimension.words:
        return len(dict.fromkeys(dimension.words))
    count = len(dict.fromkeys(dimension.values))
    return min(count, 2) if corners else count


def _factors(conditions: ConditionsSet) -> list[tuple[str, int]]:
    """Return the names and counts whose product is the number of combinations."""
    factors: list[tuple[str, int]] = []
    listed = [one for one in _required(conditions) if conditions.is_listed(one)]
    if listed:
        factors.append(("listed rows", max(len(one.values) or len(one.words) for one in listed)))
    for dimension in _required(conditions):
        if not conditions.is_listed(dimension):
            factors.append((dimension.name, _value_count(conditions, dimension)))
    return factors


def _refuse_too_many(conditions: ConditionsSet, most: int) -> None:
    factors = _factors(conditions)
    count = prod(number for _, number in factors)
    if count > most:
        several = [(name, number) for name, number in factors if number > 1]
        sizes = " × ".join(f"{number:,}" for _, number in several)
        names = ", ".join(f"{name} {number:,}" for name, number in several)
        raise ConditionsError(
            f"the set expands to {sizes} = {count:,} points, more than {most:,} ({names})",
            where=str(conditions.id),
            hint="list fewer values, turn a sweep into a range with a step, or combine as corners or listed rows",
        )


def _refuse_two_ranges(conditions: ConditionsSet) -> None:
    ranges = list(_steps(conditions))
    if len(ranges) > 1:
        raise ConditionsError(
            f"{' and '.join(ranges)} are both ranges, and a range is proved along one dimension only",
            where=str(conditions.id),
            hint="keep one of them as a range and list the required values of the other",
        )


def _steps(conditions: ConditionsSet) -> dict[str, float]:
    spans = {one.name: one.span for one in _required(conditions) if one.rule is not MatchingRule.ANYWHERE}
    return {name: span.step for name, span in spans.items() if span is not None and span.step is not None}


def _groups(conditions: ConditionsSet) -> list[tuple[Dimension, ...]]:
    """Return the dimensions in the groups that vary together: rows of a list, directions, the others alone."""
    present = {one.name: one for one in _required(conditions)}
    groups: list[tuple[Dimension, ...]] = []
    done: set[str] = set()
    for dimension in present.values():
        if dimension.name in done:
            continue
        group = _direction(dimension, present) or (dimension,)
        if len({conditions.is_listed(one) for one in group}) > 1:
            names = " and ".join(one.name for one in group)
            raise ConditionsError(
                f"{names} are one direction: list both row by row, or neither", where=str(conditions.id)
            )
        if conditions.is_listed(dimension):
            group = tuple(one for one in present.values() if conditions.is_listed(one))
        groups.append(group)
        done.update(one.name for one in group)
    return groups


def _direction(dimension: Dimension, present: dict[str, Dimension]) -> tuple[Dimension, ...]:
    pair = direction_pair(dimension.name)
    if pair is None or pair.polar not in present or pair.turn not in present:
        return ()
    return present[pair.polar], present[pair.turn]


def _slot(conditions: ConditionsSet, group: tuple[Dimension, ...]) -> Slot:
    if conditions.is_listed(group[0]):
        axes, codes = listed_axes(conditions, group)
        return Slot(axes, codes)
    axis = single_axis(conditions, group)
    return Slot((axis,), np.arange(axis.size, dtype=np.int64)[None, :])


def _codes(slots: list[Slot], rows: NDArray[np.int64]) -> NDArray[np.int64]:
    parts = [slot.codes[:, row] for slot, row in zip(slots, rows, strict=True)]
    return np.concatenate(parts) if parts else np.zeros((0, 1), np.int64)
