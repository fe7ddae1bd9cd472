"""Gain, noise figure, IIP3 and IP1dB of a chain in one pass, and their slopes: for many points or trials at once.

The same laws as ``noise_cascade``, ``intercept_cascade`` and ``compression``, fused: each figure in dB goes through
one ``exp``, the gain before a position is a running product, and everything happens in place in blocks that stay in
the processor's cache. Block and axis order were measured (12 positions, 10^6 trials): rows of 4096 trials, positions
first.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any, NoReturn

import numpy as np
import numpy.typing as npt

from specflow.calculators.arguments import Figures, Floats, chain, finite, intercept, noise_figure, unchecked
from specflow.calculators.decibel import NEPER
from specflow.calculators.intercept_cascade import THIRD_ORDER, Law, exponent
from specflow.calculators.noise_cascade import Slopes
from specflow.errors import CalculationError

BLOCK = 4096
"""Points or trials per block: 32 KiB a row."""

Kept = npt.NDArray[np.floating[Any]]


@dataclass(frozen=True, slots=True)
class CascadeResults:
    """Four results of a chain, each in the shape of the axes behind the positions."""

    gain_db: Kept
    nf_db: Kept
    iip3_dbm: Kept
    ip1db_dbm: Kept


@dataclass(frozen=True, slots=True)
class CascadeSlopes:
    """Slopes of the results, each (positions, …) in dB per dB; the gain's own slope is 1 for every position."""

    nf: Slopes
    iip3: Slopes
    ip1db: Slopes


def cascade_results(
    gain_db: Figures,
    nf_db: Figures,
    iip3_dbm: Figures,
    ip1db_dbm: Figures,
    law: Law = "coherent",
    *,
    keep: type[np.float64] | type[np.float32] = np.float64,
) -> CascadeResults:
    """Return gain, noise figure, IIP3 and IP1dB of a chain; figures (positions, …), one with fewer axes holds for all.

    Formula: Friis; Σ (G_before/IIP3_i)^p with p = 1 coherent, 2 non-coherent; 1/IP1 = Σ G_before/IP1_i.
    Valid: as each law. ``keep`` = float32 stores 16 bytes per trial for the four results (error below 1e-5 dB below
    100 dB); the computation is in float64 all the same.
    Source: the laws of the single calculators, to which the tests compare; noise: D. M. Pozar, 4th ed., Example 10.2.

    >>> results = cascade_results([10.0, -1.0, -3.0], [2.0, 1.0, 4.0], [0.0, None, 5.0], [-10.0, None, -5.0])
    >>> print(f"{results.gain_db:.1f} {results.nf_db:.3f} {results.iip3_dbm:.3f} {results.ip1db_dbm:.3f}")
    6.0 2.555 -5.455 -15.455
    """
    power = exponent(THIRD_ORDER, law)
    rows, shape = _rows(gain_db, nf_db, iip3_dbm, ip1db_dbm)
    points = int(np.prod(shape, dtype=np.int64))
    out = np.empty((4, points), keep)
    work = np.empty((5, min(BLOCK, points)))
    for start in range(0, points, BLOCK):
        part = slice(start, min(start + BLOCK, points))
        block = [row if row.shape[1] == 1 else row[:, part] for row in rows]
        _results_of_block(out[:, part], block, power, work[:, : part.stop - part.start])
    _check(out, float(rows[1].min(initial=np.inf)), gain_db, nf_db, iip3_dbm, ip1db_dbm)
    gain, nf, iip3, ip1db = (np.reshape(row, shape)[()] for row in out)
    return CascadeResults(gain, nf, iip3, ip1db)


def cascade_slopes(
    gain_db: Figures, nf_db: Figures, iip3_dbm: Figures, ip1db_dbm: Figures, law: Law = "coherent"
) -> CascadeSlopes:
    """Return the slopes of noise figure, IIP3 and IP1dB of a chain to every figure and gain, in dB per dB.

    Formula: dNF/dNF_i = F_i/(G_before·F), dNF/dG_i = -(1/F)·Σ_{j>i} (F_j - 1)/G_before(j); for intercepts the share
    c_i and -Σ_{j>i} c_j.
    Valid: as each law; a passive position's NF moves with its loss.
    Source: the laws differentiated; checked by finite differences.

    >>> slopes = cascade_slopes([18.0, -2.5, -7.0, 20.0], [1.2, 2.5, 7.0, 4.0], [0.0] * 4, [-10.0] * 4)
    >>> print(np.round(slopes.nf.to_figure, 4), np.round(slopes.nf.to_gain[:3], 4))
    [0.7955 0.017  0.0852 0.2141] [-0.2045 -0.1971 -0.1289]
    """
    power = exponent(THIRD_ORDER, law)
    rows, shape = _rows(gain_db, nf_db, iip3_dbm, ip1db_dbm)
    positions, points = rows[0].shape[0], int(np.prod(shape, dtype=np.int64))
    out = np.empty((6, positions, points))
    work = np.empty((3, min(BLOCK, points)))
    for start in range(0, points, BLOCK):
        part = slice(start, min(start + BLOCK, points))
        block = [row if row.shape[1] == 1 else row[:, part] for row in rows]
        _slopes_of_block(out[:, :, part], block, power, work[:, : part.stop - part.start])
    last_gain = rows[0][-1]  # the one figure that no slope depends on
    if not (np.isfinite(out).all() and np.isfinite(last_gain).all()) or rows[1].min(initial=np.inf) < 0.0:
        _refuse(gain_db, nf_db, iip3_dbm, ip1db_dbm)
    table = out.reshape(6, positions, *shape)
    return CascadeSlopes(Slopes(table[0], table[1]), Slopes(table[2], table[3]), Slopes(table[4], table[5]))


