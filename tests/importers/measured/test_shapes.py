"""One small table written in every shape gives the same records, and each record points to its own cell."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from openpyxl import load_workbook

from specflow.importers.measurements import Measurements
from specflow.importers.readers import column_number, looks_numeric
from specflow.model.evidence import SOURCE_COLUMN
from tests.importers.measured.make import SAID, book, measure, text

Cells = list[list[Any]]
Values = dict[str, dict[float, float]]
Record = tuple[str, float, float]

HEADERS = {
    "gain": ("Gain", "dB"),
    "noise_figure": ("NF", "dB"),
    "oip3": ("OIP3", "dBm"),
    "saturated_power": ("Psat", "dBm"),
}
NUMBERS = st.floats(-50, 50, allow_nan=False).map(lambda number: round(number, 3))
FREQUENCIES = st.lists(
    st.floats(17.7, 30, allow_nan=False).map(lambda number: round(number, 2)),
    min_size=2,
    max_size=5,
    unique=True,
)


@st.composite
def tables(draw: st.DrawFn) -> Values:
    """Readings of some quantities at some frequencies, none left out."""
    frequencies = sorted(draw(FREQUENCIES))
    keys = draw(st.lists(st.sampled_from(sorted(HEADERS)), min_size=2, max_size=4, unique=True))
    return {key: {frequency: draw(NUMBERS) for frequency in frequencies} for key in keys}


def _header(key: str) -> str:
    return "{} ({})".format(*HEADERS[key])


def _frequencies(values: Values) -> list[float]:
    return list(next(iter(values.values())))


def plain(values: Values) -> Cells:
    rows = [[frequency, *(own[frequency] for own in values.values())] for frequency in _frequencies(values)]
    return [["f (GHz)", *map(_header, values)], *rows]


def turned(values: Values) -> Cells:
    return [list(line) for line in zip(*plain(values), strict=True)]


def turned_with_units(values: Values) -> Cells:
    rows = [[HEADERS[key][0], HEADERS[key][1], *own.values()] for key, own in values.items()]
    return [["Parameter", "Unit"], ["Frequency", "GHz", *_frequencies(values)], *rows][1:]


def with_units_row(values: Values) -> Cells:
    body = plain(values)[1:]
    names = ["Frequency", *(HEADERS[key][0] for key in values)]
    return [names, ["GHz", *(HEADERS[key][1] for key in values)], *body]


def long(values: Values) -> Cells:
    rows = [
        [HEADERS[key][0], value, HEADERS[key][1], frequency]
        for frequency in _frequencies(values)
        for key, value in ((key, own[frequency]) for key, own in values.items())
    ]
    return [["Parameter", "Value", "Unit", "f (GHz)"], *rows]


def beside(values: Values) -> Cells:
    lines: Cells = [[] for _ in range(len(_frequencies(values)) + 1)]
    for key, own in values.items():
        lines[0] += ["f (GHz)", _header(key), None]
        for line, (frequency, value) in zip(lines[1:], own.items(), strict=True):
            line += [frequency, value, None]
    return lines


def beside_without_gap(values: Values) -> Cells:
    return [[cell for cell in line if cell is not None] for line in beside(values)]


def stacked(values: Values) -> Cells:
    lines: Cells = []
    for key, own in values.items():
        lines += [
            ["f (GHz)", _header(key)],
            *([frequency, value] for frequency, value in own.items()),
            [],
            [],
        ]
    return lines


def stacked_with_titles(values: Values) -> Cells:
    lines: Cells = []
    for key, own in values.items():
        lines += [[f"Results of {HEADERS[key][0]}"], ["f (GHz)", _header(key)]]
        lines += [*([frequency, value] for frequency, value in own.items()), []]
    return lines


def pivoted(values: Values) -> Cells:
    """One block for each quantity, with the frequencies as headers and the items in the first column's place."""
    lines: Cells = []
    for key, own in values.items():
        lines += [
            [_header(key)],
            ["Baseplate (°C) \\ f (GHz)", *own],
            [25, *own.values()],
            [25.5, *own.values()],
            [],
        ]
    return lines


SHAPES: dict[str, Callable[[Values], Cells]] = {
    one.__name__: one
    for one in (
        plain, turned, turned_with_units, with_units_row, long, beside, beside_without_gap, stacked, stacked_with_titles
    )
}  # fmt: skip


