"""A column that says "Power" and no more may be a setting or a result: settings come in steps, or return."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from specflow.importers.measurements import Role
from tests.importers.measured.make import book, one_table, questions, taken

LEVELS: dict[str, list[Any]] = {
    "equal steps": [-10, -8, -6, -4],
    "a few that return": [10, 20, 10, 20],
    "always the same": [30, 30, 30, 30],
}


@pytest.mark.parametrize("name", LEVELS)
def test_settings_are_a_condition(tmp_path: Path, name: str) -> None:
    rows = [["f (GHz)", "Power (dBm)", "Gain (dB)"]]
    rows += [[28 + place, level, 20] for place, level in enumerate(LEVELS[name])]
    table = taken(one_table(book(tmp_path / "a.xlsx", rows)))
    assert {one.header: one.role for one in table.recognised}["Power (dBm)"] is Role.CONDITION


@pytest.mark.parametrize("levels", [[24.1, 24.35, 24.2, 24.6], ["45 ± 0.5", "46 ± 0.5", "44 ± 0.5", "x"]])
def test_powers_that_look_measured_are_asked_about(tmp_path: Path, levels: list[Any]) -> None:
    rows = [["f (GHz)", "Power (dBm)", "Gain (dB)"]]
    rows += [[28 + place, level, 20] for place, level in enumerate(levels)]
    path = book(tmp_path / "a.xlsx", rows)
    assert "B1: column B: may be the condition power level, or a power that was measured" in questions(
        one_table(path)
    )
    stated = {"block": "LNA", "item": "LNA-1", "column B": "condition"}
    taken(one_table(path, stated=stated))
