"""Laws of a power sweep: small-signal gain, compression, saturated power, efficiency at a level.

The swept input level is the range (``--over "input_level -30..5 dBm"``); the output is a level, or a gain in dB.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.calculators.dc_power import power_added_efficiency
from specflow.derive.law import Law, Outcome, Setting, single
from specflow.derive.samples import Samples, figure
from specflow.errors import CalculationError
from specflow.units import Kind, converter, parse_unit

Floats = NDArray[np.float64]
Rows = NDArray[np.intp]
DBM, DB = parse_unit("dBm"), parse_unit("dB")


def _levels(samples: Samples, role: str) -> tuple[Floats, Floats]:
    """Return input and output level in dBm along the sweep."""
    axis = parse_unit(samples.axis_unit or "1")
    if axis.kind is not Kind.LEVEL:
        raise CalculationError(
            f"the sweep runs over {samples.axis} in {samples.axis_unit or 'plain numbers'}, not over an input level"
        )
    level = np.asarray(converter(axis, DBM)(samples.along), np.float64)
    unit = samples.unit(role)
    if unit.kind is Kind.RATIO and unit.is_log:
        return level, level + samples.value(role)
    return level, np.asarray(converter(unit, DBM)(samples.value(role)), np.float64)


def _linear_gain(samples: Samples, role: str) -> tuple[Floats, Floats, float, Rows]:
    """Return input, output, small-signal gain and the rows of the linear range."""
    level, output = _levels(samples, role)
    axis = parse_unit(samples.axis_unit)
    low, high = (float(converter(axis, DBM)(samples.number(f"linear {end}"))) for end in ("from", "to"))
    close = 1e-9 * max(1.0, abs(low), abs(high))
    if low > high or level[0] > low + close or level[-1] < high - close:
        raise CalculationError(
            f"the sweep runs from {figure(float(level[0]))} to {figure(float(level[-1]))} dBm and does not "
            f"cover the linear range {figure(low)} to {figure(high)} dBm",
            hint="state a linear range inside the sweep",
        )
    rows = np.flatnonzero((level >= low - close) & (level <= high + close))
    if not len(rows):
        raise CalculationError("no reading lies in the linear range", hint="state a wider one")
    gain = output - level
    return level, output, float(np.mean(gain[rows])), rows


def small_signal_gain(samples: Samples) -> Outcome:
    """Return the small-signal gain: the mean of dB of output less input over the stated linear range.

    Formula: mean of (P_out - P_in) in dB over the readings with ``linear from`` <= P_in <= ``linear to``.
    Valid: where the device is linear over that range; how far the gain varies there is told. No uncertainty is derived.
    Source: definition; common practice, no source for the mean.
    """
    level, output, gain, rows = _linear_gain(samples, "output")
    varies = float(np.ptp((output - level)[rows]))
    note = f"the gain varies by {figure(varies)} dB over the {len(rows)} readings of the linear range"
    return single(gain, "dB", int(rows[-1]), notes=(note,))


def compression_point(samples: Samples) -> Outcome:
    """Return the level at which the gain has fallen by x dB from its small-signal value (P1dB for 1 dB).

    Formula: the first crossing of (small-signal gain - compression) above the linear range, linear between the
    neighbouring readings in dB against the input level in dBm; referred to the input, or to the output there.
    Valid: the sweep reaches the compression; it is never extrapolated. OP1dB = IP1dB + G - 1.
    Source: definition of the compression point; D. M. Pozar, Microwave Engineering (from memory).
    """
    level, output, gain, rows = _linear_gain(samples, "output")
    last = int(rows[-1])
    short = gain - (output - level) - samples.number("compression")
    if short[last] >= 0:
        raise CalculationError(
            f"the gain has fallen by {figure(float(gain - (output - level)[last]))} dB before the linear range ends",
            hint="state a linear range that ends lower",
        )
    reached = np.flatnonzero((short[last:-1] < 0) & (short[last + 1 :] >= 0)) + last
    if not len(reached):
        most = float(np.max(gain - (output - level)[last:]))
        raise CalculationError(
            f"the gain falls by only {figure(most)} dB up to {figure(float(level[-1]))} dBm at the input",
            hint="drive it harder; a compression point is never extrapolated",
        )
    row = int(reached[0])
    share = -short[row] / (short[row + 1] - short[row])
    at_input = float(level[row] + share * (level[row + 1] - level[row]))
    at_output = float(output[row] + share * (output[row + 1] - output[row]))
    value, other = (at_input, at_output) if samples.word("referred") == "input" else (at_output, at_input)
    side = "output" if samples.word("referred") == "input" else "input"
    at = f"small-signal gain {figure(gain)} dB, {side} {figure(other)} dBm"
    nearest = row if share < 0.5 else row + 1
    return single(value, "dBm", nearest, at=f"{at}, interpolated")


def saturated_power(samples: Samples) -> Outcome:
    """Return the saturated output power: the greatest output, where the output has stopped rising.

    Formula: max P_out, if over the last ``span`` of input level the output rises by no more than ``rise``.
    Valid: the sweep goes into saturation; one that still rises at its end is refused.
    Source: common practice, no source.
    """
    level, output = _levels(samples, "output")
    span, rise = samples.number("span"), samples.number("rise")
    if level[-1] - level[0] < span:
        raise CalculationError(f"the sweep is shorter than {figure(span)} dB")
    before = float(np.interp(level[-1] - span, level, output))
    last = float(output.max() - before)
    if last > rise and int(np.argmax(output)) == len(output) - 1:
        raise CalculationError(
            f"the output still rises by {figure(last)} dB over the last {figure(span)} dB",
            hint="drive it harder, or state another rise",
        )
    row = int(np.argmax(output))
    readings = samples.values["output"]
    is_level = samples.unit("output").kind is not Kind.RATIO
    u = float(readings.u[row]) if readings.u is not None and is_level and readings.unit == "dBm" else None
    return single(float(output[row]), "dBm", row, u=u, u_rule="that of the governing reading")


def efficiency_at_level(samples: Samples) -> Outcome:
    """Return the power-added efficiency at a stated input or output level.

    Formula: (P_out - P_in)/P_dc in %, with P_out and P_dc taken at the level on straight lines between neighbours (dBm
    and W against the input level in dBm).
    Valid: inside the sweep; of an output level that is met more than once the first. No uncertainty is derived.
    Source: definition; calculator power_added_efficiency.
    """
    level, output = _levels(samples, "output")
    unit = samples.unit("dc")
    supply = np.asarray(converter(unit, parse_unit("W"))(samples.value("dc")), np.float64)
    wanted = samples.number("level")
    drive = wanted if samples.word("referred") == "input" else _drive_for(level, output, wanted)
    if not level[0] <= drive <= level[-1]:
        raise CalculationError(
            f"the input level {figure(drive)} dBm lies outside the sweep",
            hint="it is never extrapolated",
        )
    at_output = float(np.interp(drive, level, output))
    dc = float(np.interp(drive, level, supply))
    share = float(power_added_efficiency(at_output, drive, dc))
    row = int(np.argmin(np.abs(level - drive)))
    at = f"input {figure(drive)} dBm, output {figure(at_output)} dBm"
    return single(100 * share, "%", row, at=f"{at}, supply {figure(dc)} W, interpolated")


def _drive_for(level: Floats, output: Floats, wanted: float) -> float:
    """Return the input level at which the output is first what is wanted."""
    reached = np.flatnonzero((output[:-1] <= wanted) & (output[1:] >= wanted))
    if not len(reached):
        there = f"{figure(float(output.min()))} to {figure(float(output.max()))}"
        raise CalculationError(
            f"the output level {figure(wanted)} dBm is not met; the output runs from {there} dBm",
            hint="it is never extrapolated",
        )
    row = int(reached[0])
    rise = output[row + 1] - output[row]
    share = 0.0 if rise == 0 else (wanted - output[row]) / rise
    return float(level[row] + share * (level[row + 1] - level[row]))


_LINEAR = (
    Setting("linear from", "lower end of the linear range, an input level", unit="axis"),
    Setting("linear to", "upper end of the linear range, an input level", unit="axis"),
)
_REFERRED = Setting("referred", "to which side", choices=("input", "output"))
_SWEEP = "output level (or gain) over a sweep of the input level"
SWEEP_LAWS: tuple[Law, ...] = (
    Law(
        "small signal gain",
        "mean gain over a stated linear range of a power sweep",
        small_signal_gain,
        needs=_SWEEP,
        roles=("output",),
        settings=_LINEAR,
        gives=("gain",),
        reads=("output_power",),
        along=("input_level",),
    ),
    Law(
        "compression point",
        "level at which the gain has fallen by 1 dB (or x)",
        compression_point,
        needs=_SWEEP,
        roles=("output",),
        settings=(
            *_LINEAR,
            _REFERRED,
            Setting("compression", "how far the gain has fallen", "1 dB", unit="dB"),
        ),
        gives=("ip1db", "op1db"),
        reads=("output_power", "gain"),
        along=("input_level",),
    ),
    Law(
        "saturated power",
        "greatest output of a sweep that has stopped rising",
        saturated_power,
        needs=_SWEEP,
        roles=("output",),
        settings=(
            Setting("span", "the last part of the sweep that is looked at", "1 dB", unit="dB"),
            Setting("rise", "how much the output may still rise over it", "0.2 dB", unit="dB"),
        ),
        gives=("saturated_power",),
        reads=("output_power",),
        along=("input_level",),
    ),
    Law(
        "efficiency at level",
        "power-added efficiency at a stated level",
        efficiency_at_level,
        needs="output level and DC power over a sweep of the input level",
        roles=("output", "dc"),
        settings=(Setting("level", "the level, as '20 dBm'", unit="dBm"), _REFERRED),
        gives=("pae",),
    ),
)
