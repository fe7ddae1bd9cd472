"""Two mismatches: transfer between them, limits when the phase is unknown, and standard uncertainty."""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt

from specflow.calculators.arguments import Figures, Floats, complex_finite, loss, within
from specflow.calculators.decibel import decibels, ratio
from specflow.errors import CalculationError


def mismatch_transfer(source: npt.ArrayLike, load: npt.ArrayLike) -> Floats:
    """Return the power into a load in dB relative to what the source has available, both reflections complex.

    Formula: (1 - |Γs|²)(1 - |Γl|²)/|1 - Γs·Γl|².
    Valid: |Γ| below 1 on both sides.
    Source: D. M. Pozar, Microwave Engineering (transducer gain of a direct connection); conjugate match gives 0 dB.

    >>> print(f"{mismatch_transfer(0.3 + 0.2j, 0.3 - 0.2j) + 0.0:.4f}")
    0.0000
    """
    gs, gl = complex_finite(source, "source"), complex_finite(load, "load")
    if np.any(np.abs(gs) >= 1.0) or np.any(np.abs(gl) >= 1.0):
        raise CalculationError("a reflection reaches 1", hint="give source and load reflections below 1")
    passed = (1.0 - np.abs(gs) ** 2) * (1.0 - np.abs(gl) ** 2)
    return decibels(passed / np.abs(1.0 - gs * gl) ** 2)


def mismatch_limits(source_reflection: Figures, load_reflection: Figures) -> tuple[Floats, Floats]:
    """Return the upper and the lower limit in dB of the mismatch error when the phases are unknown.

    Formula: 20·log(1 ± |Γs|·|Γl|): not symmetric.
    Valid: any phase equally possible; magnitudes as given.
    Source: computed: VSWR 1.5 and 1.2.

    >>> upper, lower = mismatch_limits(0.2, 0.0909090909)
    >>> print(f"{upper:.4f} {lower:.4f}")
    0.1565 -0.1594
    """
    product = _product(source_reflection, load_reflection)
    return 2.0 * decibels(1.0 + product), 2.0 * decibels(1.0 - product)


def mismatch_limits_percent(source_reflection: Figures, load_reflection: Figures) -> tuple[Floats, Floats]:
    """Return the upper and the lower limit in % of power of the mismatch error when the phases are unknown.

    Formula: 100·((1 ± |Γs|·|Γl|)² - 1).
    Valid: some makers quote the plus side alone.
    Source: Bird Technologies 5015 series manual, pp. 9-10: VSWR 1.5 and 1.2 give 3.67 %.

    >>> upper, lower = mismatch_limits_percent(0.2, 1 / 11)
    >>> print(f"{upper:.2f} {lower:.2f}")
    3.67 -3.60
    """
    product = _product(source_reflection, load_reflection)
    return 100.0 * ((1.0 + product) ** 2 - 1.0), 100.0 * ((1.0 - product) ** 2 - 1.0)


def mismatch_standard_uncertainty(source_reflection: Figures, load_reflection: Figures) -> Floats:
    """Return the standard uncertainty of mismatch as a fraction of power, magnitudes known and phases not.

    Formula: √2·|Γs|·|Γl|: the U-shaped distribution of a cosine of uniform phase.
    Valid: small reflections.
    Source: computed, checked by simulation: 0.0244 on both sides.

    >>> print(f"{mismatch_standard_uncertainty(0.0243902439, 0.0243902439):.9f}")
    0.000841293
    """
    return math.sqrt(2.0) * _product(source_reflection, load_reflection)


def mismatch_standard_uncertainty_of_maxima(source_maximum: Figures, load_maximum: Figures) -> Floats:
    """Return the standard uncertainty of mismatch as a fraction of power when only the largest reflections are known.

    Formula: |Γs|max·|Γl|max/√2: both reflections uniform in a disc.
    Valid: small reflections.
    Source: uniform-in-circle model of the Agilent E4416A/E4417A manual; computed, checked by simulation.

    >>> print(f"{mismatch_standard_uncertainty_of_maxima(0.0243902439, 0.0243902439):.10f}")
    0.0004206465
    """
    return _product(source_maximum, load_maximum) / math.sqrt(2.0)


def line_ripple(first_reflection: Figures, second_reflection: Figures, line_loss_db: Figures = 0.0) -> Floats:
    """Return the ripple in dB peak to peak of a line between two mismatches.

    Formula: 20·log((1 + g1·g2/L)/(1 - g1·g2/L)), L the one-way loss as a power ratio.
    Valid: line long enough to turn the phase through a full circle in the band.
    Source: round trip of the reflected wave; computed.

    >>> print(f"{line_ripple(0.2, 0.3, 1.0):.4f}")
    0.8286
    """
    product = _product(first_reflection, second_reflection) / ratio(loss(line_loss_db, "line_loss_db"))
    return 2.0 * decibels((1.0 + product) / (1.0 - product))


def _product(first: Figures, second: Figures) -> Floats:
    product = within(first, 0.0, 1.0, "first reflection") * within(second, 0.0, 1.0, "second reflection")
    if np.any(product == 1.0):
        raise CalculationError("both reflections are total", hint="give reflections below 1")
    return product
