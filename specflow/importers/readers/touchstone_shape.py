"""What is known of the numbers of a Touchstone file when its comments are read; which comments stand outside them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.importers.readers.touchstone_network import Comment, Floats, PairFormat


@dataclass(frozen=True, slots=True)
class Shape:
    """What is known of the data when the comments are read; ``order`` are the entries in the order of the format."""

    parameter: str
    pair_format: PairFormat
    order: tuple[tuple[int, int], ...]
    axis: Floats
    lines: NDArray[np.int64]
    reference: tuple[float, ...]
    reference_stated: bool

    @property
    def ports(self) -> int:
        """How many ports there are."""
        return len(self.reference)


def outside_data(comments: Sequence[Comment], lines: NDArray[np.int64]) -> list[Comment]:
    """Return the comments above the first and below the last frequency: simulators put thousands between."""
    first, last = int(lines[0]), int(lines[-1])
    return [one for one in comments if (one.line < first or one.line > last) and not one.beside_data]
