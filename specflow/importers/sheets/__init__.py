"""The sheets of the project workbook: one module a noun, each with its layout and its way from rows to documents.

What may live here: ``sheet.py`` (what a sheet kind is), ``table.py`` (the header row and the rows below it), ``row.py``
and ``cells.py`` (a cell, typed or refused), ``intake.py`` (what was read so far, references, duplicates),
``spelling.py`` (the nearest known words), ``cycles.py`` and ``leftovers.py`` (checks across rows), ``plans.py`` (the
activities of a requirement), and one module a noun. A new sheet is one module and one line in ``SHEETS``.
"""

from specflow.importers.sheets import (
    activities,
    allocations,
    blocks,
    board_decisions,
    change_records,
    condition_maps,
    conditions_sets,
    declared_values,
    items,
    nonconformances,
    parameters,
    requirements,
    uncertainty,
    waivers,
)
from specflow.importers.sheets.sheet import Sheet

#: In the order of the template: what people fill in first stands first.
SHEETS: tuple[Sheet, ...] = (
    requirements.SHEET,
    blocks.SHEET,
    conditions_sets.SHEET,
    activities.SHEET,
    items.SHEET,
    declared_values.SHEET,
    uncertainty.SHEET,
    condition_maps.SHEET,
    parameters.SHEET,
    allocations.SHEET,
    change_records.SHEET,
    nonconformances.SHEET,
    waivers.SHEET,
    *board_decisions.SHEETS,
)

__all__ = ["SHEETS", "Sheet"]
