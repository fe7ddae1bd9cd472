"""Limits: reading them from text, what they come to for each record, and saying them in words.

Where things live:

- ``reader`` positions and tokens; ``expression_grammar`` the grammar that limits, gates, applicability and filters
  share; ``value_grammar``, ``bound_grammar``, ``tolerance_grammar``, ``at_grammar``, ``shape_grammar``,
  ``population_grammar`` the parts of a limit, ``joint_grammar`` what joins them, ``whole_grammar`` what belongs to
  all of it, ``grammar`` the whole, ``entrance`` loads it when it is needed
- ``phrases`` words that say a side, ``suggestion`` a spelling that works, for every refusal
- ``settling`` which unit a limit has, and what does not add; ``conversion`` units that meet in it
- ``expression`` parse and evaluate expressions; ``expression_value`` how, on arrays; ``inputs`` where names look
- ``evaluation`` the bounds a limit sets; ``bounds`` what comes out; ``mask`` and ``combination`` two large parts
- ``text`` canonical spelling; ``words`` plain English; ``difference`` what changed; ``alternative`` members apart
- ``tree``, ``expression_shape`` what a tree is made of

Nothing here looks anything up: declared values and conditions are handed in.
"""

from typing import TYPE_CHECKING

from specflow.late import late_names
from specflow.limits.alternative import Alternative, alternatives, choose, rule_of
from specflow.limits.bounds import Bounds, LimitContext
from specflow.limits.entrance import parse_limit
from specflow.limits.evaluation import evaluate_limit
from specflow.limits.expression import (
    evaluate_condition,
    evaluate_expression,
    expression_names,
    parse_condition,
    parse_expression,
)
from specflow.limits.expression_text import expression_text, expression_words
from specflow.limits.tree import limit_inputs

if TYPE_CHECKING:
    from specflow.limits.difference import limit_difference
    from specflow.limits.text import limit_text
    from specflow.limits.words import limit_words

# Judging says nothing of a limit in words: status does not wait for what does.
__getattr__ = late_names(
    __name__,
    {
        "limit_difference": "difference",
        "limit_text": "text",
        "limit_words": "words",
    },
)

__all__ = [
    "Alternative",
    "Bounds",
    "LimitContext",
    "alternatives",
    "choose",
    "evaluate_condition",
    "evaluate_expression",
    "evaluate_limit",
    "expression_names",
    "expression_text",
    "expression_words",
    "limit_difference",
    "limit_inputs",
    "limit_text",
    "limit_words",
    "parse_condition",
    "parse_expression",
    "parse_limit",
    "rule_of",
]
