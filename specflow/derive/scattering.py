"""Laws of one scattering parameter, row by row: gain, loss, VSWR, phase.

An entry is read as its two columns, as recorded: dB and angle, magnitude and angle, or real and imaginary part; which
of them is told by their units. Signs: a loss and a return loss are positive where less comes out than goes in.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.derive.law import Law, Outcome
from specflow.derive.samples import Samples
from specflow.errors import CalculationError
from specflow.units import parse_unit

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]

OF_THE_READING = "that of the reading"
ENTRY = ("first", "second")
_NEEDS = "the two columns of a scattering parameter, as a network file is taken in"


def magnitude_db(samples: Samples, roles: tuple[str, str] = ENTRY) -> Floats:
    """Return 20·log10 of the magnitude of an entry (n,): as recorded where it is in dB.

    Raises CalculationError where the entry is zero: nothing was measured, or the file cannot say so little.
    """
    first, second = roles
    _refuse_unmeasured(samples, roles)
    if samples.unit(first).is_log:
        return samples.value(first)
    if _is_polar(samples, second):
        size = samples.value(first)
    else:
        size = np.hypot(samples.value(first), samples.value(second))
    zero = np.count_nonzero(size == 0)
    if zero or (size < 0).any():
        what = "zero" if zero else "below zero"
        raise CalculationError(
            f"the magnitude is {what} at {zero or np.count_nonzero(size < 0)} of {len(size)} places, "
            "which has no value in dB",
            hint="an entry of zeros was hardly measured: choose the range in which it was",
        )
    value: Floats = 20.0 * np.log10(size)
    return value


def entry(samples: Samples, roles: tuple[str, str] = ENTRY) -> Complexes:
    """Return an entry as complex numbers (n,). Raises CalculationError where it was hardly measured."""
    _refuse_unmeasured(samples, roles)
    first, second = (samples.value(role) for role in roles)
    if not _is_polar(samples, roles[1]):
        parts: Complexes = first + 1j * second
        return parts
    size = 10.0 ** (first / 20.0) if samples.unit(roles[0]).is_log else first
    turn: Complexes = np.exp(1j * np.deg2rad(second))
    return size * turn


def angle_deg(samples: Samples, roles: tuple[str, str] = ENTRY) -> Floats:
    """Return the angle of an entry in degrees (n,): as recorded where it is.

    Raises CalculationError where it was hardly measured.
    """
    _refuse_unmeasured(samples, roles)
    if _is_polar(samples, roles[1]):
        return samples.value(roles[1])
    angle: Floats = np.rad2deg(np.angle(entry(samples, roles)))
    return angle


def _refuse_unmeasured(samples: Samples, roles: tuple[str, str]) -> None:
    """Refuse an entry with places where both numbers are exactly 0: a file of every entry has zeros for what was not
    swept, and those would be a perfect match, no delay, or in dB no loss. One such place among others is left: the
    first of a simulation that begins at 0 Hz. Common practice, no source.
    """
    zero = (samples.value(roles[0]) == 0) & (samples.value(roles[1]) == 0)
    count = int(np.count_nonzero(zero))
    if count and (count > 1 or count == len(zero)):
        raise CalculationError(
            f"both numbers of the entry are 0 at {count} of {len(zero)} places",
            hint="an entry of zeros was hardly measured: choose the range in which it was",
        )


def _is_polar(samples: Samples, role: str) -> bool:
    return samples.unit(role).dimension == parse_unit("deg").dimension and samples.values[role].unit not in (
        "",
        "1",
    )


def row_by_row(value: Floats, unit: str, *, u: Floats | None = None, notes: tuple[str, ...] = ()) -> Outcome:
    """Return one result a reading, at the conditions of the reading."""
    rows = np.arange(len(value), dtype=np.intp)
    return Outcome(value, unit, rows, u=u, u_rule=OF_THE_READING if u is not None else "", notes=notes)


def _u_db(samples: Samples) -> Floats | None:
    """The uncertainty of a reading in dB, where it was recorded in dB."""
    return samples.values["first"].u if samples.unit("first").is_log else None


def gain(samples: Samples) -> Outcome:
    """Return the magnitude of an entry in dB: gain of S21, |S11| in dB of S11.

    Formula: 20·log10 |S|; as recorded where the file has dB.
    Valid: a gain into and from the reference impedance of the file (transducer gain with matched source and load).
    Source: definition of scattering parameters; Touchstone File Format Specification 2.1 (dB = 20·log10 of magnitude).
    """
    return row_by_row(magnitude_db(samples), "dB", u=_u_db(samples))


def loss(samples: Samples) -> Outcome:
    """Return the loss that an entry means in dB, positive: insertion loss, return loss, isolation.

    Formula: -20·log10 |S|.
    Valid: with the reference impedance of the file at all ports; a return loss below 0 dB is that of an active port.
    Source: definition; return loss is positive where less is reflected than arrives (T. S. Bird, IEEE Antennas and
    Propagation Magazine 51 (2009), from memory).
    """
    value = -magnitude_db(samples)
    return row_by_row(value, "dB", u=_u_db(samples))


def vswr(samples: Samples) -> Outcome:
    """Return the voltage standing wave ratio of a reflection.

    Formula: (1 + |S|)/(1 - |S|); infinite where |S| is 1 or more.
    Valid: a reflection (S11, S22 ...).
    Source: definition.
    """
    size = np.abs(entry(samples))
    total = size >= 1.0
    with np.errstate(divide="ignore"):
        value = np.where(total, np.inf, (1.0 + size) / np.where(total, 1.0, 1.0 - size))
    count = int(np.count_nonzero(total))
    notes = (f"|S| is 1 or more at {count} places: the VSWR is infinite there",) if count else ()
    return row_by_row(value, "1", notes=notes)


def phase(samples: Samples) -> Outcome:
    """Return the phase of an entry in degrees as recorded, between -180 and 180 degrees.

    Formula: arg S.
    Valid: relative to the reference planes of the file; it turns over at ±180 degrees.
    Source: definition.
    """
    return row_by_row(angle_deg(samples), "deg")


ENTRY_LAWS: tuple[Law, ...] = (
    Law("gain", "20·log of a scattering parameter: gain, |S| in dB", gain, needs=_NEEDS, roles=ENTRY,
        gives=("gain", "transmission_magnitude", "reverse_transmission", "reflection_magnitude"), over="each"),
    Law("loss", "-20·log of a scattering parameter: insertion loss, return loss, isolation", loss, needs=_NEEDS,
        roles=ENTRY, gives=("insertion_loss", "return_loss", "isolation", "reverse_isolation", "coupling",
                            "attenuation"), over="each"),
    Law("vswr", "voltage standing wave ratio of a reflection", vswr, needs=_NEEDS, roles=ENTRY, gives=("vswr",),
        over="each"),
    Law("phase", "phase of a scattering parameter", phase, needs=_NEEDS, roles=ENTRY, gives=("phase",),
        over="each"),
)  # fmt: skip
