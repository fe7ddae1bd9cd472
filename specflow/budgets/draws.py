"""Random specimens: how far each line of one specimen lies from its figure.

Every line has a stream of its own, a counter-based generator (Philox) keyed by seed and line, cut into chunks of fixed
size. A trial therefore has the same draws whatever block, thread or order it is computed in, and adding a line leaves
the draws of the others as they were.
"""

from __future__ import annotations

import hashlib
import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain, ReadLine
from specflow.budgets.spread import elements, group_matrix, moments, moves, sigma_of_full_normal
from specflow.errors import CalculationError
from specflow.model.base import code_key
from specflow.model.budget_line import Distribution, LineTolerance

Floats = NDArray[np.float64]
CHUNK = 16384
"""Trials drawn at once from each stream: fixed, because it is part of what a seed means."""
_FEW = 12
"""Up to so many independent elements are drawn one by one; the mean of more is taken as normal (common practice)."""
_LARGEST_SEED = (1 << 64) - 1

Deviation = Callable[[int], Floats]


@dataclass(frozen=True, slots=True)
class Draws:
    """The streams of a budget: ``lines`` has one for every line that moves, None for the others."""

    lines: tuple[Deviation | None, ...]

    def chunk(self, number: int) -> list[Floats | None]:
        """Return the deviations of one chunk of trials, (CHUNK,) in the tolerance unit of each line."""
        return [None if one is None else one(number) for one in self.lines]


def draws_of(chain: Chain, seed: int) -> Draws:
    """Return the streams of a budget. CalculationError where a line that moves names no distribution."""
    if not 0 <= seed <= _LARGEST_SEED:
        raise CalculationError(
            f"the seed {seed} is out of range", hint="give a whole number from 0 to 2^64 - 1"
        )
    silent = [
        read.line.place
        for read in chain.lines
        if moves(read.line) and read.line.tolerance is not None and read.line.tolerance.shape is None
    ]
    if silent:
        raise CalculationError(
            f"bounds are no distribution, and these lines name none: {', '.join(silent)}",
            where=f"budget {chain.budget.id}",
            hint="say uniform, triangular, u-shaped or truncated normal between limits, or normal with k·σ",
        )
    latent = _Groups(chain, seed)
    return Draws(tuple(_stream(chain, read, seed, latent) for read in chain.lines))


def generator(seed: int, name: str, chunk: int) -> np.random.Generator:
    """Return the generator of one chunk of the stream with that name."""
    digest = hashlib.blake2b(name.encode(), digest_size=8).digest()
    key = np.array([seed, int.from_bytes(digest, "little")], np.uint64)
    return np.random.Generator(np.random.Philox(counter=[0, 0, chunk, 0], key=key))


def _name(read: ReadLine) -> str:
    line = read.line
    return f"line {code_key(line.block)} {line.position} {code_key(line.parameter)}"


def _stream(chain: Chain, read: ReadLine, seed: int, latent: _Groups) -> Deviation | None:
    tolerance = read.line.tolerance
    if tolerance is None or not moves(read.line):
        return None
    name, count = _name(read), elements(chain, read)
    if read.line.correlation_group:
        group = code_key(read.line.correlation_group)
        return lambda chunk: _from_latent(tolerance, latent.of(group, chunk))
    if count == 1:
        return lambda chunk: _drawn(tolerance, generator(seed, name, chunk), CHUNK)
    if count <= _FEW:
        return lambda chunk: np.asarray(
            _drawn(tolerance, generator(seed, name, chunk), count * CHUNK).reshape(count, CHUNK).mean(axis=0)
        )
    found = moments(tolerance)
    assert found is not None  # a shape is named
    mean, deviation = found.mean, found.deviation / math.sqrt(count)
    return lambda chunk: mean + deviation * generator(seed, name, chunk).standard_normal(CHUNK)


def _drawn(tolerance: LineTolerance, random: np.random.Generator, size: int) -> Floats:
    """Draw deviations by the distribution between -minus and +plus."""
    minus, plus = tolerance.minus, tolerance.plus
    match tolerance.shape:
        case Distribution.NORMAL:
            assert tolerance.k is not None
            drawn = random.standard_normal(size)
            drawn *= plus / tolerance.k
            return drawn
        case Distribution.TRIANGULAR:
            return random.triangular(-minus, 0.0, plus, size)
        case Distribution.U_SHAPED:
            return _u_shaped(random.random(size), minus, plus)
        case Distribution.TRUNCATED_NORMAL:
            return _truncated(random.random(size), tolerance)
    drawn = random.random(size)  # faster than random.uniform
    drawn *= minus + plus
    drawn -= minus
    return drawn


def _from_latent(tolerance: LineTolerance, latent: Floats) -> Floats:
    """Return the deviations whose ranks are those of standard normal ``latent`` values."""
    from scipy.special import ndtr  # loading it takes longer than many a budget

    minus, plus = tolerance.minus, tolerance.plus
    if tolerance.shape is Distribution.NORMAL:
        assert tolerance.k is not None
        return latent * (plus / tolerance.k)
    rank = np.asarray(ndtr(latent), np.float64)
    match tolerance.shape:
        case Distribution.TRIANGULAR:
            return _triangular(rank, minus, plus)
        case Distribution.U_SHAPED:
            return _u_shaped(rank, minus, plus)
        case Distribution.TRUNCATED_NORMAL:
            return _truncated(rank, tolerance)
    return rank * (minus + plus) - minus


def _triangular(rank: Floats, minus: float, plus: float) -> Floats:
    width, turn = minus + plus, minus / (minus + plus)
    below = -minus + np.sqrt(rank * width * minus)
    above = plus - np.sqrt((1.0 - rank) * width * plus)
    return np.where(rank < turn, below, above)


def _u_shaped(rank: Floats, minus: float, plus: float) -> Floats:
    return np.asarray((plus - minus) / 2.0 + (plus + minus) / 2.0 * np.sin(math.pi * (rank - 0.5)))


def _truncated(rank: Floats, tolerance: LineTolerance) -> Floats:
    from scipy.special import ndtr, ndtri

    sigma = sigma_of_full_normal(tolerance)
    low, high = float(ndtr(-tolerance.minus / sigma)), float(ndtr(tolerance.plus / sigma))
    return np.asarray(sigma * ndtri(low + rank * (high - low)), np.float64)


class _Groups:
    """The standard normal values that the lines of correlation groups share, correlated between groups as stated."""

    def __init__(self, chain: Chain, seed: int) -> None:
        groups = [
            code_key(read.line.correlation_group) for read in chain.lines if read.line.correlation_group
        ]
        self.names: Sequence[str] = list(dict.fromkeys(groups))
        self.seed = seed
        values, vectors = np.linalg.eigh(group_matrix(chain.budget, self.names))
        self.mix = vectors * np.sqrt(np.maximum(values, 0.0))
        self.kept: tuple[int, Floats] | None = None

    def of(self, group: str, chunk: int) -> Floats:
        """Return the values of one group in one chunk."""
        plain = self.kept[1] if self.kept is not None and self.kept[0] == chunk else None
        if plain is None:
            plain = np.array(
                [generator(self.seed, f"group {name}", chunk).standard_normal(CHUNK) for name in self.names]
            )
            self.kept = (chunk, plain)
        return np.asarray(self.mix[self.names.index(group)] @ plain)
