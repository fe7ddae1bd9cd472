"""Rows that belong together: those of one item under the same conditions, but for the axes that are looked along."""

from __future__ import annotations

from collections.abc import Collection, Sequence

import numpy as np
from numpy.typing import NDArray

from specflow.model.columns import Columns, TextColumn

Rows = NDArray[np.intp]


def grouped_rows(
    conditions: Columns, items: TextColumn, rows: Rows, apart: Collection[str]
) -> Sequence[Rows]:
    """Return ``rows`` in groups of the same item and the same conditions, those named in ``apart`` left out.

    Unstated is a value of its own. Groups come in the order in which they are met.
    """
    if not len(rows):
        return []
    keys = [items.codes[rows].astype(np.int64)]
    for name, values in conditions.numeric.items():
        if name not in apart:
            keys.append(np.unique(values[rows], return_inverse=True, equal_nan=True)[1].astype(np.int64))
    for name, words in conditions.text.items():
        if name not in apart:
            keys.append(words.codes[rows].astype(np.int64))
    _, first, group = np.unique(np.stack(keys, axis=1), axis=0, return_index=True, return_inverse=True)
    group = group.reshape(-1)
    order = np.argsort(group, kind="stable")
    parts = np.split(rows[order], np.flatnonzero(np.diff(group[order])) + 1)
    return [parts[place] for place in np.argsort(first, kind="stable")]
