"""Power sweeps: a memoryless cubic has its compression in closed form; refusals rather than extrapolation."""

from __future__ import annotations

import numpy as np
import pytest

from specflow.calculators.compression import cubic_ip3_minus_p1db
from specflow.errors import CalculationError
from tests.derive.deriving import law_on, value_of

LEVEL = np.arange(-40.0, 5.01, 0.1)
GAIN, IIP3 = 20.0, 10.0
AXIS = {"axis": "input_level", "axis_unit": "dBm"}
LINEAR = {"linear_from": "-40 dBm", "linear_to": "-35 dBm"}


def cubic(level: np.ndarray) -> np.ndarray:
    """Output of a memoryless cubic amplifier: gain less 20·log(1 - P/IIP3) for one tone (rf-budget section 1.2)."""
    return level + GAIN + 20 * np.log10(1 - 10 ** ((level - IIP3) / 10))


def test_the_compression_point_of_a_cubic_is_known_from_its_intercept() -> None:
    """IIP3 - IP1dB = 9.636 dB (closed form, rf-budget section 1.2); OP1dB = IP1dB + G - 1."""
    rows = LEVEL < 4
    fields = {"unit": "dBm", **AXIS, **LINEAR}
    found = {
        side: value_of("compression point", LEVEL[rows], cubic(LEVEL[rows]), referred=side, **fields)
        for side in ("input", "output")
    }
    wanted = IIP3 - float(cubic_ip3_minus_p1db())
    assert found["input"] == pytest.approx(wanted, abs=0.002)
    assert found["output"] == pytest.approx(wanted + GAIN - 1, abs=0.002)


def test_a_sweep_of_gain_gives_the_same_as_one_of_output() -> None:
    rows = LEVEL < 4
    gain = cubic(LEVEL[rows]) - LEVEL[rows]
    fields = {**AXIS, **LINEAR, "referred": "output"}
    first = value_of("compression point", LEVEL[rows], gain, unit="dB", **fields)
    second = value_of("compression point", LEVEL[rows], cubic(LEVEL[rows]), unit="dBm", **fields)
    assert first == pytest.approx(second, abs=1e-9)


def test_small_signal_gain_is_the_mean_over_the_linear_range() -> None:
    found = law_on("small signal gain", LEVEL, cubic(np.minimum(LEVEL, 4)), unit="dBm", **AXIS, **LINEAR)
    assert found.value[0] == pytest.approx(GAIN, abs=0.001)
    assert "over the 51 readings of the linear range" in found.notes[0]


def test_a_sweep_that_does_not_compress_is_refused() -> None:
    rows = LEVEL < -10
    with pytest.raises(CalculationError, match=r"the gain falls by only 0\.085\d+ dB up to -10\.1 dBm"):
        value_of(
            "compression point",
            LEVEL[rows],
            cubic(LEVEL[rows]),
            unit="dBm",
            referred="input",
            **AXIS,
            **LINEAR,
        )


def test_a_linear_range_outside_the_sweep_is_refused() -> None:
    with pytest.raises(CalculationError, match="does not cover the linear range -60 to -50 dBm"):
        value_of(
            "small signal gain", LEVEL, LEVEL, unit="dBm", linear_from="-60 dBm", linear_to="-50 dBm", **AXIS
        )


def test_saturated_power_needs_a_sweep_that_has_stopped_rising() -> None:
    level = np.arange(0.0, 11.0)
    flat = np.minimum(level + 20, 28)
    assert value_of("saturated power", level, flat, unit="dBm", **AXIS) == 28
    with pytest.raises(CalculationError, match="the output still rises by 1 dB over the last 1 dB"):
        value_of("saturated power", level, level + 20, unit="dBm", **AXIS)


def test_efficiency_at_a_level() -> None:
    """10 W out, 1 W in, 25 W of supply: 36 % (the worked example of the calculator)."""
    level = np.array([28.0, 30.0, 32.0])
    values = {"output": level + 10, "dc": [20.0, 25.0, 30.0]}
    fields = {"unit": {"output": "dBm", "dc": "W"}, **AXIS}
    for where, side in (("30 dBm", "input"), ("40 dBm", "output")):
        found = law_on("efficiency at level", level, values, level=where, referred=side, **fields)
        assert (found.value[0], found.unit) == (pytest.approx(36), "%")
    with pytest.raises(CalculationError, match="the output level 50 dBm is not met"):
        value_of("efficiency at level", level, values, level="50 dBm", referred="output", **fields)


def test_a_sweep_over_something_else_is_refused() -> None:
    with pytest.raises(CalculationError, match="runs over frequency in GHz, not over an input level"):
        value_of("saturated power", [1, 2, 3], [1, 2, 3], unit="dBm")


def test_a_linear_range_that_ends_in_compression_is_refused() -> None:
    rows = LEVEL < 4
    with pytest.raises(CalculationError, match="before the linear range ends"):
        value_of(
            "compression point",
            LEVEL[rows],
            cubic(LEVEL[rows]),
            unit="dBm",
            referred="input",
            linear_from="-40 dBm",
            linear_to="3 dBm",
            **AXIS,
        )
