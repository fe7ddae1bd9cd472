"""Evidence recorded as one parameter serves a requirement on another that a formula ties to it; nothing else does."""

from __future__ import annotations

from datetime import date

import numpy as np
import pytest

from specflow.model.evidence import ItemChange
from specflow.model.snapshot import Results
from specflow.model.verdict import Label, RequirementStatus, Standing
from tests.builders import (
    a_quantity,
    a_requirement,
    a_value_column,
    an_evidence_table,
    at_least,
    at_most,
    some_evidence,
)
from tests.verification.evaluating import results_of, status_of

MATCH = a_requirement(quantity=a_quantity("return_loss", plane="input"), limit=at_least(12, "dB"))


def recorded(parameter: str, unit: str, **quantity: object) -> object:
    """Return the table T-1 of one column of that parameter."""
    identity = a_quantity(parameter, **{"plane": "input"} | quantity)
    return an_evidence_table(values=(a_value_column("X", quantity=identity, unit=unit),))


def serving(
    parameter: str, unit: str, values: list[float], requirement: object = MATCH, **fields: object
) -> RequirementStatus:
    """Return the status of a requirement of which only that column was recorded."""
    evidence = some_evidence({"X": values}, **fields)  # type: ignore[arg-type]
    return status_of(requirement, recorded(parameter, unit), T_1=evidence)  # type: ignore[arg-type]


@pytest.mark.parametrize(
    ("parameter", "unit", "values"),
    [
        ("vswr", "1", [1.2, 1.5, 2.0]),
        ("vswr", "", [1.2, 1.5, 2.0]),
        ("reflection_magnitude", "dB", [-20.8, -14.0, -9.5]),
        ("reflection_magnitude", "", [0.0909, 0.2, 0.3333]),
        ("return_loss", "dB", [20.8, 14.0, 9.5]),
    ],
)
def test_one_match_recorded_in_four_ways_proves_the_same(
    parameter: str, unit: str, values: list[float]
) -> None:
    status = serving(parameter, unit, values)
    assert (status.k, status.n_failing) == (2, 1)
    assert status.governing is not None and status.governing.margin == pytest.approx(-2.46, abs=0.05)
    assert status.governing.record is not None and status.governing.record.column == "X"


def test_what_was_done_is_said_with_formula_and_source() -> None:
    (remark,) = [one for one in serving("vswr", "1", [1.2, 1.5, 2.0]).remarks if "VSWR" in one]
    assert remark == (
        "VSWR told as return loss: |Γ| = (V - 1)/(V + 1), RL = -20·log |Γ| (by definition, passive loads)"
    )


def test_noise_temperature_and_noise_figure_serve_each_other() -> None:
    figure = a_requirement(quantity=a_quantity("noise_figure", plane="input"), limit=at_most(3.02, "dB"))
    assert serving("noise_temperature", "K", [290.0, 288.6, 300.0], figure).n_failing == 1
    kelvin = a_requirement(quantity=a_quantity("noise_temperature", plane="input"), limit=at_most(290, "K"))
    assert serving("noise_figure", "dB", [3.0, 3.01, 3.02], kelvin).n_failing == 1


def test_a_bound_in_one_is_a_bound_in_the_other() -> None:
    low, high = np.array([1.0, 1.0, 1.0]), np.array([1.3, 1.5, 2.0])
    status = serving(
        "vswr", "1", low.tolist(), high=high.tolist()
    )  # "at most 2.0" decides nothing about 12 dB
    assert (status.k, status.n_failing, status.label) == (2, 0, Label.INCONCLUSIVE)


def test_a_value_that_means_nothing_is_said_and_proves_nothing() -> None:
    status = serving("vswr", "1", [1.2, 0.8, 1.2])
    (mismatch,) = status.mismatches
    assert mismatch.what.startswith("1 of 3 values have no meaning") and (status.k, status.n) == (2, 3)


@pytest.mark.parametrize(
    ("quantity", "kind", "words"),
    [
        ({"plane": "output"}, "plane", "referred to output, required at input"),
        (
            {"statistic": "mean of dB"},
            "statistic",
            "the statistic is mean of dB, the requirement states none",
        ),
    ],
)
def test_only_like_compares_with_like_over_a_relation_too(
    quantity: dict[str, object], kind: str, words: str
) -> None:
    status = status_of(MATCH, recorded("vswr", "1", **quantity), T_1=some_evidence({"X": [1.2] * 3}))  # type: ignore[arg-type]
    (mismatch,) = status.mismatches
    assert (status.k, mismatch.kind) == (0, kind) and words in mismatch.what


def test_a_mean_in_one_is_no_mean_in_the_other() -> None:
    mean = {"statistic": "mean of dB", "plane": "input"}
    requirement = a_requirement(quantity=a_quantity("return_loss", **mean), limit=at_least(12, "dB"))
    table = recorded("reflection_magnitude", "dB", **mean)
    status = status_of(requirement, table, T_1=some_evidence({"X": [-20.0] * 3}))  # type: ignore[arg-type]
    (mismatch,) = status.mismatches
    assert "recorded as |S11|, and a mean of dB of it is none of return_loss" in mismatch.what
    worst = {"statistic": "worst", "plane": "input"}
    requirement = a_requirement(quantity=a_quantity("return_loss", **worst), limit=at_least(12, "dB"))
    table = recorded("reflection_magnitude", "dB", **worst)
    assert status_of(requirement, table, T_1=some_evidence({"X": [-20.0] * 3})).k == 3  # type: ignore[arg-type]


def test_a_related_column_that_does_not_fit_is_no_matter_where_the_quantity_itself_was_recorded() -> None:
    columns = (
        a_value_column("RL", quantity=MATCH.quantity, unit="dB"),
        a_value_column("X", quantity=a_quantity("vswr", plane="output"), unit="1"),
    )
    evidence = some_evidence({"RL": [20.0] * 3, "X": [1.2] * 3})
    status = status_of(MATCH, an_evidence_table(values=columns), T_1=evidence)
    assert (status.k, status.mismatches) == (3, ())


def test_evidence_of_an_earlier_plane_goes_over_the_relation_too() -> None:
    moved = MATCH.model_copy(update={"revision": 2, "quantity": a_quantity("return_loss", plane="output")})
    table = recorded("reflection_magnitude", "dB").model_copy(update={"requirement": "R-1"})  # type: ignore[attr-defined]
    status = status_of(moved, table, T_1=some_evidence({"X": [-9.0, -20.0, -20.0]}))
    assert status.standing == {Standing.STALE: 3}
    assert status.n_failing == 1, "|S11| of -9 dB is a return loss of 9 dB, not of -9 dB"
    assert status.governing is not None and status.governing.margin == pytest.approx(-3)


def test_a_change_of_the_one_makes_evidence_of_the_other_stale() -> None:
    change = ItemChange(
        id="C-1",
        block="LNA",
        aspect="hardware",
        effective=date(2026, 5, 20),
        description="coil",
        parameters=("return_loss",),
    )
    evidence = some_evidence({"X": [1.2] * 3})
    assert status_of(MATCH, recorded("vswr", "1"), change, T_1=evidence).label is Label.REVERIFY  # type: ignore[arg-type]


def test_a_table_that_serves_over_a_relation_is_neither_unmatched_nor_misattributed() -> None:
    table = recorded("vswr", "1").model_copy(update={"requirement": "R-1"})  # type: ignore[attr-defined]
    results: Results = results_of(MATCH, table, T_1=some_evidence({"X": [1.2] * 3}))
    assert not results.unmatched and not results.of("R-1").mismatches
