"""Expressions as filters and applicability: columns or one mapping, units, words, unstated inputs."""

from __future__ import annotations

import numpy as np
import pytest

from specflow.errors import ExpressionError
from specflow.limits import (
    evaluate_condition,
    evaluate_expression,
    expression_names,
    parse_condition,
    parse_expression,
)
from specflow.model.columns import Columns, TextColumn
from specflow.units import parse_quantity

COLUMNS = Columns(
    4,
    {"frequency": np.array([27.5, 29.0, 30.0, np.nan]), "mode": np.array([1.0, 2.0, 1.0, 2.0])},
    {"band": TextColumn.of(["n257", "N258", None, "n260"])},
    {"frequency": "GHz", "mode": ""},
)


@pytest.mark.parametrize(
    ("text", "true", "known"),
    [
        ("frequency >= 29 GHz", [0, 1, 1, 0], [1, 1, 1, 0]),
        ("frequency > 29000 MHz", [0, 0, 1, 0], [1, 1, 1, 0]),
        ("27 GHz <= frequency <= 29 GHz", [1, 1, 0, 0], [1, 1, 1, 0]),
        ("frequency in 27.5..29 GHz", [1, 1, 0, 0], [1, 1, 1, 0]),
        ("frequency in 27.5<..29 GHz", [0, 1, 0, 0], [1, 1, 1, 0]),
        ("frequency in (27.5 GHz, 30 GHz)", [1, 0, 1, 0], [1, 1, 1, 0]),
        ("frequency[GHz] > 28", [0, 1, 1, 0], [1, 1, 1, 0]),
        ("band == n257", [1, 0, 0, 0], [1, 1, 0, 1]),
        ("band = 'n258'", [0, 1, 0, 0], [1, 1, 0, 1]),
        ("band != n257", [0, 1, 0, 1], [1, 1, 0, 1]),
        ("band in (n257, n260)", [1, 0, 0, 1], [1, 1, 0, 1]),
        ("band not in (n257 | n260)", [0, 1, 0, 0], [1, 1, 0, 1]),
        ("not band == n257", [0, 1, 0, 1], [1, 1, 0, 1]),
        # what the unstated input cannot change is known (three-valued logic)
        ("band == n257 or mode == 1", [1, 0, 1, 0], [1, 1, 1, 1]),
        ("band == n257 and mode == 2", [0, 0, 0, 0], [1, 1, 1, 1]),
        ("nobody > 3 and mode == 2", [0, 0, 0, 0], [1, 0, 1, 0]),
        ("mode * 2 + 1 == 5", [0, 1, 0, 1], [1, 1, 1, 1]),
        ("frequency - 1 GHz >= 28 GHz", [0, 1, 1, 0], [1, 1, 1, 0]),
        ("frequency / 29 GHz >= 1", [0, 1, 1, 0], [1, 1, 1, 0]),
    ],
)
def test_condition_holds_and_is_known(text: str, true: list[int], known: list[int]) -> None:
    found, decided = evaluate_condition(parse_condition(text), COLUMNS)
    assert found.tolist() == [bool(value) for value in true]
    assert decided.tolist() == [bool(value) for value in known]


def test_mapping_gives_scalars() -> None:
    given = {"severity": "high", "count": 3, "P": parse_quantity("1 W"), "nothing": None}
    assert evaluate_expression(parse_expression("severity == high and count >= 3"), given) is True
    assert evaluate_expression(parse_expression("P[dBm] + 2 * count"), given) == pytest.approx(36.0)
    assert evaluate_expression(parse_expression("2 ^ 3 ^ 2 - -1"), {}) == 513.0
    assert evaluate_expression(parse_expression("nothing == high"), given) is False


def test_columns_give_arrays() -> None:
    found = evaluate_expression(parse_expression("10 * mode if band == n257 else -mode"), COLUMNS)
    np.testing.assert_array_equal(found, [10.0, -2.0, np.nan, -2.0])


def test_names_are_listed() -> None:
    node = parse_expression("frequency > 27 GHz and (band == n257 or P_rated[dBm] - 3 > x)")
    assert expression_names(node) == {"frequency", "band", "P_rated", "x"}


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("frequency > 28", "plain number meets a value in GHz"),
        ("frequency > 3 V", "V cannot be read in GHz"),
        ("frequency == n257", "is a number here"),
        ("band > 3", "is a word here"),
        ("log10(frequency) > 1", "takes a plain number"),
        ("frequency * frequency > 1", "has no unit that a limit could have"),
    ],
)
def test_units_that_do_not_fit_are_refused(text: str, message: str) -> None:
    with pytest.raises(ExpressionError, match=message):
        evaluate_expression(parse_expression(text), COLUMNS)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("(frequency > 3) + 1", "condition stands where a value belongs"),
        ("frequency and band == n257", "nothing can be made of"),
        ("not frequency", "value stands where a condition belongs"),
        ("min(3)", "takes 2 arguments or more"),
        ("open('x')", "is not a function"),
        ("a.__class__ > 3", ""),
        ("lambda: 0", "nothing can be made of"),
        ("3 if a > 2", "needs 'else'"),
        ("", "empty"),
        ("frequency[quarkz] > 3", "hold its unit"),
    ],
)
def test_text_that_is_no_expression_is_refused(text: str, message: str) -> None:
    if not message:
        assert (
            evaluate_expression(parse_expression(text), {}) is False
        )  # a name like any other; nothing is reached
        return
    with pytest.raises(ExpressionError, match=message):
        parse_expression(text)


def test_condition_is_asked_for() -> None:
    with pytest.raises(ExpressionError, match="compare it"):
        parse_condition("frequency + 1 GHz")
