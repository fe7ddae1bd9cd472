"""Signal, back-off and noise along a transmit chain; positions on the first axis."""

from __future__ import annotations

import numpy as np

from specflow.calculators.arguments import Figures, Floats, chain, finite, intercept
from specflow.calculators.decibel import BOLTZMANN, T0, decibels, ratio, total
from specflow.calculators.noise_cascade import cascade_noise_figure


def node_levels(input_dbm: Figures, gain_db: Figures) -> Floats:
    """Return the signal at every node in dBm: at the input, then behind each position.

    Formula: P_0, P_0 + G_1, P_0 + G_1 + G_2, …
    Valid: small-signal gains; check the back-off at every node.
    Source: definition of gain; computed.

    >>> print(node_levels(-13.0, [12.0, 15.0, 13.0]))
    [-13.  -1.  14.  27.]
    """
    gain, start = chain(gain_db=finite(gain_db, "gain_db"))[0], finite(input_dbm, "input_dbm")
    shape = np.broadcast_shapes(gain.shape[1:], start.shape)
    levels = np.empty((gain.shape[0] + 1, *shape))
    levels[0] = start
    levels[1:] = start + np.cumsum(gain, axis=0)
    return levels


def output_back_off(input_dbm: Figures, gain_db: Figures, op1db_dbm: Figures) -> Floats:
    """Return how far the signal behind each position lies below its output compression point, in dB.

    Formula: OP1dB_i - P_i.
    Valid: average power against the compression point; the peaks of the signal come on top.
    Source: definition; computed.

    >>> print(output_back_off(-13.0, [12.0, 15.0, 13.0], [10.0, 20.0, 37.0]))
    [11.  6. 10.]
    """
    gain, op1db = chain(gain_db=finite(gain_db, "gain_db"), op1db_dbm=intercept(op1db_dbm, "op1db_dbm"))
    return op1db - node_levels(input_dbm, gain)[1:]


def output_noise_density(gain_db: Figures, nf_db: Figures, input_density_dbm_hz: Figures) -> Floats:
    """Return the noise density at the output of a chain in dBm/Hz.

    Formula: G·(n_in + (F - 1)·k·290).
    Valid: any input noise. "-174 + NF + G" is right only if the input noise is that of 290 K.
    Source: computed: -150 dBm/Hz, 12/5, 15/6, 13/8 dB.

    >>> print(f"{output_noise_density([12.0, 15.0, 13.0], [5.0, 6.0, 8.0], -150.0):.3f}")
    -109.959
    """
    added = (ratio(cascade_noise_figure(gain_db, nf_db)) - 1.0) * BOLTZMANN * T0 * 1e3
    source = ratio(finite(input_density_dbm_hz, "input_density_dbm_hz"))
    return decibels(source + added) + total(finite(gain_db, "gain_db"))
