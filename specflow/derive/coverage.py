"""Does a group of rows cover the range a law is to run over? What is not covered is refused, never supplied."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.axes import slack
from specflow.conditions.words import difference_words, range_words
from specflow.derive.samples import Range
from specflow.errors import CalculationError

Floats = NDArray[np.float64]
Rows = NDArray[np.intp]


@dataclass(frozen=True, slots=True)
class Coverage:
    """The rows within a range, ascending along the axis, and the largest gap between neighbours."""

    rows: Rows
    largest_gap: float


def covered_rows(
    along: Floats,
    has_value: NDArray[np.bool_],
    wanted: Range,
    name: str,
    unit: str,
    *,
    brackets: bool = False,
) -> Coverage:
    """Return the rows of a group that a law over ``wanted`` reads.

    Both ends must be reached within the stated tolerance (with ``brackets`` lie between two readings, and the readings
    beyond the ends enter, too), and neighbours lie no farther apart than the stated step. Rows without a value are
    left out; without a stated step they are refused, because nobody said how large a hole may be. Raises
    CalculationError with the range there is and the range needed.
    """
    edge = np.array([wanted.low, wanted.high])
    reach = wanted.tolerance + slack(edge, np.full(2, wanted.tolerance))
    inside = (along >= wanted.low - reach[0]) & (along <= wanted.high + reach[1])
    empty = int(np.count_nonzero(inside & ~has_value))
    if empty and wanted.step is None:
        raise CalculationError(
            f"{empty} of {np.count_nonzero(inside)} rows in the range have no value",
            hint="state the largest gap allowed, as in 'step 0.1 GHz', or read the cells that were rejected",
        )
    rows = np.flatnonzero(inside & has_value)
    rows = rows[np.argsort(along[rows], kind="stable")]
    if brackets:
        rows = _bracketed(along, has_value, rows, wanted, reach)
    _check_ends(along, along[rows], wanted, reach, name, unit)
    return Coverage(rows, _largest_gap(along[rows], wanted.step, name, unit))


def _bracketed(along: Floats, has_value: NDArray[np.bool_], rows: Rows, wanted: Range, reach: Floats) -> Rows:
    """Add the nearest reading beyond an end that no reading stands at."""
    known = np.flatnonzero(has_value & ~np.isnan(along))
    below = known[along[known] < wanted.low - reach[0]]
    above = known[along[known] > wanted.high + reach[1]]
    if len(below) and not (len(rows) and along[rows[0]] <= wanted.low + reach[0]):
        rows = np.concatenate([[below[np.argmax(along[below])]], rows])
    if len(above) and not (len(rows) and along[rows[-1]] >= wanted.high - reach[1]):
        rows = np.concatenate([rows, [above[np.argmin(along[above])]]])
    return rows.astype(np.intp)


def _largest_gap(inside: Floats, step: float | None, name: str, unit: str) -> float:
    gaps = np.diff(inside)
    if not len(gaps):
        return 0.0
    widest = int(np.argmax(gaps))
    largest = float(gaps[widest])
    if step is not None and largest > step + float(slack(np.array(inside[widest + 1]), np.array(step))):
        between = range_words(name, float(inside[widest]), float(inside[widest + 1]), unit)
        raise CalculationError(
            f"no value between {between.replace(' to ', ' and ')}; the step is {difference_words(step, unit)}",
            hint="measure there, or state a larger step",
        )
    return largest


def _check_ends(along: Floats, inside: Floats, wanted: Range, reach: Floats, name: str, unit: str) -> None:
    starts = len(inside) > 0 and bool(inside[0] <= wanted.low + reach[0])
    ends = len(inside) > 0 and bool(inside[-1] >= wanted.high - reach[1])
    if starts and ends:
        return
    needed = range_words(name, wanted.low, wanted.high, unit)
    known = along[~np.isnan(along)]
    missing = [edge for edge, met in ((wanted.low, starts), (wanted.high, ends)) if not met]
    if len(known) and all(known.min() < edge < known.max() for edge in missing):
        stands = "; ".join(_neighbours(known, edge, unit) for edge in missing)
        raise CalculationError(
            f"the readings go past {needed}, but {stands}",
            hint="add the ends to the sweep, ask for a range between two readings, or state the setting tolerance that "
            "the requirement has (±)",
        )
    there = "no value" if not len(known) else range_words(name, float(known.min()), float(known.max()), unit)
    end = "neither end is" if not starts and not ends else f"the {'upper' if starts else 'lower'} end is not"
    raise CalculationError(
        f"{end} reached: there is {there}, needed is {needed}",
        hint="measure the whole range, ask for the range that is there, or state the setting tolerance that the "
        "requirement has (±), if the end was set within it",
    )


def _neighbours(known: Floats, edge: float, unit: str) -> str:
    """Say that no reading stands at an end of a range, and where the nearest do."""
    below, above = float(known[known < edge].max()), float(known[known > edge].min())
    return f"none stands at {edge:.10g} {unit} (its neighbours are {below:.10g} and {above:.10g} {unit})"
