"""Gain states of a receiver: each evaluated with its own figures over its own input range, never mixed."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from specflow.calculators.arguments import Figures, Floats, finite, intercept
from specflow.calculators.decibel import decibels, ratio
from specflow.calculators.intercept_cascade import Law, cascade_iip3
from specflow.calculators.noise_cascade import cascade_gain, cascade_noise_figure
from specflow.calculators.sensitivity import noise_floor
from specflow.errors import CalculationError


@dataclass(frozen=True, slots=True)
class GainStates:
    """Figures of each state (last axis), and its signal to noise and distortion at both ends of its range."""

    gain_db: Floats
    nf_db: Floats
    iip3_dbm: Floats
    sndr_lowest_db: Floats
    sndr_highest_db: Floats


def sndr_two_tone(input_dbm: Figures, noise_dbm: Figures, iip3_dbm: Figures) -> Floats:
    """Return signal to noise plus third-order product in dB for tones of one level.

    Formula: P - 10·log(10^(N/10) + 10^((3P - 2·IIP3)/10)).
    Valid: below compression; per-tone level, all at the input.
    Source: computed: at -95 dBm distortion does not matter, at -40 dBm it does.

    >>> print(f"{sndr_two_tone(-95.0, -99.0471, -16.332):.3f} {sndr_two_tone(-40.0, -99.0471, -16.332):.2f}")
    4.047 47.05
    """
    level, noise = finite(input_dbm, "input_dbm"), finite(noise_dbm, "noise_dbm")
    product = ratio(3.0 * level - 2.0 * intercept(iip3_dbm, "iip3_dbm"))
    return level - decibels(ratio(noise) + product)


def gain_states(
    gain_db: Figures,
    nf_db: Figures,
    iip3_dbm: Figures,
    bandwidth_hz: Figures,
    lowest_dbm: Figures,
    highest_dbm: Figures,
    law: Law = "coherent",
) -> GainStates:
    """Return the results of every gain state; figures are (positions, states), ranges (states,), hysteresis included.

    Formula: Friis and the intercept law with the figures of each state; noise matters most at the lowest and
    distortion at the highest input of its range.
    Valid: source at 290 K; ranges as the state is really used. The best noise figure of one state and the best
    intercept of another belong to no receiver.
    Source: computed: two stages 18/1.5/-5 and 10/10/2, 20 MHz: NF 1.918 dB, IIP3 -16.332 dBm.

    >>> states = gain_states([[18.0], [10.0]], [[1.5], [10.0]], [[-5.0], [2.0]], 20e6, [-95.0], [-50.0])
    >>> print(np.round(states.nf_db, 3), np.round(states.iip3_dbm, 3), np.round(states.sndr_lowest_db, 3))
    [1.918] [-16.332] [4.047]
    """
    lowest, highest = finite(lowest_dbm, "lowest_dbm"), finite(highest_dbm, "highest_dbm")
    if np.any(lowest > highest):
        raise CalculationError(
            "a gain state ends below its lowest input",
            hint="give the lowest and the highest input of each state",
        )
    nf, iip3 = cascade_noise_figure(gain_db, nf_db), cascade_iip3(gain_db, iip3_dbm, law)
    floor = noise_floor(bandwidth_hz, nf)
    return GainStates(
        cascade_gain(gain_db),
        nf,
        iip3,
        sndr_two_tone(lowest, floor, iip3),
        sndr_two_tone(highest, floor, iip3),
    )
