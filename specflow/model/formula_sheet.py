"""A worksheet that calculates: cells with formulas and the values that these have, made as data.

Formulas are made of numbers and references to cells of the same sheet; nothing that a person typed is ever part of one.
"""

from __future__ import annotations

from enum import StrEnum

from specflow.model.base import Document


class CellLook(StrEnum):
    """What a cell is; a writer decides how to show it."""

    PLAIN = ""
    TITLE = "title"
    NOTE = "note"
    HEADER = "header"
    INPUT = "input"
    FORMULA = "formula"
    TOOL = "tool"
    DIFFERENCE = "difference"


class FormulaCell(Document):
    """A cell: a formula with its value, or a number, or text. ``format`` is a number format."""

    text: str = ""
    number: float | None = None
    formula: str = ""
    look: CellLook = CellLook.PLAIN
    format: str = "0.00"


class Choice(Document):
    """A cell whose text is one of those in a column of the same sheet; rows and columns count from 0, ends included."""

    row: int
    column: int
    list_column: int
    first_row: int
    last_row: int


class FormulaSheet(Document):
    """Rows of cells, None where a cell is empty; ``widths`` are those of the columns in characters."""

    title: str
    widths: tuple[int, ...] = ()
    frozen_rows: int = 0
    rows: tuple[tuple[FormulaCell | None, ...], ...]
    choices: tuple[Choice, ...] = ()
