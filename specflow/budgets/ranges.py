"""What a result comes to for other values of the lines, and requirements held against the ends of a range."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain
from specflow.budgets.figures import figures_of, line_slopes
from specflow.budgets.margins import Bar
from specflow.budgets.outputs import Output
from specflow.model.budget_outcome import ServedOutcome

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class ServedRange:
    """A requirement held against the extremes: margins at the adverse and at the favourable end, each (n,)."""

    adverse: ServedOutcome
    favourable: ServedOutcome


def value_at(chain: Chain, output: Output, values: Sequence[Floats]) -> Floats:
    """Return a result (n,) for values of the lines."""
    return np.broadcast_to(output.value(figures_of(chain, values, output.takes)), (chain.size,))


def slopes_at(chain: Chain, output: Output, values: Sequence[Floats]) -> Floats:
    """Return the slopes (lines, n) of a result at values of the lines."""
    figures = figures_of(chain, values, output.takes)
    slopes = line_slopes(chain, values, figures, output.gradient(figures))
    return np.broadcast_to(slopes, (len(chain.lines), chain.size))


def held_between(bar: Bar, low: Floats, high: Floats) -> ServedRange:
    """Hold both ends against the limit; favourable is the best value between them."""
    at_low, at_high = bar.held(low), bar.held(high)
    worse = np.where(
        np.nan_to_num(at_low.margin, nan=np.inf) <= np.nan_to_num(at_high.margin, nan=np.inf), low, high
    )
    better = np.where(
        np.nan_to_num(at_low.margin, nan=np.inf) <= np.nan_to_num(at_high.margin, nan=np.inf), high, low
    )
    if bar.convert.is_identity:
        middle = (bar.lower + bar.upper) / 2.0
        better = np.where(np.isfinite(middle), np.clip(middle, low, high), better)
    return ServedRange(bar.held(worse), bar.held(better))
