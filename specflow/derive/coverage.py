"""Does a group of rows cover the range a law is to run over? What is not covered is refused, never supplied."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.axes import slack
from specflow.conditions.words import range_words, value_words
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
    along: Floats, has_value: NDArray[np.bool_], wanted: Range, name: str, unit: str
) -> Coverage:
    """Return the rows of a group that a law over ``wanted`` reads.

    Both ends must be reached within the stated tolerance, and neighbours lie no farther apart than the stated step.
    Rows without a value are left out; without a stated step they are refused, because nobody said how large a hole may
    be. Raises CalculationError with the range there is and the range needed.
    """
    edge = np.array([wanted.low, wanted.high])
    reach = wanted.tolerance + slack(edge, np.full(2, wanted.tolerance))
    inside = (along >= wanted.low - reach[0]) & (along <= wanted.high + reach[1])
    rows = np.flatnonzero(inside & has_value)
    empty = int(np.count_nonzero(inside & ~has_value))
    if empty and wanted.step is None:
        raise CalculationError(
            f"{empty} of {np.count_nonzero(inside)} rows in the range have no value",
            hint="state the largest gap allowed, as in 'step 0.1 GHz', or read the cells that were rejected",
        )
    rows = rows[np.argsort(along[rows], kind="stable")]
    _check_ends(along, along[rows], wanted, reach, name, unit)
    gaps = np.diff(along[rows])
    widest = int(np.argmax(gaps)) if len(gaps) else 0
    largest = float(gaps[widest]) if len(gaps) else 0.0
    if wanted.step is not None and largest > wanted.step + float(
        slack(np.array(wanted.step), np.array(wanted.step))
    ):
        low, high = along[rows[widest]], along[rows[widest + 1]]
        raise CalculationError(
            f"no value between {range_words(name, float(low), float(high), unit)}; the step is "
            f"{value_words(name, wanted.step, unit)}",
            hint="measure there, or state a larger step",
        )
    return Coverage(rows, largest)


def _check_ends(along: Floats, inside: Floats, wanted: Range, reach: Floats, name: str, unit: str) -> None:
    starts = len(inside) > 0 and bool(inside[0] <= wanted.low + reach[0])
    ends = len(inside) > 0 and bool(inside[-1] >= wanted.high - reach[1])
    if starts and ends:
        return
    needed = range_words(name, wanted.low, wanted.high, unit)
    known = along[~np.isnan(along)]
    there = "no value" if not len(known) else range_words(name, float(known.min()), float(known.max()), unit)
    end = "neither end is" if not starts and not ends else f"the {'upper' if starts else 'lower'} end is not"
    raise CalculationError(
        f"{end} reached: there is {there}, needed is {needed}",
        hint="measure the whole range, state a setting tolerance (± 10 MHz), or ask for the range that is there",
    )