def records(measured: Measurements, cells: dict[tuple[int, int], Any]) -> list[Record]:
    """All records of a file; each must stand in the cell that it says it is from."""
    found = []
    for table in measured.tables:
        assert not table.questions, table.questions
        assert table.document is not None and table.columns is not None
        assert table.rejected == ()
        columns = table.columns
        for value in table.document.values:
            low = columns.values[value.name].low
            for row, number in enumerate(low.tolist()):
                column = value.column
                if SOURCE_COLUMN in columns.extra:
                    column = column_number(columns.extra[SOURCE_COLUMN].word(row))
                place = table.document.cell(int(columns.source_rows[row]), column)
                assert cells[place] == number, (place, number)
                frequency = float(columns.conditions.numeric["frequency"][row])
                assert columns.conditions.units["frequency"] == "GHz"
                assert value.unit == HEADERS[value.quantity.parameter][1]
                found.append((value.quantity.parameter, frequency, number))
    return sorted(found)


def grouped(values: Values) -> Cells:
    """Two items beside each other under cells that name them."""
    keys = list(map(_header, values))
    lines: Cells = [[None, "LNA-1", *[None] * (len(keys) - 1), "LNA-2"], ["f (GHz)", *keys, *keys]]
    for frequency in _frequencies(values):
        own = [column[frequency] for column in values.values()]
        lines.append([frequency, *own, *(round(-value - 0.5, 3) for value in own)])
    return lines


def written(path: Path, cells: Cells) -> Path:
    """The cells as a workbook, or as text."""
    if path.suffix == ".xlsx":
        return book(path, cells)
    width = max(map(len, cells))
    lines = [
        ",".join("" if cell is None else str(cell) for cell in [*line, *[None] * (width - len(line))])
        for line in cells
    ]
    return text(path, "\n".join(lines) + "\n")


def _cells(path: Path) -> dict[tuple[int, int], Any]:
    if path.suffix == ".csv":
        lines = [line.split(",") for line in path.read_text(encoding="utf-8").splitlines()]
        places = {
            (row, column): cell for row, line in enumerate(lines, 1) for column, cell in enumerate(line, 1)
        }
        return {place: float(cell) if looks_numeric(cell) else cell for place, cell in places.items()}
    sheet = load_workbook(path).worksheets[0]
    return {(cell.row, cell.column): cell.value for row in sheet.iter_rows() for cell in row}


@pytest.mark.parametrize("ending", ["xlsx", "csv"])
@pytest.mark.parametrize("shape", SHAPES)
@settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(values=tables())
def test_the_same_records_in_every_shape(tmp_path: Path, shape: str, ending: str, values: Values) -> None:
    path = written(tmp_path / f"{shape}.{ending}", SHAPES[shape](values))
    expected = sorted((key, f, value) for key, own in values.items() for f, value in own.items())
    assert records(measure(path), _cells(path)) == expected


@pytest.mark.parametrize("ending", ["xlsx", "csv"])
@settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(values=tables())
def test_a_condition_across_the_columns(tmp_path: Path, ending: str, values: Values) -> None:
    path = written(tmp_path / f"pivot.{ending}", pivoted(values))
    expected = sorted((key, f, value) for key, own in values.items() for f, value in [*own.items()] * 2)
    assert records(measure(path), _cells(path)) == expected


@pytest.mark.parametrize("ending", ["xlsx", "csv"])
@settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(values=tables())
def test_groups_of_columns_for_each_item(tmp_path: Path, ending: str, values: Values) -> None:
    path = written(tmp_path / f"grouped.{ending}", grouped(values))
    measured = measure(path, stated={"block": "LNA"})
    first = [(key, f, value) for key, own in values.items() for f, value in own.items()]
    second = [(key, f, round(-value - 0.5, 3)) for key, f, value in first]
    assert records(measured, _cells(path)) == sorted([*first, *second])
    assert [table.columns.items.labels for table in measured.tables if table.columns] == [
        ("LNA-1",),
        ("LNA-2",),
    ]


@pytest.mark.parametrize("shape", SHAPES)
@settings(max_examples=10, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(values=tables())
def test_what_is_proposed_reads_the_same(tmp_path: Path, shape: str, values: Values) -> None:
    path = book(tmp_path / f"{shape}.xlsx", SHAPES[shape](values))
    first = measure(path, stated=SAID)
    again = measure(path, stated=SAID, mapping=first.proposal)
    assert records(again, _cells(path)) == records(first, _cells(path))
    assert all(table.mapping_from for table in again.tables)
    assert not [finding for finding in again.findings if finding.rule == "attach-layout-not-met"]
