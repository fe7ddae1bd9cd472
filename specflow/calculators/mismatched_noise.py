"""Noise of two-ports at the source they really see: noise parameters, and Friis with mismatch."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from specflow.calculators.arguments import (
    Complexes,
    Figures,
    Floats,
    above,
    at_least,
    complex_finite,
    matrices,
    noise_figure,
)
from specflow.calculators.decibel import decibels, ratio
from specflow.calculators.two_port import available_gain, output_reflection
from specflow.errors import CalculationError


@dataclass(frozen=True, slots=True)
class NoisyTwoPort:
    """A two-port with noise parameters: S (…, 2, 2), Fmin in dB, optimum source reflection, Rn in ohm as such."""

    s: Complexes
    nfmin_db: Floats
    gamma_opt: Complexes
    rn_ohm: Floats

    @classmethod
    def of(
        cls, s: npt.ArrayLike, nfmin_db: Figures, gamma_opt: npt.ArrayLike, rn_ohm: Figures
    ) -> NoisyTwoPort:
        """Return the two-port after checking its figures."""
        return cls(
            matrices(s, 2, "s"),
            noise_figure(nfmin_db, "nfmin_db"),
            complex_finite(gamma_opt, "gamma_opt"),
            at_least(rn_ohm, 0.0, "rn_ohm"),
        )


def noise_figure_at_source(
    nfmin_db: Figures,
    gamma_opt: npt.ArrayLike,
    rn_ohm: Figures,
    source: npt.ArrayLike = 0.0,
    z0_ohm: float = 50.0,
) -> Floats:
    """Return the noise figure in dB at a source reflection.

    Formula: Fmin + 4·(Rn/Z0)·|Γs - Γopt|²/((1 - |Γs|²)·|1 + Γopt|²).
    Valid: Rn in ohm; Touchstone 1.x files give it divided by the reference impedance.
    Source: Touchstone File Format Specification 2.1, IBIS Open Forum 2024 (noise data of its example); value computed.

    >>> optimum = 0.64 * np.exp(1j * np.deg2rad(69.0))
    >>> print(f"{noise_figure_at_source(0.7, optimum, 19.0):.4f}")
    1.7844
    """
    least, optimum = ratio(noise_figure(nfmin_db, "nfmin_db")), complex_finite(gamma_opt, "gamma_opt")
    gs = complex_finite(source, "source")
    if np.any(np.abs(gs) >= 1.0):
        raise CalculationError("the source reflection reaches 1", hint="give a passive source, below 1")
    rn = at_least(rn_ohm, 0.0, "rn_ohm") / float(above(z0_ohm, 0.0, "z0_ohm"))
    away = np.abs(gs - optimum) ** 2 / ((1.0 - np.abs(gs) ** 2) * np.abs(1.0 + optimum) ** 2)
    return decibels(least + 4.0 * rn * away)


def mismatched_cascade_noise_figure(
    stages: Sequence[NoisyTwoPort], source: npt.ArrayLike = 0.0, z0_ohm: float = 50.0
) -> Floats:
    """Return the noise figure in dB of two-ports in a row, each at the source that it sees.

    Formula: F = F1(Γs) + (F2(Γout1) - 1)/GA1 + …, GA the available gain at that source.
    Valid: noise of each stage known by its parameters at one frequency.
    Source: H. Rothe and W. Dahlke, Proc. IRE 44 (1956), with Friis; equals the noise cascade of scikit-rf to 1e-6 (in
    the tests). Two stages with 50 ohm ports are the plain cascade:

    >>> stage = NoisyTwoPort.of([[0.0, 0.0], [10.0**0.5, 0.0]], 2.0, 0.0, 10.0)
    >>> print(f"{mismatched_cascade_noise_figure([stage, stage]):.4f}")
    2.1574
    """
    if not stages:
        raise CalculationError("the chain has no positions", hint="give at least one two-port")
    seen = complex_finite(source, "source")
    excess: Floats = np.zeros(())
    gain: Floats = np.ones(())
    for stage in stages:
        nf = noise_figure_at_source(stage.nfmin_db, stage.gamma_opt, stage.rn_ohm, seen, z0_ohm)
        excess = excess + (ratio(nf) - 1.0) / gain
        gain = gain * ratio(available_gain(stage.s, seen))
        seen = output_reflection(stage.s, seen)
    return decibels(1.0 + excess)
