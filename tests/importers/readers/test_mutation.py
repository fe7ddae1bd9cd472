"""Damaged bytes: whatever they are, the answer is grids or one FileError, soon."""

from __future__ import annotations

import io
import random
import tempfile
import zipfile
from datetime import timedelta
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from specflow.errors import FileError
from specflow.importers.readers import open_grids
from tests.importers.readers.mutating import Seed, run, seeds
from tests.importers.readers.workbooks import PARTS, by_hand

SHEET = "xl/worksheets/sheet1.xml"
ROWS = (
    '<row r="2"><c r="B2" t="s"><v>0</v></c><c r="C2" s="1"><v>0.5</v></c><c r="D2"><f>B2*2</f><v>3</v></c></row>'
    '<row r="3" hidden="1"><c r="B3" t="s"><v>1</v></c><c r="C3" t="e"><v>#N/A</v></c>'
    '<c r="D3" s="3"><v>45000</v></c></row>'
)
TABLE = b'# run 3\n"Freq, GHz";Gain (dB);note\n1,5;20,25;"a;b"\n2,5;-3e1;\n\n3,5;<-90;\xc2\xb5\n'

edits = st.lists(
    st.tuples(
        st.floats(0, 1, exclude_max=True), st.sampled_from(["set", "insert", "delete"]), st.binary(max_size=6)
    ),
    min_size=1,
    max_size=6,
)
patient = settings(max_examples=120, deadline=timedelta(seconds=5))


def workbook() -> bytes:
    with tempfile.TemporaryDirectory() as folder:
        return by_hand(Path(folder) / "a.xlsx", ROWS).read_bytes()


WORKBOOK = workbook()


def edited(content: bytes, changes: list[tuple[float, str, bytes]]) -> bytes:
    for place, how, new in changes:
        at = int(place * len(content))
        after = at if how == "insert" else at + max(len(new), 1)
        content = content[:at] + (b"" if how == "delete" else new) + content[after:]
    return content


def survives(name: str, content: bytes) -> None:
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / name
        path.write_bytes(content)
        try:
            grids = open_grids(path)
        except FileError as error:
            assert error.where.startswith(name)
            assert error.hint
        else:
            for grid in grids:
                for column in range(grid.first_column, min(grid.last_column, 50) + 1):
                    grid.column_floats(column, grid.first_row, grid.last_row + 1)


@patient
@given(edits)
def test_changed_workbook_bytes(changes: list[tuple[float, str, bytes]]) -> None:
    survives("a.xlsx", edited(WORKBOOK, changes))


@patient
@given(st.sampled_from([SHEET, *PARTS]), edits)
def test_changed_parts_of_a_sound_archive(part: str, changes: list[tuple[float, str, bytes]]) -> None:
    packed = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(WORKBOOK)) as before, zipfile.ZipFile(packed, "w") as after:
        for name in before.namelist():
            content = before.read(name)
            after.writestr(name, edited(content, changes) if name == part else content)
    survives("a.xlsx", packed.getvalue())


@patient
@given(edits)
def test_changed_text_bytes(changes: list[tuple[float, str, bytes]]) -> None:
    survives("a.csv", edited(TABLE, changes))


@patient
@given(st.binary(max_size=400), st.sampled_from(["a.csv", "a.xlsx", "a.xls", "a.ods", "a.jsonl", "a.html"]))
def test_any_bytes(content: bytes, name: str) -> None:
    survives(name, content)


@pytest.mark.parametrize("seed", seeds(), ids=lambda seed: seed.name)
def test_a_changed_file_gives_its_own_numbers_or_one_refusal(seed: Seed, tmp_path: Path) -> None:
    outcome = run(seed, 60, random.Random(f"suite {seed.name}"), tmp_path)
    assert outcome.faults == []
    assert sum(outcome.counts.values()) == 60
    assert outcome.counts["read"] and outcome.counts["refused"] + outcome.compared
