"""Laws of noise parameters over frequency."""

from __future__ import annotations

import numpy as np

from specflow.calculators.mismatched_noise import noise_figure_at_source
from specflow.derive.law import Law, Outcome, Setting
from specflow.derive.samples import Samples
from specflow.derive.scattering import row_by_row
from specflow.errors import CalculationError
from specflow.units import parse_unit

NOISE = ("fmin", "magnitude", "angle", "rn")


def source_noise_figure(samples: Samples) -> Outcome:
    """Return the noise figure in dB with a matched source (the reference impedance), from noise parameters.

    Formula: F = Fmin + 4·rn·|Γopt|²/|1 + Γopt|², rn = Rn/Z0 and a source reflection of 0; 10·log10 of it.
    Valid: source at port 1, of the reference impedance. A real source with another reflection has another noise
    figure.
    Source: H. Rothe and W. Dahlke, Proc. IRE 44 (1956), from memory; noise data of the Touchstone File Format
    Specification 2.1, where version 1 files give Rn/Z0 and version 2 files Rn in ohm.
    """
    reference = samples.number("reference")
    normalised = parse_unit(samples.values["rn"].unit or "1").dimension == parse_unit("1").dimension
    rn_ohm = samples.value("rn") * (reference if normalised else 1.0)
    magnitude = samples.value("magnitude")
    if (magnitude >= 1).any():
        raise CalculationError(
            "an optimum source reflection reaches 1", hint="look at the noise data of the file"
        )
    optimum = magnitude * np.exp(1j * np.deg2rad(samples.value("angle")))
    value = noise_figure_at_source(samples.value("fmin"), optimum, rn_ohm, 0.0, reference)
    return row_by_row(value, "dB", notes=(f"with a source of {reference:g} ohm",))


NOISE_LAWS: tuple[Law, ...] = (
    Law(
        "noise figure",
        "noise figure with a matched source, from noise parameters",
        source_noise_figure,
        over="each",
        needs="the noise block of a network file",
        roles=NOISE,
        settings=(Setting("reference", "the reference impedance, also that of the source", "50", ""),),
        gives=("noise_figure",),
    ),
)  # fmt: skip
