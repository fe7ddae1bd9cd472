"""Conditions: what a conditions set requires, and whether recorded conditions prove it.

What may live here: the dictionary of dimensions, reading what people type, expansion into required points,
matching of records with points, the one decision whether a point is proved, condition maps, and saying all of
it in words. Limits and verdicts do not live here: a caller says which records are good.

    points = compile_points(conditions_set)           # once a set
    matching = match(points, records)                 # once for all records of a requirement
    proved = proves(points, matching, good)           # once an item, ``good`` marking its records
"""

from typing import TYPE_CHECKING

from specflow.conditions.dictionary import DIRECTION_PAIRS, KNOWN_DIMENSIONS, Comparison, KnownDimension
from specflow.conditions.dimensions import (
    find_dimension,
    is_unlocated_temperature,
    known_dimension,
    unlocated_temperature_hint,
)
from specflow.conditions.expand import MOST_POINTS, compile_points, expand, point_count
from specflow.conditions.match import Matching, match, unstated_conditions
from specflow.conditions.points import Points
from specflow.conditions.proof import proves, range_gaps
from specflow.conditions.words import (
    conditions_words,
    dimension_words,
    point_words,
    set_words,
    value_words,
)
from specflow.late import late_names

if TYPE_CHECKING:
    from specflow.conditions.assemble import make_conditions_set, read_combination, read_exclusions
    from specflow.conditions.difference import conditions_difference
    from specflow.conditions.maps import map_columns, parse_map_entry, unmap_columns
    from specflow.conditions.mismatch import explain_mismatch, missing_words
    from specflow.conditions.parse import ReadDimension, parse_dimension, read_dimension, read_rule

# Matching reads no text and explains nothing: status does not wait for what does.
__getattr__ = late_names(
    __name__,
    {
        "ReadDimension": "parse",
        "conditions_difference": "difference",
        "explain_mismatch": "mismatch",
        "make_conditions_set": "assemble",
        "map_columns": "maps",
        "missing_words": "mismatch",
        "parse_dimension": "parse",
        "parse_map_entry": "maps",
        "read_combination": "assemble",
        "read_dimension": "parse",
        "read_exclusions": "assemble",
        "read_rule": "parse",
        "unmap_columns": "maps",
    },
)

__all__ = [
    "DIRECTION_PAIRS",
    "KNOWN_DIMENSIONS",
    "MOST_POINTS",
    "Comparison",
    "KnownDimension",
    "Matching",
    "Points",
    "ReadDimension",
    "compile_points",
    "conditions_difference",
    "conditions_words",
    "dimension_words",
    "expand",
    "explain_mismatch",
    "find_dimension",
    "is_unlocated_temperature",
    "known_dimension",
    "make_conditions_set",
    "map_columns",
    "match",
    "missing_words",
    "parse_dimension",
    "parse_map_entry",
    "point_count",
    "point_words",
    "proves",
    "range_gaps",
    "read_combination",
    "read_dimension",
    "read_exclusions",
    "read_rule",
    "set_words",
    "unlocated_temperature_hint",
    "unmap_columns",
    "unstated_conditions",
    "value_words",
]
