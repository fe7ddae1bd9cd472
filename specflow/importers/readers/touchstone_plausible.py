"""Numbers that are hardly what the option line says: another unit, another format, radians, a count that differs.

None of this is a rule of the format: it is what a file looks like whose option line is wrong (common practice, no
source).
"""

from __future__ import annotations

import re
from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from specflow.importers.readers.touchstone_network import (
    HERTZ,
    Doubt,
    DoubtKind,
    NetworkFile,
    PairFormat,
    Remark,
)
from specflow.importers.readers.touchstone_shape import outside_data

_HIGHEST_HZ, _LOWEST_HZ = 1e13, 1e3
_HUGE = 10.0
_FEW = 3
_SOME_PARTS = 6
_SOME_ANGLES, _NEARLY_PI, _PI_AS_WRITTEN = 20, 3.0, 3.1416
_POINTS = re.compile(r"\b(?:number of )?points\s*[:=]\s*(?P<count>\d+)\b", re.IGNORECASE)
_EDGE = re.compile(
    r"\b(?P<end>start|stop)(?:[ _]*freq(?:uency)?)?\s*[:=]?\s*(?P<value>\d+(?:\.\d+)?)\s*(?P<unit>[kMG]?Hz)\b",
    re.IGNORECASE,
)


def axis_doubts(network: NetworkFile, line: int) -> list[Doubt]:
    """Doubt an axis in a unit that is none of frequency, and frequencies that no network has; ``line``: the options."""
    if network.axis_unit not in HERTZ:
        what = f"the option line names {network.axis_unit}, which is no unit of frequency"
        return [Doubt(DoubtKind.X_AXIS, line, what)]
    greatest = float(np.max(network.frequency_hz))
    if network.axis.min() < 0:
        return []  # which is a doubt of its own
    if greatest > _HIGHEST_HZ or greatest < _LOWEST_HZ:
        what = (
            f"the greatest frequency is {network.axis.max():.12g} {network.axis_unit}; "
            "is the unit of the option line right?"
        )
        return [Doubt(DoubtKind.X_AXIS, line, what)]
    if len(network.axis) > 1 and greatest == float(np.min(network.frequency_hz)):
        what = (
            f"all {len(network.axis)} rows have the frequency {network.axis[0]:.12g} {network.axis_unit}: "
            "what was swept does not stand in the file"
        )
        return [Doubt(DoubtKind.X_AXIS, int(network.lines[0]), what)]
    return []


def pair_doubts(network: NetworkFile) -> list[Doubt]:
    """Doubt pairs that are hardly of the format of the option line."""
    found = _unlikely(network)
    if not found:
        return []
    place, why = found
    k, i, j = place
    line, token = network.place(k, i, j)
    what = (
        f"{network.entry_name(i, j)} is {network.first[k, i, j]:.12g} {network.second[k, i, j]:.12g} (number {token} "
        f"of the line): {why}; the option line says {network.pair_format.value}"
    )
    return [Doubt(DoubtKind.PAIR_FORMAT, line, what)]


def _unlikely(network: NetworkFile) -> tuple[tuple[int, int, int], str] | None:
    """The first entry that tells, and why."""
    first, second = network.first, network.second
    below = np.argwhere(first < 0)
    if network.pair_format is PairFormat.MA and len(below):
        return _place(below[0]), "the magnitude is below zero"
    if network.parameter != "S" or len(network.axis) < _FEW:
        return None
    with np.errstate(invalid="ignore"):
        if network.pair_format is PairFormat.DB and bool((first > 0).all()):
            return (0, 0, 0), "all entries are above 0 dB, as magnitudes would be"
        parts = first.size >= _SOME_PARTS and bool(
            (np.abs(first) <= 1.0).all() and (np.abs(second) <= 1.0).all()
        )
        if network.pair_format is PairFormat.DB and parts and (first.any() or second.any()):
            return (0, 0, 0), "no number is beyond 1, as of real and imaginary parts"
        large = np.abs(second) if network.pair_format is PairFormat.RI else np.abs(first)
        if network.pair_format is not PairFormat.DB and np.nanmedian(large) > _HUGE:
            return _place(np.argwhere(large > _HUGE)[0]), "half of the entries are larger than 10 (20 dB)"
    return None


def _place(found: NDArray[np.intp]) -> tuple[int, int, int]:
    k, i, j = (int(one) for one in found)
    return k, i, j


def angle_doubts(network: NetworkFile) -> list[Doubt]:
    """Doubt angles that fill the range of radians: a delay of them would be 57 times too short."""
    angles = np.abs(network.second)
    if network.pair_format is PairFormat.RI or angles.size < _SOME_ANGLES:
        return []
    greatest = float(np.nanmax(angles, initial=0.0))
    if not _NEARLY_PI < greatest <= _PI_AS_WRITTEN:
        return []
    what = f"no angle is beyond {greatest:.6g}: they may be in radians; the format has degrees"
    return [Doubt(DoubtKind.ANGLES, int(network.lines[0]), what)]


def number_remarks(network: NetworkFile) -> Iterator[Remark]:
    """Say where a conversion gives no S, and where the comments count other points or name other ends."""
    without = np.flatnonzero((np.isnan(network.s) & ~np.isnan(network.recorded)).any(axis=(1, 2)))
    if len(without):
        what = (
            f"the {network.parameter} parameters of {len(without)} of {len(network.axis)} frequencies have no S: "
            "ports say the same, or the sum with the reference is zero; those rows were left out"
        )
        yield Remark(int(network.lines[without[0]]), what, warns=True)
    for comment in outside_data(network.comments, network.lines):
        counted = _POINTS.search(comment.text)
        if counted and int(counted["count"]) != len(network.axis):
            what = f"the comment counts {counted['count']} points, the file has {len(network.axis)}"
            yield Remark(comment.line, what, warns=True)
        for edge in _EDGE.finditer(comment.text):
            unit = next(one for one in HERTZ if one.casefold() == edge["unit"].casefold())
            said = float(edge["value"]) * HERTZ[unit]
            ends = float(network.frequency_hz.min()), float(network.frequency_hz.max())
            found = ends[0] if edge["end"].casefold() == "start" else ends[1]
            if abs(said - found) > 1e-3 * max(said, found):
                what = f"the comment says {edge['end'].lower()} {edge['value']} {unit}, the file has {found:.10g} Hz"
                yield Remark(comment.line, what, warns=True)
