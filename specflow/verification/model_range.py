"""Simulation outside the range in which its model was validated: it decides nothing there.

``simulation_validated`` of a table may be a condition (``frequency in 27..31 GHz``); a denial (no, none, not yet, n/a)
says that the model is not validated; any other text is a statement that it is, for what the table holds.
"""

from __future__ import annotations

from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from specflow.errors import ExpressionError
from specflow.limits import evaluate_condition, parse_condition
from specflow.model.columns import Columns
from specflow.model.expression import Expression
from specflow.verification.records import Records


@lru_cache(maxsize=256)
def _condition(text: str) -> Expression | None:
    try:
        return parse_condition(text)
    except ExpressionError:
        return None


_DENIALS = ("no", "not", "none", "never", "false", "n/a", "na", "tbd", "unvalidated", "-", "–", "—", "0")


def is_validated(text: str) -> bool:
    """Whether a table says that the model behind it was validated at all."""
    words = text.casefold().replace(",", " ").replace(".", " ").split()
    return bool(words) and words[0] not in _DENIALS


def outside_validated_range(records: Records, conditions: Columns) -> NDArray[np.bool_] | None:
    """Return which records (m,) lie outside the validated range of their model; None where no range is stated."""
    texts = [source.table.simulation_validated for source in records.sources]
    if not any(texts):
        return None
    outside = np.zeros(records.size, bool)
    for place, text in enumerate(texts):
        condition = _condition(text) if is_validated(text) else None
        if condition is None:
            continue
        try:
            holds, known = evaluate_condition(condition, conditions)
        except ExpressionError:
            continue
        outside |= (records.source == place) & ~(holds & known)
    return outside if outside.any() else None
