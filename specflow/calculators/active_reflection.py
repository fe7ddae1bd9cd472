"""Active reflection of array elements over scan, from a scattering matrix.

The phase convention of the excitation and the numbering of the elements belong together: with
a_n = exp(-j·2π·d·n·sin θ), element 0 leads when the beam leans away from it.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from specflow.calculators.arguments import (
    Complexes,
    Figures,
    Floats,
    complex_finite,
    count,
    finite,
    matrices,
    within,
)
from specflow.calculators.decibel import decibels
from specflow.errors import CalculationError


def line_excitation(elements: int, spacing_wavelengths: float, scan_deg: Figures) -> Complexes:
    """Return the excitation (…, elements) of a uniform line scanned to each angle.

    Formula: a_n = exp(-j·2π·d·n·sin θ).
    Valid: unit amplitudes.
    Source: path difference; computed: at 30° and half a wavelength each element lags 90°.

    >>> print(np.round(np.angle(line_excitation(3, 0.5, 30.0), deg=True), 1))
    [   0.  -90. -180.]
    """
    number = np.arange(int(count(elements, "elements")))
    spacing = float(finite(spacing_wavelengths, "spacing_wavelengths"))
    sine = np.sin(np.deg2rad(within(scan_deg, -90.0, 90.0, "scan_deg")))
    excitation: Complexes = np.exp(sine[..., None] * number * (-2j * np.pi * spacing))
    return excitation


def active_reflection(s: npt.ArrayLike, excitation: npt.ArrayLike) -> Complexes:
    """Return the active reflection coefficient of each element (…, elements).

    Formula: Γ_m = Σ_n S_mn·a_n/a_m.
    Valid: all elements driven; |Γ_m| may exceed 1. Edge elements differ from those in the middle.
    Source: definition as in scikit-rf ``s_active``; computed: two elements, 0.1 coupled to 0.2.

    >>> print(np.round(active_reflection([[0.1, 0.2], [0.2, 0.1]], [1.0, -1.0]).real, 3))
    [-0.1 -0.1]
    """
    matrix, a = matrices(s, None, "s"), complex_finite(excitation, "excitation")
    if a.shape[-1:] != matrix.shape[-1:]:
        raise CalculationError(
            f"s has {matrix.shape[-1]} ports, the excitation {a.shape[-1:] or 'no'} elements",
            hint="drive every port",
        )
    if np.any(a == 0):
        raise CalculationError(
            "an element is not driven",
            hint="its active reflection is not defined; leave its port terminated in s",
        )
    incoming: Complexes = np.einsum("...mn,...n->...m", matrix, a)
    return incoming / a


def active_mismatch_loss(reflection: npt.ArrayLike) -> Floats:
    """Return the mismatch loss in dB of each element from its active reflection.

    Formula: -10·log(1 - |Γ|²).
    Valid: |Γ| below 1; an element that takes up power from its neighbours has no mismatch loss and is refused.
    Source: power not accepted; computed: four-element example at broadside.

    >>> print(f"{active_mismatch_loss(0.22324348):.4f}")
    0.2220
    """
    accepted = 1.0 - np.abs(complex_finite(reflection, "reflection")) ** 2
    if np.any(accepted <= 0):
        raise CalculationError(
            "an active reflection reaches 1", hint="the element accepts no power at this scan"
        )
    return -decibels(accepted)


def realised_scan_efficiency(s: npt.ArrayLike, excitation: npt.ArrayLike) -> Floats:
    """Return the share of the available power that an array accepts at a scan angle.

    Formula: Σ |a_m|²·(1 - |Γ_m|²)/Σ |a_m|².
    Valid: every element fed by its own matched source.
    Source: power balance; computed: odd drive of two elements 0.1 coupled to 0.2.

    >>> print(f"{realised_scan_efficiency([[0.1, 0.2], [0.2, 0.1]], [1.0, -1.0]):.2f}")
    0.99
    """
    power = np.abs(complex_finite(excitation, "excitation")) ** 2
    accepted = power * (1.0 - np.abs(active_reflection(s, excitation)) ** 2)
    share: Floats = np.sum(accepted, axis=-1) / np.sum(power, axis=-1)
    return share
