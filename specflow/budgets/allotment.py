"""Allotments: what a block may have of one parameter, before it becomes a requirement."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace

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
_DECIMALS = 2  # of decibels
_DIGITS = 4  # of other amounts
_NEAR = 7  # decimals of a count that is whole but for binary noise


@dataclass(frozen=True, slots=True, eq=False)
class Allotment:
    """What one block may have of one parameter, from ``low`` to ``high`` in ``unit``; ±inf where a side is open.

    ``at`` are the same place by place (n,) where they depend on conditions; ``low`` and ``high`` are then the widest.
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
    at: Ends | None = None

    def ends(self, size: int) -> Ends:
        """Return the two sides at each of ``size`` places."""
        if self.at is not None:
            return self.at
        return np.full(size, self.low), np.full(size, self.high)

    def by_place(self, low: Floats, high: Floats) -> Allotment:
        """Return the allotment with sides place by place; one number a side where no place differs."""
        if np.ptp(_finite_of(low)) == 0 and np.ptp(_finite_of(high)) == 0:
            return replace(self, low=float(low[0]), high=float(high[0]), at=None)
        return replace(self, low=float(low.min()), high=float(high.max()), at=(low, high))

    @property
    def key(self) -> BlockParameter:
        """What it is looked up by."""
        return code_key(self.block), code_key(self.parameter)

    @property
    def is_open(self) -> bool:
        """Whether it bounds nothing."""
        return math.isinf(self.low) and math.isinf(self.high)


def _finite_of(side: Floats) -> Floats:
    """Return a side with an open end as a number, so that places compare."""
    return np.where(np.isfinite(side), side, np.sign(side) * 1e300)


def open_allotment(read: ReadLine, words: str, *, is_shared: bool) -> Allotment:
    """Return an allotment of a line that bounds nothing yet."""
    line, least, most = read.line, float(read.values.min()), float(read.values.max())
    return Allotment(
        line.block, line.parameter, line.unit, -math.inf, math.inf, is_shared, least, most, words
    )


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
        low, high = one.ends(1)
        place = int(np.argmax(low - high))
        if low[place] > high[place]:
            raise InfeasibleError(
                f"{one.block} {one.parameter} would have to be at least {low[place]:.4g} and at most "
                f"{high[place]:.4g} {one.unit}: infeasible, and short by {low[place] - high[place]:.3g}",
                where=where,
                hint="its figure differs more from one condition to another than the limits leave; relax one of them",
            )
    return list(found.values())


def _narrower(first: Allotment, second: Allotment) -> Allotment:
    size = max(len(one.at[0]) if one.at is not None else 1 for one in (first, second))
    (low, high), (other_low, other_high) = first.ends(size), second.ends(size)
    is_second = bool((other_low > low).any() or (other_high < high).any())
    governing = replace(
        second if is_second else first,
        is_shared=first.is_shared or second.is_shared,
        least=min(first.least, second.least),
        most=max(first.most, second.most),
    )
    return governing.by_place(np.maximum(low, other_low), np.minimum(high, other_high))


def rounded_safely(one: Allotment) -> Allotment:
    """Round both sides inwards, so that a limit of few digits never allows more: 0.01 dB, or four digits."""
    return _both_rounded(one, inwards=True)


def rounded_widely(one: Allotment) -> Allotment:
    """Round both sides outwards: for what a block takes first, which the shares then have to leave room for."""
    return _both_rounded(one, inwards=False)


def _both_rounded(one: Allotment, *, inwards: bool) -> Allotment:
    low, high = one.ends(1)
    is_log = parse_unit(one.unit).is_log
    return one.by_place(_rounded(low, is_log, up=inwards), _rounded(high, is_log, up=not inwards))


def _rounded(values: Floats, is_log: bool, *, up: bool) -> Floats:
    """Round each value to a step of 0.01, or of its fourth digit: 1.7 stays 1.7, as it would on paper."""
    known = np.isfinite(values) & (values != 0)
    finite = np.where(known, np.round(values, 9), 1.0)
    if is_log:
        digits = np.full(values.shape, _DECIMALS)
    else:
        digits = _DIGITS - 1 - np.floor(np.log10(np.maximum(np.abs(finite), 1e-9))).astype(np.intp)
    scale = 10.0 ** np.abs(digits)
    # Times or divided by a whole power of ten, never by 0.01: the count comes out whole where the decimal is.
    counts = np.where(digits >= 0, finite * scale, finite / scale)
    near = np.round(counts, _NEAR)
    whole = np.ceil(near) if up else np.floor(near)
    return np.where(known, np.where(digits >= 0, whole / scale, whole * scale), values)


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


def taken_first(
    probe: Probe, numbers: Sequence[int], *, by_conditions: bool = False
) -> tuple[list[Allotment], list[str]]:
    """Return what lines take first, and notes on those that nothing bounds.

    A line with a tolerance takes its figure with it, from the least to the most of all places, on the sides that hurt.
    One without takes its figure as a limit where only one side hurts; where both do it is taken as exact, and said.
    A figure that follows conditions by more than its tolerance gets sides that follow them too; ``by_conditions`` any
    that follows them.
    """
    matters = sides_that_matter(probe)
    found: list[Allotment] = []
    notes: list[str] = []
    for number in numbers:
        read = probe.chain.lines[number]
        if read.role.figure == "source_k":
            continue
        low_hurts, high_hurts = matters[number]
        is_exact = not moves(read.line)
        if is_exact and low_hurts and high_hurts:
            notes.append(
                f"{read.line.place} states no tolerance and is taken as exact: nothing keeps it on either side"
            )
        elif low_hurts or high_hurts:
            low, high = (np.broadcast_to(end, (probe.size,)) for end in bounds(read))
            low = low if low_hurts else np.full(probe.size, -math.inf)
            high = high if high_hurts else np.full(probe.size, math.inf)
            what = "figure" if is_exact else "figure and tolerance"
            found.append(_first(read, low, high, what, by_conditions=by_conditions))
    return found, notes


def kept_first(
    probe: Probe, numbers: Sequence[int], agreed: Mapping[BlockParameter, Allotment]
) -> dict[BlockParameter, Allotment]:
    """Return the bounds that stand already for lines that are not shared."""
    keys = {key_of(probe.chain.lines[number]) for number in numbers}
    return {key: one for key, one in agreed.items() if key in keys}


def _first(read: ReadLine, low: Floats, high: Floats, what: str, *, by_conditions: bool) -> Allotment:
    """Return what a line takes first: one number a side, or sides place by place where it moves by more than that."""
    line, values, tolerance = read.line, read.values, read.line.tolerance
    width = 0.0 if tolerance is None else tolerance.minus + tolerance.plus
    least, most = float(values.min()), float(values.max())
    words = f"its {what} in the budget"
    one = Allotment(
        line.block, line.parameter, line.unit, float(low.min()), float(high.max()), False, least, most, words
    )
    return one.by_place(low, high) if by_conditions or most - least > width else one


def ends_of(
    probe: Probe, allotments: Mapping[BlockParameter, Allotment], *, with_tolerances: bool = False
) -> list[Ends | None]:
    """Return the ends (n,) of every line by its allotment; without one those of its tolerance if asked for, or None."""
    ends: list[Ends | None] = []
    size = probe.size
    for read in probe.chain.lines:
        one = allotments.get(key_of(read))
        if one is not None:
            ends.append(one.ends(size))
        elif with_tolerances and moves(read.line):
            low, high = bounds(read)
            ends.append((np.broadcast_to(low, (size,)), np.broadcast_to(high, (size,))))
        else:
            ends.append(None)
    return ends
