"""Allotments: what a block may have of one parameter, before it becomes a requirement."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from decimal import ROUND_CEILING, ROUND_FLOOR, Decimal

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.allowed import Ends
from specflow.budgets.chain import ReadLine
from specflow.budgets.probe import Probe
from specflow.budgets.ranges import slopes_at
from specflow.budgets.spread import bounds, moves
from specflow.errors import InfeasibleError
from specflow.model.base import code_key
from specflow.units import parse_unit

Floats = NDArray[np.float64]
BlockParameter = tuple[str, str]
"""The keys of a block and of a parameter."""
_FLAT = 1e-9
_DECIBEL_STEP = Decimal("0.01")
_DIGITS = 4


@dataclass(frozen=True, slots=True)
class Allotment:
    """What one block may have of one parameter, from ``low`` to ``high`` in ``unit``; ±inf where a side is open.

    ``is_shared``: it is a share of what a limit leaves; else it is what the block takes first: its figure and its
    tolerance, or (``is_kept``) the requirement that its block has already. ``least`` and ``most`` are the figures that
    the budget has now. ``words`` say where it comes from.
    """

    block: str
    parameter: str
    unit: str
    low: float
    high: float
    is_shared: bool
    least: float
    most: float
    words: str
    is_kept: bool = False

    @property
    def key(self) -> BlockParameter:
        """What it is looked up by."""
        return code_key(self.block), code_key(self.parameter)

    @property
    def is_open(self) -> bool:
        """Whether it bounds nothing."""
        return math.isinf(self.low) and math.isinf(self.high)


def key_of(read: ReadLine) -> BlockParameter:
    """Return the block and parameter of a line."""
    return code_key(read.line.block), code_key(read.line.parameter)


def joined(allotments: Iterable[Allotment], where: str) -> list[Allotment]:
    """Return one allotment a block and parameter: where a block stands in several places, or serves several limits,
    the narrowest. InfeasibleError where nothing is left between the two sides.
    """
    found: dict[BlockParameter, Allotment] = {}
    for one in allotments:
        known = found.get(one.key)
        found[one.key] = one if known is None else _narrower(known, one)
    for one in found.values():
        if one.low > one.high:
            raise InfeasibleError(
                f"{one.block} {one.parameter} would have to be at least {one.low:.4g} and at most {one.high:.4g} "
                f"{one.unit}: infeasible, and short by {one.low - one.high:.3g}",
                where=where,
                hint="its figure differs more from one condition to another than the limits leave; relax one of them",
            )
    return list(found.values())


def _narrower(first: Allotment, second: Allotment) -> Allotment:
    governing = second if second.low > first.low or second.high < first.high else first
    return replace(
        governing,
        low=max(first.low, second.low),
        high=min(first.high, second.high),
        is_shared=first.is_shared or second.is_shared,
        least=min(first.least, second.least),
        most=max(first.most, second.most),
    )


def rounded_safely(one: Allotment) -> Allotment:
    """Round both sides inwards, so that a limit of few digits never allows more: 0.01 dB, or four digits."""
    return replace(one, low=_rounded(one.low, one.unit, up=True), high=_rounded(one.high, one.unit, up=False))


def rounded_widely(one: Allotment) -> Allotment:
    """Round both sides outwards: for what a block takes first, which the shares then have to leave room for."""
    return replace(one, low=_rounded(one.low, one.unit, up=False), high=_rounded(one.high, one.unit, up=True))


def _rounded(value: float, unit: str, *, up: bool) -> float:
    if math.isinf(value) or value == 0:
        return value
    exact = Decimal(repr(round(value, 9)))
    step = _DECIBEL_STEP if parse_unit(unit).is_log else Decimal(10) ** (exact.adjusted() - _DIGITS + 1)
    count = (exact / step).to_integral_value(ROUND_CEILING if up else ROUND_FLOOR)
    return float(count * step)


def sides_that_matter(probe: Probe) -> NDArray[np.bool_]:
    """Return for each line (lines, 2) whether a lower and whether a higher value hurts some limit somewhere."""
    chain = probe.chain
    matters = np.zeros((len(chain.lines), 2), bool)
    for target in probe.targets:
        slopes = slopes_at(chain, target.output, chain.nominal())
        for sign, limit in ((1, target.bar.upper), (-1, target.bar.lower)):
            places = target.bar.required & np.isfinite(limit)
            toward = slopes[:, places] * sign
            matters[:, 0] |= (toward < -_FLAT).any(axis=1)
            matters[:, 1] |= (toward > _FLAT).any(axis=1)
    return matters


def taken_first(probe: Probe, numbers: Sequence[int]) -> tuple[list[Allotment], list[str]]:
    """Return what lines take first, and notes on those that nothing bounds.

    A line with a tolerance takes its figure with it, from the least to the most of all places, on the sides that hurt.
    One without takes its figure as a limit where only one side hurts; where both do it is taken as exact, and said.
    A figure that follows conditions by more than its tolerance gets no limit of one number.
    """
    matters = sides_that_matter(probe)
    found: list[Allotment] = []
    notes: list[str] = []
    for number in numbers:
        read = probe.chain.lines[number]
        if read.role.figure == "source_k":
            continue
        low_hurts, high_hurts = matters[number]
        tolerance = read.line.tolerance
        width = 0.0 if tolerance is None else tolerance.minus + tolerance.plus
        if float(np.ptp(read.values)) > width and (low_hurts or high_hurts):
            notes.append(
                f"{read.line.place} differs more between conditions than its tolerance: it is taken as it is at each, "
                "and no single limit is proposed"
            )
            continue
        if moves(read.line):
            ends = bounds(read)
            low = float(ends[0].min()) if low_hurts else -math.inf
            high = float(ends[1].max()) if high_hurts else math.inf
            found.append(_first(read, low, high, "figure and tolerance"))
            continue
        if low_hurts and high_hurts:
            notes.append(
                f"{read.line.place} states no tolerance and is taken as exact: nothing keeps it on either side"
            )
        elif low_hurts:
            found.append(_first(read, float(read.values.min()), math.inf, "figure"))
        elif high_hurts:
            found.append(_first(read, -math.inf, float(read.values.max()), "figure"))
    return found, notes


def kept_first(
    probe: Probe, numbers: Sequence[int], agreed: Mapping[BlockParameter, Allotment]
) -> dict[BlockParameter, Allotment]:
    """Return the bounds that stand already for lines that are not shared."""
    keys = {key_of(probe.chain.lines[number]) for number in numbers}
    return {key: one for key, one in agreed.items() if key in keys}


def _first(read: ReadLine, low: float, high: float, what: str) -> Allotment:
    values = read.values
    return Allotment(
        read.line.block,
        read.line.parameter,
        read.line.unit,
        low,
        high,
        False,
        float(values.min()),
        float(values.max()),
        f"its {what} in the budget",
    )


def ends_of(
    probe: Probe, allotments: Mapping[BlockParameter, Allotment], *, with_tolerances: bool = False
) -> list[Ends | None]:
    """Return the ends (n,) of every line by its allotment; without one those of its tolerance if asked for, or None."""
    ends: list[Ends | None] = []
    size = probe.size
    for read in probe.chain.lines:
        one = allotments.get(key_of(read))
        if one is not None:
            ends.append((np.full(size, one.low), np.full(size, one.high)))
        elif with_tolerances and moves(read.line):
            low, high = bounds(read)
            ends.append((np.broadcast_to(low, (size,)), np.broadcast_to(high, (size,))))
        else:
            ends.append(None)
    return ends
