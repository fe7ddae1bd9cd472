"""Laws of the phase of one scattering parameter over frequency: group delay, deviation from linear phase.

Both unwrap the phase first, which is only sure where neighbours differ by much less than half a turn; readings too far
apart are refused, because a delay would be wrong by a whole turn between neighbours and look like any other.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.derive.law import Law, Outcome, Setting
from specflow.derive.samples import Samples
from specflow.derive.scattering import ENTRY, angle_deg
from specflow.errors import CalculationError
from specflow.units import convert, parse_unit

Floats = NDArray[np.float64]

#: Neighbouring phases farther apart than this may be wrapped the other way round. Common practice, no source.
MOST_STEP_DEG = 150.0
_NEEDS = "the two columns of a scattering parameter over frequency, closely enough spaced to unwrap its phase"


def unwrapped_phase(samples: Samples, roles: tuple[str, str] = ENTRY) -> Floats:
    """Return the phase in degrees (n,) without turns of 360 degrees between neighbours.

    Raises CalculationError where a step is so large that the direction of the turn is not sure.
    """
    value: Floats = np.rad2deg(np.unwrap(np.deg2rad(angle_deg(samples, roles))))
    steps = np.abs(np.diff(value))
    if len(steps) and steps.max() > MOST_STEP_DEG:
        place = int(np.argmax(steps))
        raise CalculationError(
            f"the phase turns by {steps[place]:.1f} deg from {samples.along[place]:.10g} to "
            f"{samples.along[place + 1]:.10g} {samples.axis_unit}, too much to know which way it turned",
            hint=f"measure in smaller steps; up to {MOST_STEP_DEG:g} deg is unwrapped",
        )
    return value


def _hertz(samples: Samples) -> Floats:
    unit = parse_unit(samples.axis_unit or "1")
    if unit.dimension != parse_unit("Hz").dimension:
        raise CalculationError(
            f"the axis is {samples.axis} in {samples.axis_unit}", hint="a delay is taken over frequency"
        )
    return convert(samples.along, unit, parse_unit("Hz"))


def group_delay(samples: Samples) -> Outcome:
    """Return the group delay in ns by central differences of the unwrapped phase.

    Formula: -(φ(f + A/2) - φ(f - A/2))/(360°·A), A the aperture. Without a stated aperture the neighbours of each
    reading are taken: A is the distance between them. With one, the phase is interpolated linearly at f ± A/2.
    Valid: phase steps of at most 150 degrees. Readings nearer to an end than half an aperture give no result.
    Source: τ = -dφ/dω, definition; a finite aperture averages over it and hides ripple that is narrower (common
    practice, no source).
    """
    frequency, turned = _hertz(samples), unwrapped_phase(samples)
    if len(frequency) < 3:
        raise CalculationError(
            f"{len(frequency)} readings give no central difference", hint="give at least 3"
        )
    aperture = samples.settings["aperture"]
    if isinstance(aperture, str):
        rows = np.arange(1, len(frequency) - 1, dtype=np.intp)
        low, high, span = turned[:-2], turned[2:], frequency[2:] - frequency[:-2]
    else:
        width = float(convert(aperture, parse_unit(samples.axis_unit), parse_unit("Hz")))
        if not 0 < width <= frequency[-1] - frequency[0]:
            raise CalculationError(
                f"an aperture of {aperture:g} {samples.axis_unit} is not within the range",
                hint="state one above 0 and below the width of the range",
            )
        inside = (frequency - width / 2 >= frequency[0]) & (frequency + width / 2 <= frequency[-1])
        rows = np.flatnonzero(inside).astype(np.intp)
        middle = frequency[rows]
        low = np.interp(middle - width / 2, frequency, turned)
        high = np.interp(middle + width / 2, frequency, turned)
        span = np.full(len(rows), width)
    if not len(rows):
        raise CalculationError(
            "no reading has half an aperture on both sides", hint="state a smaller aperture"
        )
    value = -(high - low) / (360.0 * span) * 1e9
    note = f"aperture {_megahertz(span.min())}" + (
        "" if np.isclose(span.min(), span.max()) else f" to {_megahertz(span.max())}"
    )
    return Outcome(value, "ns", rows, axes={samples.axis: samples.along[rows]}, notes=(note,))


def _megahertz(hertz: float) -> str:
    return f"{float(hertz) / 1e6:.6g} MHz"


def phase_linearity(samples: Samples) -> Outcome:
    """Return the deviation of the phase from its best straight line over the range, in degrees.

    Formula: φ(f) - (a + b·f), a and b by least squares over the readings of the range; every reading counts alike.
    Valid: readings spaced evenly, or nearly so; phase steps of at most 150 degrees.
    Source: definition with the least-squares line (common practice, no source; a line of least peak deviation differs).
    """
    frequency, turned = _hertz(samples), unwrapped_phase(samples)
    if len(frequency) < 3:
        raise CalculationError(f"{len(frequency)} readings lie on any line", hint="give at least 3")
    centred = frequency - frequency.mean()
    slope = float(centred @ (turned - turned.mean()) / (centred @ centred))
    value: Floats = turned - turned.mean() - slope * centred
    delay = f"{-slope / 360.0 * 1e9:.6g}"
    rows = np.arange(len(value), dtype=np.intp)
    note = f"the line has the delay {delay} ns"
    return Outcome(value, "deg", rows, axes={samples.axis: samples.along}, notes=(note,))


PHASE_LAWS: tuple[Law, ...] = (
    Law(
        "group delay",
        "group delay of a scattering parameter by central differences",
        group_delay,
        needs=_NEEDS,
        roles=ENTRY,
        settings=(
            Setting("aperture", "distance over which the phase is differenced; nothing: the neighbours", "", "axis"),
        ),
        gives=("group_delay",),
    ),
    Law("phase linearity", "deviation of the phase from the best straight line over the range", phase_linearity,
        needs=_NEEDS, roles=ENTRY, gives=("phase_linearity",)),
)  # fmt: skip
