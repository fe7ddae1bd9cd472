"""Where u comes from: a column, a statement, the register; an expanded one is divided by its coverage factor."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest

from specflow.importers.measurements import MeasuredTable
from specflow.model.base import Document
from specflow.model.declared import UncertaintyEntry
from tests.importers.measured.make import SAID, book, one_table, questions, rejected, taken


def table_of(
    path: Path, header: list[str], row: list[Any], *documents: Document, above: Any = (), **options: Any
) -> MeasuredTable:
    return one_table(book(path / "a.xlsx", [*above, header, row, row]), *documents, **options)


def u_of(table: MeasuredTable, name: str) -> list[float] | None:
    assert table.columns is not None
    u = table.columns.values[name].u
    return None if u is None else [round(float(value), 9) for value in u]


@pytest.mark.parametrize(
    ("header", "amount", "u"),
    [
        ("U (dB), k=2", 0.8, 0.4),
        ("u (dB)", 0.4, 0.4),
        ("Standard uncertainty (dB)", 0.4, 0.4),
        ("Expanded uncertainty (dB) k=3", 0.9, 0.3),
        ("U Gain (dB), k=2", 0.8, 0.4),
        ("Gain uncertainty (dB), k=2", 0.8, 0.4),
        ("Uncertainty of gain (dB), k=2", 0.8, 0.4),
        ("± (dB), k=2", 0.8, 0.4),
        ("±dB (k=2)", 0.8, 0.4),
        ("Meas. unc. (dB, k=2)", 0.8, 0.4),
    ],
)
def test_columns(tmp_path: Path, header: str, amount: float, u: float) -> None:
    table = taken(table_of(tmp_path, ["f (GHz)", "Gain (dB)", header], [27.5, 20, amount]))
    assert u_of(table, "Gain") == [u, u]
    assert "column C" in table.document.values[0].uncertainty_from  # type: ignore[union-attr]


@pytest.mark.parametrize("header", ["U (dB)", "± dB", "Uncertainty (dB)", "Expanded uncertainty (dB)"])
def test_an_expanded_uncertainty_without_k_is_asked_about(tmp_path: Path, header: str) -> None:
    asked = questions(table_of(tmp_path, ["f (GHz)", "Gain (dB)", header], [27.5, 20, 0.8]))
    assert "coverage factor" in asked and "k = 2" in asked


def test_of_which_column_it_is(tmp_path: Path) -> None:
    header = ["f (GHz)", "Gain (dB)", "NF (dB)", "U NF (dB), k=2", "U (Gain), k=2, dB"]
    table = taken(table_of(tmp_path, header, [27.5, 20, 1.5, 0.2, 0.8]))
    assert (u_of(table, "Gain"), u_of(table, "NF")) == ([0.4, 0.4], [0.1, 0.1])
    header = ["f (GHz)", "Gain (dB)", "u (dB)", "NF (dB)", "u [dB]"]
    assert "more than once" in questions(table_of(tmp_path, header, [27.5, 20, 0.4, 1.5, 0.1]))
    header = ["f (GHz)", "Gain (dB)", "NF (dB)", "U (dB), k=2"]
    assert "of which column" in questions(table_of(tmp_path, header, [27.5, 20, 1.5, 0.8]))


def test_a_part_of_a_linear_value(tmp_path: Path) -> None:
    table = taken(table_of(tmp_path, ["f (GHz)", "Supply current (mA)", "U (%), k=2"], [27.5, 200, 4]))
    assert u_of(table, "Supply current") == [4.0, 4.0]


def test_percent_of_decibels_is_refused(tmp_path: Path) -> None:
    assert "does not fit" in questions(
        table_of(tmp_path, ["f (GHz)", "Gain (dB)", "U (%), k=2"], [27.5, 20, 4])
    )


def test_an_uncertainty_of_nothing_is_rejected(tmp_path: Path) -> None:
    table = taken(table_of(tmp_path, ["f (GHz)", "Gain (dB)", "u (dB)"], [27.5, 20, 0]))
    assert set(rejected(table)) == {"C2", "C3"}


@pytest.mark.parametrize("text", ["0.8 dB (k=2)", "u = 0.4 dB", "±0.8 dB, k=2", "U = 0.8 dB; k = 2"])
def test_stated_above_the_table(tmp_path: Path, text: str) -> None:
    table = taken(table_of(tmp_path, ["f (GHz)", "Gain (dB)"], [27.5, 20], above=[["Uncertainty", text]]))
    assert u_of(table, "Gain") == [0.4, 0.4]
    assert "stated in B1" in table.document.values[0].uncertainty_from  # type: ignore[union-attr]


def test_stated_without_k_is_asked_about(tmp_path: Path) -> None:
    table = table_of(tmp_path, ["f (GHz)", "Gain (dB)"], [27.5, 20], above=[["Uncertainty: 0.8 dB"]])
    assert "has no coverage factor k" in questions(table)


def test_stated_for_several_columns_must_name_its_quantity(tmp_path: Path) -> None:
    header, row = ["f (GHz)", "Gain (dB)", "NF (dB)", "Supply current (A)"], [27.5, 20, 1.5, 2]
    table = table_of(tmp_path, header, row, above=[["Uncertainty: 0.8 dB (k=2)"]])
    assert "of which of the 2 columns" in questions(table)
    table = taken(table_of(tmp_path, header, row, above=[["Gain uncertainty: 0.8 dB (k=2)"]]))
    assert (u_of(table, "Gain"), u_of(table, "NF"), u_of(table, "Supply current")) == ([0.4, 0.4], None, None)


def line(id: str, u: float, **fields: Any) -> UncertaintyEntry:
    return UncertaintyEntry(
        id=id, set_up="Bench 3", parameter="gain", standard_uncertainty=u, unit="dB", **fields
    )


def test_the_register_by_set_up_frequency_and_level(tmp_path: Path) -> None:
    rows = [["f (GHz)", "Gain (dB)"], [27.5, 20], [28.5, 20], [30, 20], [31, 20], [29.5, 25], [28, None]]
    path = book(tmp_path / "a.xlsx", rows)
    register = (
        line("U-1", 0.2, frequency_from_hz=27e9, frequency_to_hz=29e9),
        line(
            "U-2",
            0.3,
            frequency_from_hz=28e9,
            frequency_to_hz=30e9,
            level_from=15,
            level_to=21,
            level_unit="dB",
        ),
    )
    table = taken(one_table(path, *register, stated=SAID | {"set_up": "bench 3"}))
    np.testing.assert_equal(u_of(table, "Gain"), [0.2, 0.3, 0.3, np.nan, np.nan, np.nan])
    assert table.document.values[0].uncertainty_from == "register U-1, U-2"  # type: ignore[union-attr]
    assert any("2 values lie outside" in note for note in table.notes)
    assert u_of(taken(one_table(path, *register)), "Gain") is None  # no set-up, no register


def test_the_register_needs_the_frequency_that_its_line_speaks_of(tmp_path: Path) -> None:
    path = book(tmp_path / "a.xlsx", [["Vdd (V)", "Gain (dB)"], [5, 20]])
    register = line("U-1", 0.2, frequency_from_hz=27e9)
    assert u_of(taken(one_table(path, register, stated=SAID | {"set_up": "Bench 3"})), "Gain") is None


@pytest.mark.parametrize(
    "unit", ["dB (k=2)", "dB, k = 2", "[dB] (k=2)", "(dB, k=2)", "± dB (k=2)", "±dB k=2"]
)
def test_the_coverage_factor_may_stand_in_the_units_row(tmp_path: Path, unit: str) -> None:
    rows = [["Frequency", "Gain", "Uncertainty"], ["GHz", "dB", unit], [27.5, 20, 0.8]]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows)))
    assert u_of(table, "Gain") == [0.4]
    assert table.document is not None and table.document.values[0].coverage_factor == 2


def test_two_coverage_factors_are_asked_about(tmp_path: Path) -> None:
    rows = [["Frequency", "Gain", "U (k=1)"], ["GHz", "dB", "dB (k=2)"], [27.5, 20, 0.8]]
    assert "the header says k = 1, the units row k = 2" in questions(
        one_table(book(tmp_path / "a.xlsx", rows))
    )


def test_layouts_with_other_coverage_factors_are_other_layouts(tmp_path: Path) -> None:
    keys = set()
    for unit in ("dB (k=2)", "dB (k=3)", "dB"):
        rows = [["Frequency", "Gain", "U"], ["GHz", "dB", unit], [27.5, 20, 0.8]]
        keys.add(one_table(book(tmp_path / "a.xlsx", rows)).layout_key)
    assert len(keys) == 3


def _register(*lines: tuple[str, float, float, float]) -> list[UncertaintyEntry]:
    return [
        UncertaintyEntry(
            id=id, set_up="bench 1", parameter="gain", standard_uncertainty=u, unit="dB",
            frequency_from_hz=low * 1e9, frequency_to_hz=high * 1e9,
        )
        for id, u, low, high in lines
    ]  # fmt: skip


def test_the_line_of_the_register_is_named_row_by_row(tmp_path: Path) -> None:
    rows = [["Set-up", "bench 1"], [], ["f (GHz)", "Gain (dB)"], [27.5, 20], [28.5, 21], [31, 22]]
    lines = _register(("U-1", 0.2, 27, 28), ("U-2", 0.3, 28, 30))
    table = taken(one_table(book(tmp_path / "a.xlsx", rows), *lines))
    assert table.document is not None and table.columns is not None
    assert table.document.values[0].uncertainty_from == "register U-1, U-2"
    assert [table.columns.extra["u of Gain from"].word(row) for row in range(3)] == ["U-1", "U-2", ""]
    u = table.columns.values["Gain"].u
    assert u is not None and u[:2].tolist() == [0.2, 0.3] and u[2] != u[2]
    assert any("1 values lie outside the lines of the register" in note for note in table.notes)


def test_rows_without_an_uncertainty_of_their_own_take_it_from_the_register(tmp_path: Path) -> None:
    rows = [
        ["Set-up", "bench 1"],
        [],
        ["f (GHz)", "Gain (dB)", "u Gain (dB)"],
        [27.5, 20, 0.1],
        [27.8, 21, None],
    ]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows), *_register(("U-1", 0.2, 27, 28))))
    assert table.document is not None and table.columns is not None
    assert table.document.values[0].uncertainty_from == "column C, standard; register U-1 in 1 of 2 rows"
    u = table.columns.values["Gain"].u
    assert u is not None and u.tolist() == [0.1, 0.2]
    assert [table.columns.extra["u of Gain from"].word(row) for row in range(2)] == ["", "U-1"]


def test_stacked_columns_take_theirs_from_the_register(tmp_path: Path) -> None:
    rows = [["Set-up", "bench 1"], [], ["Vdd (V)", "Gain @ 27.5 GHz (dB)", "Gain @ 29 GHz (dB)"], [5, 20, 21]]
    mapping = """
    [[table]]
    [table.pivot]
    header = "Gain @ {frequency} GHz (dB)"
    parameter = "gain"
    unit = "dB"
    units = { frequency = "GHz" }
    """
    lines = _register(("U-1", 0.2, 27, 28), ("U-2", 0.3, 28, 30))
    table = taken(one_table(book(tmp_path / "a.xlsx", rows), *lines, mapping=mapping))
    assert table.columns is not None
    (arrays,) = table.columns.values.values()
    assert arrays.u is not None and arrays.u.tolist() == [0.2, 0.3]
