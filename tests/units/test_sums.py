"""Power sums and the two means of levels."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.errors import UnitError
from specflow.units import Quantity, mean, mean_of_db, mean_of_power, parse_quantity, parse_unit, power_sum


def _all(*texts: str) -> list[Quantity]:
    return [parse_quantity(text) for text in texts]


def test_a_power_sum_adds_powers_whatever_they_are_written_in() -> None:
    assert power_sum(_all("30 dBm", "1 W")).value == pytest.approx(33.0103, abs=1e-4)
    assert power_sum(_all("1 W", "30 dBm")).value == pytest.approx(2.0)
    assert power_sum(_all("-30 dBc", "-30 dBc")).value == pytest.approx(-26.9897, abs=1e-4)


def test_fields_and_voltages_add_by_their_squares() -> None:
    assert power_sum(_all("3 V/m", "4 V/m")).value == pytest.approx(5.0)
    assert power_sum(_all("60 dBµV/m", "60 dBµV/m")).value == pytest.approx(63.0103, abs=1e-4)


def test_the_two_means_of_20_and_30_dbm_differ() -> None:
    # Arithmetic: 10·log10((100 + 1000) / 2) is 27.40, the middle of 20 and 30 is 25. People are asked for either.
    assert mean_of_power(_all("20 dBm", "30 dBm")).value == pytest.approx(27.4036, abs=1e-4)
    assert mean_of_db(_all("20 dBm", "30 dBm")).value == 25.0


def test_a_mean_of_levels_must_say_which() -> None:
    with pytest.raises(UnitError, match="say 'of power' or 'of dB'"):
        mean(_all("20 dBm", "30 dBm"))
    with pytest.raises(UnitError, match="not in dB"):
        mean_of_db(_all("1 W", "2 W"))
    assert mean(_all("1 GHz", "3000 MHz")).value == 2.0


@pytest.mark.parametrize("function", [power_sum, mean_of_power, mean_of_db, mean])
def test_an_empty_list_is_refused(function: object) -> None:
    with pytest.raises(UnitError, match="nothing"):
        function([])  # type: ignore[operator]


def test_what_has_no_power_is_refused() -> None:
    with pytest.raises(UnitError, match="have no power"):
        power_sum(_all("1 GHz", "2 GHz"))
    with pytest.raises(UnitError, match="carrier"):
        power_sum(_all("30 dBm", "-30 dBc"))


@given(st.lists(st.floats(-150, 60), min_size=1, max_size=20))
def test_a_power_sum_lies_between_the_largest_and_n_times_it(levels: list[float]) -> None:
    total = power_sum([Quantity(level, parse_unit("dBm")) for level in levels]).value
    assert max(levels) - 1e-9 <= total <= max(levels) + 10 * np.log10(len(levels)) + 1e-9


@given(st.lists(st.floats(-150, 60), min_size=1, max_size=20))
def test_the_mean_of_power_is_never_below_the_mean_of_db(levels: list[float]) -> None:
    quantities = [Quantity(level, parse_unit("dBm")) for level in levels]
    assert mean_of_power(quantities).value >= mean_of_db(quantities).value - 1e-9


def test_traces_are_summed_point_by_point_and_one_trace_over_its_points() -> None:
    a, b = (Quantity(np.array([0.0, level]), parse_unit("dBm")) for level in (-100.0, 0.0))
    np.testing.assert_allclose(power_sum([a, b]).value, [3.0103, 0.0], atol=1e-4)
    assert power_sum([b]).value == pytest.approx(3.0103, abs=1e-4)
