"""All tables of a sheet, however they lie."""

from __future__ import annotations

from specflow.importers.measured.context import Context
from specflow.importers.measured.tables import FoundTable, find_tables
from specflow.importers.readers import Grid


def find_all(grid: Grid, context: Context) -> tuple[FoundTable, ...]:
    """Return the tables of a sheet, from top to bottom and from left to right."""
    return find_tables(grid, context.recognises)
