"""Requirements judged abreast come out as each does alone: field by field, array by array."""

from __future__ import annotations

from dataclasses import fields, is_dataclass
from typing import Any, NoReturn

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from specflow.model.base import Document
from specflow.model.block import HardwareType
from specflow.model.evidence import EvidenceColumns, ValueArrays
from specflow.model.limit import Limit
from specflow.model.parameter import Parameter
from specflow.model.requirement import DecisionRule, Requirement, RuleName
from specflow.model.snapshot import Snapshot
from specflow.parameters import load_dictionary
from specflow.verification import docket, evaluate, judging
from tests.builders import (
    a_block,
    a_conditions_set,
    a_parameter,
    a_quantity,
    a_requirement,
    a_snapshot,
    a_value_column,
    a_waiver,
    an_activity,
    an_evidence_table,
    an_item,
    at_least,
    at_most,
    between,
    some_columns,
    some_evidence,
)
from tests.verification.evaluating import AS_OF

POINTS = (27.5, 28.75, 30.0)
NAN = float("nan")
LIMITS = tuple(
    limit
    for unit in ("dB", "V")
    for limit in (
        at_least(20, unit),
        at_least(20.5, unit),
        at_most(20.1, unit),
        between(19, 21, unit),
        at_least(20, unit, strict=True),
    )
)
RULES = (
    DecisionRule(),
    DecisionRule(name=RuleName.GUARDED),
    DecisionRule(name=RuleName.FOUR_WAY, conditional_pass_counts=False),
    DecisionRule(comparison="rounded"),
)

WAIVER = a_waiver("W-1", "R-1", permitted=">= 18 dB", state="approved", approver="B. Invented")

hardware = st.sampled_from(["engineering", "qualification"])
numbers = st.sampled_from([18.0, 19.5, 20.0, 20.1, 20.4, 20.5, 25.0])
spreads = st.sampled_from([0.1, 0.3])


@st.composite
def projects(draw: st.DrawFn) -> Snapshot:
    """Draw some requirements, most of them alike, each on a column of its own of one table, and its readings."""
    limits, rules = draw(st.lists(st.sampled_from(LIMITS), min_size=1, max_size=2)), st.sampled_from(RULES)
    rules = st.sampled_from(draw(st.lists(rules, min_size=1, max_size=2)))
    kinds = st.tuples(st.sampled_from(limits), rules, hardware)
    asked = draw(st.lists(kinds, min_size=2, max_size=6))
    size = draw(st.integers(1, 12))

    def row_of(values: st.SearchStrategy[Any]) -> list[Any]:
        return draw(st.lists(values, min_size=size, max_size=size))

    items, frequency = (
        row_of(st.sampled_from(["LNA-1", "LNA-2", None])),
        row_of(st.sampled_from([*POINTS, 29.0])),
    )
    scales = [
        1e-3 if limit.unit == "V" and place % 3 == 2 else 1.0 for place, (limit, _, _) in enumerate(asked)
    ]
    columns = {
        f"Gain {place}": draw(arrays_of(row_of(numbers), row_of(spreads), scale))
        for place, scale in enumerate(scales)
    }
    one = some_evidence([21.0] * size, items=items)
    evidence = EvidenceColumns(some_columns(frequency=frequency), columns, one.source_rows, one.items)
    decided = [WAIVER] if draw(st.booleans()) else []
    return snapshot_of(asked, evidence, *decided, provisional=draw(st.booleans()))


@st.composite
def arrays_of(draw: st.DrawFn, low: list[float], u: list[float], scale: float) -> ValueArrays:
    """Draw a column of these values: mostly of single values with a known uncertainty."""
    form = draw(
        st.sampled_from(
            ["plain", "plain", "plain", "intervals", "without u", "a value is missing", "a u is missing"]
        )
    )
    values, spread = np.array(low) * scale, np.array(u) * scale
    if form == "a value is missing":
        values[-1] = NAN
    if form == "a u is missing":
        spread[-1] = NAN
    return ValueArrays(
        values, values + scale if form == "intervals" else values, None if form == "without u" else spread
    )


