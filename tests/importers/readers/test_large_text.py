"""Text tables read into columns, against the same tables read line by line."""

from __future__ import annotations

import tempfile
from datetime import timedelta
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from specflow.errors import FileError
from specflow.importers.readers import Grid, csv, large_text, open_grids
from specflow.importers.readers.stores import CellStore
from tests.published import BESIDE, DATA

TEXTS = sorted(
    path
    for folder in (DATA, BESIDE)
    if folder.is_dir()
    for path in folder.iterdir()
    if path.suffix.lower() in (".csv", ".dat", ".txt", ".tsv")
)


def as_large(path: Path, block: int = 200) -> Grid:
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(csv, "LARGE_BYTES", -1)
        patch.setattr(large_text, "BLOCK", block)
        patch.setattr(large_text, "_HEAD", 40)
        return open_grids(path)[0]


def assert_same(one: Grid, other: Grid) -> None:
    assert list(one.rows) == list(other.rows)
    assert (one.decimal, one.comment_rows, one.notes) == (other.decimal, other.comment_rows, other.notes)
    assert one.last_column == other.last_column
    first, stop = 0, other.last_row + 3
    for column in range(1, other.last_column + 2):
        assert one.column(column, first, stop) == other.column(column, first, stop)
        (numbers, bad), (expected, known_bad) = (
            grid.column_floats(column, first, stop) for grid in (one, other)
        )
        assert np.array_equal(numbers, expected, equal_nan=True)
        assert np.array_equal(np.signbit(numbers), np.signbit(expected))
        assert bad == known_bad
        assert one.value(other.last_row, column) == other.value(other.last_row, column)


@pytest.mark.parametrize("path", TEXTS, ids=lambda path: path.name)
def test_published_tables(path: Path) -> None:
    other = open_grids(path)[0]
    one = as_large(path)
    if one.decimal == other.decimal and one.last_column == other.last_column:
        assert_same(one, other)
    else:
        pytest.fail("another layout was found")


numbers = st.one_of(
    st.floats(allow_nan=False, allow_infinity=False).map(repr),
    st.sampled_from(["1", "-0", "+1.5E+03", ".5", "5.", "30000000.000000000000000000001", "1e400", "0.1 "]),
)
others = st.sampled_from(
    ["", "ok", "<-90", "N/A", "1,5", "1_0", "nan", "inf", "- -", "1 2", "e5", "-", "0x1F", "٣"]
)
lines = st.lists(
    st.one_of(
        st.lists(numbers, min_size=3, max_size=3),
        st.lists(numbers, min_size=3, max_size=3),
        st.lists(st.one_of(numbers, others), min_size=1, max_size=4),
        st.sampled_from([["# a remark"], [""], ["% rms", "x", "y"]]),
    ),
    min_size=3,
    max_size=30,
)


@settings(max_examples=150, deadline=timedelta(seconds=5))
@given(lines, st.sampled_from([";", "\t", ",", "  "]), st.sampled_from(["\n", "\r\n"]), st.booleans())
def test_any_lines(rows: list[list[str]], delimiter: str, end: str, closed: bool) -> None:
    text = (
        end.join(delimiter.join(row) for row in [["f (GHz)", "G (dB)", "NF (dB)"]] * 3 + rows) + end * closed
    )
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "a.csv"
        path.write_bytes(text.encode())
        try:
            other = open_grids(path)[0]
        except FileError as error:
            with pytest.raises(FileError) as again:
                as_large(path)
            assert str(again.value) == str(error)
        else:
            assert_same(as_large(path), other)


def test_plain_numbers_are_kept_in_columns(tmp_path: Path) -> None:
    path = tmp_path / "a.csv"
    draw = np.random.default_rng(3).normal(size=(500, 3))
    path.write_text("f,G,NF\n" + "".join(",".join(map(repr, row)) + "\n" for row in draw.tolist()))
    grid = as_large(path)
    assert isinstance(grid.rows, CellStore)
    assert (
        np.array([grid.column_floats(column, 2, 502)[0] for column in (1, 2, 3)]).T.tolist() == draw.tolist()
    )
    assert grid.row(501) == [repr(number) for number in draw[-1].tolist()]


def test_decimal_commas_are_converted_in_columns(tmp_path: Path) -> None:
    path = tmp_path / "a.csv"
    path.write_text("f;G\n" + "".join(f"{row},5;-{row},25\n" for row in range(300)))
    grid = as_large(path)
    assert isinstance(grid.rows, CellStore)
    assert grid.decimal == ","
    assert grid.column_floats(2, 2, 302)[0].tolist() == [-row - 0.25 for row in range(300)]
    assert grid.value(3, 1) == "1,5"


@pytest.mark.parametrize(
    "text",
    [
        b'f,G\n1,2\n3,"4"\n' + b"5,6\n" * 50,
        b"f,G\n" + b"5,6\n" * 50 + b"5,6\0\n",
        b"f,G\n" + b"5,6\r" * 50,
        b"f,G\n" + b"5,6\n" * 50 + b"#12,1\n",
        b"f,G (\xb0C)\n" + b"5,6\n" * 50,
    ],
)
def test_what_cannot_be_read_in_columns_is_read_line_by_line(tmp_path: Path, text: bytes) -> None:
    path = tmp_path / "a.csv"
    path.write_bytes(text)
    assert_same(as_large(path), open_grids(path)[0])


def test_too_many_fields_are_refused(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "a.csv"
    path.write_text("f,G\n" + "5,6\n" * 50)
    monkeypatch.setattr(large_text, "MAX_FIELDS", 60)
    with pytest.raises(FileError, match="more than 60"):
        as_large(path)
