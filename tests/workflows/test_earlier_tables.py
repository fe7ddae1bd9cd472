"""Which rows of earlier tables a new one has again; a quick look first must never hide one."""

from __future__ import annotations

from unittest.mock import patch

from hypothesis import given
from hypothesis import strategies as st

from specflow.model.evidence import ConditionColumn, EvidenceColumns
from specflow.workflows import earlier_tables
from specflow.workflows.earlier_tables import Replacement, replaced_rows
from tests.builders import a_snapshot, an_evidence_file, an_evidence_table, some_columns, some_evidence

CONDITIONS = (
    ConditionColumn(dimension="frequency", kind="numeric", unit="GHz", column=1),
    ConditionColumn(dimension="mode", kind="text", column=2),
)
ROW = st.tuples(
    st.sampled_from([None, 27.5, 30.0, -0.0, 0.0]),
    st.sampled_from([None, "low", "LOW", "high"]),
    st.sampled_from([None, "LNA-1", "lna-1", "LNA-2"]),
    st.sampled_from([1.0, 2.0]),
)
ROWS = st.lists(ROW, min_size=1, max_size=5)


def evidence(rows: list[tuple[float | None, str | None, str | None, float]]) -> EvidenceColumns:
    frequencies, modes, items, values = zip(*rows, strict=True)
    return some_evidence(
        list(values),
        items=list(items),
        conditions=some_columns({"frequency": "GHz"}, frequency=list(frequencies), mode=list(modes)),
    )


def found(earlier: EvidenceColumns, later: EvidenceColumns) -> list[Replacement]:
    tables = [
        an_evidence_table(
            f"T-{number}", rows=len(columns.source_rows), conditions=CONDITIONS, table_key="T-key"
        )
        for number, columns in enumerate((earlier, later))
    ]
    snapshot = a_snapshot(an_evidence_file("F-1"), tables[0], columns={"T-0": earlier})
    return replaced_rows(snapshot, tables[1], later, "another digest")


@given(ROWS, ROWS)
def test_a_quick_look_hides_no_row_that_is_there_again(
    first: list[tuple[float | None, str | None, str | None, float]],
    second: list[tuple[float | None, str | None, str | None, float]],
) -> None:
    earlier, later = evidence(first), evidence(second)
    with patch.object(earlier_tables, "_may_share_rows", return_value=True):
        thorough = found(earlier, later)
    assert found(earlier, later) == thorough


def test_tables_that_have_nothing_in_common_are_not_compared_row_by_row() -> None:
    earlier = evidence([(27.5, "low", "LNA-1", 1.0)])
    for other in ((30.0, "low", "LNA-1", 2.0), (27.5, "high", "LNA-1", 2.0), (27.5, "low", "LNA-2", 2.0)):
        with patch.object(earlier_tables, "_rows", side_effect=AssertionError):
            assert found(earlier, evidence([other])) == []
    [same] = found(earlier, evidence([(27.5, "LOW", "lna-1", 2.0)]))
    assert (same.earlier, same.rows, same.differing) == ("T-0", (0,), 1)
