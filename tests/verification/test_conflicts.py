"""Conflicts: the same item and point, one rank, further apart than both uncertainties allow."""

from __future__ import annotations

import numpy as np
import pytest

from specflow.model.conditions import Span
from specflow.model.requirement import Method
from specflow.model.verdict import Label
from tests.builders import (
    a_conditions_set,
    a_dimension,
    a_requirement,
    an_evidence_table,
    an_item,
    some_columns,
    some_evidence,
)
from tests.verification.evaluating import status_of

SECOND = an_evidence_table("T-2")


def test_two_laboratories_that_contradict_are_a_conflict_and_the_worst_governs() -> None:
    status = status_of(SECOND, T_1=some_evidence([25, 25, 25], u=0.1), T_2=some_evidence([25, 24, 25], u=0.2))
    assert status.label is Label.CONFLICTING
    (conflict,) = status.conflicts
    assert conflict.words == "28.75 GHz"
    assert {conflict.first.table, conflict.second.table} == {"T-1", "T-2"}
    assert (conflict.difference, conflict.allowed) == (1.0, pytest.approx((0.2**2 + 0.4**2) ** 0.5))
    assert conflict.unit == "dB"
    assert status.governing is not None
    assert status.governing.margin == 4.0


def test_within_both_uncertainties_there_is_no_conflict() -> None:
    status = status_of(
        SECOND, T_1=some_evidence([25, 25, 25], u=0.1), T_2=some_evidence([25, 24.56, 25], u=0.2)
    )
    assert not status.conflicts


def test_without_uncertainty_the_house_threshold_is_taken() -> None:
    apart = status_of(SECOND, T_1=some_evidence([25, 25, 25]), T_2=some_evidence([25, 24.2, 25]))
    assert len(apart.conflicts) == 1
    near = status_of(SECOND, T_1=some_evidence([25, 25, 25]), T_2=some_evidence([25, 24.4, 25]))
    assert not near.conflicts


def test_other_items_and_simulations_do_not_conflict() -> None:
    other = status_of(
        SECOND,
        an_item("LNA-2"),
        T_1=some_evidence([25, 25, 25], u=0.1),
        T_2=some_evidence([22, 22, 22], u=0.1, items="LNA-2"),
    )
    assert not other.conflicts
    simulated = an_evidence_table("T-2", method=Method.ANALYSIS)
    status = status_of(
        simulated, T_1=some_evidence([25, 25, 25], u=0.1), T_2=some_evidence([22, 22, 22], u=0.1)
    )
    assert not status.conflicts


def test_along_a_range_only_readings_at_one_value_are_compared() -> None:
    ranged = a_conditions_set("CS", a_dimension(span=Span(low=27, high=30, step=1), tolerance=0.01))
    at = some_columns(frequency=[27, 28, 29, 30, 29])
    rising = some_evidence([21, 22, 23, 24, 23.1], u=0.1, conditions=at)
    assert not status_of(ranged, T_1=rising).conflicts
    contradicted = some_evidence([21, 22, 23, 24, 24.1], u=0.1, conditions=at)
    assert len(status_of(ranged, T_1=contradicted).conflicts) == 1


def test_readings_under_other_conditions_that_both_state_do_not_conflict() -> None:
    cold = some_columns(frequency=[27.5, 28.75, 30], temperature_ambient=[-40, -40, -40])
    hot = some_columns(frequency=[27.5, 28.75, 30], temperature_ambient=[85, 85, 85])
    status = status_of(
        SECOND,
        T_1=some_evidence([25, 25, 25], u=0.1, conditions=cold),
        T_2=some_evidence([22, 22, 22], u=0.1, conditions=hot),
    )
    assert not status.conflicts


def test_a_long_table_without_required_conditions_is_compared_like_with_like_and_in_bounded_memory() -> None:
    """50,000 readings serve one point; a matrix of all pairs would hold 20 GB."""
    count = 50_000
    frequency = np.linspace(20, 30, count)
    rising = some_evidence(25 + frequency, u=0.1, conditions=some_columns(frequency=frequency))
    anywhere = a_requirement(conditions=None)
    assert not status_of(anywhere, T_1=rising).conflicts
    doubled = np.repeat(frequency[: count // 2], 2)
    values = 25 + doubled
    values[40_001] += 1.0
    contradicted = some_evidence(values, u=0.1, conditions=some_columns(frequency=doubled))
    (conflict,) = status_of(anywhere, T_1=contradicted).conflicts
    assert {conflict.first.row, conflict.second.row} == {40_000, 40_001}
