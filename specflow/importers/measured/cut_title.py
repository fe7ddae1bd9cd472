"""Pattern cuts without headers, each below a title that says the cut and the number of its rows: ``HORIZONTAL 360``."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from specflow.importers.measured.facts import Fact, read_facts, read_preamble
from specflow.importers.measured.found_table import FoundTable
from specflow.importers.measured.header_cells import HeaderCell
from specflow.importers.readers import Grid

_CUTS = frozenset(("horizontal", "vertical", "azimuth", "elevation"))
_TURN = 360.0


def cut_title(grid: Grid, row: int) -> Fact | None:
    """The cut that a row states, with its number of rows; None for any other row."""
    facts = read_facts(grid, row)
    is_cut = len(facts) == 1 and facts[0].key.casefold() in _CUTS and facts[0].value.isdigit()
    return facts[0] if is_cut else None


def with_cut(table: FoundTable, grid: Grid, block: int) -> FoundTable:
    """The block that begins in a row with what its title says; what stands above the first cut of a file holds for all
    of them."""
    title = cut_title(grid, block - 1) if block > grid.first_row else None
    if title is None or int(title.value) != len(table.rows):
        return table
    first = next(row for row in range(grid.first_row, block) if cut_title(grid, row) is not None)
    head = read_preamble(grid, grid.first_row, first).facts
    said = (Fact("cut", title.key.casefold(), title.cell, title.row), *head)
    return replace(table, headers=_named(table, title), facts=said)


def _named(table: FoundTable, title: Fact) -> tuple[HeaderCell, ...]:
    """The first column is the angle; in degrees where its rows part a full turn evenly."""
    axis, *rest = table.headers
    angles = table.cells(axis.column).numbers_at(table.rows)
    even = np.arange(len(angles)) * _TURN / len(angles)
    if not np.allclose(angles, even, atol=1e-6 * _TURN):
        return (replace(axis, text="Angle"), *rest)
    source = f"{len(angles)} rows part a full turn, {title.cell}"
    return (replace(axis, text="Angle", unit="deg", unit_row=axis.row, unit_from=source), *rest)
