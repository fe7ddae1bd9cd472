"""Readings that look like a slipped decimal, a slipped unit or sign: reported with their neighbours, never repaired.

A reading is doubted when its neighbours along the axis (or, in a small group, all the others at like conditions) agree
among themselves and it is ten, a hundred or a thousand times off them, has the other sign, or, as a level, lies 30 dB
off (dBm and dBW, W and mW). Resonances, nulls, band edges and spectra full of lines do not have such neighbours. Common
practice, no source; the thresholds were tried on published files without an alarm. Columns longer than anybody types
by hand are passed over.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.model.columns import Columns, TextColumn
from specflow.units import Kind, parse_unit

Floats = NDArray[np.float64]
Places = NDArray[np.intp]

_AGREE = 0.2  # of their mean: how far two neighbours may be apart
_MATCH = 0.1  # how near a reading, put right, must come to what its neighbours say
_EVEN = 6.0  # 10 ** (1 - 2 * _MATCH) and a margin
_FAR = 8.0  # times the scatter of the neighbours
_WINDOW = 4  # neighbours that are looked at, on either side
_SMALL = 6  # a group of so few is compared as a whole
_SPIKES = 0.02  # share of readings that may stick out; more is a spectrum full of lines
_UNIT_STEP_DB = 30.0
_LEVEL_MATCH_DB = 0.5
_MATCH_LONG = 0.02  # the same as _MATCH, where scatter is known from many neighbours
_MARK_LEAST, _MARK_FAR = 100, 5.0
_LONGEST = 100_000
_TRACE = 200  # a level swept at more points is a spectrum, in which lines stand up from the floor


@dataclass(frozen=True, slots=True)
class Slip:
    """A doubtful reading: its place in the arrays, those of its neighbours, and what it may be."""

    place: int
    neighbours: tuple[int, ...]
    words: str


def find_slips(values: Floats, unit: str, conditions: Columns, items: TextColumn) -> list[Slip]:
    """Return the doubtful ones among readings (n,) in ``unit``; NaN and infinite ones are passed over."""
    known = np.flatnonzero(np.isfinite(values)) if len(values) <= _LONGEST else np.zeros(0, np.intp)
    if len(known) < 3:
        return []
    is_level = parse_unit(unit).is_log and parse_unit(unit).kind is Kind.LEVEL
    turns = parse_unit(unit).dimension == "angle" or unit in ("deg", "rad")
    if _is_even(values[known], is_level):
        return []
    axis = _axis(conditions, known)
    found: dict[int, Slip] = {}
    for grouped in _groupings(conditions, items, axis, known):
        for slip in _along(values, grouped, is_level, turns):
            found.setdefault(slip.place, slip)
    return [found[place] for place in sorted(found)]


def _is_even(values: Floats, is_level: bool) -> bool:
    """Whether all readings have one sign and are so near to each other that none can be a candidate, however they lie:
    no two are six times, or as levels nearly 30 dB, apart (``_candidates`` asks for 10 ** 0.8, and 29 dB)."""
    low, high = float(values.min()), float(values.max())
    if low <= 0 <= high or (is_level and high - low >= _UNIT_STEP_DB - 2 * _LEVEL_MATCH_DB):
        return False
    return max(abs(low), abs(high)) < _EVEN * min(abs(low), abs(high))


def _axis(conditions: Columns, known: Places) -> str:
    """The numeric condition with the most different values, "" without one."""
    counts = {name: len(np.unique(values[known])) for name, values in conditions.numeric.items()}
    return max(counts, key=lambda name: counts[name], default="")


def _groupings(conditions: Columns, items: TextColumn, axis: str, known: Places) -> Iterator[list[Places]]:
    """Yield the readings in groups of like conditions: along the axis of each item; and of all items at one place.

    Where no item has three readings, those of all items are compared along the axis.
    """
    settings = [values[known] for name, values in conditions.numeric.items() if name != axis]
    settings += [words.codes[known].astype(float) for words in conditions.text.values()]
    along = conditions.numeric[axis][known] if axis else np.arange(len(known), dtype=float)
    item = items.codes[known].astype(float)
    of_items = _groups([item, *settings], along, known)
    yield of_items
    if max(map(len, of_items)) < 3:
        yield _groups(settings, along, known)
    if len(items.labels) > 2 and axis:
        yield [group for group in _groups([along, *settings], item, known) if len(group) <= _SMALL * 10]


def _groups(keys: Sequence[Floats], along: Floats, known: Places) -> list[Places]:
    order = np.lexsort((along, *keys)) if keys else np.argsort(along, kind="stable")
    if not keys:
        return [known[order]]
    changed = np.zeros(len(order) - 1, bool)
    for key in keys:
        sorted_key = np.nan_to_num(key[order], nan=-np.inf)
        changed |= sorted_key[1:] != sorted_key[:-1]
    return [known[part] for part in np.split(order, np.flatnonzero(changed) + 1)]


def _along(values: Floats, groups: list[Places], is_level: bool, turns: bool) -> Iterator[Slip]:
    for group in groups:
        if len(group) < 3:
            continue
        run = values[group]
        for place in _candidates(run, is_level):
            slip = _doubted(run, place, is_level, turns)
            if slip is not None:
                yield Slip(int(group[place]), tuple(int(group[one]) for one in slip[0]), slip[1])


def _candidates(run: Floats, is_level: bool) -> list[int]:
    """Places at which a reading is off its two neighbours, and these agree; those of an end are on one side."""
    inner = np.arange(1, len(run) - 1)
    left, right = (
        np.r_[1, inner - 1, len(run) - 2],
        np.r_[min(2, len(run) - 1), inner + 1, max(len(run) - 3, 0)],
    )
    middle = (run[left] + run[right]) / 2
    agree = np.abs(run[left] - run[right]) <= _AGREE * np.abs(middle)
    usable = (middle != 0) & (run != 0)
    ratio = np.divide(run, middle, out=np.ones(len(run)), where=usable)
    power = np.log10(np.abs(ratio))
    whole = np.round(power)
    slipped = (np.abs(power - whole) < 2 * _MATCH) & (whole != 0) & (np.abs(whole) <= 3)
    slipped |= (ratio < 0) & (np.abs(power) < _MATCH)
    if is_level:
        slipped |= np.abs(np.abs(run - middle) - _UNIT_STEP_DB) <= 2 * _LEVEL_MATCH_DB
    slipped |= _is_round(run) & (np.abs(run - middle) > _MARK_FAR * np.abs(middle) + _MARK_LEAST / 2)
    return [int(one) for one in np.flatnonzero(agree & slipped)]


def _is_round(values: Floats) -> NDArray[np.bool_]:
    """Which readings are of the form that floors and marks have: -200, 1000."""
    return np.asarray((np.abs(values) >= _MARK_LEAST) & (np.mod(values, 10) == 0))


def _doubted(run: Floats, place: int, is_level: bool, turns: bool) -> tuple[list[int], str] | None:
    """The neighbours of a reading and what it may be, where they are smooth and it is far off; else None."""
    size = len(run)
    near = [one for one in range(max(place - _WINDOW, 0), min(place + _WINDOW + 1, size)) if one != place]
    near = [one for one in range(size) if one != place] if size <= _SMALL else near
    spots, others = np.array(near, float), run[near]
    if len(near) > 3:
        slope, level = np.polyfit(spots - place, others, 1)
        scatter = float(np.sqrt(np.mean((others - level - slope * (spots - place)) ** 2)))
    else:
        level, scatter = float(np.median(others)), float(np.ptp(others)) / 2
    expected, off = float(level), abs(float(run[place]) - float(level))
    if scatter > _AGREE / 2 * abs(expected) or off <= _FAR * scatter or _is_spiky(run):
        return None
    if is_level and size > _TRACE and run[place] > expected:
        return None
    margin = max(3 * scatter, (_MATCH if size <= _SMALL else _MATCH_LONG) * abs(expected))
    words = _words(float(run[place]), expected, margin, is_level and scatter < _LEVEL_MATCH_DB, turns)
    closest = sorted(near, key=lambda one: abs(one - place))[:2]
    return None if not words else (sorted(closest), words)


def _is_spiky(run: Floats) -> bool:
    """Whether more readings stick out than a slip or two account for."""
    if len(run) <= _SMALL:
        return False
    off = np.abs(run[1:-1] - (run[:-2] + run[2:]) / 2)
    usual = float(np.median(off))
    return int(np.count_nonzero(off > _FAR * max(usual, 1e-12 * float(np.abs(run).max())))) > max(
        6, 3 * _SPIKES * len(run)
    )


def _words(value: float, expected: float, margin: float, is_level: bool, turns: bool) -> str:
    """What a reading may be: which factor, put right, brings it to what is expected; "" when none does."""
    for power in (1, 2, 3):
        for factor, words in ((10.0**power, f"1/{10**power} of"), (10.0**-power, f"{10**power} times")):
            if abs(value * factor - expected) <= margin:
                return f"about {words} them: a slipped decimal, or another prefix of the unit?"
    if not turns and abs(value + expected) <= margin:
        return "of the other sign"
    if _is_round(np.array(value)) and abs(value - expected) > _MARK_FAR * abs(expected) + _MARK_LEAST / 2:
        return "far off them and a round number: a floor, or a mark of the instrument?"
    if is_level and abs(abs(value - expected) - _UNIT_STEP_DB) <= _LEVEL_MATCH_DB:
        return "30 dB off them: dBm and dBW, or W and mW, taken for each other?"
    return ""
