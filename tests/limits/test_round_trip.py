"""Properties of the grammar: canonical text and JSON read back to the same tree, and nothing but ExpressionError."""

from __future__ import annotations

from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

from specflow.errors import ExpressionError
from specflow.limits import (
    expression_text,
    expression_words,
    limit_difference,
    limit_text,
    limit_words,
    parse_expression,
    parse_limit,
)
from specflow.model.expression import Expression
from specflow.model.limit import Limit, LimitNode
from tests.limits.strategies import expressions, trees

calm = settings(
    max_examples=200, deadline=None, suppress_health_check=[HealthCheck.too_slow, HealthCheck.filter_too_much]
)


@calm
@given(expressions)
def test_expression_reads_back_from_its_canonical_text(node: Expression) -> None:
    assert parse_expression(expression_text(node)) == node
    assert expression_words(node)


def _read_unless_levels_add(text: str) -> Limit:
    """A random sum may add two levels, which physics refuses; such a tree is no limit, so it is not asked for."""
    try:
        return parse_limit(text)
    except ExpressionError as error:
        assume(not error.message.startswith(("two levels", "a level minus a level")))
        raise


@calm
@given(trees)
def test_limit_reads_back_from_its_canonical_text_and_from_json(tree: LimitNode) -> None:
    limit = Limit(text="typed", tree=tree)
    assert _read_unless_levels_add(limit_text(limit)).tree == tree
    assert Limit.model_validate_json(limit.model_dump_json()) == limit
    assert limit_words(limit)


@calm
@given(trees, trees)
def test_difference_is_empty_for_equal_meaning_only(one: LimitNode, two: LimitNode) -> None:
    before, after = Limit(text="a", tree=one), Limit(text="b", tree=two)
    assert (limit_difference(before, after) == "") == (one == two)


_WORDS = (
    ">= <= < > ± +/- +2/-3 -6..4 .. – - − + * / ^ ( ) [ ] { } , ; : % dBm dB MHz dBm/MHz max min max( min( log10( "
    "if in by cases( mask( looser( sum( when otherwise: TBD TBR (TBR) at 50 % CDF worst mean over with exceptions "
    "rounded to test tolerance P_rated band == 'n257' 1 2.5 3,2 1,234 1e999 between and or not from \u00a0 \u0661 ² µ"
)
_PIECES = st.sampled_from(_WORDS.split(" "))


@settings(max_examples=600, deadline=None)
@given(
    st.one_of(
        st.text(max_size=60),
        st.lists(_PIECES, max_size=14).map(" ".join),
        st.lists(_PIECES, max_size=14).map("".join),
    )
)
def test_any_text_is_read_or_refused_with_a_column(text: str) -> None:
    for read in (parse_limit, parse_expression):
        try:
            read(text)
        except ExpressionError as error:
            assert error.where.startswith("column ")
