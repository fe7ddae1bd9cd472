"""Combination laws take the kinds that physics allows and refuse the others."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest

from specflow.calculators.combination.linear_sum import linear_sum
from specflow.calculators.combination.operands import ACCEPTS, Operand
from specflow.calculators.combination.power_sum import power_sum
from specflow.calculators.combination.rss import root_sum_square
from specflow.calculators.combination.voltage_sum import voltage_sum
from specflow.calculators.combination.worst_case import worst_case_sum
from specflow.errors import CalculationError, UnitError

LAWS: dict[str, Callable[[Any, Operand], Any]] = {
    "linear sum": linear_sum,
    "power sum": power_sum,
    "voltage sum": voltage_sum,
    "RSS": root_sum_square,
    "worst case": worst_case_sum,
}


def test_every_law_of_the_table_has_its_function() -> None:
    assert set(LAWS) == set(ACCEPTS)


@pytest.mark.parametrize("law", LAWS)
@pytest.mark.parametrize("kind", Operand)
def test_a_law_takes_its_kinds_and_refuses_the_others(law: str, kind: Operand) -> None:
    if kind in ACCEPTS[law]:
        assert LAWS[law]([1.0, 1.0], kind) > 1.0
    else:
        with pytest.raises(UnitError, match=f"{law} of operands of kind '{kind}'") as refusal:
            LAWS[law]([1.0, 1.0], kind)
        assert refusal.value.hint.startswith("use ")


def test_levels_are_never_combined_as_root_sum_of_squares_nor_tolerances_as_powers() -> None:
    with pytest.raises(UnitError, match="refused"):
        root_sum_square([-90.0, -93.0], Operand.LEVEL)
    with pytest.raises(UnitError, match="refused"):
        power_sum([0.5, 0.3], Operand.TOLERANCE)
    with pytest.raises(UnitError, match="refused"):
        linear_sum([10.0, 10.0], Operand.LEVEL)


def test_equal_contributions_rise_by_3_6_and_the_known_factors() -> None:
    assert power_sum([-45.0, -45.0], Operand.RELATIVE) == pytest.approx(-41.98970004)
    assert voltage_sum([-45.0, -45.0], Operand.RELATIVE) == pytest.approx(-38.97940009)
    assert root_sum_square([3.0, 4.0], Operand.TOLERANCE) == pytest.approx(5.0)
    assert worst_case_sum([3.0, 4.0], Operand.ERROR) == 7.0
    assert linear_sum([3.0, -4.0], Operand.GAIN) == -1.0


def test_points_are_combined_side_by_side() -> None:
    assert power_sum([[0.0, 10.0], [0.0, 10.0]], Operand.LEVEL) == pytest.approx([3.0103, 13.0103], abs=1e-4)


def test_a_negative_tolerance_or_nothing_at_all_is_refused() -> None:
    with pytest.raises(CalculationError, match="tolerance"):
        worst_case_sum([-0.5], Operand.TOLERANCE)
    with pytest.raises(CalculationError, match="no positions"):
        power_sum([], Operand.LEVEL)
