"""Integration of a phase-noise profile."""

from __future__ import annotations

import math

import numpy as np

from specflow.calculators.arguments import Figures, Floats, above, chain, finite, within
from specflow.calculators.decibel import ratio
from specflow.errors import CalculationError


def integrated_phase_noise(
    offset_hz: Figures, density_dbc_hz: Figures, low_hz: float | None = None, high_hz: float | None = None
) -> float:
    """Return the integrated phase noise of both sidebands in dBc, that is 10·log of the variance in rad².

    Formula: σ² = 2·∫ L(f) df, with straight lines in dB against log f between the points: each piece is
    L1·f1/(m + 1)·((f2/f1)^(m + 1) - 1), m = slope per decade/10, and L1·f1·ln(f2/f1) at m = -1.
    Valid: small angles; inside the profile only. Lines drawn against linear f give another answer.
    Source: closed form checked by numerical integration; five-point example.

    >>> profile = [1e3, 1e4, 1e5, 1e6, 1e7], [-80, -90, -100, -120, -140]
    >>> print(f"{integrated_phase_noise(*profile):.3f}")
    -39.512
    """
    return 10.0 * math.log10(2.0 * _integral(*_profile(offset_hz, density_dbc_hz), low_hz, high_hz))


def rms_phase_error(
    offset_hz: Figures, density_dbc_hz: Figures, low_hz: float | None = None, high_hz: float | None = None
) -> float:
    """Return the rms phase error in degrees of a phase-noise profile.

    Formula: σ in degrees, σ² = 2·∫ L(f) df.
    Valid: as for the integral; start where the receiver stops tracking (about the subcarrier spacing in OFDM).
    Source: closed form checked by numerical integration; five-point example.

    >>> print(f"{rms_phase_error([1e3, 1e4, 1e5, 1e6, 1e7], [-80, -90, -100, -120, -140]):.4f}")
    0.6061
    """
    return math.degrees(math.sqrt(2.0 * _integral(*_profile(offset_hz, density_dbc_hz), low_hz, high_hz)))


def reciprocal_mixing_of_profile(
    blocker_dbm: float, offset_hz: Figures, density_dbc_hz: Figures, low_hz: float, high_hz: float
) -> float:
    """Return the reciprocal-mixing noise in dBm of a blocker over a channel from ``low_hz`` to ``high_hz`` beside it.

    Formula: Pb + 10·log ∫ L(f) df (one sideband).
    Valid: where the profile is not flat over the channel; inside the profile only.
    Source: integral of L; a flat profile gives Pb + L + 10·log B.

    >>> print(f"{reciprocal_mixing_of_profile(-26.0, [1e5, 1e7], [-140.0, -140.0], 1e6, 1.271e6):.2f}")
    -111.67
    """
    finite(blocker_dbm, "blocker_dbm")
    return blocker_dbm + 10.0 * math.log10(_integral(*_profile(offset_hz, density_dbc_hz), low_hz, high_hz))


def _profile(offset_hz: Figures, density_dbc_hz: Figures) -> tuple[Floats, Floats]:
    offset, density = chain(
        offset_hz=above(offset_hz, 0.0, "offset_hz"), density_dbc_hz=finite(density_dbc_hz, "density_dbc_hz")
    )
    if offset.ndim != 1 or offset.size < 2 or np.any(np.diff(offset) <= 0):
        raise CalculationError(
            "the offsets of the profile do not rise", hint="sort its points; each offset once"
        )
    return offset, density


def _integral(offset: Floats, density: Floats, low_hz: float | None, high_hz: float | None) -> float:
    """Return ∫ L(f) df in closed form over the pieces between ``low_hz`` and ``high_hz``."""
    first, last = float(offset[0]), float(offset[-1])
    low = float(within(first if low_hz is None else low_hz, first, last, "low_hz"))
    high = float(within(last if high_hz is None else high_hz, first, last, "high_hz"))
    if low >= high:
        raise CalculationError("the integration ends where it begins", hint="give low_hz below high_hz")
    inner = offset[(offset > low) & (offset < high)]
    f = np.concatenate(([low], inner, [high]))
    level = np.interp(np.log10(f), np.log10(offset), density)
    span = np.log(f[1:] / f[:-1])
    rise = np.diff(level) * math.log(10.0) / 10.0 + span  # ln of (f·L) from end to end, (m + 1)·span
    grown = np.divide(np.expm1(rise), rise, out=np.ones_like(rise), where=np.abs(rise) > 1e-12)
    return float(np.sum(ratio(level[:-1]) * f[:-1] * span * grown))
