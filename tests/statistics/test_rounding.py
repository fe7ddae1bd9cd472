"""Rounding in decimal: ties to even, trailing zeros, values that binary rounding gets wrong."""

from __future__ import annotations

from decimal import Decimal

import numpy as np
import pytest

from specflow.statistics.rounding import digit_of, round_to, round_values


def test_the_trailing_zero_of_a_limit_is_data() -> None:
    assert digit_of("4") == Decimal(1)
    assert digit_of("4.0") == Decimal("0.1")
    assert digit_of("-29.50") == Decimal("0.01")


def test_two_point_five_five_is_rounded_as_written_and_not_as_held() -> None:
    """Binary round(2.55, 1) is 2.5 (metrology.md section 4); the decimal that was written is a tie and goes to 2.6."""
    assert round(2.55, 1) == 2.5
    assert round_to("2.55", Decimal("0.1")) == Decimal("2.6")
    assert round_to("2.45", Decimal("0.1")) == Decimal("2.4")
    assert round_values(np.array([2.55, np.nan, -np.inf]), Decimal("0.1")) == pytest.approx(
        [2.6, np.nan, -np.inf], nan_ok=True
    )


def test_a_number_without_digits_is_refused() -> None:
    with pytest.raises(ValueError, match="finite"):
        digit_of("inf")
