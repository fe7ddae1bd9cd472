"""What sources say beside their readings, over many points: the last one is compared like the first."""

from __future__ import annotations

import time
from dataclasses import replace
from datetime import date

import numpy as np
import pytest

from specflow.model.columns import TextColumn
from specflow.model.source_statement import StatedColumn
from specflow.parameters import load_dictionary
from specflow.rules.facts import Facts
from specflow.rules.sources import stated_limit_differs, stated_verdict_differs
from specflow.verification import evaluate
from tests.builders import (
    a_block,
    a_conditions_set,
    a_dimension,
    a_requirement,
    a_snapshot,
    an_evidence_file,
    an_evidence_table,
    an_item,
    some_columns,
    some_evidence,
)

DICTIONARY = load_dictionary()
MANY = 25_000


@pytest.fixture(scope="module")
def facts() -> Facts:
    """Readings that pass at many frequencies, but the last, beside which the source says PASS and another limit."""
    frequencies = tuple(np.round(10 + np.arange(MANY) / 1000, 3).tolist())
    arrays = replace(
        some_evidence([21.0] * (MANY - 1) + [19.5], conditions=some_columns(frequency=frequencies)),
        extra={
            "verdict": TextColumn.of(["PASS"] * MANY),
            "limit": TextColumn.of(["20 dB"] * (MANY - 1) + ["19 dB"]),
        },
    )
    stated = (
        StatedColumn(name="verdict", kind="verdict", of="Gain"),
        StatedColumn(name="limit", kind="limit", of="Gain", unit="dB"),
    )
    snapshot = a_snapshot(
        a_block(),
        an_item(),
        a_conditions_set("CS", a_dimension(values=frequencies, tolerance=0.0001)),
        a_requirement(),
        an_evidence_file(),
        an_evidence_table(rows=MANY, stated=stated),
        columns={"T-1": arrays},
    )
    return Facts(snapshot, evaluate(snapshot, DICTIONARY, as_of=date(2026, 6, 1)), DICTIONARY)


def test_a_difference_at_the_last_of_many_points_is_found_soon(facts: Facts) -> None:
    start = time.perf_counter()
    (verdict,), (limit,) = list(stated_verdict_differs(facts)), list(stated_limit_differs(facts))
    assert time.perf_counter() - start < 2.0
    assert "the source says 'PASS', we find a fail" in verdict.message
    assert "a limit of 19 dB, the requirement has 20 dB" in limit.message
    assert verdict.origin is not None and verdict.origin.row == MANY + 1
