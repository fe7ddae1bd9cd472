"""Which limits a figure of a block serves: those that move with it anywhere."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from specflow.budgets.allotment import BlockParameter, key_of
from specflow.budgets.probe import Probe
from specflow.budgets.ranges import slopes_at

_FLAT = 1e-9


def targets_of_lines(probe: Probe) -> Mapping[BlockParameter, tuple[str, ...]]:
    """Return for each block and parameter the requirements whose result moves with it, in the order of the budget."""
    found: dict[BlockParameter, dict[str, None]] = {}
    chain = probe.chain
    for target in probe.targets:
        slopes = np.abs(slopes_at(chain, target.output, chain.nominal()))
        for read, part in zip(chain.lines, slopes, strict=True):
            if (part > _FLAT).any():
                found.setdefault(key_of(read), {})[target.name] = None
    return {key: tuple(names) for key, names in found.items()}
