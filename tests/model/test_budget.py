"""Budgets as documents: written down and read back, chain and lines."""

from __future__ import annotations

import pytest

from specflow.exchange import payload_text, read_text
from specflow.model.budget import Budget, BudgetPosition, Correlation, Reserve
from specflow.model.budget_line import (
    ConditionTable,
    Constant,
    Drift,
    LineTolerance,
    Meaning,
    TouchstoneTrace,
    Trace,
)
from tests.builders import a_budget, a_budget_line, a_quantity


def a_full_budget() -> Budget:
    table = ConditionTable(
        dimension="frequency", dimension_unit="GHz", at=(17.7, 20.2), values=(23.5, 24.5), between="step"
    )
    touchstone = TouchstoneTrace(
        file="f.s2p", sha256="0" * 64, entry="S21", frequency_hz=(1e9, 2e9), values_db=(-1.0, -1.5)
    )
    drift = Drift(
        dimension="temperature_baseplate", dimension_unit="°C", slope=-0.02, reference=23.0, low=-40.0
    )
    tolerance = LineTolerance(minus=0.1, plus=0.1, meaning=Meaning.SIGMA, k=2.0)
    return a_budget(
        positions=(
            BudgetPosition(order=2, block="FIL", passive=True),
            BudgetPosition(order=1, block="LNA", count=4, path="a", condition_map="CM"),
        ),
        lines=(
            a_budget_line(
                1, "LNA", "gain", table, drifts=(drift,), tolerance=tolerance, correlation_group="heat"
            ),
            a_budget_line(
                1, "LNA", "noise_figure", Trace(table="T-1", column="NF"), correlation_group="supply"
            ),
            a_budget_line(2, "FIL", "gain", touchstone),
        ),
        correlations=(Correlation(first="heat", second="supply", coefficient=-0.5),),
        reserves=(Reserve(parameter="gain", amount=0.5, unit="dB", holder="Systems"),),
        input_level=-60.0,
        noise_source=150.0,
        bandwidth_hz=1e6,
    )


def test_a_budget_comes_back_as_it_was_written() -> None:
    budget = a_full_budget()
    assert read_text("budget", payload_text(budget)) == budget


def test_positions_stand_in_their_order_and_follow_from_the_lines_where_none_are_listed() -> None:
    assert [one.block for one in a_full_budget().chain] == ["LNA", "FIL"]
    assert [(one.order, one.block) for one in a_budget().chain] == [(1, "LNA"), (2, "MIX")]
    assert BudgetPosition(order=1, block="LNA", name="first").label == "first"


def test_a_number_is_a_constant_value() -> None:
    assert a_budget_line(value=20).value == Constant(value=20.0)


def test_a_correlation_joins_two_groups() -> None:
    with pytest.raises(ValueError, match="name two groups"):
        Correlation(first="heat", second="Heat", coefficient=0.5)


def test_a_budget_is_of_one_known_law() -> None:
    with pytest.raises(ValueError, match="cascade"):
        Budget(id="B", requirements=("R",), quantity=a_quantity(), law="magic")
