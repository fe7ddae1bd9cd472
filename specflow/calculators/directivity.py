"""Directivity and beamwidth of arrays; spacings in wavelengths."""

from __future__ import annotations

import math

import numpy as np

from specflow.calculators.arguments import Figures, Floats, above, count, within
from specflow.calculators.decibel import decibels


def linear_directivity(elements: int, spacing_wavelengths: Figures) -> Floats:
    """Return the directivity (a ratio) of a broadside line of isotropic elements, exactly.

    Formula: N²/Σ_mn sinc(2·d·(m - n)), sinc(x) = sin(πx)/(πx).
    Valid: isotropic elements, uniform, broadside.
    Source: integral of the array factor, checked by numerical integration.

    >>> print(f"{linear_directivity(16, 0.25):.5f}")
    8.16175
    """
    n = int(count(elements, "elements"))
    spacing = above(spacing_wavelengths, 0.0, "spacing_wavelengths")
    apart = np.arange(1, n).reshape((-1,) + (1,) * spacing.ndim)
    pairs: Floats = np.sum((n - apart) * np.sinc(2.0 * spacing * apart), axis=0)
    return n * n / (n + 2.0 * pairs)


def linear_directivity_estimate(elements: Figures, spacing_wavelengths: Figures) -> Floats:
    """Return the estimated directivity (a ratio) of a broadside line.

    Formula: 2·N·d.
    Valid: long line, d below 1; equal to the exact value at d = 0.5.
    Source: common practice, no source; 8 elements at 0.6: 9.6 against 9.454 exact.

    >>> print(f"{linear_directivity_estimate(8, 0.6):.2f}")
    9.60
    """
    return 2.0 * count(elements, "elements") * above(spacing_wavelengths, 0.0, "spacing_wavelengths")


def planar_directivity(
    elements: Figures, dx_wavelengths: Figures, dy_wavelengths: Figures, scan_deg: Figures = 0.0
) -> Floats:
    """Return the directivity in dBi of a planar array from its area.

    Formula: 10·log(4π·N·dx·dy·cos θ).
    Valid: infinite-array estimate, uniform, no grating lobes, not near the horizon.
    Source: 4πA/λ²; computed: 64 elements at half a wavelength.

    >>> print(f"{planar_directivity(64, 0.5, 0.5):.4f}")
    23.0333
    """
    cell = above(dx_wavelengths, 0.0, "dx_wavelengths") * above(dy_wavelengths, 0.0, "dy_wavelengths")
    seen = np.cos(np.deg2rad(within(scan_deg, -89.0, 89.0, "scan_deg")))
    return decibels(4.0 * math.pi * count(elements, "elements") * cell * seen)


def directivity_from_beamwidths(first_deg: Figures, second_deg: Figures, constant: float = 32400.0) -> Floats:
    """Return the directivity in dBi estimated from two half-power beamwidths.

    Formula: 10·log(32400/(θ1·θ2)); 41253 is the lossless idea of a rectangular beam.
    Valid: one narrow main beam, low sidelobes.
    Source: common estimate; computed: 12.7° by 12.7°.

    >>> print(f"{directivity_from_beamwidths(12.7, 12.7):.4f}")
    23.0294
    """
    area = above(first_deg, 0.0, "first_deg") * above(second_deg, 0.0, "second_deg")
    return decibels(float(above(constant, 0.0, "constant")) / area)


def line_beamwidth(elements: Figures, spacing_wavelengths: Figures, scan_deg: Figures = 0.0) -> Floats:
    """Return the half-power beamwidth in degrees of a long uniform line.

    Formula: 0.886/(N·d·cos θ) rad.
    Valid: long line, not near the horizon; some texts round the constant to 0.9.
    Source: half-power point of sin(x)/x; PySDR (M. Lichtman) prints 6.8° for 16 elements at 20° with 0.9.

    >>> print(f"{line_beamwidth(16, 0.5, 20.0):.2f}")
    6.75
    """
    length = count(elements, "elements") * above(spacing_wavelengths, 0.0, "spacing_wavelengths")
    seen = np.cos(np.deg2rad(within(scan_deg, -89.0, 89.0, "scan_deg")))
    return np.rad2deg(0.885893 / (length * seen))