def _rows(*figures: Figures) -> tuple[list[Floats], tuple[int, ...]]:
    """Return each figure as (positions, points) or (positions, 1) where it is constant, and the shape of the points."""
    names = ("gain_db", "nf_db", "iip3_dbm", "ip1db_dbm")
    arrays = chain(**{name: unchecked(value, name) for name, value in zip(names, figures, strict=True)})
    shape = np.broadcast_shapes(*(array.shape for array in arrays))
    positions, points = shape[0], shape[1:]
    rows = []
    for array in arrays:
        constant = array.size == positions
        rows.append((array if constant else np.broadcast_to(array, shape)).reshape(positions, -1))
    return rows, points


def _results_of_block(out: Kept, block: Sequence[Floats], power: float, work: Floats) -> None:
    gain, nf, iip3, ip1db = block
    before, noise, third, first, x = work
    before.fill(1.0)
    noise.fill(1.0)
    third.fill(0.0)
    first.fill(0.0)
    for k in range(len(gain)):
        excess = np.subtract(_linear(nf[k], NEPER, x), 1.0, out=x)
        excess /= before
        noise += excess
        third += _referred(iip3[k], before, power, x)
        first += _referred(ip1db[k], before, 1.0, x)
        before *= _linear(gain[k], NEPER, x)
    out[0] = np.sum(gain, axis=0)
    for row, ratio, scale in ((1, noise, 1.0), (2, third, -1.0 / power), (3, first, -1.0)):
        with np.errstate(divide="ignore"):
            np.log(ratio, out=ratio)
        np.multiply(ratio, scale / NEPER, out=out[row], casting="same_kind")


def _slopes_of_block(out: Floats, block: Sequence[Floats], power: float, work: Floats) -> None:
    gain, nf, iip3, ip1db = block
    to_nf, nf_to_gain, to_iip3, iip3_to_gain, to_ip1db, ip1db_to_gain = out
    before, passed, x = work
    before.fill(1.0)
    for k in range(len(gain)):
        np.divide(1.0, before, out=passed)
        np.multiply(_linear(nf[k], NEPER, x), passed, out=to_nf[k])
        np.subtract(to_nf[k], passed, out=nf_to_gain[k])
        _referred(iip3[k], before, power, to_iip3[k])
        _referred(ip1db[k], before, 1.0, to_ip1db[k])
        before *= _linear(gain[k], NEPER, x)
    noise = np.sum(nf_to_gain, axis=0) + 1.0
    to_nf /= noise
    nf_to_gain /= noise
    _turn_into_sum_after(nf_to_gain, nf_to_gain, work)
    for shares, to_gain in ((to_iip3, iip3_to_gain), (to_ip1db, ip1db_to_gain)):
        whole = np.sum(shares, axis=0)
        shares /= np.where(whole > 0.0, whole, 1.0)
        _turn_into_sum_after(shares, to_gain, work)


def _turn_into_sum_after(parts: Floats, slopes: Floats, work: Floats) -> None:
    """Write minus the sum of all later parts to each row of ``slopes``, which may be ``parts`` itself."""
    after, here = work[0], work[1]
    after.fill(0.0)
    for k in range(len(parts) - 1, -1, -1):
        np.copyto(here, parts[k])
        np.copyto(slopes[k], after)
        after -= here


def _linear(row: Floats, scale: float, into: Floats) -> Floats:
    """Return exp(scale·row), in ``into`` unless one value holds for the whole block."""
    target = into if row.size > 1 else None
    scaled = np.multiply(row, scale, out=target)
    return np.exp(scaled, out=scaled)


def _referred(row: Floats, before: Floats, power: float, into: Floats) -> Floats:
    """Return (G_before/IP)^power in ``into``."""
    parts = np.multiply(_linear(row, -power * NEPER, into), before, out=into)
    if power == 2.0:
        parts *= before
    return parts


def _check(out: Kept, lowest_nf: float, *figures: Figures) -> None:
    """Refuse bad figures after the fact: a bad input shows in the results, and only then is it worth looking for."""
    bad_intercept = np.isnan(out[2:]).any() or (out[2:] == -np.inf).any()
    if bad_intercept or not np.isfinite(out[:2]).all() or lowest_nf < 0.0:
        _refuse(*figures)


def _refuse(gain_db: Figures, nf_db: Figures, iip3_dbm: Figures, ip1db_dbm: Figures) -> NoReturn:
    """Raise the message that names the first bad figure."""
    finite(gain_db, "gain_db")
    noise_figure(nf_db, "nf_db")
    intercept(iip3_dbm, "iip3_dbm")
    intercept(ip1db_dbm, "ip1db_dbm")
    raise CalculationError(
        "the figures of the chain are too large for a result",
        hint="check the units: gains in dB, levels in dBm",
    )
