"""Exclusions: combinations of a conditions set that are not required."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.axes import EXACT_SLACK
from specflow.conditions.dimensions import word_key
from specflow.errors import ConditionsError
from specflow.model.columns import Columns
from specflow.model.conditions import Clause, ConditionsSet, Exclusion


def excluded_points(conditions: ConditionsSet, points: Columns) -> tuple[NDArray[np.bool_], tuple[int, ...]]:
    """Return which combinations are excluded, and how many each exclusion takes away (0 deserves a look)."""
    taken = np.zeros(points.size, bool)
    counts: list[int] = []
    for exclusion in conditions.exclusions:
        meant = _meant(conditions, exclusion, points)
        counts.append(int(meant.sum()))
        taken |= meant
    return taken, tuple(counts)


def _meant(conditions: ConditionsSet, exclusion: Exclusion, points: Columns) -> NDArray[np.bool_]:
    meant = np.ones(points.size, bool)
    for clause in exclusion.clauses:
        dimension = conditions.dimension(clause.dimension)
        if dimension is None or not (dimension.values or dimension.words):
            raise ConditionsError(
                f"an exclusion speaks of {clause.dimension}, which has no listed values to take away",
                where=str(conditions.id),
                hint="exclusions take away listed values; split a range into two sets instead",
            )
        meant &= _true(clause, points)
    return meant


def _true(clause: Clause, points: Columns) -> NDArray[np.bool_]:
    name = clause.dimension
    if name in points.text:
        column = points.text[name]
        wanted = {word_key(name, word) for word in clause.words} | {
            f"{value:.15g}" for value in clause.values
        }
        return np.array([word_key(name, label) in wanted for label in column.labels], np.bool_)[column.codes]
    actual = points.numeric[name]
    if clause.words:
        raise ConditionsError(f"an exclusion compares {name}, which is a number, with {clause.words[0]!r}")
    near = EXACT_SLACK * np.abs(actual)
    if clause.values:
        return np.asarray(np.any(np.abs(actual[:, None] - np.array(clause.values)) <= near[:, None], axis=1))
    meant = np.ones(points.size, bool)
    if clause.low is not None:
        meant &= actual > clause.low + near if clause.low_is_open else actual >= clause.low - near
    if clause.high is not None:
        meant &= actual < clause.high - near if clause.high_is_open else actual <= clause.high + near
    return meant
