"""A trace against a mask with its allowances; the off-axis mask referred to the commanded direction."""

from __future__ import annotations

import numpy as np
import pytest

from specflow.errors import CalculationError, ExpressionError
from specflow.limits import LimitContext, evaluate_limit, parse_limit
from specflow.model.columns import Columns
from tests.derive.deriving import law_on, value_of

PLACES = np.arange(20.0)
FLAT = "mask(frequency[GHz], max dB: 0..20: 10)"
AXIS = {"axis": "frequency", "axis_unit": "GHz"}


def test_without_an_allowance_it_is_the_greatest_excess() -> None:
    values = np.where(PLACES == 7, 12.5, 8.0)
    found = law_on("mask excess", PLACES, values, limit=FLAT, **AXIS)
    assert (found.value[0], found.rows[0], found.at) == (2.5, 7, ("7 GHz",))
    assert value_of("mask excess", PLACES, np.full(20, 8.0), limit=FLAT, **AXIS) == -2


def test_along_a_sloped_mask_it_is_the_excess_over_the_line() -> None:
    mask = "mask(frequency[GHz], max dB: 1..10: 20 to 0 log)"
    along = np.linspace(1, 10, 10)
    values = 20 * (1 - np.log10(along)) + np.linspace(-1, 0.5, 10)
    assert value_of("mask excess", along, values, limit=mask, **AXIS) == pytest.approx(0.5)


@pytest.mark.parametrize(
    ("over", "wanted"),
    [
        ([1.0, 2.0], 0.0 - 1.0),  # two of twenty may exceed by 3 dB, and do: the next is 1 dB below
        ([1.0, 2.0, 0.5], 0.5),  # the third has no allowance
        ([1.0, 4.0], 1.0),  # one exceeds by more than is allowed
    ],
)
def test_a_share_of_the_readings_may_exceed_by_so_much(over: list[float], wanted: float) -> None:
    values = np.full(20, 9.0)
    values[: len(over)] = 10 + np.array(over)
    limit = "mask(frequency[GHz], max dB: 0..20: 10; allow 10 % by 3 dB)"
    assert value_of("mask excess", PLACES, values, limit=limit, **AXIS) == pytest.approx(wanted)


def test_a_mask_moved_by_the_excess_is_just_kept() -> None:
    values = 9 + np.sin(PLACES * 2.7) * 3
    excess = value_of("mask excess", PLACES, values, limit=FLAT, **AXIS)
    moved = parse_limit(f"mask(frequency[GHz], max dB: 0..20: {10 + excess!r})")
    columns = Columns(20, {"frequency": PLACES}, units={"frequency": "GHz"})
    upper = evaluate_limit(moved, LimitContext(columns)).upper
    assert upper is not None
    assert np.max(values - upper) == pytest.approx(0, abs=1e-12)


def test_readings_that_the_mask_does_not_reach_are_told() -> None:
    found = law_on(
        "mask excess", PLACES, np.full(20, 12.0), limit="mask(frequency[GHz], max dB: 0..9.5: 10)", **AXIS
    )
    assert (found.value[0], found.notes) == (2, ("10 readings lie where the mask asks for nothing",))
    with pytest.raises(CalculationError, match="no reading lies where the mask asks for something"):
        value_of(
            "mask excess", PLACES, np.full(20, 12.0), limit="mask(frequency[GHz], max dB: 30..40: 10)", **AXIS
        )


def test_a_mask_over_something_else_is_refused() -> None:
    with pytest.raises(CalculationError, match="the limit depends on theta, the range is over frequency"):
        value_of("mask excess", PLACES, PLACES, limit="mask(theta[deg], max dB: 0..20: 10)", **AXIS)
    with pytest.raises(ExpressionError):
        value_of("mask excess", PLACES, PLACES, limit="mask(frequency[GHz]", **AXIS)
