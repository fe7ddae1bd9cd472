"""Scanning an array: loss and grating lobes; angles from broadside."""

from __future__ import annotations

import numpy as np

from specflow.calculators.arguments import Figures, Floats, above, at_least, within
from specflow.calculators.decibel import decibels
from specflow.errors import CalculationError


def scan_loss(scan_deg: Figures, exponent: Figures = 1.0) -> Floats:
    """Return the scan loss in dB (positive).

    Formula: -10·q·log(cos θ); q on power: 1 for an ideal aperture, typically 1.2 to 1.5. Some texts take it on field.
    Valid: not near the onset of grating lobes or scan blindness; below 90°.
    Source: common practice, no source; computed: 60° with q 1.3.

    >>> print(f"{scan_loss(60.0, 1.3):.4f}")
    3.9134
    """
    angle = within(scan_deg, -89.0, 89.0, "scan_deg")
    return -at_least(exponent, 0.0, "exponent") * decibels(np.cos(np.deg2rad(angle)))


def grating_lobe_spacing(scan_deg: Figures) -> Floats:
    """Return the largest element spacing in wavelengths whose grating lobe stays out of sight.

    Formula: 1/(1 + sin |θ|).
    Valid: uniform spacing; keep a beamwidth of margin, the first null should be out of sight too.
    Source: Microwaves101 encyclopedia, grating lobes: 2/3 at 30°.

    >>> print(f"{grating_lobe_spacing(30.0):.4f}")
    0.6667
    """
    return 1.0 / (1.0 + np.sin(np.deg2rad(np.abs(within(scan_deg, -90.0, 90.0, "scan_deg")))))


def grating_lobe_angle(spacing_wavelengths: Figures, scan_deg: Figures) -> Floats:
    """Return the angle of the first grating lobe in degrees; refused where none is in sight.

    Formula: asin(sin θ0 - sign(θ0)·1/d).
    Valid: uniform spacing.
    Source: array factor repeated in sin θ with 1/d; computed.

    >>> print(f"{grating_lobe_angle(0.7, 45.0):.3f}")
    -46.176
    """
    sine = np.sin(np.deg2rad(within(scan_deg, -90.0, 90.0, "scan_deg")))
    lobe = sine - np.where(sine < 0, -1.0, 1.0) / above(spacing_wavelengths, 0.0, "spacing_wavelengths")
    if np.any(np.abs(lobe) > 1.0):
        raise CalculationError("no grating lobe is in sight", hint="the spacing is below 1/(1 + sin θ)")
    return np.rad2deg(np.arcsin(lobe))
