"""What a law gives: one entry a quantity, with the figures it takes, its value, its cumulative column and gradient."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.figures import Figures

Floats = NDArray[np.float64]
Value = Callable[[Figures], Floats]
Derivatives = Callable[[Figures], Mapping[str, Floats]]


@dataclass(frozen=True, slots=True)
class Output:
    """A quantity that a law gives.

    ``needs`` are the figures every position must have (or be free of, see ``checks``); ``asks`` what the budget must
    state besides: "input level", "noise source", "bandwidth", "antenna gain", "signal-to-noise ratio". ``value`` is
    (...,); ``cumulative`` (positions, ...) is the same up to and including each position; ``gradient`` has the
    derivative to each figure. ``shares`` (positions, ...) sum to 1; None where a share means nothing. ``is_monotonic``:
    each figure moves the result one way, so that its extremes lie at corners. ``words`` say the law. ``wants`` are
    figures that count where they are stated.
    """

    parameter: str
    unit: str
    words: str
    needs: tuple[str, ...]
    value: Value
    cumulative: Value
    gradient: Derivatives
    shares: Value | None = None
    asks: tuple[str, ...] = ()
    is_monotonic: bool = True
    last_gain: bool = False
    wants: tuple[str, ...] = ()

    @property
    def takes(self) -> tuple[str, ...]:
        """All figures that it is computed from."""
        return (*self.needs, *self.wants)
