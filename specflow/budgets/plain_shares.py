"""Sharing where figures add as they are: gains and losses in dB, plain amounts."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.allotment import Allotment, open_allotment
from specflow.budgets.allowed import Ends, worst_corner
from specflow.budgets.figures import of_elements
from specflow.budgets.inverse_figures import line_value
from specflow.budgets.probe import Probe, Target
from specflow.budgets.ranges import value_at
from specflow.units import Kind, converter, parse_unit

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class _Side:
    """What is left towards one side of a limit, in the unit of the law: ``left`` (n,), ``sign`` +1 upwards."""

    left: Floats
    sign: int


def share_plainly(
    probe: Probe,
    target: Target,
    numbers: Sequence[int],
    ends: list[Ends | None],
    way: str,
    *,
    by_conditions: bool = False,
) -> tuple[list[Allotment], list[str]]:
    """Share a limit on a plain sum over lines.

    Losses or amounts of one sign share the limit itself, equally or in proportion. Gains and losses together, or a
    level with them, share the margin that their figures leave: equal parts of it, or parts in proportion to their
    amounts. The other lines stand at the worst of their ``ends``. A side that the limit leaves open keeps the
    tolerance of a line. One number for all places starts from the least (or most) figure of each line and shares what
    these leave where the limit asks most; ``by_conditions`` shares at each place by itself.
    """
    for number in numbers:
        ends[number] = None
    now = np.array([_amount(probe, number) for number in numbers])
    weights, starts = _weights(probe, numbers, now, way)
    sides = [_side(probe, target, ends, sign) for sign in (-1, +1)]
    bounds = [_bounds(side, starts, weights, by_conditions=by_conditions) for side in sides]
    words = f"{way} share of {target.name}"
    found = [
        _allotment(probe, number, low, high, words)
        for number, low, high in zip(numbers, bounds[0], bounds[1], strict=True)
    ]
    side = sides[0] if np.isfinite(sides[0].left).any() else sides[1]
    place = _hardest(side, starts)
    return found, [_binding(probe, number, place, target) for number in numbers]


def _hardest(side: _Side, starts: Floats) -> int:
    """Return the place where a side asks most of the sum of the shared lines."""
    return int(np.argmin((starts.sum(axis=0) + side.sign * side.left) * side.sign))


def _bounds(side: _Side, starts: Floats, weights: Floats, *, by_conditions: bool) -> Floats:
    """Return what each line may come to towards one side (lines, n), infinite where that side is open."""
    if not np.isfinite(side.left).any():
        return np.full_like(starts, side.sign * np.inf)
    if by_conditions:
        return np.asarray(starts + side.sign * side.left * weights)
    place = _hardest(side, starts)
    asked = float(starts[:, place].sum() + side.sign * side.left[place])
    worst = starts.max(axis=1) if side.sign > 0 else starts.min(axis=1)
    whole = worst + (asked - worst.sum()) * weights[:, place]
    return np.repeat(whole[:, None], starts.shape[1], axis=1)


def _amount(probe: Probe, number: int) -> Floats:
    read = probe.chain.lines[number]
    figure = np.broadcast_to(read.figure(read.values), (probe.size,))
    factor, offset = _factor(probe, number)
    return np.asarray(factor * figure + offset)


def _factor(probe: Probe, number: int) -> tuple[float, float]:
    read = probe.chain.lines[number]
    return of_elements(probe.chain, read) if read.role.figure == "amount" else (1.0, 0.0)


def _side(probe: Probe, target: Target, ends: list[Ends | None], sign: int) -> _Side:
    """Return what is left towards one side of the limit less the reserve, +inf where nothing is asked."""
    bar = target.bar
    limit = bar.upper if sign > 0 else bar.lower
    asked = np.isfinite(limit) & bar.required
    if not asked.any():
        return _Side(np.full(probe.size, np.inf), sign)
    bound = np.where(asked, limit - sign * bar.reserve, 0.0)
    if not bar.convert.is_identity:
        parameter = probe.dictionary.get(target.output.parameter)
        factor = parameter.log_factor if parameter is not None else None
        bound = converter(bar.convert.target, bar.convert.source, log_factor=factor)(bound)
    result = value_at(probe.chain, target.output, worst_corner(probe, target, ends).values)
    return _Side(np.where(asked, sign * (bound - result), np.inf), sign)


def _weights(probe: Probe, numbers: Sequence[int], now: Floats, way: str) -> tuple[Floats, Floats]:
    """Return the part of what is left that each line gets, and from which figure it counts, both (lines, n)."""
    sizes = np.abs(now)
    whole = sizes.sum(axis=0)
    even = np.full_like(now, 1.0 / len(numbers))
    if way == "proportional":
        return np.where(whole > 0, sizes / np.where(whole > 0, whole, 1.0), even), now
    plain = all(_is_difference(probe, number) for number in numbers)
    one_sign = bool((now >= 0).all() or (now <= 0).all())
    level = plain and one_sign and _is_sum(probe, numbers)
    return even, np.broadcast_to(now.mean(axis=0), now.shape) if level else now


def _is_difference(probe: Probe, number: int) -> bool:
    unit = parse_unit(probe.chain.lines[number].role.unit)
    return not unit.is_log or unit.kind is Kind.RATIO


def _is_sum(probe: Probe, numbers: Sequence[int]) -> bool:
    return all(probe.chain.lines[number].role.figure == "amount" for number in numbers)


def _allotment(probe: Probe, number: int, low: Floats, high: Floats, words: str) -> Allotment:
    """Return what a line may be from what it may come to in the sum.

    An open side keeps the line's tolerance, and where the share is harder than the estimate its whole width: a window
    narrower than that no block could be built into.
    """
    read = probe.chain.lines[number]
    factor, offset = _factor(probe, number)
    sides = [
        np.where(
            np.isfinite(value), line_value(read, (_known(value) - offset) / factor, probe.dictionary), value
        )
        for value in (low, high)
    ]
    if read.role.form.rises < 0:
        sides = [np.where(np.isfinite(one), one, -one) for one in reversed(sides)]
    bottom, top = sides
    values, tolerance = read.values, read.line.tolerance
    if tolerance is not None:
        width = tolerance.minus + tolerance.plus
        upmost = np.maximum(float(np.max(values)) + tolerance.plus, bottom + width)
        lowest = np.minimum(float(np.min(values)) - tolerance.minus, top - width)
        top, bottom = np.where(np.isposinf(top), upmost, top), np.where(np.isneginf(bottom), lowest, bottom)
    return open_allotment(read, words, is_shared=True).by_place(bottom, top)


def _known(value: Floats) -> Floats:
    return np.where(np.isfinite(value), value, 0.0)


def _binding(probe: Probe, number: int, place: int, target: Target) -> str:
    read = probe.chain.lines[number]
    return f"{read.line.block} {read.line.parameter}: {target.name} at {probe.words(place)}"
