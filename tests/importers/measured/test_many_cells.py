"""A sheet kept in typed columns gives the same evidence as one kept in lists, and its columns are not copied."""

from __future__ import annotations

from datetime import date
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from specflow.importers.measured.cells import read_column
from specflow.importers.readers import open_grids, xlsx
from tests.importers.measured.make import book, one_table, taken

HEAD = ["Item", "Mode", "f (GHz)", "Gain (dB)", "Isolation (dB)", "Date", "Remark"]
cells = st.tuples(
    st.sampled_from(["LNA-1", "LNA-2", " LNA-1 ", None, 7, "—"]),
    st.sampled_from(["high", "low", "high  power", 3, None, True]),
    st.sampled_from([27.5, 28, 29.25]),
    st.sampled_from([20.5, 9.9e37, "n/a", "20,5", "OL", None, 999, 21]),
    st.sampled_from([60, "> 60", "55 .. 58", None, "#N/A"]),
    st.sampled_from([date(2026, 3, 2), "2 March 2026", None]),
    st.sampled_from(["ok", "", " ", "seen again", 1, True]),
)


def evidence(path: Path, monkeypatch: pytest.MonkeyPatch, streamed_bytes: int) -> Any:
    monkeypatch.setattr(xlsx, "STREAMED_BYTES", streamed_bytes)
    table = one_table(path)
    digest = table.document.digest if table.document is not None else ""
    return digest, table.rejected, table.blank, table.notes, table.questions


@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(st.lists(cells, min_size=2, max_size=12))
def test_typed_columns_say_what_lists_say(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, rows: list[tuple[Any, ...]]
) -> None:
    path = book(tmp_path / "a.xlsx", [HEAD, *rows])
    assert evidence(path, monkeypatch, 0) == evidence(path, monkeypatch, 1 << 30)


def test_columns_are_shared_with_the_sheet_and_locked(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(xlsx, "STREAMED_BYTES", 0)
    path = book(tmp_path / "a.xlsx", [HEAD[2:4], *([27.5 + row, 20.5] for row in range(9))])
    column = read_column(open_grids(path)[0], 2, 2, 11)
    part = column.numbers_at(np.arange(3, 8, dtype=np.int32))
    assert np.shares_memory(part, column.numbers) and not part.flags.writeable
    apart = column.numbers_at(np.array([3, 5], np.int32))
    assert not np.shares_memory(apart, column.numbers)
    table = taken(one_table(path))
    assert table.columns is not None and not table.columns.values["Gain"].low.flags.writeable
