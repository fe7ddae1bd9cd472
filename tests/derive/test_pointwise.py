"""Laws row by row."""

from __future__ import annotations

import numpy as np
import pytest

from specflow.errors import CalculationError
from tests.derive.deriving import law_on, value_of


def test_a_difference_of_levels_is_a_ratio_with_both_uncertainties() -> None:
    found = law_on(
        "difference", values={"value": [-50.0, -40], "minus": [-53.0, -41]}, unit="dBm", u=[0.3, 0.4]
    )
    assert found.unit == "dB"
    assert found.value.tolist() == [3, 1]
    assert found.u == pytest.approx(np.sqrt(2) * np.array([0.3, 0.4]))


def test_the_second_column_is_brought_to_the_unit_of_the_first() -> None:
    found = law_on(
        "difference", values={"value": [0.0], "minus": [1.0]}, unit={"value": "dBm", "minus": "mW"}
    )
    assert found.value[0] == pytest.approx(0)


def test_two_equal_powers_are_3_db_more() -> None:
    found = law_on("power sum", values={"value": [10.0, 10.0], "other": [10.0, -300.0]}, unit="dBm")
    assert found.value == pytest.approx([10 + 10 * np.log10(2), 10])
    assert law_on("power sum", values={"value": [1.0], "other": [2.0]}, unit="W").value[0] == 3


def test_the_y_factor_gives_the_noise_figure() -> None:
    """With Tc = 290 K: NF = ENR - 10·log(Y - 1) (definition): ENR 15 dB, Y 8 dB."""
    wanted = 15 - 10 * np.log10(10**0.8 - 1)
    found = value_of(
        "y factor",
        values={"hot": [-60.0], "cold": [-68.0]},
        unit="dBm",
        enr="15 dB",
        cold_temperature="290 K",
    )
    assert found == pytest.approx(wanted)


def test_an_impossible_y_factor_is_refused() -> None:
    with pytest.raises(CalculationError):
        value_of(
            "y factor",
            values={"hot": [-60.0], "cold": [-60.0]},
            unit="dBm",
            enr="15 dB",
            cold_temperature="290 K",
        )
