"""Arrays of evidence: stored exactly, loaded when asked for, never changed, and damage is noticed."""

from __future__ import annotations

import sqlite3
from contextlib import closing
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from specflow.errors import DocumentError, StoreError
from specflow.model.columns import Columns, TextColumn
from specflow.model.evidence import EvidenceColumns, EvidenceTable, ValueArrays
from specflow.store import ProjectStore, create_project, open_project
from specflow.store.columns import pack, unpack
from tests.builders import (
    a_block,
    a_project,
    a_value_column,
    adding,
    an_evidence_file,
    an_evidence_table,
    editing,
    some_columns,
    some_evidence,
)

ME = "Ann Invented"
GROUND = (a_block(), an_evidence_file())


def assert_same(one: EvidenceColumns, other: EvidenceColumns) -> None:
    """Compare all arrays of two tables, NaN being equal to NaN."""
    np.testing.assert_array_equal(one.source_rows, other.source_rows)
    assert words(one.items) == words(other.items)
    assert (one.dates is None) == (other.dates is None)
    if one.dates is not None and other.dates is not None:
        assert words(one.dates) == words(other.dates)
    assert one.conditions.size == other.conditions.size
    assert one.conditions.units == other.conditions.units
    assert list(one.conditions.names) == list(other.conditions.names)
    for name, numbers in one.conditions.numeric.items():
        np.testing.assert_array_equal(numbers, other.conditions.numeric[name])
    for name, column in one.conditions.text.items():
        assert words(column) == words(other.conditions.text[name])
    assert list(one.values) == list(other.values)
    for name, value in one.values.items():
        np.testing.assert_array_equal(value.low, other.values[name].low)
        np.testing.assert_array_equal(value.high, other.values[name].high)
        assert (value.u is None) == (other.values[name].u is None)
        if value.u is not None:
            np.testing.assert_array_equal(value.u, other.values[name].u)
    assert {name: words(column) for name, column in one.extra.items()} == {
        name: words(column) for name, column in other.extra.items()
    }


def words(column: TextColumn) -> list[str]:
    """Return a text column as words."""
    return [column.word(row) for row in range(len(column.codes))]


def rich_evidence() -> EvidenceColumns:
    """Return a table with everything a table may have."""
    return EvidenceColumns(
        conditions=some_columns(frequency=[27.5, None, 30.0], polarisation=["LHCP", None, "RHCP"]),
        values={
            "Gain": ValueArrays(
                np.array([21.0, -np.inf, np.nan]),
                np.array([21.0, 19.5, np.nan]),
                np.array([0.2, np.nan, 0.3]),
            ),
            "Gain 2": ValueArrays(np.array([1e-300, 5e300, 0.1]), np.array([1e-300, 5e300, 0.1])),
        },
        source_rows=np.array([5, 6, 9], np.int32),
        items=TextColumn.of(["LNA-1", None, "Größe 2"]),
        dates=TextColumn.of(["2026-05-01", "2026-05-02", None]),
        extra={"operator": TextColumn.of(["x", "y", "x"])},
    )


def rich_table(id: str = "T-1") -> EvidenceTable:
    """Return the document of ``rich_evidence``."""
    return an_evidence_table(id, values=(a_value_column(), a_value_column("Gain 2")))


def test_arrays_come_back_exactly(store: ProjectStore) -> None:
    empty = some_evidence([], items=[], conditions=some_columns(frequency=[]))
    store.apply(
        adding(*GROUND, rich_table(), an_evidence_table("T-2", rows=0), an_evidence_table("T-3")),
        columns={"t-1": rich_evidence(), "T-2": empty, "T-3": some_evidence(u=0.2)},
        by=ME,
    )
    loaded = store.load().load_columns(["T-1", "T-2", "t-3"])
    assert list(loaded) == ["T-1", "T-2", "t-3"]
    assert_same(loaded["T-1"], rich_evidence())
    assert_same(loaded["T-2"], empty)
    assert_same(loaded["t-3"], some_evidence(u=0.2))


