"""Evaluation of a mask: a bound that is piecewise over an axis."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from specflow.limits.bounds import ALL_FLAG, NO_FLAG, Bounds
from specflow.limits.conversion import Floats, convert_to
from specflow.limits.expression_value import number_in, truth
from specflow.limits.inputs import Flags, Inputs
from specflow.model.expression import Member, Name
from specflow.model.limit import Mask, Segment, Side, Slope


@dataclass(slots=True)
class _Gathered:
    """The most stringent bound so far: its value, whether any segment holds the row, and its bandwidth."""

    value: Floats
    held: Flags
    width: Floats
    undecided: Flags


def mask_bounds(mask: Mask, inputs: Inputs) -> Bounds:
    """Return the bound at each record's axis value.

    Outside all segments and in exclusions nothing is required; without an axis value the bound is unknown. Where
    segments share an axis value the most stringent holds.
    """
    place = _axis(mask, inputs)
    sign = 1.0 if mask.side is Side.LOWER else -1.0
    found = _Gathered(np.full(1, -np.inf), NO_FLAG, np.full(1, np.nan), np.isnan(place))
    for segment in mask.segments:
        _add_segment(found, mask, segment, place, inputs, sign)
    excluded = _excluded(mask, inputs)
    unknown = found.undecided & ~excluded
    held = found.held & ~excluded & ~unknown
    nothing = np.inf if mask.side is Side.UPPER else -np.inf
    value = np.where(unknown, np.nan, np.where(held, sign * found.value, nothing))
    strict = ALL_FLAG if mask.strict else NO_FLAG
    widths = any(segment.bandwidth is not None for segment in mask.segments)
    return Bounds(
        value if mask.side is Side.LOWER else None,
        value if mask.side is Side.UPPER else None,
        mask.unit,
        strict if mask.side is Side.LOWER else NO_FLAG,
        strict if mask.side is Side.UPPER else NO_FLAG,
        held | unknown,
        ~held & ~unknown & ~excluded,
        unknown,
        "",
        np.where(held, found.width, np.nan) if widths else None,
    )


def _axis(mask: Mask, inputs: Inputs) -> Floats:
    return number_in(Name(name=mask.axis, unit=mask.axis_unit), mask.axis_unit, inputs)


def _excluded(mask: Mask, inputs: Inputs) -> Flags:
    if not mask.exclusions:
        return NO_FLAG
    axis = Name(name=mask.axis, unit=mask.axis_unit)
    return truth(Member(operand=axis, values=mask.exclusions), inputs).true


def _add_segment(
    found: _Gathered, mask: Mask, segment: Segment, place: Floats, inputs: Inputs, sign: float
) -> None:
    start = number_in(segment.start, mask.axis_unit, inputs)
    stop = np.full(1, np.inf) if segment.stop is None else number_in(segment.stop, mask.axis_unit, inputs)
    above = place > start if segment.start_open else place >= start
    below = place < stop if segment.stop_open else place <= stop
    inside = above & below
    # Without knowing where the segment ends, a row may belong to it.
    found.undecided = (
        found.undecided
        | (np.isnan(start) & below)
        | (np.isnan(stop) & above)
        | (np.isnan(start) & np.isnan(stop))
    )
    value = _value_at(mask, segment, place, start, stop, inputs)
    found.undecided = found.undecided | (inside & np.isnan(value))
    own = sign * value
    wins = inside & ~np.isnan(own) & (~found.held | (own > found.value))
    width = np.nan if segment.bandwidth is None else float(_hertz(segment))
    found.value = np.where(wins, own, found.value)
    found.width = np.where(wins, width, found.width)
    found.held = found.held | (inside & ~np.isnan(own))


def _hertz(segment: Segment) -> float:
    width = segment.bandwidth
    return np.nan if width is None else float(convert_to(np.array([width.value]), width.unit, "Hz")[0])


def _value_at(
    mask: Mask, segment: Segment, place: Floats, start: Floats, stop: Floats, inputs: Inputs
) -> Floats:
    """Return the bound along the segment: flat, a formula of the axis, or a line in the axis or its logarithm."""
    first = number_in(segment.value, mask.unit, inputs)
    if segment.end_value is None:
        return first
    last = number_in(segment.end_value, mask.unit, inputs)
    if segment.slope is Slope.LOG:
        place, start, stop = np.log10(place), np.log10(start), np.log10(stop)
    share = np.divide(place - start, stop - start)
    # At the two ends the corner itself, not what rounding makes of it.
    return np.where(share == 0, first, np.where(share == 1, last, first + share * (last - first)))
