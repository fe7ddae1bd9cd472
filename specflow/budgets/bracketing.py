"""Finding where a margin is gone, at all places at once: the edge between a value that holds and one that fails.

Secant steps between the two ends, the weight of an end that stays put halved (the Illinois rule; M. Dowell and
P. Jarratt, BIT 11, 1971, recalled from memory), and every third step a halving, so that it ends for any margin.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
MarginAt = Callable[[Floats], Floats]
_MOST_STEPS = 200
_WIDTH = 1e-12


def edge(
    margin_at: MarginAt, outside: Floats, inside: Floats, at_outside: Floats, at_inside: Floats
) -> Floats:
    """Return the side that holds (n,) of an edge between ``outside``, where the margin is negative, and ``inside``.

    ``at_outside`` and ``at_inside`` are the margins there. Places where ``inside`` fails too, or both hold, are left at
    some value between: the caller knows them. Exact to 1e-12, relative above 1.
    """
    outside, inside = np.array(outside, np.float64), np.array(inside, np.float64)
    weights = [np.array(at_outside, np.float64), np.array(at_inside, np.float64)]
    before = np.zeros(len(inside), np.int8)
    for step in range(_MOST_STEPS):
        if np.all(np.abs(inside - outside) <= _WIDTH * np.maximum(1.0, np.abs(inside))):
            break
        middle = (outside + inside) / 2.0
        if step % 3 != 2:
            middle = _secant(outside, inside, weights[0], weights[1], middle)
        margin = margin_at(middle)
        holds = margin >= 0
        outside, inside = np.where(holds, outside, middle), np.where(holds, middle, inside)
        side = np.where(holds, 1, -1).astype(np.int8)
        stayed = np.where(side == before, 0.5, 1.0)
        weights = [
            np.where(holds, weights[0] * stayed, margin),
            np.where(holds, margin, weights[1] * stayed),
        ]
        before = side
    return inside


def _secant(outside: Floats, inside: Floats, at_outside: Floats, at_inside: Floats, middle: Floats) -> Floats:
    """Return where a straight line between the ends crosses 0; the middle where the ends tell no such place."""
    with np.errstate(invalid="ignore", divide="ignore", over="ignore"):
        part = at_inside / (at_inside - at_outside)
        found = inside + part * (outside - inside)
    usable = np.isfinite(found) & (part > 0) & (part < 1)
    return np.where(usable, found, middle)
