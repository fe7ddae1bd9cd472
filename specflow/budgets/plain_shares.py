"""Sharing where figures add as they are: gains and losses in dB, plain amounts."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.allotment import Allotment
from specflow.budgets.allowed import Ends, worst_corner
from specflow.budgets.figures import of_elements
from specflow.budgets.inverse_figures import line_value
from specflow.budgets.probe import Probe, Target
from specflow.budgets.ranges import value_at
from specflow.units import Kind, parse_unit

Floats = NDArray[np.float64]


def share_plainly(
    probe: Probe, target: Target, numbers: Sequence[int], ends: list[Ends | None], way: str
) -> tuple[list[Allotment], list[str]]:
    """Share a limit on a plain sum over lines.

    Losses or amounts of one sign share the limit itself, equally or in proportion. Gains and losses together, or a
    level with them, share the margin that their figures leave: equal parts of it, or parts in proportion to their
    amounts. The other lines stand at the worst of their ``ends``. A side that the limit leaves open keeps the
    tolerance of a line.
    """
    for number in numbers:
        ends[number] = None
    now = np.array([_amount(probe, number) for number in numbers])
    lower, upper = _margin(probe, target, ends, -1), _margin(probe, target, ends, +1)
    found, said = [], []
    for index, number in enumerate(numbers):
        weight, start = _weight(probe, numbers, now, index, way)
        low = np.full(probe.size, -np.inf) if lower is None else start - lower * weight
        high = np.full(probe.size, np.inf) if upper is None else start + upper * weight
        found.append(_allotment(probe, number, low, high, f"{way} share of {target.name}"))
        said.append(_binding(probe, number, low if lower is not None else high, lower is not None, target))
    return found, said


def _amount(probe: Probe, number: int) -> Floats:
    read = probe.chain.lines[number]
    figure = np.broadcast_to(read.figure(read.values), (probe.size,))
    factor, offset = _factor(probe, number)
    return np.asarray(factor * figure + offset)


def _factor(probe: Probe, number: int) -> tuple[float, float]:
    read = probe.chain.lines[number]
    return of_elements(probe.chain, read) if read.role.figure == "amount" else (1.0, 0.0)


def _margin(probe: Probe, target: Target, ends: list[Ends | None], side: int) -> Floats | None:
    """Return what is left (n,) towards one side of the limit, in the unit of the law; None where that side is open."""
    bar = target.bar
    limit = bar.upper if side > 0 else bar.lower
    if not (np.isfinite(limit) & bar.required).any():
        return None
    corner = worst_corner(probe, target, ends)
    result = value_at(probe.chain, target.output, corner.values)
    shown = result if bar.convert.is_identity else bar.convert(result)
    left = (limit - shown if side > 0 else shown - limit) - bar.reserve
    return np.where(np.isfinite(left) & bar.required, left, np.inf)


def _weight(probe: Probe, numbers: Sequence[int], now: Floats, index: int, way: str) -> tuple[Floats, Floats]:
    """Return the part of the margin (n,) that a line gets, and from which figure (n,) it counts."""
    sizes = np.abs(now)
    whole = sizes.sum(axis=0)
    if way == "proportional":
        weight = np.where(whole > 0, sizes[index] / np.where(whole > 0, whole, 1.0), 1.0 / len(numbers))
        return weight, np.asarray(now[index])
    plain = all(_is_difference(probe, number) for number in numbers)
    one_sign = bool((now >= 0).all() or (now <= 0).all())
    level = now.mean(axis=0) if plain and one_sign and _is_sum(probe, numbers) else now[index]
    return np.full(probe.size, 1.0 / len(numbers)), np.asarray(level)


def _is_difference(probe: Probe, number: int) -> bool:
    unit = parse_unit(probe.chain.lines[number].role.unit)
    return not unit.is_log or unit.kind is Kind.RATIO


def _is_sum(probe: Probe, numbers: Sequence[int]) -> bool:
    return all(probe.chain.lines[number].role.figure == "amount" for number in numbers)


def _allotment(probe: Probe, number: int, low: Floats, high: Floats, words: str) -> Allotment:
    read = probe.chain.lines[number]
    factor, offset = _factor(probe, number)
    bottom, top = (
        float(line_value(read, np.array([(value - offset) / factor]), probe.dictionary)[0])
        if math.isfinite(value)
        else value * read.role.form.rises
        for value in (float(np.max(low)), float(np.min(high)))
    )
    if read.role.form.rises < 0:
        bottom, top = top, bottom
    tolerance = read.line.tolerance
    if tolerance is not None and math.isinf(top):
        top = max(float(np.max(read.values)) + tolerance.plus, bottom)
    if tolerance is not None and math.isinf(bottom):
        bottom = min(float(np.min(read.values)) - tolerance.minus, top)
    line, values = read.line, read.values
    return Allotment(
        line.block,
        line.parameter,
        line.unit,
        bottom,
        top,
        True,
        float(values.min()),
        float(values.max()),
        words,
    )


def _binding(probe: Probe, number: int, bound: Floats, is_lower: bool, target: Target) -> str:
    place = int(np.argmax(bound) if is_lower else np.argmin(bound))
    read = probe.chain.lines[number]
    return f"{read.line.block} {read.line.parameter}: {target.name} at {probe.words(place)}"
