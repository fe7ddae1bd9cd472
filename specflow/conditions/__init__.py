"""Conditions: what a conditions set requires, and whether recorded conditions prove it.

What may live here: the dictionary of dimensions, reading what people type, expansion into required points, matching
of records with points, the one decision whether a point is proved, condition maps, and saying all of it in words.
Limits and verdicts do not live here: a caller says which records are good.

    points = compile_points(conditions_set)           # once a set
    matching = match(points, records)                 # once for all records of a requirement
    proved = proves(points, matching, good)           # once an item, ``good`` marking its records
"""

from specflow.conditions.dimensions import KNOWN_DIMENSIONS, KnownDimension, find_dimension, known_dimension
from specflow.conditions.expand import MOST_POINTS, compile_points, expand, point_count
from specflow.conditions.match import Matching, match, unstated_conditions
from specflow.conditions.points import Points
from specflow.conditions.proof import proves, range_gaps

__all__ = [
    "KNOWN_DIMENSIONS",
    "MOST_POINTS",
    "KnownDimension",
    "Matching",
    "Points",
    "compile_points",
    "expand",
    "find_dimension",
    "known_dimension",
    "match",
    "point_count",
    "proves",
    "range_gaps",
    "unstated_conditions",
]
