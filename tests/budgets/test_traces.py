"""Lines read from recorded evidence and from Touchstone files, at the block's own conditions."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from specflow.budgets import evaluate_budget
from specflow.errors import SpecflowError
from specflow.model.budget_line import Drift, TouchstoneTrace, Trace
from specflow.model.snapshot import Snapshot
from specflow.parameters import load_dictionary
from tests.budgets.chains import a_chain, project_of
from tests.builders import (
    a_conditions_set,
    a_dimension,
    an_evidence_table,
    at_least,
    some_columns,
    some_evidence,
)

DICTIONARY = load_dictionary()


def project(
    trace: Any, evidence: Any, *dimensions: Any, more: dict[str, Any] | None = None
) -> tuple[Any, Snapshot]:
    budget = a_chain(
        {"block": "LNA", "gain": trace, "more": {"gain": more or {}}}, parameter="gain", conditions="CS"
    )
    conditions = a_conditions_set("CS", *dimensions)
    snapshot = project_of(
        budget, conditions, an_evidence_table(), limit=at_least(1), columns={"T-1": evidence}
    )
    return budget, snapshot


def gain_of(trace: Any, evidence: Any, *dimensions: Any, more: dict[str, Any] | None = None) -> Any:
    budget, snapshot = project(trace, evidence, *dimensions, more=more)
    return evaluate_budget(budget, snapshot, DICTIONARY).of("gain").result


def test_a_trace_runs_along_the_condition_that_varies_between_its_rows() -> None:
    found = gain_of(
        Trace(table="T-1", column="Gain"),
        some_evidence((20.0, 22.0, 23.0)),
        a_dimension("frequency", "GHz", values=(28.125, 30.0)),
    )
    assert found == pytest.approx([21.0, 23.0])


def test_other_conditions_of_the_table_are_those_of_the_block() -> None:
    conditions = some_columns(frequency=[27.5, 30.0] * 2, temperature_ambient=[-25.0, -25.0, 55.0, 55.0])
    evidence = some_evidence((22.0, 23.0, 20.0, 21.0), conditions=conditions)
    trace = Trace(table="T-1", column="Gain", along="frequency")
    found = gain_of(
        trace,
        evidence,
        a_dimension("frequency", "GHz", values=(27.5, 30.0)),
        a_dimension("temperature_ambient", "°C", values=(-25.0, 55.0)),
    )
    assert found == pytest.approx([22.0, 20.0, 23.0, 21.0])
    with pytest.raises(SpecflowError, match="temperature_ambient -25, 55 °C, needed is 23 °C"):
        gain_of(
            trace,
            evidence,
            a_dimension("frequency", "GHz", values=(27.5, 30.0)),
            a_dimension("temperature_ambient", "°C", values=(23.0,)),
        )


def test_a_drift_takes_a_trace_from_the_temperature_at_which_it_was_recorded() -> None:
    conditions = some_columns(frequency=[27.5, 30.0], temperature_ambient=[23.0, 23.0])
    drift = Drift(dimension="temperature_ambient", dimension_unit="°C", slope=-0.05, reference=23.0)
    found = gain_of(
        Trace(table="T-1", column="Gain", along="frequency"),
        some_evidence((20.0, 22.0), conditions=conditions),
        a_dimension("frequency", "GHz", values=(27.5,)),
        a_dimension("temperature_ambient", "°C", values=(23.0, 43.0)),
        more={"drifts": (drift,)},
    )
    assert found == pytest.approx([20.0, 19.0])


@pytest.mark.parametrize(
    ("trace", "evidence", "words"),
    [
        (Trace(table="T-1", column="Loss"), {}, "no column Loss"),
        (Trace(table="T-1", column="Gain"), {"items": ["LNA-1", "LNA-2", "LNA-2"]}, "several items"),
        (Trace(table="T-1", column="Gain", item="LNA-9"), {}, "no values for LNA-9"),
        (Trace(table="T-1", column="Gain"), {"high": [22.0, 23.0, 24.0]}, "bounds"),
        (Trace(table="T-1", column="Gain", along="theta"), {}, "along which condition"),
    ],
)
def test_traces_that_cannot_be_read(trace: Trace, evidence: dict[str, Any], words: str) -> None:
    with pytest.raises(SpecflowError, match=words):
        gain_of(trace, some_evidence((20.0, 21.0, 22.0), **evidence), a_dimension())


def test_a_trace_does_not_reach_beyond_its_rows() -> None:
    with pytest.raises(SpecflowError, match=r"27\.5 to 30 GHz of frequency, needed is 27 to 30"):
        gain_of(
            Trace(table="T-1", column="Gain"),
            some_evidence((20.0, 21.0, 22.0)),
            a_dimension("frequency", "GHz", values=(27.0, 30.0)),
        )


def test_the_named_item_is_taken() -> None:
    conditions = some_columns(frequency=[27.5, 30.0] * 2)
    evidence = some_evidence(
        (20.0, 21.0, 30.0, 31.0), items=["LNA-1", "LNA-1", "LNA-2", "LNA-2"], conditions=conditions
    )
    found = gain_of(
        Trace(table="T-1", column="Gain", item="lna-2"),
        evidence,
        a_dimension("frequency", "GHz", values=(27.5,)),
    )
    assert found == pytest.approx([30.0])


def test_a_touchstone_trace_is_read_over_frequency_and_not_beyond() -> None:
    trace = TouchstoneTrace(
        file="lna.s2p",
        sha256="0" * 64,
        entry="S21",
        frequency_hz=(27e9, 29e9, 31e9),
        values_db=(20.0, 22.0, 21.0),
    )
    found = gain_of(trace, some_evidence(), a_dimension("frequency", "GHz", values=(28.0, 30.0)))
    assert found == pytest.approx([21.0, 21.5])
    with pytest.raises(SpecflowError, match=r"lna\.s2p S21 reaches from"):
        gain_of(trace, some_evidence(), a_dimension("frequency", "GHz", values=(26.0,)))


def test_a_trace_in_linear_power_is_drawn_in_linear_power() -> None:
    found = gain_of(
        Trace(table="T-1", column="Gain", drawn_in="linear"),
        some_evidence((10.0, 20.0), conditions=some_columns(frequency=[1.0, 3.0])),
        a_dimension("frequency", "GHz", values=(2.0,)),
    )
    assert found == pytest.approx([10 * np.log10(55)])
