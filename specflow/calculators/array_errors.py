"""What errors of the elements do to gain, sidelobes and pointing of an array.

Phase errors in degrees rms, amplitude errors as a fraction rms, independent from element to element: errors that all
elements share (temperature, panel, supply) do not average out.
"""

from __future__ import annotations

import math

import numpy as np

from specflow.calculators.arguments import Figures, Floats, above, at_least, count, finite, within
from specflow.calculators.decibel import NEPER, decibels, ratio
from specflow.errors import CalculationError


def phase_error_gain_loss(phase_rms_deg: Figures) -> Floats:
    """Return the loss of gain in dB of random phase errors.

    Formula: gain exp(-σ²), that is 4.343·σ² dB.
    Valid: Gaussian errors, independent.
    Source: J. Ruze, Proc. IEEE 54 (1966); 10° gives 3 % (NASA Langley 1976); computed for 20°.

    >>> print(f"{phase_error_gain_loss(20.0):.4f}")
    0.5292
    """
    return _variance(phase_rms_deg) / NEPER


def error_directivity_ratio(phase_rms_deg: Figures, amplitude_rms: Figures = 0.0) -> Floats:
    """Return the directivity with errors relative to that without (a ratio).

    Formula: exp(-σ²)/(1 + δ²).
    Valid: many elements, independent errors.
    Source: computed; a thesis on phased arrays has the first-order form.

    >>> print(f"{error_directivity_ratio(10.0, 0.1):.7f}")
    0.9603936
    """
    return np.exp(-_variance(phase_rms_deg)) / (1.0 + _square(amplitude_rms))


def error_directivity_ratio_first_order(phase_rms_deg: Figures, amplitude_rms: Figures = 0.0) -> Floats:
    """Return the directivity with errors relative to that without (a ratio), to first order.

    Formula: 1/(1 + δ² + σ²).
    Valid: small errors; 0.03 dB from the exponential form at 20°.
    Source: formula in a thesis on phased arrays; computed.

    >>> print(f"{error_directivity_ratio_first_order(10.0, 0.1):.7f}")
    0.9611117
    """
    return 1.0 / (1.0 + _square(amplitude_rms) + _variance(phase_rms_deg))


def error_sidelobe(
    elements: Figures,
    phase_rms_deg: Figures,
    amplitude_rms: Figures = 0.0,
    taper_efficiency_db: Figures = 0.0,
) -> Floats:
    """Return the average sidelobe in dB below the peak that random errors make.

    Formula: (1 + δ² - exp(-σ²))/(N·e·exp(-σ²)), e = taper efficiency.
    Valid: the average, not the peak: peaks exceed it by some 8 to 10 dB over many lobes. Isotropic elements.
    Source: computed, checked by simulation at an ideal null within 0.1 dB.

    >>> print(f"{error_sidelobe(64, 10.0, 0.1):.4f}")
    -31.9086
    """
    kept = np.exp(-_variance(phase_rms_deg))
    scattered = _square(amplitude_rms) - np.expm1(-_variance(phase_rms_deg))
    return decibels(scattered / (_effective(elements, taper_efficiency_db) * kept))


def error_sidelobe_first_order(
    elements: Figures,
    phase_rms_deg: Figures,
    amplitude_rms: Figures = 0.0,
    taper_efficiency_db: Figures = 0.0,
) -> Floats:
    """Return the average sidelobe in dB below the peak that small random errors make.

    Formula: (δ² + σ²)/(N·e).
    Valid: small errors.
    Source: first order of the exact form; computed.

    >>> print(f"{error_sidelobe_first_order(64, 10.0, 0.1):.4f}")
    -31.9914
    """
    scattered = _square(amplitude_rms) + _variance(phase_rms_deg)
    return decibels(scattered / _effective(elements, taper_efficiency_db))


def amplitude_error_fraction(amplitude_rms_db: Figures) -> Floats:
    """Return an rms amplitude error as a fraction from dB.

    Formula: dB·ln 10/20.
    Valid: small errors.
    Source: derivative of 20·log; computed.

    >>> print(f"{amplitude_error_fraction(0.5):.6f}")
    0.057565
    """
    return at_least(amplitude_rms_db, 0.0, "amplitude_rms_db") * (NEPER / 2.0)


def quantisation_phase_error(bits: Figures) -> Floats:
    """Return the rms phase error in degrees of a phase shifter of so many bits.

    Formula: π/(√3·2^b) rad: uniform over one step.
    Valid: rounding errors that look random over the array.
    Source: computed: 5 bits.

    >>> print(f"{quantisation_phase_error(5):.4f}")
    3.2476
    """
    return 180.0 / (math.sqrt(3.0) * 2.0 ** count(bits, "bits"))


def quantisation_gain_loss(bits: Figures) -> Floats:
    """Return the loss of array gain in dB from phase quantisation.

    Formula: -20·log(sinc(1/2^b)).
    Valid: rounding errors uniform over one step.
    Source: online MIMO book, TU Berlin, chapter 20, section 5: 3.92, 0.91, 0.22, 0.056, 0.014 dB for 1 to 5 bits.

    >>> print(np.round(quantisation_gain_loss([1, 2, 3, 4, 5]), 3))
    [3.922 0.912 0.224 0.056 0.014]
    """
    return -2.0 * decibels(np.sinc(0.5 ** count(bits, "bits")))


