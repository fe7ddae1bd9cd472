"""Friis: gain, noise figure and noise temperature of a chain, positions on the first axis."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from specflow.calculators.arguments import Figures, Floats, chain, finite, kelvin, noise_figure
from specflow.calculators.decibel import T0, decibels, gain_before, ratio, sum_after, total


@dataclass(frozen=True, slots=True)
class Slopes:
    """Derivatives of a cascade result in dB per dB: to each position's own figure, and to each position's gain."""

    to_figure: Floats
    to_gain: Floats


def cascade_gain(gain_db: Figures) -> Floats:
    """Return the gain of a chain in dB.

    Formula: sum of the gains in dB.
    Valid: available gains, or matched positions.
    Source: the definition of gain; the example is the first half of D. M. Pozar, 4th ed., Example 10.2.

    >>> print(f"{cascade_gain([10.0, -1.0, -3.0]):.1f}")
    6.0
    """
    return total(chain(gain_db=finite(gain_db, "gain_db"))[0])


def cascade_noise_figure(gain_db: Figures, nf_db: Figures) -> Floats:
    """Return the noise figure of a chain in dB.

    Formula: F = F1 + (F2 - 1)/G1 + (F3 - 1)/(G1·G2) + …
    Valid: available gains; each noise figure for the source that its position really sees; no position wider in
    bandwidth than those before it.
    Source: H. T. Friis, Proc. IRE 32 (1944); D. M. Pozar, Microwave Engineering, 4th ed., Example 10.2 (2.55 dB).

    >>> print(f"{cascade_noise_figure([10.0, -1.0, -3.0], [2.0, 1.0, 4.0]):.2f}")
    2.56
    """
    return decibels(1.0 + total(_excess(*_stages(gain_db, nf_db))))


def cumulative_noise_figure(gain_db: Figures, nf_db: Figures) -> Floats:
    """Return the noise figure in dB from the input up to and including each position.

    Formula: Friis, cut off behind each position.
    Valid: as for the whole chain.
    Source: H. T. Friis, Proc. IRE 32 (1944); steps of D. M. Pozar, 4th ed., Example 10.2.

    >>> print(np.round(cumulative_noise_figure([10.0, -1.0, -3.0], [2.0, 1.0, 4.0]), 3))
    [2.    2.07  2.555]
    """
    return decibels(1.0 + np.cumsum(_excess(*_stages(gain_db, nf_db)), axis=0))


def cascade_noise_temperature(gain_db: Figures, te_k: Figures) -> Floats:
    """Return the equivalent input noise temperature of a chain in K.

    Formula: Te = T1 + T2/G1 + T3/(G1·G2) + …
    Valid: available gains; a passive position has T = (L - 1)·Tphysical.
    Source: courseware "Noise in Communication Systems" (15/2, -3/3, 10/10 dB: 343 K).

    >>> print(f"{cascade_noise_temperature([15.0, -3.0, 10.0], [169.619, 288.626, 2610.0]):.1f}")
    343.4
    """
    gain, te = chain(gain_db=finite(gain_db, "gain_db"), te_k=kelvin(te_k, "te_k"))
    return total(te / gain_before(gain))


def excess_noise_shares(gain_db: Figures, nf_db: Figures) -> Floats:
    """Return each position's share of the excess noise F - 1 (sum 1; all 0 for a noiseless chain).

    Formula: ((F_i - 1)/G_before)/(F - 1).
    Valid: shares of F - 1 add up to 1; shares of a noise figure in dB do not.
    Source: Friis term by term; stages of L. A. Harrison, Introduction to Radar (2019), value computed.

    >>> print(np.round(excess_noise_shares([20, -0.5, -6, -1, 30], [3, 0.5, 6, 1, 5]), 4))
    [0.8557 0.001  0.0288 0.0099 0.1045]
    """
    excess = _excess(*_stages(gain_db, nf_db))
    whole = total(excess)
    return np.divide(excess, whole, out=np.zeros_like(excess), where=whole > 0)


def noise_figure_slopes(gain_db: Figures, nf_db: Figures) -> Slopes:
    """Return the derivatives of the noise figure of a chain, in dB per dB.

    Formula: dNF/dNF_i = F_i/(G_before·F); dNF/dG_i = -(1/F)·Σ_{j>i} (F_j - 1)/G_before(j).
    Valid: gain and noise figure varied apart; for a passive position with NF = loss the slope to its loss is
    dNF/dNF_i - dNF/dG_i.
    Source: Friis differentiated; checked by finite differences.

    >>> slopes = noise_figure_slopes([18.0, -2.5, -7.0, 20.0], [1.2, 2.5, 7.0, 4.0])
    >>> print(np.round(slopes.to_figure, 4), np.round(slopes.to_gain, 4) + 0.0)
    [0.7955 0.017  0.0852 0.2141] [-0.2045 -0.1971 -0.1289  0.    ]
    """
    gain, nf = _stages(gain_db, nf_db)
    before, factor = gain_before(gain), ratio(nf)
    excess = (factor - 1.0) / before
    whole = 1.0 + total(excess)
    return Slopes(factor / (before * whole), -sum_after(excess) / whole)


def system_temperature(antenna_k: Figures, gain_db: Figures, te_k: Figures, plane: int = 0) -> Floats:
    """Return the system noise temperature in K referred to the plane in front of position ``plane`` (0: antenna).

    Formula: Tsys = (Ta + Te)·G_before(plane).
    Valid: antenna temperature at the antenna plane; available gains.
    Source: computed from the formula; 0.5 dB feed, 0.8 dB LNA: 151.2 K at the antenna is 134.8 K at the LNA input.

    >>> chain_gain, chain_te = [-0.5, 50.0, 0.0], [35.385, 58.661, 2610.0]
    >>> print(f"{system_temperature(50.0, chain_gain, chain_te):.1f}")
    151.2
    >>> print(f"{system_temperature(50.0, chain_gain, chain_te, plane=1):.1f}")
    134.8
    """
    gain = chain(gain_db=finite(gain_db, "gain_db"))[0]
    at_antenna = kelvin(antenna_k, "antenna_k") + cascade_noise_temperature(gain, te_k)
    return at_antenna * ratio(total(gain[:plane]))


def g_over_t(
    antenna_gain_dbi: Figures, antenna_k: Figures, gain_db: Figures, te_k: Figures, plane: int = 0
) -> Floats:
    """Return the figure of merit G/T in dB/K, computed at the plane in front of position ``plane``.

    Formula: G_antenna + G_before(plane) - 10·log(Tsys(plane)); the same at every plane.
    Valid: gain and noise temperature at one plane.
    Source: computed from the formula: 40 dBi, 50 K, 0.5 dB feed, 0.8 dB LNA.

    >>> print(f"{g_over_t(40.0, 50.0, [-0.5, 50.0, 0.0], [35.385, 58.661, 2610.0], plane=1):.3f}")
    18.204
    """
    gain = chain(gain_db=finite(gain_db, "gain_db"))[0]
    at_plane = finite(antenna_gain_dbi, "antenna_gain_dbi") + total(gain[:plane])
    return at_plane - decibels(system_temperature(antenna_k, gain, te_k, plane))


def _stages(gain_db: Figures, nf_db: Figures) -> tuple[Floats, Floats]:
    gain, nf = chain(gain_db=finite(gain_db, "gain_db"), nf_db=noise_figure(nf_db, "nf_db"))
    shape = np.broadcast_shapes(gain.shape, nf.shape)
    return np.broadcast_to(gain, shape), np.broadcast_to(nf, shape)


def _excess(gain_db: Floats, nf_db: Floats) -> Floats:
    excess = ratio(nf_db)
    excess -= 1.0
    excess /= gain_before(gain_db)
    return excess


def stage_temperatures(nf_db: Figures) -> Floats:
    """Return the noise temperature of each position in K from its noise figure in dB.

    Formula: Te = 290·(F - 1).
    Valid: always, by definition.
    Source: definition of the noise figure; computed.

    >>> print(np.round(stage_temperatures([2.0, 3.0, 10.0]), 1))
    [ 169.6  288.6 2610. ]
    """
    return T0 * (ratio(noise_figure(nf_db, "nf_db")) - 1.0)
