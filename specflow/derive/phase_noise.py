"""Laws of a phase-noise table: integrated over stated offsets, as phase error, as jitter, or in dBc."""

from __future__ import annotations

import math

from specflow.calculators.phase_noise import integrated_phase_noise, rms_phase_error
from specflow.conditions.words import range_words
from specflow.derive.law import Law, Outcome, Setting, single
from specflow.derive.samples import Floats, Samples
from specflow.errors import CalculationError
from specflow.units import converter, parse_unit

HERTZ, DENSITY = parse_unit("Hz"), parse_unit("dBc/Hz")


def phase_error(samples: Samples) -> Outcome:
    """Return the integrated phase error of both sidebands in degrees rms.

    Formula: σ² = 2·∫ L(f) df over the range, straight lines in dB against log f between the readings.
    Valid: small angles; offsets inside the table; discrete lines are not in a density. No uncertainty is derived.
    Source: calculator rms_phase_error (closed form, checked by numerical integration).
    """
    return _single(samples, rms_phase_error(*_profile(samples)), "deg")


def phase_noise_ratio(samples: Samples) -> Outcome:
    """Return the integrated phase noise of both sidebands relative to the carrier.

    Formula: 10·log(2·∫ L(f) df) in dBc.
    Valid: as for phase error.
    Source: calculator integrated_phase_noise.
    """
    return _single(samples, integrated_phase_noise(*_profile(samples)), "dBc")


def jitter(samples: Samples) -> Outcome:
    """Return the rms jitter of a carrier from its phase noise.

    Formula: σ_t = σ_φ/(2π f0), σ_φ in rad as for phase error.
    Valid: as for phase error; the carrier is the one whose phase noise the table is.
    Source: definition; computed.
    """
    carrier = samples.number("carrier")
    if carrier <= 0:
        raise CalculationError("the carrier frequency must be above 0")
    seconds = math.radians(rms_phase_error(*_profile(samples))) / (2 * math.pi * carrier)
    return _single(samples, seconds * 1e15, "fs")


CLOSE = 1e-9  # ends nearer than this differ by the rounding of a conversion only


def _profile(samples: Samples) -> tuple[Floats, Floats, float, float]:
    """Return offsets in Hz, densities in dBc/Hz, and the ends of the integral."""
    assert samples.range is not None
    to_hertz = converter(parse_unit(samples.axis_unit or "1"), HERTZ)
    density = converter(samples.unit(), DENSITY)(samples.value())
    low, high = float(to_hertz(samples.range.low)), float(to_hertz(samples.range.high))
    offset = to_hertz(samples.along)
    # What a setting tolerance lets pass for another law would be integrated over nothing here.
    if low < offset[0] * (1 - CLOSE) or high > offset[-1] * (1 + CLOSE):
        there = range_words(samples.axis, samples.along[0], samples.along[-1], samples.axis_unit)
        raise CalculationError(
            f"the integral reaches beyond the readings: there is {there}",
            hint="measure the whole range, or ask for the range that is there",
        )
    return offset, density, low, high


def _single(samples: Samples, value: float, unit: str) -> Outcome:
    assert samples.range is not None
    at = range_words(samples.axis, samples.range.low, samples.range.high, samples.axis_unit)
    row = int(samples.value().argmax())
    return single(value, unit, row, at=f"integrated from {at}")


_NEEDS = "phase noise density over the frequency offset (--over 'offset 1 kHz..10 MHz')"
PHASE_NOISE_LAWS: tuple[Law, ...] = (
    Law(
        "phase error",
        "integrated phase error, degrees rms",
        phase_error,
        needs=_NEEDS,
        gives=("integrated_phase_error",),
        reads=("phase_noise",),
        along=("offset",),
        brackets=True,
    ),
    Law(
        "integrated phase noise",
        "integrated phase noise, dBc",
        phase_noise_ratio,
        needs=_NEEDS,
        gives=("integrated_phase_noise_relative",),
        reads=("phase_noise",),
        along=("offset",),
        brackets=True,
    ),
    Law(
        "jitter",
        "rms jitter of a carrier",
        jitter,
        needs=_NEEDS,
        settings=(Setting("carrier", "the carrier frequency, as '10 GHz'", unit="Hz"),),
        gives=("jitter",),
        reads=("phase_noise",),
        along=("offset",),
        brackets=True,
    ),
)