def quantisation_sidelobe(bits: Figures, elements: Figures) -> Floats:
    """Return the average sidelobe in dB below the peak from phase quantisation.

    Formula: 10·log(π²/(3·4^b·N)) = 5.17 - 6.02·b - 10·log N.
    Valid: the average; periodic rounding gives discrete lobes up to about -6.02·b dB whatever N is.
    Source: σ²/N; computed: 5 bits, 64 elements.

    >>> print(f"{quantisation_sidelobe(5, 64):.4f}")
    -42.9930
    """
    return decibels(math.pi**2 / (3.0 * 4.0 ** count(bits, "bits") * count(elements, "elements")))


def bits_for_sidelobe(elements: Figures, sidelobe_db: Figures) -> Floats:
    """Return the least number of phase-shifter bits that keeps an average sidelobe (dB below the peak, negative).

    Formula: ceil(log4(π²/(3·N·10^(SLL/10)))), at least 1.
    Valid: as for the average sidelobe.
    Source: class problem (64 elements, -40 dB); answer computed.

    >>> print(f"{bits_for_sidelobe(64, -40.0):.0f}")
    5
    """
    wanted = count(elements, "elements") * ratio(finite(sidelobe_db, "sidelobe_db"))
    # The small allowance keeps a sidelobe that b bits meet exactly from asking for b + 1 by rounding.
    exact = np.log(math.pi**2 / (3.0 * wanted)) / math.log(4.0)
    return np.maximum(np.ceil(exact - 1e-12), 1.0)


def pointing_error(
    elements: Figures, spacing_wavelengths: Figures, phase_rms_deg: Figures, scan_deg: Figures = 0.0
) -> Floats:
    """Return the rms pointing error in degrees of a uniform line with random phase errors.

    Formula: slope √(12/(N·(N² - 1)))·σ, pointing = slope/(2π·d·cos θ); many texts write N³ for N·(N² - 1).
    Valid: small errors, one plane; at least 2 elements.
    Source: least-squares slope; thesis on phased arrays has the N³ form (0.17229°); computed.

    >>> print(f"{pointing_error(16, 0.5, 10.0):.4f}")
    0.1726
    """
    n = count(elements, "elements", 2)
    slope = np.sqrt(12.0 / (n * (n * n - 1.0))) * at_least(phase_rms_deg, 0.0, "phase_rms_deg")
    spacing = above(spacing_wavelengths, 0.0, "spacing_wavelengths")
    return slope / (2.0 * math.pi * spacing * np.cos(np.deg2rad(within(scan_deg, -89.0, 89.0, "scan_deg"))))


def failed_eirp_loss(failed_fraction: Figures) -> Floats:
    """Return the loss of EIRP in dB when a fraction of transmit elements has failed.

    Formula: -20·log(1 - f): less power and less gain.
    Valid: failed elements radiate nothing.
    Source: sum of fields; computed: 5 %.

    >>> print(f"{failed_eirp_loss(0.05):.4f}")
    0.4455
    """
    return 2.0 * failed_directivity_loss(failed_fraction)


def failed_directivity_loss(failed_fraction: Figures) -> Floats:
    """Return the loss of directivity, or of receive G/T, in dB when a fraction of elements has failed.

    Formula: -10·log(1 - f).
    Valid: failed elements are silent: neither signal nor noise.
    Source: sum of fields over their power; computed: 5 %.

    >>> print(f"{failed_directivity_loss(0.05):.4f}")
    0.2228
    """
    return -decibels(1.0 - _failed(failed_fraction))


def failed_sidelobe(failed_fraction: Figures, elements: Figures) -> Floats:
    """Return the average sidelobe in dB below the peak that failed elements make.

    Formula: f/((1 - f)·N).
    Valid: failures scattered at random.
    Source: variance of a random gap; computed: 5 % of 256.

    >>> print(f"{failed_sidelobe(0.05, 256):.3f}")
    -36.870
    """
    failed = _failed(failed_fraction)
    return decibels(failed / ((1.0 - failed) * count(elements, "elements")))


def _failed(fraction: Figures) -> Floats:
    failed = within(fraction, 0.0, 1.0, "failed_fraction")
    if np.any(failed == 1.0):
        raise CalculationError("all elements have failed", hint="give a fraction below 1")
    return failed


def _variance(phase_rms_deg: Figures) -> Floats:
    return np.deg2rad(at_least(phase_rms_deg, 0.0, "phase_rms_deg")) ** 2


def _square(amplitude_rms: Figures) -> Floats:
    return at_least(amplitude_rms, 0.0, "amplitude_rms") ** 2


def _effective(elements: Figures, taper_efficiency_db: Figures) -> Floats:
    return count(elements, "elements") * ratio(finite(taper_efficiency_db, "taper_efficiency_db"))
