"""Whole requirements against a plain loop: every reading asked by itself, in the order the rules are written."""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from specflow.model.block import HardwareType
from specflow.model.evidence import EvidenceTable
from specflow.model.requirement import Method
from specflow.model.verdict import Verdict
from tests.builders import an_activity, an_evidence_table, an_item, some_columns, some_evidence
from tests.verification.evaluating import status_of

POINTS = (27.5, 28.75, 30.0)
ITEMS = {
    "LNA-1": HardwareType.ENGINEERING,
    "LNA-2": HardwareType.BREADBOARD,
    "LNA-3": HardwareType.PRODUCTION,
}


@dataclass(frozen=True)
class Row:
    """One reading: where, on which item, its value, and what the table it stands in is."""

    frequency: float
    item: str
    value: float
    table: int


TABLES = {
    1: {"method": Method.TEST, "accepted_by": "A. Invented"},
    2: {"method": Method.TEST, "accepted_by": ""},
    3: {"method": Method.ANALYSIS, "accepted_by": "A. Invented"},
}

rows = st.builds(
    Row,
    st.sampled_from([*POINTS, 29.0]),
    st.sampled_from(sorted(ITEMS)),
    st.sampled_from([18.0, 19.5, 20.0, 20.5, 25.0]),
    st.sampled_from(sorted(TABLES)),
)


def rank_of(row: Row) -> int:
    if TABLES[row.table]["method"] is Method.ANALYSIS:
        return 2
    return 5 if ITEMS[row.item] is HardwareType.BREADBOARD else 6


def has_credit(row: Row) -> bool:
    return rank_of(row) == 6 and bool(TABLES[row.table]["accepted_by"])


def expected(readings: list[Row]) -> dict[str, list[tuple[Verdict, bool]]]:
    """Return verdict that rolls up, and whether it proves, at every point of every item that has evidence there."""
    served = defaultdict(list)
    for row in readings:
        if row.frequency in POINTS:
            served[row.item, row.frequency].append(row)
    found = {}
    for item in {item for item, _ in served}:
        found[item] = [judged(served[item, point]) for point in POINTS]
    return found


def judged(here: list[Row]) -> tuple[Verdict, bool]:
    weighing = [row for row in here if has_credit(row) or row.value < 20]
    if not weighing:
        return Verdict.NONE, False
    best = max(rank_of(row) for row in weighing)
    worst = min((row for row in weighing if rank_of(row) == best), key=lambda row: row.value)
    verdict = Verdict.PASS if worst.value >= 20 else Verdict.FAIL
    return verdict, verdict is Verdict.PASS


@settings(max_examples=60, deadline=None)
@given(st.lists(rows, min_size=1, max_size=25))
def test_points_of_every_item_agree_with_a_plain_loop(readings: list[Row]) -> None:
    tables: list[EvidenceTable] = []
    columns = {}
    for number, fields in TABLES.items():
        own = [row for row in readings if row.table == number]
        if own:
            tables.append(an_evidence_table(f"T-{number}", rows=len(own), **fields))
            columns[f"T_{number}"] = some_evidence(
                [row.value for row in own],
                items=[row.item for row in own],
                conditions=some_columns(frequency=[row.frequency for row in own]),
            )
    items = [an_item(name, hardware_type=kind) for name, kind in ITEMS.items()]
    status = status_of(*items, *tables, an_activity(), **columns)
    (activity,) = status.activities
    wanted = expected(readings)
    for name, points in wanted.items():
        results = activity.items[name]
        assert results.proved.tolist() == [proves for _, proves in points]
        for place, (verdict, _) in enumerate(points):
            if verdict is not Verdict.NONE:
                assert results.verdict[place] == verdict
    most = max((sum(proves for _, proves in points) for points in wanted.values()), default=0)
    assert status.k == most
    open_fails = {
        place
        for name, points in wanted.items()
        for place, (verdict, _) in enumerate(points)
        if verdict is Verdict.FAIL and not outranked(readings, wanted, name, place)
    }
    assert (status.verdict is Verdict.FAIL) == bool(open_fails or fails_where_shown(status, wanted))


def outranked(
    readings: list[Row], wanted: dict[str, list[tuple[Verdict, bool]]], name: str, place: int
) -> bool:
    """Whether another item proves the point with evidence of higher rank than this item's fail."""
    here = [row for row in readings if row.item == name and row.frequency == POINTS[place]]
    weighing = [row for row in here if has_credit(row) or row.value < 20]
    own = max(rank_of(row) for row in weighing)
    return own < 6 and any(points[place][1] for other, points in wanted.items() if other != name)


def fails_where_shown(status: object, wanted: dict[str, list[tuple[Verdict, bool]]]) -> bool:
    shown = status.activities[0].shown_item  # type: ignore[attr-defined]
    return any(verdict is Verdict.FAIL for verdict, _ in wanted.get(shown, []))


@pytest.mark.parametrize("count", [1, 5])
def test_more_readings_at_proved_points_never_prove_less_when_they_pass(count: int) -> None:
    readings = some_evidence(
        [21.0] * 3 * count,
        conditions=some_columns(frequency=list(POINTS) * count),
    )
    assert status_of(T_1=readings).k == 3
