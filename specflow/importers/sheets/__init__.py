"""The sheets of the project workbook: one module a noun, each with its layout and its way from rows to documents.

What may live here, in the order of a run:

- ``header`` and ``table``: which row and columns count; ``row`` and ``cells``: a cell, typed or refused
- ``intake``: what was read so far, references, duplicates; ``spelling``: the nearest known words
- one module a noun; ``limit_cells``, ``limit_names``, ``limit_doubts``, ``decision_rules``, ``requirement_columns``:
  parts of the requirement sheet; ``budget_lines``, ``line_values``, ``line_tolerances``: the second sheet of budgets
- ``cycles``, ``leftovers``, ``plans``: what is checked and completed once all sheets are read
- ``sheet``: what a sheet kind is; ``findings``: what may be reported

A new sheet is one module and one line in ``SHEETS``.
"""

from specflow.importers.sheets import (
    activities,
    allocations,
    blocks,
    board_decisions,
    budget_lines,
    budgets,
    change_records,
    condition_maps,
    conditions_sets,
    corrections,
    declared_values,
    items,
    nonconformances,
    parameters,
    project,
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
    corrections.SHEET,
    condition_maps.SHEET,
    parameters.SHEET,
    budgets.SHEET,
    budget_lines.SHEET,
    allocations.SHEET,
    change_records.SHEET,
    nonconformances.SHEET,
    waivers.SHEET,
    *board_decisions.SHEETS,
    project.SHEET,
)

__all__ = ["SHEETS", "Sheet"]