def test_points_are_stored_once_and_come_back_as_one_array() -> None:
    table = rich_table()
    packed = pack(table, rich_evidence())
    assert [column.name for column in packed if column.role == "high"] == ["Gain"]
    point = unpack("T-1", packed).values["Gain 2"]
    assert point.high is point.low


@given(arrays(np.float64, st.integers(0, 20), elements=st.floats(allow_nan=True, allow_infinity=True)))
def test_any_float_comes_back_but_negative_zero(values: np.ndarray) -> None:
    table = an_evidence_table(rows=len(values))
    given_columns = some_evidence(list(values), items=[None] * len(values), conditions=Columns(len(values)))
    low = unpack("T-1", pack(table, given_columns)).values["Gain"].low
    np.testing.assert_array_equal(low, values)
    assert not np.signbit(low[low == 0]).any()


def test_loaded_arrays_cannot_be_written_to() -> None:
    low = unpack("T-1", pack(an_evidence_table(), some_evidence())).values["Gain"].low
    with pytest.raises(ValueError, match="read-only"):
        low[0] = 1.0


def test_many_tables_are_fetched_together(store: ProjectStore) -> None:
    names = [f"T-{number}" for number in range(1200)]
    store.apply(
        adding(*GROUND, *(an_evidence_table(name) for name in names)),
        columns={name: some_evidence([float(number)] * 3) for number, name in enumerate(names)},
        by=ME,
    )
    loaded = store.load().load_columns(names)
    assert [columns.values["Gain"].low[0] for columns in loaded.values()] == list(range(1200))


def test_tables_and_arrays_must_come_together(store: ProjectStore) -> None:
    with pytest.raises(DocumentError, match="without its values"):
        store.apply(adding(*GROUND, an_evidence_table()), by=ME)
    with pytest.raises(DocumentError, match="rows"):
        store.apply(adding(*GROUND, an_evidence_table(rows=4)), columns={"T-1": some_evidence()}, by=ME)
    with pytest.raises(DocumentError, match="value columns: Gain, Loss"):
        store.apply(
            adding(*GROUND, an_evidence_table()),
            columns={"T-1": some_evidence({"Loss": [1.0, 2.0, 3.0]})},
            by=ME,
        )
    with pytest.raises(DocumentError, match="not added: t-2"):
        store.apply(
            adding(*GROUND, an_evidence_table()),
            columns={"T-1": some_evidence(), "T-2": some_evidence()},
            by=ME,
        )
    assert store.revision == 1


def test_stored_arrays_never_change(store: ProjectStore) -> None:
    store.apply(adding(*GROUND, an_evidence_table()), columns={"T-1": some_evidence()}, by=ME)
    edit = editing(an_evidence_table(), provisional=True)
    with pytest.raises(DocumentError, match="never change"):
        store.apply([edit], columns={"T-1": some_evidence([1.0, 2.0, 3.0])}, by=ME)
    store.apply([edit], by=ME)
    snapshot = store.load()
    assert snapshot.tables[0].provisional
    assert_same(snapshot.load_columns(["T-1"])["T-1"], some_evidence())


def test_damaged_bytes_are_noticed(project_file: Path) -> None:
    with create_project(project_file, a_project()) as store:
        store.apply(adding(*GROUND, an_evidence_table()), columns={"T-1": some_evidence()}, by=ME)
    with closing(sqlite3.connect(project_file)) as connection:
        connection.execute("UPDATE evidence_column SET data = zeroblob(24) WHERE role = 'low'")
        connection.commit()
    with open_project(project_file) as store:
        snapshot = store.load()
        with pytest.raises(StoreError, match="'Gain' is damaged") as caught:
            snapshot.load_columns(["T-1"])
    assert caught.value.where == "evidence table T-1"
    assert "backup" in caught.value.hint
