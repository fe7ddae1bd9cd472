"""The worst corner of bounds on lines: every line at the end of what it is allowed that hurts a limit most."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain
from specflow.budgets.probe import Changes, Probe, Target
from specflow.budgets.ranges import slopes_at, value_at

Floats = NDArray[np.float64]
Signs = NDArray[np.int8]
Ends = tuple[Floats, Floats]
_MOST_PASSES = 6
_FLAT = 1e-9


@dataclass(frozen=True, slots=True, eq=False)
class Corner:
    """A limit with every line at its worst allowed bound.

    ``margin`` (n,), NaN where nothing is required. ``signs`` (lines, n): which end each line stands at, of the side of
    the limit that is worse there. ``open_low``, ``open_high`` (lines,): lines whose worst bound on that side is missing
    and matters somewhere; they stand at their figure. ``values`` are what all lines came to.
    """

    target: Target
    margin: Floats
    signs: Signs
    open_low: NDArray[np.bool_]
    open_high: NDArray[np.bool_]
    values: tuple[Floats, ...]

    @property
    def worst(self) -> int:
        """The place with the smallest margin, -1 where there is none."""
        known = np.flatnonzero(~np.isnan(self.margin))
        return int(known[np.argmin(self.margin[known])]) if len(known) else -1


def worst_corner(
    probe: Probe, target: Target, ends: Sequence[Ends | None], changes: Changes | None = None
) -> Corner:
    """Return a limit at the worst corner.

    ``ends`` gives for each line its lowest and highest allowed value in its own unit, ±inf where that side has no
    bound, None where the line stands at its value. ``changes`` are other values of lines.
    """
    found: Corner | None = None
    for side, limit in ((1, target.bar.upper), (-1, target.bar.lower)):
        if np.isfinite(limit).any():
            corner = _to_side(probe, target, ends, changes or {}, side)
            found = corner if found is None else _worse(found, corner)
    assert found is not None  # a bar has at least one finite side, see ``margins``
    return found


def _to_side(
    probe: Probe, target: Target, ends: Sequence[Ends | None], changes: Changes, side: int
) -> Corner:
    chain, values = probe.at(changes)
    start = list(values)
    signs = np.zeros((len(chain.lines), chain.size), np.int8)
    for _ in range(_MOST_PASSES):
        slopes = slopes_at(chain, target.output, values)
        found = np.where(np.abs(slopes) > _FLAT, np.sign(slopes * side), 0).astype(np.int8)
        found = np.where(found == 0, signs, found)
        if np.array_equal(found, signs):
            break
        signs = found
        values = _at_ends(start, ends, signs)
        if probe.is_driven:
            chain, values = _driven(probe, chain, start, values, changes)
    opened = _open(ends, signs, target, side)
    margin = target.bar.margin(value_at(chain, target.output, values))
    return Corner(target, margin, signs, *opened, tuple(values))


def _driven(
    probe: Probe, chain: Chain, start: Sequence[Floats], values: list[Floats], changes: Changes
) -> tuple[Chain, list[Floats]]:
    """Read the budget again where gains moved: levels, and what depends on them, move too."""
    moved = {number: values[number] for number, one in enumerate(values) if one is not start[number]}
    return probe.at({**changes, **moved})


def _at_ends(start: Sequence[Floats], ends: Sequence[Ends | None], signs: Signs) -> list[Floats]:
    values = []
    for value, bounds, sign in zip(start, ends, signs, strict=True):
        if bounds is None:
            values.append(value)
            continue
        low, high = bounds
        wanted = np.where(sign > 0, high, np.where(sign < 0, low, value))
        values.append(np.where(np.isfinite(wanted), wanted, value))
    return values


def _open(
    ends: Sequence[Ends | None], signs: Signs, target: Target, side: int
) -> tuple[NDArray[np.bool_], NDArray[np.bool_]]:
    """Return which lines lack the bound, on the low and on the high side, that the worst corner asks for."""
    limit = target.bar.upper if side > 0 else target.bar.lower
    matters = target.bar.required & np.isfinite(limit)
    low = np.zeros(len(ends), bool)
    high = np.zeros(len(ends), bool)
    for number, bounds in enumerate(ends):
        if bounds is not None:
            low[number] = bool((np.isneginf(bounds[0]) & (signs[number] < 0) & matters).any())
            high[number] = bool((np.isposinf(bounds[1]) & (signs[number] > 0) & matters).any())
    return low, high


def _worse(first: Corner, second: Corner) -> Corner:
    """Join the two sides of a limit: at each place the side that leaves less."""
    take = np.nan_to_num(second.margin, nan=np.inf) < np.nan_to_num(first.margin, nan=np.inf)
    values = tuple(np.where(take, two, one) for one, two in zip(first.values, second.values, strict=True))
    return Corner(
        first.target,
        np.where(take, second.margin, first.margin),
        np.where(take, second.signs, first.signs),
        first.open_low | second.open_low,
        first.open_high | second.open_high,
        values,
    )
