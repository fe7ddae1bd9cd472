"""Laws over a stated range of one condition that give one number: worst, mean, percentile, ripple, slope, departure."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.words import range_words, value_words
from specflow.derive.law import Law, Outcome, Setting, single
from specflow.derive.samples import Samples
from specflow.errors import CalculationError
from specflow.model.parameter import Better
from specflow.statistics.sphere import percentile

Floats = NDArray[np.float64]
OF_THE_READING = "that of the governing reading"


def worst(samples: Samples) -> Outcome:
    """Return the reading that is worst by the better direction of the parameter.

    Formula: the least where higher is better, the greatest where lower is, the farthest from zero where nearer to zero
    is; where neither is (and with ``side`` both) the interval from the least to the greatest. A reading that is a bound
    enters with its worse end; the result is the bound then.
    Valid: the lowest reading speaks for lower limits only, the highest for upper ones; the interval for both. The
    uncertainty is that of the governing reading: that several competed biases the worst outwards, never inwards.
    Source: definition.
    """
    readings, side = samples.values["value"], _side(samples)
    if side == "both":
        return _both(samples)
    if side == "lowest":
        row = int(np.argmin(readings.low))
    elif side == "highest":
        row = int(np.argmax(readings.high))
    else:
        row = int(np.argmax(np.maximum(np.abs(readings.low), np.abs(readings.high))))
    u = None if readings.u is None else readings.u[[row]]
    place = np.array([row], np.intp)
    only = {"lowest": "a lower", "highest": "an upper"}.get(side)
    notes = (f"the {side} reading speaks for {only} limit only",) if only else ()
    low, high = readings.low[place], readings.high[place]
    return Outcome(low, readings.unit, place, high, u=u, u_rule=OF_THE_READING, notes=notes)


def _both(samples: Samples) -> Outcome:
    """Return the interval from the least to the greatest, with the larger uncertainty of the two."""
    readings = samples.values["value"]
    least, greatest = int(np.argmin(readings.low)), int(np.argmax(readings.high))
    u = None if readings.u is None else readings.u[[least, greatest]].max(keepdims=True)
    at = (f"from {_at(samples, least)} to {_at(samples, greatest)}",)
    low, high = readings.low[[least]], readings.high[[greatest]]
    return Outcome(
        low, readings.unit, np.array([least], np.intp), high, at, u, "the larger of the two readings"
    )


def _side(samples: Samples) -> str:
    said = samples.word("side")
    if said != "as the parameter":
        return said
    better = samples.gives.better if samples.gives else Better.NEITHER
    sides = {Better.HIGHER: "lowest", Better.LOWER: "highest", Better.NEARER_ZERO: "farthest from zero"}
    return sides.get(better, "both")


def mean(samples: Samples) -> Outcome:
    """Return the mean over the range: of power, of dB, of amplitude, or of the values as they stand.

    Formula: Σ w·x / Σ w; of power 10·log of the mean of 10^(x/10), of amplitude 20·log of the mean of 10^(x/20). The
    weights are 1 a reading, or (``weights`` axis) the stretch of the axis that each reading stands for, by the
    trapezoidal rule.
    Valid: values in dB need to be told of what; linear values take the mean of values. No uncertainty is derived: how
    far the readings' errors are common is not known.
    Source: definitions; mean of 0 and 20 dB: of power 17.03 dB, of dB 10 dB.
    """
    values, of = samples.value(), samples.word("of")
    if samples.unit().is_log == (of == "values"):
        known = "power, dB or amplitude" if samples.unit().is_log else "values"
        raise CalculationError(
            f"values in {samples.unit()} have no mean of {of}", hint=f"say --set of={known}"
        )
    by_axis = samples.word("weights") == "axis"
    weights = _stretches(samples.along) if by_axis else np.ones(len(values))
    factor = {"power": 10.0, "amplitude": 20.0}.get(of)
    if factor is None:
        result = float(np.average(values, weights=weights))
    else:
        top = float(values.max())
        result = top + factor * float(np.log10(np.average(10 ** ((values - top) / factor), weights=weights)))
    steps = np.diff(samples.along)
    uneven = not by_axis and len(steps) > 1 and steps.max() > 1.5 * steps.min()
    notes = (
        ("the readings are unevenly spaced and count the same; weights=axis weighs them",) if uneven else ()
    )
    row = int(np.argmin(np.abs(values - result)))
    return single(result, samples.values["value"].unit, row, at=_everywhere(samples), notes=notes)


def _stretches(along: Floats) -> Floats:
    if len(along) < 2:
        return np.ones(len(along))
    steps = np.diff(along)
    return np.concatenate([[steps[0]], steps[1:] + steps[:-1], [steps[-1]]]) / 2


def _everywhere(samples: Samples) -> str:
    return range_words(samples.axis, float(samples.along[0]), float(samples.along[-1]), samples.axis_unit)


def percentile_over_range(samples: Samples) -> Outcome:
    """Return the reading at a percentile of the distribution over the range, each reading counting the same.

    Formula: the smallest reading whose cumulative share reaches the percentage (CDF); of the CCDF, that of 100 less it.
    Valid: readings spread evenly over the range; the result is one of the readings, and its uncertainty is theirs.
    Source: definition of the quantile without interpolation (inverted CDF).
    """
    values = samples.value()
    complement = samples.word("of") == "CCDF"
    result = percentile(values, np.ones(len(values)), _percent(samples), complement=complement)
    row = int(np.flatnonzero(values == result)[0])
    readings = samples.values["value"]
    u = None if readings.u is None else float(readings.u[row])
    return single(result, readings.unit, row, u=u, u_rule=OF_THE_READING)


def _percent(samples: Samples) -> float:
    percent = samples.number("percentile")
    if not 0 < percent <= 100:
        raise CalculationError(f"the percentile {percent:g} is not above 0 and at most 100")
    return percent


def ripple(samples: Samples) -> Outcome:
    """Return the ripple over the range: the greatest reading less the least, or half of it.

    Formula: max - min; with ``form`` half, (max - min)/2, the ± about the middle.
    Valid: the raw readings must be close enough to catch the ripple: state a step. No uncertainty is derived: that of a
    difference of two readings of one sweep is not in the sheet.
    Source: definition.
    """
    values = samples.value()
    low, high = int(np.argmin(values)), int(np.argmax(values))
    size = float(values[high] - values[low]) / (2 if samples.word("form") == "half" else 1)
    at = f"least at {_at(samples, low)}, greatest at {_at(samples, high)}"
    return single(size, samples.difference_unit(), high, at=at)


def _at(samples: Samples, row: int) -> str:
    return value_words(samples.axis, float(samples.along[row]), samples.axis_unit)


def slope(samples: Samples) -> Outcome:
    """Return the slope of the straight line that fits the readings best.

    Formula: Σ (f - f̄)(x - x̄) / Σ (f - f̄)², least squares, every reading counting the same.
    Valid: for values in dB per unit of the axis; three readings at least.
    Source: ordinary least squares.
    """
    line, _ = _line(samples)
    unit = f"{samples.difference_unit()}/{samples.axis_unit}"
    return single(line, unit, int(np.argmax(samples.value())), at=_everywhere(samples))


def departure(samples: Samples) -> Outcome:
    """Return how far the readings depart from the straight line that fits them best (linearity of phase, of gain).

    Formula: residuals r of the least-squares line; peak max|r|, peak-to-peak max r - min r, rms √(Σ r²/n).
    Valid: three readings at least; phase must be unwrapped.
    Source: ordinary least squares.
    """
    _, residuals = _line(samples)
    row = int(np.argmax(np.abs(residuals)))
    form = samples.word("form")
    if form == "peak":
        size = float(np.abs(residuals[row]))
    elif form == "rms":
        size = float(np.sqrt(np.mean(residuals**2)))
    else:
        size = float(residuals.max() - residuals.min())
    return single(size, samples.difference_unit(), row)


def _line(samples: Samples) -> tuple[float, Floats]:
    along, values = samples.along, samples.value()
    if len(values) < 3:
        raise CalculationError(f"{len(values)} readings make no line", hint="three at least are needed")
    off, level = along - along.mean(), values - values.mean()
    line = float(np.dot(off, level) / np.dot(off, off))
    return line, level - line * off


_SIDE = Setting(
    "side",
    "which reading is the worst",
    "as the parameter",
    choices=("as the parameter", "lowest", "highest", "farthest from zero", "both"),
)
RANGE_LAWS: tuple[Law, ...] = (
    Law(
        "worst",
        "the worst reading over a range",
        worst,
        settings=(_SIDE,),
        keeps_parameter=True,
        in_parts=True,
        statistic="worst",
        takes_bounds=True,
        takes_repeats=True,
    ),
    Law(
        "mean",
        "the mean over a range, of what is said",
        mean,
        settings=(
            Setting("of", "what is averaged", choices=("power", "dB", "amplitude", "values")),
            Setting("weights", "what a reading counts", "readings", choices=("readings", "axis")),
        ),
        keeps_parameter=True,
        statistic="mean of {of}",
    ),
    Law(
        "percentile",
        "the reading at a percentile over a range",
        percentile_over_range,
        settings=(
            Setting("percentile", "the percentage, as 50"),
            Setting("of", "of which distribution", "CDF", choices=("CDF", "CCDF")),
        ),
        keeps_parameter=True,
        statistic="percentile",
        takes_repeats=True,
    ),
    Law(
        "ripple",
        "greatest less least over a range",
        ripple,
        settings=(
            Setting("form", "the whole, or half of it", "peak-to-peak", choices=("peak-to-peak", "half")),
        ),
        statistic="peak-to-peak",
        gives=("gain_flatness", "power_flatness", "group_delay_variation"),
        reads=("gain", "transmission_magnitude", "output_power", "eirp", "group_delay"),
        takes_repeats=True,
    ),
    Law(
        "slope",
        "the slope of the best straight line",
        slope,
        gives=("gain_slope",),
        reads=("gain", "transmission_magnitude"),
        takes_repeats=True,
    ),
    Law(
        "departure",
        "the departure from the best straight line",
        departure,
        settings=(Setting("form", "how it is counted", choices=("peak", "peak-to-peak", "rms")),),
        gives=("phase_linearity",),
        reads=("phase",),
        takes_repeats=True,
    ),
)
