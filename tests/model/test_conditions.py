"""Conditions documents refuse what contradicts itself."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from pydantic import ValidationError

from specflow.model.base import Document
from specflow.model.conditions import (
    Clause,
    Combination,
    ConditionMap,
    ConditionsSet,
    Dimension,
    Exclusion,
    MapEntry,
    MapTerm,
    MatchingRule,
    Need,
    Span,
)

FREQUENCY = Dimension(name="frequency", unit="GHz", values=(27.5, 30.0), tolerance=0.01)
SWEEP = Dimension(name="frequency", unit="GHz", span=Span(low=27.5, high=30, step=0.25))
ENDS = Dimension(name="frequency", unit="GHz", span=Span(low=27.5, high=30))
MODE = Dimension(name="mode", words=("A", "B", "C"))


def a_set(*dimensions: Dimension, **fields: object) -> ConditionsSet:
    return ConditionsSet.model_validate({"id": "CS-1", "dimensions": dimensions, **fields})


@pytest.mark.parametrize(
    ("make", "complaint"),
    [
        (lambda: Span(low=3, high=3), "does not rise"),
        (lambda: Span(low=1, high=3, step=0), "greater than 0"),
        (lambda: Dimension(name="x"), "only one of them"),
        (lambda: Dimension(name="x", values=(1,), words=("a",)), "only one of them"),
        (lambda: Dimension(name="x", values=(float("nan"),)), "finite"),
        (lambda: Dimension(name="x", need=Need.ANY, values=(1,)), "takes no values"),
        (lambda: Dimension(name="x", need=Need.NOT_REQUIRED, tolerance=1), "takes no tolerance"),
        (lambda: Dimension(name="x", words=("a",), tolerance=1), "no tolerance"),
        (lambda: Dimension(name="x", values=(1,), rule=MatchingRule.ANYWHERE), "needs a range"),
        (lambda: Dimension(name="x", values=(1,), rule=MatchingRule.OUTWARD), "no outward side"),
        (lambda: Dimension(name="x", values=(1,), tolerance=100, tolerance_is_percent=True), "below 100 %"),
        (lambda: SWEEP.model_validate({**SWEEP.model_dump(), "rule": MatchingRule.ANYWHERE}), "has no step"),
        (
            lambda: Dimension(name="temperature_case", unit="°C", values=(-300, 20)),
            "-300 °C is below absolute zero",
        ),
        (
            lambda: Dimension(name="temperature_ambient", unit="K", span=Span(low=-5, high=20, step=5)),
            "-5 K is below absolute zero",
        ),
        (lambda: a_set(FREQUENCY, FREQUENCY), "appears twice"),
        (lambda: a_set(ENDS), "states no step"),
        (lambda: a_set(SWEEP, combination=Combination.CORNERS), "drop its step"),
        (lambda: a_set(FREQUENCY, MODE, combination=Combination.LISTED), "frequency has 2, mode has 3"),
        (lambda: a_set(FREQUENCY, listed=("frequency",)), "dimensions are listed"),
        (lambda: a_set(SWEEP, combination=Combination.LISTED, listed=("frequency",)), "no values to list"),
        (
            lambda: a_set(FREQUENCY, combination=Combination.LISTED, listed=("mode",)),
            "no dimension of this set",
        ),
        (
            lambda: a_set(
                FREQUENCY, exclusions=[Exclusion(clauses=(Clause(dimension="mode", words=("A",)),))]
            ),
            "mode",
        ),
        (lambda: Clause(dimension="x"), "names values"),
        (lambda: Exclusion(clauses=()), "at least 1"),
        (lambda: MapEntry(target="x", terms=(MapTerm(dimension="y", factor=0),)), "other than 0"),
        (lambda: ConditionMap(id="M", entries=(MapEntry(target="x"), MapEntry(target="x"))), "defined twice"),
    ],
)
def test_contradictions_are_refused(make: Callable[[], Document], complaint: str) -> None:
    with pytest.raises(ValidationError, match=complaint):
        make()


def test_one_value_goes_with_every_row() -> None:
    supply = Dimension(name="supply_voltage", unit="V", values=(5.0,))
    assert a_set(MODE, supply, combination=Combination.LISTED).is_listed(supply)


def test_documents_survive_the_round_trip_through_json() -> None:
    exclusion = Exclusion(
        clauses=(Clause(dimension="mode", words=("A",)), Clause(dimension="frequency", high=28.0))
    )
    made = a_set(FREQUENCY, MODE, exclusions=(exclusion,), source="invented")
    assert ConditionsSet.model_validate_json(made.model_dump_json()) == made
    entry = MapEntry(
        target="temperature_baseplate", terms=(MapTerm(dimension="temperature_ambient"),), offset=18
    )
    mapped = ConditionMap(id="CM-1", block="PA", entries=(entry,))
    assert ConditionMap.model_validate_json(mapped.model_dump_json(exclude_defaults=True)) == mapped


def test_a_dimension_is_found_by_its_name() -> None:
    assert a_set(FREQUENCY, MODE).dimension("mode") is not None
    assert a_set(FREQUENCY).dimension("mode") is None