def snapshot_of(
    asked: list[tuple[Limit, DecisionRule, str]], evidence: EvidenceColumns, *more: Document, **table: Any
) -> Snapshot:
    """Return a project with these requirements and the one table that holds a column for each."""
    documents: list[Document] = [
        *more,
        a_block(),
        an_item(),
        an_item("LNA-2", hardware_type=HardwareType.BREADBOARD),
        a_conditions_set(),
    ]
    sources = []
    for place, (limit, rule, hardware) in enumerate(asked):
        quantity = a_quantity(f"gain_{place}")
        documents += [
            a_parameter(f"gain_{place}"),
            a_requirement(f"R-{place}", quantity=quantity, limit=limit, decision_rule=rule),
            an_activity(f"R-{place}", id=f"A-{place}", credit_from=hardware),
        ]
        # Volts are recorded in kilovolts now and then: converted values are compared with a slack.
        unit = "kV" if limit.unit == "V" and place % 3 == 2 else limit.unit
        sources.append(a_value_column(f"Gain {place}", quantity=quantity, unit=unit))
    rows = len(evidence.source_rows)
    documents.append(an_evidence_table(rows=rows, values=tuple(sources), **table))
    return a_snapshot(*documents, columns={"T-1": evidence})


def statuses(snapshot: Snapshot, at_once: int) -> dict[str, Any]:
    """Return all statuses, with so many cases opened at a time; one at a time each is judged alone."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(docket, "AT_ONCE", at_once)
        dictionary = load_dictionary(snapshot.all(Parameter))
        results = evaluate(snapshot, dictionary, as_of=AS_OF)
    return {one.id: results.of(one.id) for one in snapshot.all(Requirement)}


def same(one: Any, other: Any) -> bool:
    """Whether two results are equal all the way down, NaN and array types included."""
    if isinstance(one, np.ndarray):
        return one.dtype == other.dtype and np.array_equal(one, other, equal_nan=one.dtype.kind == "f")
    if is_dataclass(one):
        return all(same(getattr(one, field.name), getattr(other, field.name)) for field in fields(one))
    if isinstance(one, dict):
        return one.keys() == other.keys() and all(same(one[key], other[key]) for key in one)
    if isinstance(one, tuple | list):
        return len(one) == len(other) and all(map(same, one, other))
    return bool(one == other) or (one != one and other != other)


@settings(max_examples=300, deadline=None)
@given(projects())
def test_abreast_and_alone_give_the_same(snapshot: Snapshot) -> None:
    alone, abreast = statuses(snapshot, 1), statuses(snapshot, 256)
    for name, status in alone.items():
        assert same(status, abreast[name]), name


def test_cases_that_are_alike_are_judged_in_one_go(monkeypatch: pytest.MonkeyPatch) -> None:
    def alone(*_: object) -> NoReturn:
        raise AssertionError("judged alone")

    monkeypatch.setattr(judging, "judge", alone)
    columns = {f"Gain {place}": [21.0, 20.5, 19.5 + place] for place in range(4)}
    asked = [(at_least(20 + place / 10), DecisionRule(), "engineering") for place in range(1, 4)]
    found = statuses(snapshot_of(asked, some_evidence(columns)), 256)
    assert [status.k for status in found.values()] == [2, 3, 3]
    with pytest.raises(AssertionError, match="judged alone"):
        statuses(snapshot_of(asked, some_evidence(columns)), 1)


def test_a_waiver_of_one_of_them_is_held_against_its_own_readings() -> None:
    columns = {f"Gain {place}": [21.0, 20.5, 18.5 + place / 4] for place in range(2)}
    asked = [(at_least(20), DecisionRule(), "engineering")] * 2
    found = statuses(snapshot_of(asked, some_evidence(columns), WAIVER), 256)
    assert found["R-0"].waived_by == ()
    assert found["R-1"].waived_by == ("W-1",)


def test_a_converted_value_at_its_limit_keeps_its_slack_in_the_company_of_values_as_written() -> None:
    volts = [20.1, 20.1, 20.1]
    columns = {"Gain 0": volts, "Gain 1": volts, "Gain 2": [value * 1e-3 for value in volts]}
    asked = [(at_most(20.1, "V"), DecisionRule(), "engineering")] * 3
    found = statuses(snapshot_of(asked, some_evidence(columns)), 256)
    assert [status.k for status in found.values()] == [3, 3, 3]
